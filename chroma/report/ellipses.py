"""Tolerance ellipses as they really lie: the contour ΔE = limit about a target, found for any formula."""

from __future__ import annotations

from typing import Literal

import numpy as np

from chroma.difference.formulas import Formula
from observers.arrays import Array
from observers.errors import InputError

Plane = Literal["ab", "LC"]
POINTS = 180
DOUBLINGS = 24  # of the first step outwards; a limit not met by then lies beyond all colours
HALVINGS = 60  # to the last digit of a double
MET = 1e-6  # of the limit: a formula that jumps (where hue turns over) has no point there, and the line is broken


def tolerance_contour(
    formula: Formula, target_Lab: Array, limit: float, plane: Plane = "ab", *, points: int = POINTS
) -> Array:
    """L*a*b* (points + 1, 3) along which the formula gives ``limit`` from the target (3,), closed, by bisection.

    plane : ``ab`` at the target's lightness, ``LC`` at its hue. NaN where the formula jumps over the limit. Raises
    InputError for another plane or a limit that is not positive or is never reached.
    """
    if plane not in ("ab", "LC"):
        raise InputError(f"plane {plane!r}", why="it is ab or LC")
    if not limit > 0:
        raise InputError(f"a limit of {limit:g}", why="a contour needs a positive colour difference")
    target = np.asarray(target_Lab, dtype=np.float64)
    angle = np.linspace(0, 2 * np.pi, points + 1)
    rays = np.cos(angle)[:, None] * _axes(target, plane)[0] + np.sin(angle)[:, None] * _axes(target, plane)[1]
    radius = _radius(formula, target, rays, limit)
    contour: Array = target + radius[:, None] * rays
    off = np.abs(formula.difference(target, contour) - limit) > MET * limit
    contour[off] = np.nan
    return contour


def on_plane(Lab: Array, target_Lab: Array, plane: Plane) -> tuple[Array, Array]:
    """Abscissa and ordinate (…) of points of a contour: a*, b*, or chroma along the target's hue and L*."""
    if plane == "ab":
        return Lab[..., 1], Lab[..., 2]
    return Lab[..., 1:] @ _hue(target_Lab), Lab[..., 0]


def _hue(target: Array) -> Array:
    """Unit vector (2,) of the target's hue in a*, b*; that of +a* where it has none."""
    chroma = float(np.hypot(target[1], target[2]))
    return np.asarray(target[1:]) / chroma if chroma > 0 else np.array([1.0, 0.0])


def _axes(target: Array, plane: Plane) -> Array:
    if plane == "ab":
        return np.array([[0.0, 1.0, 0.0], [0.0, 0.0, 1.0]])
    return np.array([[0.0, *_hue(target)], [1.0, 0.0, 0.0]])


def _radius(formula: Formula, target: Array, rays: Array, limit: float) -> Array:
    """How far out each ray (P, 3) meets the limit (P,)."""
    low, high = np.zeros(len(rays)), np.full(len(rays), limit / 8)
    for _ in range(DOUBLINGS):
        short = formula.difference(target, target + high[:, None] * rays) < limit
        if not short.any():
            break
        low, high = np.where(short, high, low), np.where(short, 2 * high, high)
    else:
        raise InputError(
            f"a difference of {limit:g} by {formula}", why="no colour about the target is that far from it"
        )
    for _ in range(HALVINGS):
        middle = (low + high) / 2
        short = formula.difference(target, target + middle[:, None] * rays) < limit
        low, high = np.where(short, middle, low), np.where(short, high, middle)
    radius: Array = (low + high) / 2
    return radius
