"""The search for amounts: first the least sum of squares for many mixtures at once, then the least worst for one.

Both work on (ΔE/limit)² of the formula itself: its slopes through the mixture are exact, those of the formula in L*a*b*
numerical.
"""

from __future__ import annotations

import warnings
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from chroma.matching.goal import Goal, colour_and_slopes, with_gradient
from chroma.matching.mixture import Mixtures
from observers.arrays import Array, Mask

ROUNDS = 60
SETTLED = 1e-5  # a step that lessens the sum by no more than this share of it ends the search
STUCK = 1e8  # of the damping: no step of any length leads down
MET = 1e-4  # a worst ratio that needs no polish: far below what an instrument can tell
CLOSE = 1e-6  # how exactly a constraint is held


@dataclass(frozen=True, eq=False)
class _Point:
    """Where S searches stand: sum of squares (S,), its gradient (S, k), and its curvature (S, k, k) near the target."""

    total: Array
    gradient: Array
    curvature: Array


def settle(goal: Goal, mixtures: Mixtures, start: Array) -> Array:
    """Amounts (S, k) of the least Σ (ΔE/limit)² over the lamps, from a start (S, k), within the bounds.

    A damped Newton method, projected on the bounds, for all mixtures at once: exact gradient, and as curvature the
    metric of the formula at the target (Levenberg 1944; Marquardt 1963). Finds the minimum that the start leads to.
    """
    x = np.clip(start, mixtures.low, mixtures.high)
    if not x.size:
        return x
    here = _look(goal, mixtures, x)
    damping, done = np.full(len(x), 1e-3), np.zeros(len(x), dtype=bool)
    for _ in range(ROUNDS):
        trial = np.clip(x + _step(here, x, mixtures, damping), mixtures.low, mixtures.high)
        there = _look(goal, mixtures, trial)
        better = there.total < here.total
        done |= better & (here.total - there.total < SETTLED * here.total)
        x = np.where(better[:, None], trial, x)
        here = _chosen(better, there, here)
        damping = np.where(better, np.maximum(damping / 5, 1e-12), damping * 8)
        done |= (damping > STUCK) | (here.total < MET**2 * 1e-6)
        if done.all():
            break
    return x


def polish(goal: Goal, mixture: Mixtures, start: Array) -> Array:
    """Amounts (k,) of one mixture with the least worst ΔE/limit, one-sided limits held, from a start (k,).

    Minimises t under t ≥ (ΔE/limit)² for every lamp, which is smooth where the worst of several is not (sequential
    quadratic programming; Kraft 1988, DFVLR-FB 88-28). A start that is not bettered is handed back.
    """
    at_start = _Seen(goal, mixture)(start)
    t0 = float(at_start.squares.max())
    if not start.size or (t0 < MET**2 and at_start.kept):
        return start
    k, seen = len(start), _Seen(goal, mixture)

    def room(z: Array) -> Array:
        point = seen(z[:k])
        return np.concatenate([z[k] - point.squares / t0, point.slacks])

    def room_slopes(z: Array) -> Array:
        point = seen(z[:k])
        top = np.column_stack([-point.d_squares / t0, np.ones(len(point.squares))])
        return np.vstack([top, np.column_stack([point.d_slacks, np.zeros(len(point.slacks))])])

    found = _programme(
        lambda z: (float(z[k]), np.append(np.zeros(k), 1.0)),
        room,
        room_slopes,
        np.append(start, 1.0),
        [*zip(mixture.low[0], mixture.high[0], strict=True), (0.0, None)],
    )[:k]
    point = seen(found)
    better = point.squares.max() < t0 or not at_start.kept
    return found if point.kept and better else start


def least(goal: Goal, mixture: Mixtures, inside: Array, share: float, cost: Array) -> Array:
    """Amounts (k,) of one mixture of the least Σ cost · amount with every ΔE ≤ share · limit, one-sided limits held.

    inside (k,) must hold them already; what the programme misses by a little is drawn back towards it.
    """
    seen = _Seen(goal, mixture)
    scale = max(float(cost @ inside), 1e-12)

    def kept(x: Array) -> bool:
        point = seen(x)
        return bool(point.squares.max() <= share**2 * (1 + CLOSE)) and point.kept

    found = _programme(
        lambda x: (float(cost @ x) / scale, cost / scale),
        lambda x: np.concatenate([1 - seen(x).squares / share**2, seen(x).slacks]),
        lambda x: np.vstack([-seen(x).d_squares / share**2, seen(x).d_slacks]),
        inside,
        list(zip(mixture.low[0], mixture.high[0], strict=True)),
    )
    return found if kept(found) else _drawn_back(kept, found, inside)


