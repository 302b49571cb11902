"""The DIN99o difference (DIN 6176:2018): a distance in a space that was bent to be even near the greys."""

from __future__ import annotations

import numpy as np

from observers.arrays import Array

ROTATION = np.radians(26.0)


def din99o(target: Array, sample: Array, *, kE: float = 1.0, kCH: float = 1.0) -> Array:
    """ΔE99o (…) between L*a*b* arrays (…, 3); kE and kCH are the factors of the viewing conditions."""
    step = din99o_space(sample, kE=kE, kCH=kCH) - din99o_space(target, kE=kE, kCH=kCH)
    result: Array = np.sqrt((step**2).sum(axis=-1))
    return result


def din99o_space(Lab: Array, *, kE: float = 1.0, kCH: float = 1.0) -> Array:
    """L99o, a99o, b99o (…, 3) of L*a*b*."""
    L, a, b = Lab[..., 0], Lab[..., 1], Lab[..., 2]
    L99o = 303.67 / kE * np.log(1 + 0.0039 * L)
    e = a * np.cos(ROTATION) + b * np.sin(ROTATION)
    f = 0.83 * (b * np.cos(ROTATION) - a * np.sin(ROTATION))
    G = np.hypot(e, f)
    C99o = np.log(1 + 0.075 * G) / (0.0435 * kCH * kE)
    h99o = np.arctan2(f, e) + ROTATION
    return np.stack([L99o, C99o * np.cos(h99o), C99o * np.sin(h99o)], axis=-1)
