"""The calibration line: slope and intercept with their errors, a concentration read back, and the limits of detection.

References: DIN 32645:2008; ISO 11843-2:2000; Currie 1995 (Pure and Applied Chemistry 67, 1699); for the interval that
holds where the slope is uncertain, Fieller 1954 (Journal of the Royal Statistical Society B 16, 175).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from observers.arrays import Array
from observers.errors import InputError


@dataclass(frozen=True)
class Line:
    """y = intercept + slope·x by weighted least squares over n points.

    s is the residual standard deviation of a point of weight 1 with ``freedom`` degrees of freedom; x_mean and y_mean
    are weighted means, Sxx the weighted sum of squares of x about its mean, total the sum of weights.
    """

    slope: float
    intercept: float
    s: float
    freedom: int
    x_mean: float
    y_mean: float
    Sxx: float
    total: float
    r: float

    @property
    def s_slope(self) -> float:
        """Standard error of the slope."""
        return self.s / float(np.sqrt(self.Sxx))

    @property
    def s_intercept(self) -> float:
        """Standard error of the intercept."""
        return self.s * float(np.sqrt(1 / self.total + self.x_mean**2 / self.Sxx))


@dataclass(frozen=True)
class ReadBack:
    """A concentration from a reading: value, standard error, half the symmetric interval, and Fieller's limits."""

    value: float
    standard_error: float
    half_width: float
    low: float
    high: float


def fit_line(x: Array, y: Array, weights: Array | None = None) -> Line:
    """The weighted least-squares line through points x, y (n,).

    Raises InputError for fewer than three points or for a single concentration.
    """
    w = np.ones_like(x) if weights is None else weights
    if len(x) < 3 or np.ptp(x) == 0:
        raise InputError("no calibration line", why="three or more points at two or more concentrations are needed")
    total = float(w.sum())
    x_mean, y_mean = float(w @ x) / total, float(w @ y) / total
    Sxx = float(w @ (x - x_mean) ** 2)
    Sxy = float(w @ ((x - x_mean) * (y - y_mean)))
    Syy = float(w @ (y - y_mean) ** 2)
    slope = Sxy / Sxx
    intercept = y_mean - slope * x_mean
    residual = y - intercept - slope * x
    freedom = len(x) - 2
    s = float(np.sqrt(w @ residual**2 / freedom))
    r = Sxy / float(np.sqrt(Sxx * Syy)) if Syy > 0 else 0.0
    return Line(slope, intercept, s, freedom, x_mean, y_mean, Sxx, total, r)


def read_back(line: Line, y: float, *, readings: float = 1, weight: float = 1.0, confidence: float = 0.95) -> ReadBack:
    """The concentration of a sample whose mean of ``readings`` readings is y, each of the given weight.

    Fieller's limits are infinite where the slope cannot be told from zero. With infinite readings it is the point where
    the line passes y, as standard addition needs it.
    """
    t = quantile((1 + confidence) / 2, line.freedom)
    x = (y - line.intercept) / line.slope
    own = 1 / (readings * weight)
    spread = own + 1 / line.total + (x - line.x_mean) ** 2 / line.Sxx
    error = line.s / abs(line.slope) * float(np.sqrt(spread))
    low, high = _fieller(line, y, own, t)
    return ReadBack(x, error, t * error, low, high)


def decision_limit(line: Line, *, readings: float = 1, alpha: float = 0.05) -> float:
    """The concentration above which a reading differs from the blank, risk alpha (DIN 32645, critical value).

    Infinite, like the other limits, for a line that does not rise.
    """
    if line.slope <= 0:
        return float("inf")
    t = quantile(1 - alpha, line.freedom)
    return line.s / line.slope * t * float(np.sqrt(_spread(line, 0.0, readings)))


def detection_limit(line: Line, *, readings: float = 1, alpha: float = 0.05, beta: float = 0.05) -> float:
    """The smallest concentration that is found with a risk of at most beta of missing it (ISO 11843-2)."""
    above_blank = decision_limit(line, readings=readings, alpha=alpha)
    if np.isinf(above_blank):
        return above_blank
    t = quantile(1 - beta, line.freedom)

    def missed_by(x: float) -> float:
        return x - above_blank - t * line.s / line.slope * float(np.sqrt(_spread(line, x, readings)))

    return _root(missed_by, above_blank)


def quantification_limit(line: Line, *, readings: float = 1, alpha: float = 0.05, k: float = 3.0) -> float:
    """The concentration whose relative two-sided interval is 1/k (DIN 32645)."""
    if line.slope <= 0:
        return float("inf")
    t = quantile(1 - alpha / 2, line.freedom)

    def short_by(x: float) -> float:
        return x - k * t * line.s / line.slope * float(np.sqrt(_spread(line, x, readings)))

    return _root(short_by, decision_limit(line, readings=readings, alpha=alpha))


def quantile(probability: float, freedom: float) -> float:
    """Student's t, or the Gaussian for infinite freedom."""
    from scipy.special import ndtri, stdtrit

    return float(ndtri(probability) if np.isinf(freedom) else stdtrit(freedom, probability))


def _spread(line: Line, x: float, readings: float) -> float:
    return 1 / readings + 1 / line.total + (x - line.x_mean) ** 2 / line.Sxx


def _root(function: object, start: float) -> float:
    """The root above ``start``; infinite when the line is too poor to have one."""
    from scipy.optimize import brentq

    assert callable(function)
    high = max(start, 1e-300)
    for _ in range(60):
        if function(high) > 0:
            return float(brentq(function, 0.0, high, xtol=1e-14 * high, rtol=1e-12))
        high *= 2
    return float("inf")


def _fieller(line: Line, y: float, own: float, t: float) -> tuple[float, float]:
    """Roots of b²(1 - g)·d² - 2·b·(y - ȳ)·d + (y - ȳ)² - t²s²(own + 1/total) = 0 in d = x - x̄."""
    rise = y - line.y_mean
    g = (t * line.s_slope / line.slope) ** 2
    if g >= 1:
        return -float("inf"), float("inf")
    a = line.slope**2 * (1 - g)
    root = float(
        np.sqrt(max((line.slope * rise) ** 2 - a * (rise**2 - (t * line.s) ** 2 * (own + 1 / line.total)), 0.0))
    )
    centre = line.slope * rise
    ends = sorted(((centre - root) / a, (centre + root) / a))
    return line.x_mean + ends[0], line.x_mean + ends[1]
