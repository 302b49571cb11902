"""Where a search begins: from the target's spectrum by non-negative least squares, or from a coarse lattice."""

from __future__ import annotations

from itertools import product

import numpy as np

from chroma.matching.goal import Goal, held_absorbance
from chroma.matching.mixture import Mixtures
from observers.arrays import Array, Index
from observers.weights import Weights

# Lattice points along each component, by how many there are; amounts are absorbances at a dye's peak.
LEVELS = {1: 24, 2: 9, 3: 5, 4: 4, 5: 3}
FAINT, DEEP = 0.03, 3.0
AT_ONCE = 4_000_000  # numbers in one block of the lattice


def spectral_start(weights: Weights, transmittance: Array, directions: Array, base: Array, subsets: Index) -> Array:
    """Amounts (S, k) of the subsets (S, k) of the directions (D, B) that come nearest to a transmittance (B,).

    Non-negative least squares in absorbance, each band weighted by how much light passes there and how much the
    observer makes of it under all the lamps.
    """
    from scipy.optimize import nnls

    if not subsets.size:
        return np.zeros(subsets.shape)
    seen = np.sqrt((weights.matrix / weights.white.ravel()) ** 2 @ np.ones(weights.matrix.shape[1]))
    weight = np.maximum(transmittance, 1e-4) * seen
    Q, R = np.linalg.qr((directions * weight).T)  # the subsets then are columns of a small triangle
    wanted = Q.T @ ((held_absorbance(transmittance) - base) * weight)
    return np.array([nnls(R[:, subset], wanted)[0] for subset in subsets]).reshape(subsets.shape)


def coarse_start(goal: Goal, mixtures: Mixtures) -> Array:
    """Amounts (S, k) of each mixture's best point on a lattice, for a target whose spectrum is not known."""
    k = mixtures.low.shape[1]
    if not k:
        return np.zeros(mixtures.low.shape)
    levels = np.geomspace(FAINT, DEEP, LEVELS.get(k, 2))
    lattice = np.array(list(product(levels, repeat=k)))
    block = max(1, AT_ONCE // (len(lattice) * len(mixtures.base)))
    result = np.empty(mixtures.low.shape)
    for first in range(0, len(mixtures), block):
        rows = slice(first, first + block)
        part = Mixtures(
            mixtures.base, mixtures.directions[rows], mixtures.low[rows], mixtures.high[rows], mixtures.water
        )
        points = np.clip(lattice, part.low[:, None], part.high[:, None])
        totals = goal.squares(goal.Lab(part.absorbance(points))).sum(axis=-1)
        result[rows] = points[np.arange(len(part)), totals.argmin(axis=1)]
    return result
