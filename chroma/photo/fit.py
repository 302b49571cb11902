"""Maximum a posteriori fits of several hypotheses at once, and the mixture that they make.

A hypothesis is a lamp, a size of the error that the noise does not explain, and how far this camera may lie from the
population. Each is fitted by damped Gauss–Newton steps; the curvature at its optimum gives its covariance and its
evidence (Laplace); the answer is the mixture by evidence (drawn from in chroma.photo.sample).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from chroma.photo.forward import Optics, predict, prior
from observers.arrays import Array, frozen

STEPS = 40
SETTLED = 1e-5  # change of half chi-square between steps
GREY_SHARE = 0.25  # of the unexplained error's variance that all channels share (light, cells)
DARK_SHARE = 0.03  # of the panel, added to a reading where the unexplained error is taken as a share of it
SEED_POINTS = 80


@dataclass(frozen=True, eq=False)
class Data:
    """Readings relative to the panel (N, 3), their covariance (N, 3, 3) by noise alone, and which of them count."""

    value: Array
    covariance: Array
    used: npt.NDArray[np.bool_]

    def __post_init__(self) -> None:
        object.__setattr__(self, "value", frozen(self.value))
        object.__setattr__(self, "covariance", frozen(self.covariance))


@dataclass(frozen=True, eq=False)
class Hypotheses:
    """H of them: lamp (H,) by number, unexplained error (H,) relative, widening of the camera prior (H,), ln prior."""

    lamp: npt.NDArray[np.intp]
    error: Array
    widening: Array
    ln_prior: Array

    def __len__(self) -> int:
        return len(self.lamp)

    def take(self, rows: npt.NDArray[np.intp]) -> Hypotheses:
        """Some of them."""
        return Hypotheses(self.lamp[rows], self.error[rows], self.widening[rows], self.ln_prior[rows])


@dataclass(frozen=True, eq=False)
class Fit:
    """Optima x (H, n), their covariance (H, n, n), half chi-square (H,), weight (H,) by evidence."""

    x: Array
    covariance: Array
    cost: Array
    weight: Array
    ln_evidence: Array
    hypotheses: Hypotheses


@dataclass(frozen=True, eq=False)
class Prior:
    """Mean (n,) and precision (n, n) of every number of a fit; the camera's directions may be widened."""

    mean: Array
    precision: Array


# Sizes of the error that noise does not explain (relative), with ln prior weights: 0.5 % is usual, a factor of two off
# is not rare. Then how far a camera may lie from the population, in units of its spread.
ERRORS = (0.001, 0.002, 0.004, 0.008, 0.016)
USUAL_ERROR, ERROR_SPREAD = 0.005, 0.5
WIDENINGS = ((1.0, 0.8), (2.0, 0.2))


def hypotheses(lamps: int, *, widenings: tuple[tuple[float, float], ...] = WIDENINGS) -> Hypotheses:
    """Every lamp with every size of the unexplained error and every widening of the camera prior."""
    grid = [
        (lamp, error, wide, -0.5 * (np.log(error / USUAL_ERROR) / ERROR_SPREAD) ** 2 + np.log(share))
        for lamp in range(lamps)
        for error in ERRORS
        for wide, share in widenings
    ]
    lamp, error, wide, ln = np.array(grid).T
    return Hypotheses(lamp.astype(np.intp), error, wide, ln)


def default_prior(optics: Optics) -> Prior:
    """Independent, as `chroma.photo.forward.prior` has them."""
    mean, spread = prior(optics.layout)
    return Prior(mean, np.diag(spread**-2.0))


def whitener(data: Data, error: Array) -> tuple[Array, Array]:
    """(H, N, 3, 3) matrices that make residuals independent with unit variance, and ln of their determinants (H,)."""
    size = np.maximum(data.value, 0.0) + DARK_SHARE
    common = size[:, :, None] * size[:, None, :]
    shape = GREY_SHARE * common + (1 - GREY_SHARE) * np.einsum("ni,ij->nij", size**2, np.eye(3))
    full = data.covariance + error[:, None, None, None] ** 2 * shape
    # A reading that does not count gets a variance so large that it says nothing.
    mute = np.where(data.used, 0.0, 1e6)
    full = full + mute[:, None, :] * np.eye(3)
    root = np.linalg.cholesky(full)
    inverse = np.linalg.inv(root)
    ln_det = -np.log(np.diagonal(root, axis1=-2, axis2=-1)).sum(axis=(-1, -2))
    return inverse, ln_det


def fit(optics: Optics, data: Data, hypotheses: Hypotheses, believed: Prior, start: Array | None = None) -> Fit:
    """The optimum of every hypothesis and the weight that the readings give it."""
    x = seeds(optics, data, hypotheses, believed) if start is None else start.copy()
    white, ln_det = whitener(data, hypotheses.error)
    precision = _precisions(optics, hypotheses, believed)
    cost, gradient, curvature = _expand(optics, data, x, hypotheses.lamp, white, believed.mean, precision)
    damping = np.full(len(x), 1e-3)
    moving = np.ones(len(x), dtype=bool)
    for _ in range(STEPS):
        rows = np.flatnonzero(moving)
        step = _damped_step(gradient[rows], curvature[rows], damping[rows])
        tried = x[rows] + step
        found = _expand(optics, data, tried, hypotheses.lamp[rows], white[rows], believed.mean, precision[rows])
        better = found[0] < cost[rows]
        gain = np.where(better, cost[rows] - found[0], np.inf)
        taken = rows[better]
        x[taken], cost[taken] = tried[better], found[0][better]
        gradient[taken], curvature[taken] = found[1][better], found[2][better]
        damping[rows] = np.where(better, damping[rows] * 0.2, damping[rows] * 8.0)
        moving[rows] = (gain > SETTLED) & (damping[rows] < 1e8)
        if not moving.any():
            break
    return _weighed(x, cost, curvature, ln_det, precision, hypotheses)


