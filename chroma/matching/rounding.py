"""Amounts that can be weighed: the best multiples of a step near an unrounded recipe."""

from __future__ import annotations

from itertools import product

import numpy as np

from chroma.matching.goal import Goal
from chroma.matching.mixture import Mixtures
from observers.arrays import Array
from observers.errors import InputError

MOVES = 500
ALL_CORNERS_TO = 6  # components; with more, only one or two are moved at a time


def lattice_bounds(low: Array, high: Array, step: Array, names: tuple[str, ...]) -> tuple[Array, Array]:
    """Bounds (D,) drawn in to multiples of the step (D,).

    Raises InputError for a dye whose bounds hold no multiple.
    """
    slack = 1e-9  # bounds that are multiples themselves must not fall to rounding
    first, last = np.ceil(low / step - slack) * step, np.floor(high / step + slack) * step
    for name, a, b, c in zip(names, first, last, step, strict=True):
        if a > b:
            raise InputError(
                f"no multiple of the step {c:g} lies within the bounds of {name}", do="widen them, or take finer steps"
            )
    return first, last


def rounded(goal: Goal, mixture: Mixtures, amounts: Array, step: Array) -> Array:
    """Multiples (k,) of the step (k,) with the least worst ΔE/limit that neighbours of the amounts lead to.

    Walks to the best of the 3^k neighbouring points until none is better: plain rounding of each amount by itself can
    miss it, since an error in one dye may be made good by another.
    """
    low, high = mixture.low[0], mixture.high[0]
    here = np.clip(np.round(amounts / step), np.round(low / step), np.floor(high / step + 1e-9))
    moves = _moves(len(amounts))
    worst = np.inf
    for _ in range(MOVES):
        points = here + moves
        points = points[((points * step >= low - 1e-9 * step) & (points * step <= high + 1e-9 * step)).all(axis=1)]
        values = goal.worst(goal.Lab(mixture.absorbance((points * step)[None])[0]))
        best = int(values.argmin())
        if not values[best] < worst:
            break
        worst, here = float(values[best]), points[best]
    result: Array = here * step
    return result


def _moves(k: int) -> Array:
    """Steps (M, k) to neighbours, the first of them none at all."""
    if k <= ALL_CORNERS_TO:
        moves = np.array(list(product((0.0, -1.0, 1.0), repeat=k)))
        return moves.reshape(-1, k)
    one = np.concatenate([np.zeros((1, k)), np.eye(k), -np.eye(k)])
    pairs = (one[:, None] + one[None]).reshape(-1, k)
    result: Array = pairs[np.abs(pairs).max(axis=1) <= 1]
    return result