def _drawn_back(kept: Callable[[Array], bool], outside: Array, inside: Array) -> Array:
    """The last point on the way from inside to outside that is kept, by bisection."""
    low, high = 0.0, 1.0
    for _ in range(40):
        middle = (low + high) / 2
        low, high = (middle, high) if kept(inside + middle * (outside - inside)) else (low, middle)
    return inside + low * (outside - inside)


@dataclass(frozen=True, eq=False)
class _View:
    """One mixture at one point: squares (L,), slacks (C,) of one-sided limits, and their slopes (·, k)."""

    squares: Array
    d_squares: Array
    slacks: Array
    d_slacks: Array

    @property
    def kept(self) -> bool:
        """Whether every one-sided limit is."""
        return bool((self.slacks >= -CLOSE).all())


class _Seen:
    """Looks at one mixture, and remembers the last point, which objective, constraint and slopes all ask for."""

    def __init__(self, goal: Goal, mixture: Mixtures) -> None:
        self._goal, self._mixture = goal, mixture
        self._at: tuple[bytes, _View] | None = None

    def __call__(self, x: Array) -> _View:
        key = x.tobytes()
        if self._at is None or self._at[0] != key:
            self._at = key, self._look(x)
        return self._at[1]

    def _look(self, x: Array) -> _View:
        goal = self._goal
        Lab, J = colour_and_slopes(goal.weights, *self._mixture.absorbance_and_slopes(x[None]))
        lamps = np.swapaxes(J[0], 0, 1)  # (L, k, 3)
        squares, uphill = with_gradient(goal.squares, Lab[0])
        d_squares = np.einsum("li,lki->lk", uphill, lamps)
        if not goal.one_sided:
            return _View(squares, d_squares, np.empty(0), np.empty((0, len(x))))
        slacks, along = with_gradient(goal.slacks, Lab[0])
        return _View(squares, d_squares, slacks.ravel(), np.einsum("lci,lki->lck", along, lamps).reshape(-1, len(x)))


def _programme(
    objective: Callable[[Array], tuple[float, Array]],
    room: Callable[[Array], Array],
    room_slopes: Callable[[Array], Array],
    start: Array,
    bounds: list[tuple[float, float | None]],
) -> Array:
    from scipy.optimize import minimize

    held = {"type": "ineq", "fun": room, "jac": room_slopes}
    with warnings.catch_warnings():
        # it warns when a step of its own left the bounds, and clips it; what it returns is judged by the caller
        warnings.simplefilter("ignore", RuntimeWarning)
        found = minimize(
            objective,
            start,
            jac=True,
            bounds=[(low, None if high is None or not np.isfinite(high) else high) for low, high in bounds],
            constraints=held,
            method="SLSQP",
            options={"maxiter": 50, "ftol": 1e-6},
        )
    low = np.array([pair[0] for pair in bounds])
    high = np.array([np.inf if pair[1] is None else pair[1] for pair in bounds])
    result: Array = np.clip(found.x, low, high)
    return result


def _look(goal: Goal, mixtures: Mixtures, x: Array) -> _Point:
    Lab, J = colour_and_slopes(goal.weights, *mixtures.absorbance_and_slopes(x))
    squares, uphill = with_gradient(goal.squares, Lab)
    through = np.einsum("lij,sklj->skli", goal.metric, J)
    flat = J.reshape(*J.shape[:2], -1)
    return _Point(
        squares.sum(axis=-1),
        np.einsum("sli,skli->sk", uphill, J),
        2 * through.reshape(flat.shape) @ np.swapaxes(flat, 1, 2),
    )


def _step(here: _Point, x: Array, mixtures: Mixtures, damping: Array) -> Array:
    """(S, k) the damped Newton step, along the bounds where the way down leads out of them."""
    g = here.gradient
    stopped = ((x <= mixtures.low) & (g > 0)) | ((x >= mixtures.high) & (g < 0))
    free = ~stopped
    own = np.diagonal(here.curvature, axis1=1, axis2=2)
    floor = 1e-9 * own.max(axis=1, keepdims=True) + 1e-30  # an amount that changes nothing still has a row
    H = np.where(free[:, :, None] & free[:, None, :], here.curvature, 0.0)
    diagonal = np.arange(x.shape[1])
    H[:, diagonal, diagonal] = np.where(free, own * (1 + damping[:, None]) + floor, 1.0)
    step: Array = np.linalg.solve(H, np.where(free, -g, 0.0)[..., None])[..., 0]
    return step


def _chosen(better: Mask, there: _Point, here: _Point) -> _Point:
    return _Point(
        np.where(better, there.total, here.total),
        np.where(better[:, None], there.gradient, here.gradient),
        np.where(better[:, None, None], there.curvature, here.curvature),
    )