def _damped_step(gradient: Array, curvature: Array, damping: Array) -> Array:
    diagonal = np.einsum("hii->hi", curvature)
    damped = curvature + np.einsum("h,hi,ij->hij", damping, diagonal, np.eye(curvature.shape[-1]))
    step: Array = -np.linalg.solve(damped, gradient[..., None])[..., 0]
    # A step of an unknown by more than a factor of e or so leaves what the slopes describe.
    shorter: Array = step * np.minimum(1.0, 3.0 / np.maximum(np.abs(step).max(axis=1, keepdims=True), 1e-12))
    return shorter


def _precisions(optics: Optics, hypotheses: Hypotheses, believed: Prior) -> Array:
    scale = np.ones((len(hypotheses), len(believed.mean)))
    scale[:, : optics.layout.directions] = 1.0 / hypotheses.widening[:, None]
    result: Array = believed.precision * scale[:, :, None] * scale[:, None, :]
    return result


def _expand(
    optics: Optics, data: Data, x: Array, lamp: npt.NDArray[np.intp], white: Array, mean: Array, precision: Array
) -> tuple[Array, Array, Array]:
    """Half chi-square (H,) with its gradient (H, n) and Gauss–Newton curvature (H, n, n), priors included."""
    value, slope = predict(optics, x, lamp)
    assert slope is not None
    residual = np.einsum("hnij,hnj->hni", white, value - data.value).reshape(len(x), -1)
    slope = (white @ slope).reshape(len(x), residual.shape[1], -1)
    apart = x - mean
    pulled = np.einsum("hij,hj->hi", precision, apart)
    cost = 0.5 * (residual**2).sum(axis=1) + 0.5 * (apart * pulled).sum(axis=1)
    turned = np.swapaxes(slope, 1, 2)
    gradient = (turned @ residual[..., None])[..., 0] + pulled
    return cost, gradient, turned @ slope + precision


def _weighed(x: Array, cost: Array, curvature: Array, ln_det: Array, precision: Array, hypotheses: Hypotheses) -> Fit:
    root = np.linalg.cholesky(curvature)
    ln_curvature = 2 * np.log(np.einsum("hii->hi", root)).sum(axis=1)
    ln_precision = np.linalg.slogdet(precision)[1]
    ln_evidence = hypotheses.ln_prior - cost + ln_det + 0.5 * (ln_precision - ln_curvature)
    weight = np.exp(ln_evidence - ln_evidence.max())
    covariance = np.asarray(np.linalg.inv(curvature), dtype=np.float64)
    return Fit(x, covariance, cost, weight / weight.sum(), ln_evidence, hypotheses)


def seeds(optics: Optics, data: Data, hypotheses: Hypotheses, believed: Prior) -> Array:
    """(H, n) starts: the prior's mean, the cell from the blanks, and each unknown by search along the dye's path."""
    layout = optics.layout
    x = np.tile(believed.mean, (len(hypotheses), 1))
    blanks = (optics.known == 0).all(axis=1)
    if blanks.any():
        x[:, layout.cell] = np.log(np.maximum(data.value[blanks].mean(axis=0), 0.05))
    rows = optics.wanted
    if not len(rows):
        return x
    dyes = len(optics.absorbance)
    grid = np.linspace(0.0, 6.5, SEED_POINTS if dyes == 1 else 24)
    path = np.stack(np.meshgrid(*[grid] * dyes, indexing="ij"), axis=-1).reshape(-1, dyes)
    lamps = np.unique(hypotheses.lamp)
    for lamp in lamps:
        shown = _along(optics, x[hypotheses.lamp == lamp][0], int(lamp), path)
        apart = (shown[None] - data.value[rows][:, None]) / (np.maximum(data.value[rows][:, None], 0) + DARK_SHARE)
        apart = np.where(data.used[rows][:, None], apart, 0.0)
        best = path[(apart**2).sum(axis=-1).argmin(axis=1)]
        x[hypotheses.lamp == lamp, layout.unknown] = best.ravel()
    return x


def _along(optics: Optics, x: Array, lamp: int, path: Array) -> Array:
    """(M, 3) readings along a path (M, D) of concentrations, at the middle of the panel's level."""
    line = Optics(
        optics.channels,
        optics.absorbance,
        optics.modes,
        np.broadcast_to(optics.level.mean(axis=0), (len(path), 3)),
        optics.small * np.sinh(path),
    )
    numbers = x[None, : optics.layout.nuisance]
    shown: Array = predict(line, numbers, np.array([lamp]), slopes=False)[0][0]
    return shown
