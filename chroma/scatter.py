"""What replicates say about a colour difference: pooled covariance in L*a*b*, carried to ΔE and its parts.

References: JCGM 100:2008, 5.1 (propagation) and G.3 (the t factor for few degrees of freedom).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from chroma.colour.spaces import Lab_from_XYZ
from chroma.spectra import Spectra
from observers.arrays import Array
from observers.weights import Weights

STEP = 1e-4  # in units of L*a*b*, for slopes


@dataclass(frozen=True, eq=False)
class Spread:
    """Scatter of one reading in L*a*b*: covariance (L, 3, 3) pooled over all replicates, with its degrees of freedom.

    readings (N,) counts the readings behind each mean.
    """

    covariance: Array
    freedom: int
    readings: Array


def spread(spectra: Spectra, XYZ100: Array, W: Weights) -> Spread:
    """The pooled scatter of one table; freedom is 0 without replicates. XYZ100 (N, L, 3) are its colours."""
    deviations = Lab_deviations(spectra, XYZ100, W)
    readings = np.ones(len(spectra))
    lamps = XYZ100.shape[1]
    if spectra.scatter is None:
        return Spread(np.zeros((lamps, 3, 3)), 0, readings)
    rows, counts = np.unique(spectra.scatter.row, return_counts=True)
    readings[rows] = counts
    freedom = int((counts - 1).sum())
    return Spread(np.einsum("rli,rlj->lij", deviations, deviations) / freedom, freedom, readings)


def Lab_deviations(spectra: Spectra, XYZ100: Array, W: Weights) -> Array:
    """(R, L, 3) how far each replicate lies from the mean of its sample in L*a*b*; R is 0 without replicates."""
    if spectra.scatter is None:
        return np.zeros((0, *XYZ100.shape[1:]))
    mean = XYZ100[spectra.scatter.row]
    moved = mean + W.response(spectra.scatter.deviation)
    return Lab_from_XYZ(moved, W.white) - Lab_from_XYZ(mean, W.white)


def of_difference(target: Spread, sample: Spread) -> tuple[Array, int]:
    """Covariance (N, L, 3, 3) of sample minus target, both means of their readings, and its degrees of freedom.

    Replicates of both are pooled, as readings of one instrument.
    """
    freedom = target.freedom + sample.freedom
    pooled = (target.covariance * target.freedom + sample.covariance * sample.freedom) / max(freedom, 1)
    share = 1 / sample.readings + 1 / target.readings[0]
    return share[:, None, None, None] * pooled, freedom


def coverage_factor(coverage: float, freedom: int) -> float:
    """The factor that covers as much of Student's t, with these degrees of freedom, as k does of a Gaussian."""
    from scipy.special import ndtr, stdtrit

    return float(stdtrit(freedom, ndtr(coverage)))


def carried(function: Callable[[Array], Array], Lab: Array, covariance: Array) -> Array:
    """Standard uncertainty of ``function`` of L*a*b* (…, 3) with covariance (…, 3, 3), by its slopes.

    The function may return (…) or (…, P); so does the result.
    """
    slopes = []
    for axis in np.eye(3) * STEP:
        slopes.append((function(Lab + axis) - function(Lab - axis)) / (2 * STEP))
    return _from_slopes(np.stack(slopes), covariance)


def of_distance(distance: Callable[[Array], Array], Lab: Array, covariance: Array, target_Lab: Array) -> Array:
    """Like `carried` for a distance from ``target_Lab``; at the target itself, where it has no slope, by its growth.

    There the axes are taken as independent.
    """
    u = carried(distance, Lab, covariance)
    growth = np.stack([distance(target_Lab + axis) / STEP for axis in np.eye(3) * STEP], axis=-1)
    variance = np.einsum("...ii->...i", covariance)
    at_target: Array = np.sqrt((growth**2 * variance).sum(axis=-1))
    return np.where(distance(Lab) < 10 * STEP, at_target, u)


def _from_slopes(slopes: Array, covariance: Array) -> Array:
    if slopes.ndim == covariance.ndim - 1:
        variance = np.einsum("i...,...ij,j...->...", slopes, covariance, slopes)
    else:
        variance = np.einsum("i...p,...ij,j...p->...p", slopes, covariance, slopes)
    result: Array = np.sqrt(np.maximum(variance, 0))
    return result
