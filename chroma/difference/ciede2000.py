"""CIEDE2000 (ISO/CIE 11664-6:2014), its equations numbered as by Sharma, Wu and Dalal 2005.

Color Research and Application 30, 21, doi:10.1002/col.20070.

The paper works with two hue angles h'; here they stay (cos, sin) pairs, which saves most of the time and every special
case but two. With the vectors v = (a', b) and their lengths C',

    w = v1·C2' + v2·C1'           points along the mean hue h̄' (14), the short way round,
    |w| / (2 C1' C2')             is cos(Δh'/2), and
    (a1' b2 - a2' b1) / |w|       is sin(Δh'/2), which is all that ΔH' (11) needs of Δh' (10).

T (15) then follows from cos h̄' and sin h̄' by the multiple-angle formulas, and one arctangent is left for Δθ (16). The
special cases are a grey, which has no hue, and two opposite hues, for which w vanishes. The version with the angles is
kept in the tests as the reference.
"""

from __future__ import annotations

import numpy as np

from observers.arrays import Array, Mask

# Two hues that lie exactly opposite tie; a rounding error must not decide which way round their mean is taken. This is
# the cosine of half of 180° - 1e-9°.
TIE = 8.7e-12
COS_30, SIN_30 = float(np.cos(np.radians(30))), float(np.sin(np.radians(30)))
COS_6, SIN_6 = float(np.cos(np.radians(6))), float(np.sin(np.radians(6)))
COS_63, SIN_63 = float(np.cos(np.radians(63))), float(np.sin(np.radians(63)))
COS_275, SIN_275 = float(np.cos(np.radians(275))), float(np.sin(np.radians(275)))


def ciede2000(target: Array, sample: Array, *, kL: float = 1.0, kC: float = 1.0, kH: float = 1.0) -> Array:
    """ΔE00 (…) between L*a*b* arrays (…, 3) that broadcast; kL, kC, kH are the parametric factors."""
    L1, a1, b1 = target[..., 0], target[..., 1], target[..., 2]
    L2, a2, b2 = sample[..., 0], sample[..., 1], sample[..., 2]
    C_bar = (_length(a1, b1) + _length(a2, b2)) / 2  # (2), (3)
    G = 0.5 * (1 - np.sqrt(_seventh(C_bar)))  # (4)
    a1_p, a2_p = (1 + G) * a1, (1 + G) * a2  # (5)
    C1_p, C2_p = _length(a1_p, b1), _length(a2_p, b2)  # (6)
    sin_half_dh, cos_h, sin_h = _hues(a1_p, b1, C1_p, a2_p, b2, C2_p)  # (7), (10), (14)

    dL_p = L2 - L1  # (8)
    dC_p = C2_p - C1_p  # (9)
    dH_p = 2 * np.sqrt(C1_p * C2_p) * sin_half_dh  # (11)
    L_50 = (L1 + L2) / 2 - 50  # (12)
    C_bar_p = (C1_p + C2_p) / 2  # (13)
    S_L = 1 + 0.015 * L_50 * L_50 / np.sqrt(20 + L_50 * L_50)  # (18)
    S_C = 1 + 0.045 * C_bar_p  # (19)
    S_H = 1 + 0.015 * C_bar_p * _hue_weight(cos_h, sin_h)  # (20)
    R_C = 2 * np.sqrt(_seventh(C_bar_p))  # (17)
    R_T = -np.sin(2 * _rotation(cos_h, sin_h)) * R_C  # (21)
    l, c, h = dL_p / (kL * S_L), dC_p / (kC * S_C), dH_p / (kH * S_H)  # noqa: E741 - lightness, chroma, hue
    result: Array = np.sqrt(l * l + c * c + h * h + R_T * c * h)  # (22)
    return result


