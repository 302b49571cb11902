"""The plain CIEDE2000, with its hue angles: the reference that the shipped algebra is held against.

Color Research and Application 30, 21, doi:10.1002/col.20070.
"""

from __future__ import annotations

import numpy as np

from observers.arrays import Array

# Two hues that lie exactly opposite tie; a rounding error must not decide which way round their mean is taken.
HUE_TIE_DEG = 180.0 + 1e-9


def ciede2000(target: Array, sample: Array, *, kL: float = 1.0, kC: float = 1.0, kH: float = 1.0) -> Array:
    """ΔE00 (…) between L*a*b* arrays (…, 3) that broadcast; kL, kC, kH are the parametric factors."""
    dL_S, dC_S, dH_S, R_T = _terms(target, sample, kL, kC, kH)
    result: Array = np.sqrt(dL_S**2 + dC_S**2 + dH_S**2 + R_T * dC_S * dH_S)  # (22)
    return result


def _terms(target: Array, sample: Array, kL: float, kC: float, kH: float) -> tuple[Array, Array, Array, Array]:
    """The three weighted differences and the rotation term R_T."""
    L1, a1, b1 = target[..., 0], target[..., 1], target[..., 2]
    L2, a2, b2 = sample[..., 0], sample[..., 1], sample[..., 2]
    C_bar = (np.hypot(a1, b1) + np.hypot(a2, b2)) / 2  # (2), (3)
    G = 0.5 * (1 - np.sqrt(_seventh(C_bar)))  # (4)
    a1_p, a2_p = (1 + G) * a1, (1 + G) * a2  # (5)
    C1_p, C2_p = np.hypot(a1_p, b1), np.hypot(a2_p, b2)  # (6)
    h1_p, h2_p = np.degrees(np.arctan2(b1, a1_p)) % 360, np.degrees(np.arctan2(b2, a2_p)) % 360  # (7)

    dL_p = L2 - L1  # (8)
    dC_p = C2_p - C1_p  # (9)
    grey = C1_p * C2_p == 0
    dh_p = _turn(h2_p - h1_p, grey)  # (10)
    dH_p = 2 * np.sqrt(C1_p * C2_p) * np.sin(np.radians(dh_p) / 2)  # (11)

    L_bar_p = (L1 + L2) / 2  # (12)
    C_bar_p = (C1_p + C2_p) / 2  # (13)
    h_bar_p = _mean_hue(h1_p, h2_p, grey)  # (14)
    T = (
        1
        - 0.17 * np.cos(np.radians(h_bar_p - 30))
        + 0.24 * np.cos(np.radians(2 * h_bar_p))
        + 0.32 * np.cos(np.radians(3 * h_bar_p + 6))
        - 0.20 * np.cos(np.radians(4 * h_bar_p - 63))
    )  # (15)
    d_theta = 30 * np.exp(-(((h_bar_p - 275) / 25) ** 2))  # (16)
    R_C = 2 * np.sqrt(_seventh(C_bar_p))  # (17)
    S_L = 1 + 0.015 * (L_bar_p - 50) ** 2 / np.sqrt(20 + (L_bar_p - 50) ** 2)  # (18)
    S_C = 1 + 0.045 * C_bar_p  # (19)
    S_H = 1 + 0.015 * C_bar_p * T  # (20)
    R_T = -np.sin(np.radians(2 * d_theta)) * R_C  # (21)
    return dL_p / (kL * S_L), dC_p / (kC * S_C), dH_p / (kH * S_H), R_T


def _seventh(C: Array) -> Array:
    """C^7 / (C^7 + 25^7), in a form that does not overflow."""
    ratio = (C / 25) ** 7
    result: Array = ratio / (ratio + 1)
    return result


def _turn(dh: Array, grey: np.ndarray) -> Array:
    """The hue difference in -180 … 180 degrees (10); 0 beside a grey, which has no hue."""
    dh = np.where(dh > HUE_TIE_DEG, dh - 360, dh)
    dh = np.where(dh < -HUE_TIE_DEG, dh + 360, dh)
    return np.where(grey, 0.0, dh)


def _mean_hue(h1: Array, h2: Array, grey: np.ndarray) -> Array:
    """The hue half way between two, the short way round (14); beside a grey the hue of the other."""
    total = h1 + h2
    far = np.abs(h1 - h2) > HUE_TIE_DEG
    mean = np.where(far, np.where(total < 360, total + 360, total - 360), total) / 2
    return np.where(grey, total, mean)
