"""The older differences: CIE 1976, CIE94 and CMC(l:c), and the plain components of a difference in CIELAB."""

from __future__ import annotations

import numpy as np

from observers.arrays import Array


def components(target: Array, sample: Array) -> Array:
    """(…, 5) signed dL*, da*, db*, dC*ab, dH*ab of sample against target, L*a*b* (…, 3).

    dH is positive where the hue angle of the sample is larger (CIE 15:2018, 8.2.3; the form without angles is that of
    Sève 1991, Color Research and Application 16, 217).
    """
    dL, da, db = np.moveaxis(sample - target, -1, 0)
    a1, b1, a2, b2 = target[..., 1], target[..., 2], sample[..., 1], sample[..., 2]
    C1, C2 = np.hypot(a1, b1), np.hypot(a2, b2)
    turn, along, product = a1 * b2 - a2 * b1, a1 * a2 + b1 * b2, C1 * C2
    # Two forms of one quantity: the first loses digits where hues are opposite, the second where they are near.
    near = along > 0
    small = turn / np.sqrt(np.where(near, (product + along) / 2, 1))
    large = np.copysign(np.sqrt(np.maximum(2 * (product - along), 0)), turn)
    dH = np.where(near, small, large)
    return np.stack(np.broadcast_arrays(dL, da, db, C2 - C1, dH), axis=-1)


def cie1976(target: Array, sample: Array) -> Array:
    """ΔE*ab (…), the distance in L*a*b* (CIE 15:2018, 8.2.1)."""
    result: Array = np.sqrt(((sample - target) ** 2).sum(axis=-1))
    return result


def cie94(
    target: Array,
    sample: Array,
    *,
    kL: float = 1.0,
    kC: float = 1.0,
    kH: float = 1.0,
    K1: float = 0.045,
    K2: float = 0.015,
) -> Array:
    """ΔE*94 (…), weighted by the chroma of the target (CIE 116:1995); for textiles kL = 2, K1 = 0.048, K2 = 0.014."""
    dL, _, _, dC, dH = np.moveaxis(components(target, sample), -1, 0)
    C1 = np.hypot(target[..., 1], target[..., 2])
    S_C, S_H = 1 + K1 * C1, 1 + K2 * C1
    result: Array = np.sqrt((dL / kL) ** 2 + (dC / (kC * S_C)) ** 2 + (dH / (kH * S_H)) ** 2)
    return result


def cmc(target: Array, sample: Array, *, l: float = 2.0, c: float = 1.0) -> Array:  # noqa: E741 - the formula is named l:c
    """ΔE CMC(l:c) (…), weighted by the place of the target (ISO 105-J03; Clarke, McDonald and Rigg 1984)."""
    dL, _, _, dC, dH = np.moveaxis(components(target, sample), -1, 0)
    L1 = target[..., 0]
    C1 = np.hypot(target[..., 1], target[..., 2])
    h1 = np.degrees(np.arctan2(target[..., 2], target[..., 1])) % 360
    S_L = np.where(L1 < 16, 0.511, 0.040975 * L1 / (1 + 0.01765 * L1))
    S_C = 0.0638 * C1 / (1 + 0.0131 * C1) + 0.638
    F = np.sqrt(C1**4 / (C1**4 + 1900))
    blue_green = (h1 >= 164) & (h1 <= 345)
    T = np.where(
        blue_green, 0.56 + np.abs(0.2 * np.cos(np.radians(h1 + 168))), 0.36 + np.abs(0.4 * np.cos(np.radians(h1 + 35)))
    )
    S_H = S_C * (F * T + 1 - F)
    result: Array = np.sqrt((dL / (l * S_L)) ** 2 + (dC / (c * S_C)) ** 2 + (dH / S_H) ** 2)
    return result