def _hues(a1: Array, b1: Array, C1: Array, a2: Array, b2: Array, C2: Array) -> tuple[Array, Array, Array]:
    """The sine of half the hue difference (10), and cosine and sine of the mean hue (14)."""
    product = C1 * C2
    x, y = a1 * C2 + a2 * C1, b1 * C2 + b2 * C1
    length = _length(x, y)
    turn = a1 * b2 - a2 * b1
    grey = product == 0
    with np.errstate(divide="ignore", invalid="ignore"):
        cos_half = length / (2 * product)
        # The first form loses its digits where hues are opposite, the second where they are near.
        sin_half = np.where(
            cos_half > 0.5, turn / length, np.copysign(np.sqrt(1 - np.minimum(cos_half, 1.0) ** 2), turn)
        )
        cos_h, sin_h = x / length, y / length
    special = grey | (cos_half < TIE)
    if special.any():
        sin_half, cos_h, sin_h = (np.array(part) for part in (sin_half, cos_h, sin_h))
        _ties(special & ~grey, sin_half, cos_h, sin_h, a1, b1, C1, b2)
        _greys(grey, sin_half, cos_h, sin_h, a1 + a2, b1 + b2)
    return sin_half, cos_h, sin_h


def _ties(tie: Mask, sin_half: Array, cos_h: Array, sin_h: Array, a1: Array, b1: Array, C1: Array, b2: Array) -> None:
    """Opposite hues: the mean of both angles in 0–360° lies 90° above the smaller, which is that of the upper half."""
    a1, b1, C1, b2 = (np.broadcast_to(part, tie.shape)[tie] for part in (a1, b1, C1, b2))
    first_is_upper = (b1 > 0) | ((b1 == 0) & (a1 > 0) & (b2 <= 0))
    sign = np.where(first_is_upper, 1.0, -1.0)
    sin_half[tie] = sign
    cos_h[tie], sin_h[tie] = -sign * b1 / C1, sign * a1 / C1


def _greys(grey: Mask, sin_half: Array, cos_h: Array, sin_h: Array, x: Array, y: Array) -> None:
    """Beside a grey the hue difference is 0 and the mean hue that of the other; of two greys it is 0."""
    x, y = np.broadcast_to(x, grey.shape)[grey], np.broadcast_to(y, grey.shape)[grey]
    length = _length(x, y)
    known = length > 0
    safe = np.where(known, length, 1.0)
    sin_half[grey] = 0.0
    cos_h[grey], sin_h[grey] = np.where(known, x / safe, 1.0), y / safe


def _hue_weight(c: Array, s: Array) -> Array:
    """T (15): cosines of h - 30°, 2h, 3h + 6° and 4h - 63° from cos h and sin h."""
    c2, s2 = c * c - s * s, 2 * s * c
    c3, s3 = c2 * c - s2 * s, s2 * c + c2 * s
    c4, s4 = c2 * c2 - s2 * s2, 2 * s2 * c2
    result: Array = (
        1
        - 0.17 * (c * COS_30 + s * SIN_30)
        + 0.24 * c2
        + 0.32 * (c3 * COS_6 - s3 * SIN_6)
        - 0.20 * (c4 * COS_63 + s4 * SIN_63)
    )
    return result


def _rotation(c: Array, s: Array) -> Array:
    """Δθ (16) in radians: 30° exp(-((h - 275°)/25°)²), with h in 0–360° as the paper has it.

    The arctangent gives h - 275° within ±180°; from 85° on it stands for an h below 95°, which the paper has 180° or
    more away, where the exponential is below 1e-22.
    """
    away = np.degrees(np.arctan2(s * COS_275 - c * SIN_275, c * COS_275 + s * SIN_275)) / 25
    result: Array = np.where(away < 85 / 25, np.radians(30) * np.exp(-away * away), 0.0)
    return result


def _seventh(C: Array) -> Array:
    """C^7 / (C^7 + 25^7), in a form that does not overflow."""
    ratio = C / 25
    cube = ratio * ratio * ratio
    seventh = cube * cube * ratio
    result: Array = seventh / (seventh + 1)
    return result


def _length(a: Array, b: Array) -> Array:
    """√(a² + b²); three times as quick as hypot, whose care for overflow colours do not need."""
    result: Array = np.sqrt(a * a + b * b)
    return result
