"""Decisions under uncertainty: how sure it is that a value lies within a limit, and what a guard band makes of it.

References: JCGM 106:2012; ISO 14253-1:2017.
"""

from __future__ import annotations

from typing import Literal, get_args

import numpy as np

from observers.arrays import Array, Codes

Rule = Literal["simple", "guard-band"]
RULES: tuple[Rule, ...] = get_args(Rule)

# How a verdict is kept in arrays; the order is that of severity, so that the worst of several is their maximum.
PASS, UNDECIDED, FAIL = 0, 1, 2
WORDS = ("pass", "undecided", "fail")

FAR = 1e3  # a difference this many standard deviations from zero is Gaussian to a thousandth of one
LARGEST = 1e6  # a squared limit this many variances out holds everything


def decide(value: Array, limit: Array | float, expanded: Array | float) -> Codes:
    """Verdict codes (…) for a value held under a limit: pass when value + U ≤ limit, fail when value - U > limit.

    With U = 0 this is simple acceptance, and nothing is undecided.
    """
    return np.where(value + expanded <= limit, PASS, np.where(value - expanded > limit, FAIL, UNDECIDED)).astype(
        np.int8
    )


def guard_banded_limit(limit: float, expanded: float) -> float:
    """The acceptance limit that keeps a guard band of the expanded uncertainty inside the limit (JCGM 106, 8.3.2)."""
    return limit - expanded


def conformance_probability(value: Array, u: Array, *, lower: float = -np.inf, upper: float = np.inf) -> Array:
    """The probability that what was measured as ``value`` with Gaussian standard uncertainty u lies within the limits.

    JCGM 106:2012, 7.4.
    """
    from scipy.special import ndtr

    result: Array = ndtr((upper - value) / u) - ndtr((lower - value) / u)
    return result


def probability_within(difference: Array, sd: Array, limit: Array) -> Array:
    """The probability that a colour difference lies within a limit, when each of its three axes varies with sd.

    A difference is a length and cannot be negative, so near zero a Gaussian is wrong: the square of the length over sd
    follows the noncentral chi-square distribution with three degrees of freedom.
    """
    from scipy.special import chndtr, ndtr

    # Far from zero, in units of sd, only the axis along the difference counts, and the series of chndtr fails.
    far = difference > FAR * sd
    safe_sd, safe = np.where(far, 1.0, sd), np.where(far, 0.0, difference)
    near_zero = chndtr(np.minimum((limit / safe_sd) ** 2, LARGEST), 3, (safe / safe_sd) ** 2)
    result: Array = np.where(far, ndtr((limit - difference) / sd), near_zero)
    return result
