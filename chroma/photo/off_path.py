"""Whether a cuvette's colour can be this dye at any concentration, judged by all the others."""

from __future__ import annotations

import numpy as np

from chroma.photo.fit import Data, Fit, whitener
from chroma.photo.forward import Optics, predict
from observers.arrays import Array

FLAG_BELOW = 0.002  # probability of a colour at least so far off, were it the dye
FREE = 1e-3  # a direction in which a cuvette's own unknown follows its reading says nothing of the path


def probabilities(optics: Optics, data: Data, found: Fit) -> Array:
    """(N,) probability of each cuvette's reading, or one further off, given all the other cuvettes.

    Leave-one-out residuals by the linear algebra of least squares; the hypotheses are weighed without the cuvette, so
    that what is off cannot raise the error by which it is judged.
    """
    from scipy.special import gammaincc

    rows = found.weight > 1e-4 * found.weight.max()
    chosen = found.hypotheses.take(np.flatnonzero(rows))
    value, slope = predict(optics, found.x[rows], chosen.lamp)
    assert slope is not None
    white, _ = whitener(data, chosen.error)
    residual = (white @ (value - data.value)[..., None])[..., 0]
    slope = white @ slope
    own = np.eye(3) - slope @ found.covariance[rows][:, None] @ np.swapaxes(slope, -1, -2)
    sizes, axes = np.linalg.eigh(own)
    along = (np.swapaxes(axes, -1, -2) @ residual[..., None])[..., 0]
    counts = (sizes > FREE) & (sizes <= 1.0 + 1e-9)
    size = np.where(counts, sizes, 1.0)
    chi_square = np.where(counts, along**2 / size, 0.0).sum(axis=-1)
    freedom = counts.sum(axis=-1)
    # A channel that does not count leaves a direction of pure prior, of size 1, with no residual to speak of.
    freedom = np.maximum(freedom - (~data.used).sum(axis=-1), 0)
    # Density of the reading given the others: exp(-chi²/2) over the spread it was predicted with.
    ln_own = -0.5 * chi_square + 0.5 * np.where(counts, np.log(size), 0.0).sum(axis=-1) + _ln_white(white)
    ln_without = np.log(found.weight[rows])[:, None] - ln_own
    share = np.exp(ln_without - ln_without.max(axis=0))
    share /= share.sum(axis=0)
    tail = np.where(freedom > 0, gammaincc(np.maximum(freedom, 1) / 2, chi_square / 2), 1.0)
    result: Array = (share * tail).sum(axis=0)
    return result


def _ln_white(white: Array) -> Array:
    result: Array = np.log(np.diagonal(white, axis1=-2, axis2=-1)).sum(axis=-1)
    return result
