"""Control chart of single values in order: centre, warning and action limits, EWMA, trend.

References: ISO 7870-2 (Shewhart charts for individuals, spread from the moving range); ISO 7870-6 (EWMA charts).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from observers.arrays import Array, Mask
from observers.errors import InputError

LEAST = 3  # values, below which a moving range says nothing
D2 = 2 / np.sqrt(np.pi)  # mean range of two Gaussian values over their standard deviation: 1.128
LAMBDA = 0.2  # weight of the newest value in the EWMA
WARNING_SIGMA, ACTION_SIGMA = 2.0, 3.0


@dataclass(frozen=True, eq=False)
class Control:
    """A chart of N values (N,) that cannot be negative, so that only the upper limits count.

    centre: their mean; sigma: from the mean moving range; warning and action: upper limits; ewma (N,) with its own
    action limit ewma_action (N,); slope: change a step with its standard error (NaN where the values are three).
    """

    values: Array
    centre: float
    sigma: float
    warning: float
    action: float
    ewma: Array
    ewma_action: Array
    slope: float
    s_slope: float

    @property
    def beyond_action(self) -> Mask:
        """(N,) the values above the action limit."""
        result: Mask = self.values > self.action
        return result

    @property
    def beyond_warning(self) -> Mask:
        """(N,) the values above the warning limit, those above the action limit among them."""
        result: Mask = self.values > self.warning
        return result

    @property
    def ewma_beyond(self) -> Mask:
        """(N,) where the EWMA is above its action limit: a small shift that lasts."""
        result: Mask = self.ewma > self.ewma_action
        return result


def control(values: Array, *, weight: float = LAMBDA) -> Control:
    """The chart of values (N,) in order of time; ``weight`` is λ of the EWMA.

    Raises InputError for fewer than three values, a value that is not finite, or λ outside 0–1. Reference: ISO 7870-2,
    ISO 7870-6.
    """
    y = np.asarray(values, dtype=np.float64)
    if y.ndim != 1 or len(y) < LEAST:
        raise InputError(f"a control chart of {y.size} values", why=f"it takes at least {LEAST} in order")
    if not np.isfinite(y).all():
        raise InputError("a value of the control chart is not a finite number")
    if not 0 < weight <= 1:
        raise InputError(f"a weight of {weight:g} for the EWMA", why="it lies above 0 and up to 1")
    centre, sigma = float(y.mean()), float(np.abs(np.diff(y)).mean() / D2)
    slope, s_slope = _trend(y)
    return Control(
        y,
        centre,
        sigma,
        centre + WARNING_SIGMA * sigma,
        centre + ACTION_SIGMA * sigma,
        _ewma(y, centre, weight),
        centre + ACTION_SIGMA * sigma * _ewma_spread(len(y), weight),
        slope,
        s_slope,
    )


def _ewma(y: Array, start: float, weight: float) -> Array:
    """z_i = λ·y_i + (1 - λ)·z_(i-1), from the centre."""
    result, z = np.empty(len(y)), start
    for i, value in enumerate(y):
        z = weight * value + (1 - weight) * z
        result[i] = z
    return result


def _ewma_spread(count: int, weight: float) -> Array:
    """Standard deviation of the EWMA (N,) over that of a value; it grows to √(λ/(2 - λ))."""
    i = np.arange(1, count + 1)
    result: Array = np.sqrt(weight / (2 - weight) * (1 - (1 - weight) ** (2 * i)))
    return result


def _trend(y: Array) -> tuple[float, float]:
    """Slope of the straight line through the values by least squares, and its standard error."""
    x = np.arange(len(y)) - (len(y) - 1) / 2
    slope = float(x @ y / (x @ x))
    rest = y - y.mean() - slope * x
    return slope, float(np.sqrt(rest @ rest / (len(y) - 2) / (x @ x))) if len(y) > LEAST else float("nan")
