"""Wavelength grids: units, spacing, and the matrices that carry a table from one grid to another."""

from __future__ import annotations

from typing import Literal, get_args

import numpy as np

from observers.arrays import Array, Mask
from observers.errors import InputError

Rule = Literal["sprague", "lagrange", "linear"]
RULES: tuple[Rule, ...] = get_args(Rule)
Unit = Literal["nm", "um", "cm-1"]

# CIE 167:2005, equation for the two points that Sprague's method needs beyond each end, times 209.
SPRAGUE_BEFORE = np.array(
    [[884.0, -1960.0, 3033.0, -2648.0, 1080.0, -180.0], [508.0, -540.0, 488.0, -367.0, 144.0, -24.0]]
)
SPRAGUE_AFTER = SPRAGUE_BEFORE[::-1, ::-1]
SPRAGUE_BOUNDARY_DIVISOR = 209.0
# CIE 167:2005, coefficients a0 … a5 of the polynomial in the fraction of an interval, from values at -2 … +3, times 24.
SPRAGUE_INNER = np.array(
    [
        [0.0, 0.0, 24.0, 0.0, 0.0, 0.0],
        [2.0, -16.0, 0.0, 16.0, -2.0, 0.0],
        [-1.0, 16.0, -30.0, 16.0, -1.0, 0.0],
        [-9.0, 39.0, -70.0, 66.0, -33.0, 7.0],
        [13.0, -64.0, 126.0, -124.0, 61.0, -12.0],
        [-5.0, 25.0, -50.0, 50.0, -25.0, 5.0],
    ]
)
SPRAGUE_INNER_DIVISOR = 24.0


def nanometres(values: Array, unit: Unit) -> Array:
    """Wavelengths in nm from nm, µm or wavenumbers in cm⁻¹ (as if in the same medium; air is not corrected for)."""
    if unit == "nm":
        return values
    if unit == "um":
        return values * 1e3
    return 1e7 / values


def is_uniform(grid_nm: Array) -> bool:
    """Whether the spacing is even, to a thousandth of a step (as files print their wavelengths)."""
    steps = np.diff(grid_nm)
    return bool(len(steps) > 0 and np.abs(steps - steps.mean()).max() < 1e-3 * steps.mean())


def stated_rule(grid_nm: Array) -> Rule:
    """The rule for a grid: Sprague where evenly spaced (CIE 167), else cubic Lagrange (CIE 15), else a line."""
    if len(grid_nm) >= 6 and is_uniform(grid_nm):
        return "sprague"
    return "lagrange" if len(grid_nm) >= 4 else "linear"


def resampling(from_nm: Array, to_nm: Array, rule: Rule) -> Array:
    """The matrix (T, B) that carries values on ``from_nm`` (B,) to ``to_nm`` (T,), so that ``new = matrix @ old``.

    Raises InputError where a wanted wavelength lies outside the grid (see `held` for what to do at the ends), or where
    the rule does not apply to the grid. References: CIE 167:2005 (Sprague), ASTM E2022 (Lagrange).
    """
    slack = 1e-6
    if to_nm.min() < from_nm[0] - slack or to_nm.max() > from_nm[-1] + slack:
        raise InputError(
            f"{to_nm.min():g}–{to_nm.max():g} nm is wanted from {from_nm[0]:g}–{from_nm[-1]:g} nm",
            why="a table is not extrapolated in silence",
            do="choose a policy for the ends",
        )
    if rule == "sprague":
        return _sprague(from_nm, to_nm)
    if rule == "lagrange":
        return _lagrange(from_nm, to_nm)
    if rule == "linear":
        return _linear(from_nm, to_nm)
    raise InputError(f"unknown interpolation {rule!r}", why=f"known are {', '.join(RULES)}")


def held(from_nm: Array, to_nm: Array, rule: Rule) -> Array:
    """Like `resampling`, with the first and the last value held beyond the ends (CIE 15, E308 7.3.2.2)."""
    matrix = np.zeros((len(to_nm), len(from_nm)))
    before, after = to_nm < from_nm[0], to_nm > from_nm[-1]
    matrix[before, 0] = 1.0
    matrix[after, -1] = 1.0
    inside: Mask = ~(before | after)
    if inside.any():
        matrix[inside] = resampling(from_nm, to_nm[inside], rule)
    return matrix


def _intervals(from_nm: Array, to_nm: Array) -> tuple[np.ndarray, Array]:
    """For each wanted wavelength the interval it lies in, and the fraction of the interval passed (0 to 1)."""
    interval = np.clip(np.searchsorted(from_nm, to_nm, side="right") - 1, 0, len(from_nm) - 2)
    left, right = from_nm[interval], from_nm[interval + 1]
    return interval, (to_nm - left) / (right - left)


def _sprague(from_nm: Array, to_nm: Array) -> Array:
    bands = len(from_nm)
    if bands < 6 or not is_uniform(from_nm):
        raise InputError(
            "Sprague interpolation does not apply", why="it needs six or more evenly spaced bands (CIE 167)"
        )
    extended = np.zeros((bands + 4, bands))
    extended[2:-2] = np.eye(bands)
    extended[:2, :6] = SPRAGUE_BEFORE / SPRAGUE_BOUNDARY_DIVISOR
    extended[-2:, -6:] = SPRAGUE_AFTER / SPRAGUE_BOUNDARY_DIVISOR
    interval, fraction = _intervals(from_nm, to_nm)
    shares = np.vander(fraction, 6, increasing=True) @ (SPRAGUE_INNER / SPRAGUE_INNER_DIVISOR)
    six = extended[interval[:, None] + np.arange(6)]
    result: Array = np.einsum("ts,tsb->tb", shares, six)
    return result


def _lagrange(from_nm: Array, to_nm: Array) -> Array:
    """Cubic through the four nearest points, quadratic through three in the first and the last interval (E2022)."""
    bands = len(from_nm)
    if bands < 3:
        raise InputError("Lagrange interpolation does not apply", why="it needs three or more bands (ASTM E2022)")
    interval, _ = _intervals(from_nm, to_nm)
    inner = (interval > 0) & (interval < bands - 2)
    matrix = np.zeros((len(to_nm), bands))
    _lagrange_fill(matrix, inner, interval - 1, 4, from_nm, to_nm)
    _lagrange_fill(matrix, ~inner, np.clip(interval - 1, 0, bands - 3), 3, from_nm, to_nm)
    return matrix


def _lagrange_fill(matrix: Array, rows: Mask, start: np.ndarray, points: int, from_nm: Array, to_nm: Array) -> None:
    """Write the Lagrange coefficients of these rows, each through ``points`` nodes from ``start``."""
    where = np.flatnonzero(rows)
    nodes = start[where, None] + np.arange(points)
    x, node = to_nm[where], from_nm[nodes]
    for j in range(points):
        others = [k for k in range(points) if k != j]
        top = np.prod([x - node[:, k] for k in others], axis=0)
        matrix[where, nodes[:, j]] = top / np.prod([node[:, j] - node[:, k] for k in others], axis=0)


def _linear(from_nm: Array, to_nm: Array) -> Array:
    matrix = np.zeros((len(to_nm), len(from_nm)))
    rows = np.arange(len(to_nm))
    if len(from_nm) == 1:
        matrix[rows, 0] = 1.0
        return matrix
    interval, fraction = _intervals(from_nm, to_nm)
    matrix[rows, interval] = 1.0 - fraction
    matrix[rows, interval + 1] = fraction
    return matrix
