"""CIE colour spaces from tristimulus values; XYZ100 is on the scale where the perfect transmitter has Y = 100.

Arrays are (…, 3); whites broadcast against them. Formulas: CIE 15:2018, 8.2 and ISO/CIE 11664-4, -5.
"""

from __future__ import annotations

import numpy as np

from observers.arrays import Array

DELTA = 6 / 29
SLOPE = 841 / 108  # 1 / (3 DELTA^2)
OFFSET = 4 / 29


def xyY_from_XYZ(XYZ100: Array) -> Array:
    """Chromaticity x, y and Y; the chromaticity of black is NaN, since it has none."""
    total = XYZ100.sum(axis=-1, keepdims=True)
    with np.errstate(divide="ignore", invalid="ignore"):
        xy = XYZ100[..., :2] / total
    xy[np.broadcast_to(total <= 0, xy.shape)] = np.nan
    return np.concatenate([xy, XYZ100[..., 1:2]], axis=-1)


def Lab_from_XYZ(XYZ100: Array, white100: Array) -> Array:
    """CIE 1976 L*, a*, b* (CIE 15:2018, 8.2.1)."""
    f = _compressed(XYZ100 / white100)
    fx, fy, fz = f[..., 0], f[..., 1], f[..., 2]
    return np.stack([116 * fy - 16, 500 * (fx - fy), 200 * (fy - fz)], axis=-1)


def Lab_jacobian(XYZ100: Array, white100: Array) -> Array:
    """(…, 3, 3) slopes of L*, a*, b* against X, Y, Z."""
    ratio = XYZ100 / white100
    slope = np.where(ratio > DELTA**3, 1 / (3 * np.cbrt(np.maximum(ratio, DELTA**3)) ** 2), SLOPE) / white100
    result = np.zeros((*slope.shape, 3))
    result[..., 0, 1] = 116 * slope[..., 1]
    result[..., 1, 0], result[..., 1, 1] = 500 * slope[..., 0], -500 * slope[..., 1]
    result[..., 2, 1], result[..., 2, 2] = 200 * slope[..., 1], -200 * slope[..., 2]
    return result


def XYZ_from_Lab(Lab: Array, white100: Array) -> Array:
    """Tristimulus values of L*, a*, b*; the inverse of `Lab_from_XYZ`."""
    fy = (Lab[..., 0] + 16) / 116
    f = np.stack([fy + Lab[..., 1] / 500, fy, fy - Lab[..., 2] / 200], axis=-1)
    ratio = np.where(f > DELTA, f**3, (f - OFFSET) / SLOPE)
    result: Array = ratio * white100
    return result


def LCh_from_Lab(Lab: Array) -> Array:
    """L*, C*ab and the hue angle h_ab in degrees, 0 to 360; the hue of a grey is 0."""
    L, a, b = Lab[..., 0], Lab[..., 1], Lab[..., 2]
    # A hue a rounding error below 0 comes out of the remainder as 360 itself, hence the second one.
    return np.stack([L, np.hypot(a, b), np.degrees(np.arctan2(b, a)) % 360 % 360], axis=-1)


def Lab_from_LCh(LCh: Array) -> Array:
    """L*, a*, b* from L*, C*ab and the hue angle in degrees."""
    L, C, h = LCh[..., 0], LCh[..., 1], np.radians(LCh[..., 2])
    return np.stack([L, C * np.cos(h), C * np.sin(h)], axis=-1)


def Luv_from_XYZ(XYZ100: Array, white100: Array) -> Array:
    """CIE 1976 L*, u*, v* (CIE 15:2018, 8.2.2); u* and v* of black are 0."""
    L = 116 * _compressed(XYZ100[..., 1] / white100[..., 1]) - 16
    u, v = uv_prime(XYZ100)
    un, vn = uv_prime(white100)
    return np.stack([L, np.nan_to_num(13 * L * (u - un)), np.nan_to_num(13 * L * (v - vn))], axis=-1)


def uv_prime(XYZ100: Array) -> tuple[Array, Array]:
    """CIE 1976 u', v'; NaN for black."""
    X, Y, Z = XYZ100[..., 0], XYZ100[..., 1], XYZ100[..., 2]
    total = X + 15 * Y + 3 * Z
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(total > 0, 4 * X / total, np.nan), np.where(total > 0, 9 * Y / total, np.nan)


def _compressed(ratio: Array) -> Array:
    """The function f of L*a*b*: a cube root, and a straight line near black."""
    result: Array = np.where(ratio > DELTA**3, np.cbrt(ratio), SLOPE * ratio + OFFSET)
    return result
