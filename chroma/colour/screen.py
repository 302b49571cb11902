"""A colour for a screen: sRGB of a sample under its lamp, and whether the screen can show it.

sRGB is defined with the 2° observer, so XYZ100 here is always of the 2° observer.
"""

from __future__ import annotations

import numpy as np

from chroma.colour.adaptation import adapted
from chroma.colour.spaces import Lab_from_LCh, Lab_from_XYZ, LCh_from_Lab, XYZ_from_Lab
from observers.arrays import Array, Mask, frozen

# IEC 61966-2-1: chromaticities of the primaries and the white (D65 at four digits).
PRIMARIES_XY = ((0.64, 0.33), (0.30, 0.60), (0.15, 0.06))
WHITE_XY = (0.3127, 0.3290)
IN_GAMUT_TOLERANCE = 1e-6


def _white100() -> Array:
    x, y = WHITE_XY
    return frozen([100 * x / y, 100.0, 100 * (1 - x - y) / y])


def _rgb_to_xyz() -> Array:
    """The matrix of linear sRGB (0–1) to XYZ (0–1), derived from the primaries."""
    columns = np.array([[x / y, 1.0, (1 - x - y) / y] for x, y in PRIMARIES_XY]).T
    return frozen(columns * np.linalg.solve(columns, _white100() / 100))


SRGB_WHITE100 = _white100()
XYZ_FROM_RGB = _rgb_to_xyz()
RGB_FROM_XYZ = frozen(np.linalg.inv(XYZ_FROM_RGB))


def encoded(linear1: Array) -> Array:
    """The sRGB transfer curve, linear light 0–1 to code 0–1 (IEC 61966-2-1); odd about zero."""
    size = np.abs(linear1)
    code = np.where(size <= 0.0031308, 12.92 * size, 1.055 * size ** (1 / 2.4) - 0.055)
    result: Array = np.copysign(code, linear1)
    return result


def decoded(code1: Array) -> Array:
    """Code 0–1 to linear light 0–1, the inverse of `encoded`."""
    size = np.abs(code1)
    linear = np.where(size <= 0.04045, size / 12.92, ((size + 0.055) / 1.055) ** 2.4)
    result: Array = np.copysign(linear, code1)
    return result


def linear_rgb(XYZ100: Array, white100: Array) -> Array:
    """Linear sRGB (…, 3) of a colour seen under ``white100``, adapted to the screen's white; unclipped."""
    result: Array = adapted(XYZ100, white100, SRGB_WHITE100) @ RGB_FROM_XYZ.T / 100
    return result


def in_gamut(linear1: Array) -> Mask:
    """(…) whether every channel lies in 0–1, within a millionth."""
    result: Mask = np.all((linear1 >= -IN_GAMUT_TOLERANCE) & (linear1 <= 1 + IN_GAMUT_TOLERANCE), axis=-1)
    return result


def nearest_linear_rgb(linear1: Array) -> Array:
    """Linear sRGB inside the gamut: the same hue and lightness at the largest chroma that the screen can show.

    Lightness beyond black or white is held there. Colours inside come back unchanged.
    """
    flat = np.atleast_2d(linear1.reshape(-1, 3)).copy()
    outside = ~in_gamut(flat)
    if outside.any():
        LCh = LCh_from_Lab(Lab_from_XYZ(flat[outside] @ XYZ_FROM_RGB.T * 100, SRGB_WHITE100))
        LCh[:, 0] = np.clip(LCh[:, 0], 0, 100)
        flat[outside] = _reduced(LCh)
    return np.clip(flat, 0, 1).reshape(linear1.shape)


def hex_codes(linear1: Array) -> list[str]:
    """``#rrggbb`` of linear sRGB (N, 3), clipped to the gamut."""
    codes = np.rint(encoded(np.clip(linear1, 0, 1)) * 255).astype(int)
    return [f"#{r:02x}{g:02x}{b:02x}" for r, g, b in codes]


def _reduced(LCh: Array) -> Array:
    """Bisect the share of chroma that just stays inside; 30 halvings are below a code's step by far."""
    low, high = np.zeros(len(LCh)), np.ones(len(LCh))
    for _ in range(30):
        share = (low + high) / 2
        fits = in_gamut(_rgb_at(LCh, share))
        low, high = np.where(fits, share, low), np.where(fits, high, share)
    return _rgb_at(LCh, low)


def _rgb_at(LCh: Array, share: Array) -> Array:
    scaled = LCh * np.stack([np.ones_like(share), share, np.ones_like(share)], axis=-1)
    result: Array = XYZ_from_Lab(Lab_from_LCh(scaled), SRGB_WHITE100) @ RGB_FROM_XYZ.T / 100
    return result


def spectrum_rgb(wavelength_nm: Array) -> Array:
    """(B, 3) codes 0–1 that hint at the colour of each wavelength on a screen; black outside what eyes see.

    No screen shows a spectral colour; what the screen lacks is cut off, and the brightness follows the responsivity of
    the 2° observer, lifted so that the ends stay visible.
    """
    from observers.human import observer, responsivity_at

    XYZ = responsivity_at(observer("2"), wavelength_nm)
    linear = np.maximum(XYZ @ RGB_FROM_XYZ.T, 0)
    peak = np.maximum(linear.max(axis=1, keepdims=True), 1e-12)
    strength = np.minimum(XYZ.sum(axis=1, keepdims=True) / 0.25, 1) ** 0.5
    return encoded(linear / peak * strength)
