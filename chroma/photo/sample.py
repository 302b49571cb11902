"""Draws from the posterior of a photo: from the mixture of a fit, weighed by the posterior itself."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from chroma.photo.fit import Data, Fit, Hypotheses, Prior, whitener
from chroma.photo.forward import Optics, own_slopes, predict
from observers.arrays import Array

DRAWS = 600
POLISHING = 2  # steps by which the unknowns follow a draw
HEAVY_TAIL = 30.0  # degrees of freedom of the t distribution that is drawn from


@dataclass(frozen=True, eq=False)
class Sample:
    """Draws (S, n) from the posterior with weights (S,); effective is how many equal draws they are worth."""

    x: Array
    weight: Array
    hypothesis: npt.NDArray[np.intp]
    effective: float


def sample(optics: Optics, data: Data, found: Fit, believed: Prior, *, draws: int = DRAWS, seed: int = 7) -> Sample:
    """Draws from the mixture with heavy tails, weighed by the posterior itself.

    Only what describes the photo is drawn from the mixture; given that, each cuvette stands alone and its unknown is
    found again, as the two hang together along a curve that no covariance describes.
    """
    rng = np.random.default_rng(seed)
    which = np.sort(rng.choice(len(found.weight), draws, p=found.weight))
    few = optics.layout.nuisance
    root = np.linalg.cholesky(found.covariance[:, :few, :few])
    normal = rng.standard_normal((draws, few))
    stretch = np.sqrt(HEAVY_TAIL / rng.chisquare(HEAVY_TAIL, draws))[:, None]
    moved = (root[which] @ (normal * stretch)[..., None])[..., 0]
    follow = found.covariance[:, few:, :few] @ np.linalg.inv(found.covariance[:, :few, :few])
    x = found.x[which]
    x[:, :few] += moved
    x[:, few:] += (follow[which] @ moved[..., None])[..., 0]
    hypotheses = found.hypotheses.take(which)
    ln_wanted = _settled(optics, data, x, hypotheses, believed, rng)
    squared = ((normal * stretch) ** 2).sum(axis=1)
    ln_root = np.log(np.einsum("hii->hi", root)).sum(axis=1)[which]
    # The density drawn from, within the hypothesis; its share in the mixture is that of the evidence.
    ln_drawn = -ln_root - 0.5 * (HEAVY_TAIL + few) * np.log1p(squared / HEAVY_TAIL)
    ln_wanted += hypotheses.ln_prior - np.log(found.weight[which])
    ln_wanted -= optics.directions * np.log(hypotheses.widening)
    weight = _smoothed(ln_wanted - ln_drawn)
    return Sample(x, weight, which, 1.0 / float((weight**2).sum()))


def _settled(
    optics: Optics, data: Data, x: Array, hypotheses: Hypotheses, believed: Prior, rng: np.random.Generator
) -> Array:
    """The ln posterior (S,) of each draw's description of the photo, its unknowns integrated out; writes draws of them."""
    layout, rows = optics.layout, optics.wanted
    apart = x[:, : layout.nuisance] - believed.mean[: layout.nuisance]
    apart[:, : layout.directions] /= hypotheses.widening[:, None]
    few = believed.precision[: layout.nuisance, : layout.nuisance]
    ln: Array = -0.5 * ((apart @ few) * apart).sum(axis=1)
    errors, which = np.unique(hypotheses.error, return_inverse=True)
    white, ln_det = whitener(data, errors)
    ln += ln_det[which]
    known = np.setdiff1d(np.arange(len(data.value)), rows)
    if len(known):
        part = replace(optics, known=optics.known[known], level=optics.level[known])
        value, _ = predict(part, x[:, : layout.nuisance], hypotheses.lamp, slopes=False)
        residual = _whitened(white[:, known], which, value - data.value[known])
        ln -= 0.5 * (residual**2).sum(axis=(1, 2))
    if len(rows):
        part = replace(optics, known=optics.known[rows], level=optics.level[rows])
        ln += _unknowns(part, data.value[rows], x, hypotheses.lamp, white[:, rows], which, believed, rng)
    return ln


def _whitened(white: Array, which: npt.NDArray[np.intp], residual: Array) -> Array:
    result: Array = (white[which] @ residual[..., None])[..., 0]
    return result


def _unknowns(
    optics: Optics,
    value: Array,
    x: Array,
    lamp: npt.NDArray[np.intp],
    white: Array,
    which: npt.NDArray[np.intp],
    believed: Prior,
    rng: np.random.Generator,
) -> Array:
    """The ln of the integral over each draw's unknowns (S,), by their own optimum and curvature; writes draws of them."""
    layout, dyes = optics.layout, len(optics.absorbance)
    shape = (len(x), len(value), dyes)
    mean = believed.mean[layout.unknown].reshape(shape[1:])
    weight = np.diag(believed.precision)[layout.unknown].reshape(shape[1:])
    for step in range(POLISHING + 1):
        u = x[:, layout.unknown].reshape(shape)
        shown, slope = own_slopes(optics, x, lamp)
        residual = _whitened(white, which, shown - value)
        slope = white[which] @ slope
        turned = np.swapaxes(slope, -1, -2)
        curvature = turned @ slope + weight[..., None] * np.eye(dyes)
        if step < POLISHING:
            gradient = (turned @ residual[..., None])[..., 0] + weight * (u - mean)
            moved = -np.linalg.solve(curvature, gradient[..., None])[..., 0]
            x[:, layout.unknown] = (u + np.clip(moved, -0.5, 0.5)).reshape(len(x), -1)
    root = np.linalg.cholesky(np.linalg.inv(curvature))
    drawn = u + (root @ rng.standard_normal((*shape, 1)))[..., 0]
    x[:, layout.unknown] = drawn.reshape(len(x), -1)
    cost = 0.5 * (residual**2).sum(axis=(1, 2)) + 0.5 * (weight * (u - mean) ** 2).sum(axis=(1, 2))
    result: Array = -cost + np.log(np.einsum("hnii->hni", root)).sum(axis=(1, 2))
    return result


def _smoothed(ln_weight: Array) -> Array:
    """Weights cut at √S times their mean (Ionides 2008, J. Comput. Graph. Stat. 17, 295)."""
    weight = np.exp(ln_weight - ln_weight.max())
    weight = np.minimum(weight, weight.mean() * np.sqrt(len(weight)))
    result: Array = weight / weight.sum()
    return result


def quantiles(values: Array, weight: Array, shares: tuple[float, ...]) -> Array:
    """(Q, …) weighted quantiles along the first axis, by lines between the draws."""
    flat = values.reshape(len(values), -1)
    order = np.argsort(flat, axis=0)
    ranked = np.take_along_axis(flat, order, axis=0)
    mass = weight[order].cumsum(axis=0) - 0.5 * weight[order]
    found = np.stack([np.interp(shares, mass[:, j], ranked[:, j]) for j in range(flat.shape[1])], axis=1)
    return found.reshape(len(shares), *values.shape[1:])
