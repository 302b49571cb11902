"""Without a dye's spectrum: a smooth monotone response of each channel through the standards. The second-best way.

Nothing but the standards says how a channel falls with concentration, so there is no answer outside their range.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from observers.arrays import Array, frozen
from observers.errors import InputError

LEAST_STANDARDS = 4
FLOOR = 0.004  # relative error of a ratio that no statistics of a box shows; see chroma.photo.fit
GRID = 2000
NOT_AGAINST = 0.147  # likelihood, relative to its best, at which chi-square has risen by 3.84
LEAST_RESPONSE = 4.0  # times its error, for a channel to count
ADVICE = (
    "no dye was given: a smooth curve through the standards, the second-best way; a dye file would use all three channels "
    "by their physics, need one standard or none, reach beyond the standards, and tell other colours from this one"
)


@dataclass(frozen=True, eq=False)
class Response:
    """Levels (S,) of concentration, ln ratios to blank there (S, 3), monotone; error (3,); which channels count."""

    level: Array
    ln_ratio: Array
    error: Array
    used: npt.NDArray[np.bool_]

    def __post_init__(self) -> None:
        for name in ("level", "ln_ratio", "error"):
            object.__setattr__(self, name, frozen(getattr(self, name)))

    def curve(self, c: Array) -> Array:
        """(…, 3) ln ratios at concentrations within the levels."""
        from scipy.interpolate import PchipInterpolator

        result: Array = PchipInterpolator(self.level, self.ln_ratio, axis=0)(c)
        return result


def fit_response(concentration: Array, ln_ratio: Array, variance: Array) -> Response:
    """The response through standards (S,) with ln ratios (S, 3) of given variances (S, 3); the blank is a point of it.

    The error of a channel is what its own standards show: scatter within a level and, from each inner level left out in
    turn, what the curve between its neighbours misses. Raises InputError for fewer than four standards of three levels
    or when no channel responds.
    """
    if len(concentration) < LEAST_STANDARDS or len(np.unique(concentration)) < 3:
        raise InputError(
            f"{len(concentration)} standards and no dye",
            why=f"a curve needs {LEAST_STANDARDS} standards at least, at three concentrations",
            do="give --dye, or more standards",
        )
    level, which = np.unique(np.concatenate([[0.0], concentration]), return_inverse=True)
    ln_all = np.vstack([np.zeros(3), ln_ratio])
    weight = 1.0 / (np.vstack([np.zeros(3), variance]) + FLOOR**2)
    total = np.stack([np.bincount(which, weight[:, k]) for k in range(3)], axis=1).astype(np.float64)
    mean = np.stack([np.bincount(which, weight[:, k] * ln_all[:, k]) for k in range(3)], axis=1) / total
    monotone = np.stack([falling(mean[:, k], total[:, k]) for k in range(3)], axis=1)
    error = _errors(level, which.astype(np.intp), ln_all, mean, monotone, variance)
    used = np.abs(monotone[-1] - monotone[0]) > LEAST_RESPONSE * error
    if not used.any():
        raise InputError("no channel responds to the standards", why="their colours do not differ beyond the noise")
    return Response(level, monotone, error, used)


def falling(values: Array, weight: Array) -> Array:
    """The nearest values that only fall, or only rise, whichever is nearer: pooled neighbours (Ayer et al. 1955)."""
    down, up = -_pooled(-values, weight), _pooled(values, weight)
    return down if (weight * (values - down) ** 2).sum() <= (weight * (values - up) ** 2).sum() else up


def _pooled(values: Array, weight: Array) -> Array:
    blocks: list[tuple[float, float, int]] = []
    for value, w in zip(values, weight, strict=True):
        blocks.append((float(value), float(w), 1))
        while len(blocks) > 1 and blocks[-2][0] > blocks[-1][0]:
            (a, wa, na), (b, wb, nb) = blocks[-2:]
            blocks[-2:] = [((a * wa + b * wb) / (wa + wb), wa + wb, na + nb)]
    return np.concatenate([np.full(n, value) for value, _, n in blocks])


def _errors(
    level: Array, which: npt.NDArray[np.intp], ln_all: Array, mean: Array, monotone: Array, variance: Array
) -> Array:
    """(3,) root-mean-square error of a single reading against the curve."""
    within = ((ln_all - mean[which]) ** 2).sum(axis=0)
    freedom = max(len(ln_all) - len(level), 0)
    scatter = within / freedom if freedom else np.zeros(3)
    bent = (mean - monotone) ** 2
    missed = [
        (_between(np.delete(level, i), np.delete(monotone, i, axis=0), level[i]) - monotone[i]) ** 2
        for i in range(1, len(level) - 1)
    ]
    # Left out, a point's neighbours stand twice as far apart, and a cubic misses by some eight times as much.
    shape = np.mean(missed, axis=0) / 8.0
    result: Array = np.sqrt(scatter + bent.mean(axis=0) + shape + variance.mean(axis=0) + FLOOR**2)
    return result


def _between(level: Array, values: Array, at: float) -> Array:
    from scipy.interpolate import PchipInterpolator

    result: Array = PchipInterpolator(level, values, axis=0)(at)
    return result


def read_off(response: Response, ln_ratio: Array, variance: Array) -> tuple[Array, Array, Array, npt.NDArray[np.bool_]]:
    """Middle, low and high (N,) of unknowns with ln ratios (N, 3), and which lie outside the standards.

    The posterior over concentrations from 0 to the highest standard, each equally likely beforehand.
    """
    grid = np.linspace(0.0, response.level[-1], GRID)
    curve = response.curve(grid)
    spread = response.error**2 + variance[:, None]
    squared = (ln_ratio[:, None] - curve) ** 2 / spread
    cost = 0.5 * np.where(response.used, squared, 0.0).sum(axis=-1)
    chance = np.exp(cost.min(axis=1, keepdims=True) - cost)
    mass = np.cumsum(chance, axis=1)
    mass /= mass[:, -1:]
    low, middle, high = (np.array([np.interp(q, row, grid) for row in mass]) for q in (0.025, 0.5, 0.975))
    # An end of the range that the reading does not speak against belongs to the interval.
    low = np.where(chance[:, 0] > NOT_AGAINST, 0.0, low)
    high = np.where(chance[:, -1] > NOT_AGAINST, grid[-1], high)
    strongest = int(np.argmax(np.where(response.used, np.abs(response.ln_ratio[-1]), -1.0)))
    beyond = np.abs(ln_ratio[:, strongest]) > np.abs(response.ln_ratio[-1, strongest]) + 2 * response.error[strongest]
    return middle, low, high, beyond
