"""Dominant wavelength and purity: where the line from the white through a colour meets the spectrum locus."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from observers.arrays import Array
from observers.human import Observer

ON_CORNER = 1e-9  # a ray through a corner of the locus meets one of its two sides, whatever rounding says
NEUTRAL = 1e-6  # a chromaticity this close to the white has no direction, so no dominant wavelength


@dataclass(frozen=True)
class Dominant:
    """``wavelength_nm`` is negative for a complementary wavelength, NaN for a neutral; purities are 0–1 or NaN."""

    wavelength_nm: float
    excitation_purity: float
    colorimetric_purity: float


def dominant(xy: Array, white_xy: Array, observer: Observer) -> Dominant:
    """Dominant (or complementary) wavelength and purities of a chromaticity x, y (2,) against a white (2,).

    The locus is the polygon of the observer's 1 nm points; the wavelength is interpolated along its sides. For a purple
    the excitation purity is against the purple line, and there is no colorimetric purity. Reference: CIE 15:2004, 9.1.
    """
    step = np.asarray(xy, dtype=np.float64) - white_xy
    if not np.isfinite(step).all() or np.hypot(*step) < NEUTRAL:
        return Dominant(np.nan, 0.0, 0.0)
    wavelength_nm, locus = _locus(observer)
    met = _meeting(white_xy, step, locus)
    if met is not None:
        side, share, times = met
        edge = locus[side] + share * (locus[side + 1] - locus[side])
        excitation = 1 / times
        colorimetric = excitation * edge[1] / xy[1]
        along = wavelength_nm[side] + share * (wavelength_nm[side + 1] - wavelength_nm[side])
        return Dominant(float(along), float(excitation), float(colorimetric))
    return _complementary(white_xy, step, wavelength_nm, locus)


def _complementary(white_xy: Array, step: Array, wavelength_nm: Array, locus: Array) -> Dominant:
    back = _meeting(white_xy, -step, locus)
    purple = _meeting(white_xy, step, locus[[-1, 0]])
    if back is None or purple is None:  # the white itself lies outside the locus
        return Dominant(np.nan, np.nan, np.nan)
    side, share, _ = back
    along = wavelength_nm[side] + share * (wavelength_nm[side + 1] - wavelength_nm[side])
    return Dominant(-float(along), float(1 / purple[2]), np.nan)


def _locus(observer: Observer) -> tuple[Array, Array]:
    """Wavelengths and chromaticities where the locus still moves; its red end stands still beyond 699 nm."""
    responsivity = observer.responsivity
    keep = (observer.wavelength_nm >= 380) & (observer.wavelength_nm <= 699) & (responsivity.sum(axis=1) > 0)
    XYZ = responsivity[keep]
    return observer.wavelength_nm[keep], XYZ[:, :2] / XYZ.sum(axis=1, keepdims=True)


def _meeting(start: Array, step: Array, path: Array) -> tuple[int, float, float] | None:
    """The farthest side of a path (M, 2) met by the ray start + t·step, as side, share of the side, and t > 0."""
    along = np.diff(path, axis=0)
    offset = path[:-1] - start
    cross = step[0] * along[:, 1] - step[1] * along[:, 0]
    with np.errstate(divide="ignore", invalid="ignore"):
        times = (offset[:, 0] * along[:, 1] - offset[:, 1] * along[:, 0]) / cross
        share = (offset[:, 0] * step[1] - offset[:, 1] * step[0]) / cross
    hit = np.flatnonzero((times > 0) & (share >= -ON_CORNER) & (share <= 1 + ON_CORNER))
    if not len(hit):
        return None
    best = hit[np.argmax(times[hit])]
    return int(best), float(share[best]), float(times[best])
