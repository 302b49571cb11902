"""The goal of a search: the colours to be met under each lamp, and how far a colour is from them.

Distances are ratios, ΔE over the limit of its lamp, so that 1 is the edge of what is allowed under every lamp.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from chroma.colour.spaces import Lab_from_XYZ, Lab_jacobian, XYZ_from_Lab
from chroma.difference.classic import components
from chroma.difference.formulas import Formula
from chroma.quantity import LN10, SMALLEST_TRANSMITTANCE
from observers.arrays import Array, frozen
from observers.errors import InputError
from observers.weights import Weights

# Steps in L*a*b* for numerical slopes of a difference formula: its square is smooth, so these leave about 1e-9 of it.
SLOPE_STEP = 1e-3
METRIC_STEP = 0.1
NOISE_XYZ100 = 0.1  # what an instrument's noise about black, or rounding of L*a*b*, may leave below zero
STENCIL = frozen(np.concatenate([np.zeros((1, 3)), SLOPE_STEP * np.eye(3), -SLOPE_STEP * np.eye(3)]))


@dataclass(frozen=True, eq=False)
class Target:
    """What is to be met under L lamps: XYZ100 and Lab (L, 3), and the transmittance (B,) where it is known."""

    XYZ100: Array
    Lab: Array
    transmittance: Array | None = None


def target_spectrum(transmittance: Array, weights: Weights) -> Target:
    """A target from its transmittance (B,) on the grid of the weights, as the path length of the recipe shows it.

    Raises InputError for another shape or a value that is not finite.
    """
    values = np.asarray(transmittance, dtype=np.float64)
    if values.shape != weights.wavelength_nm.shape:
        raise InputError(
            f"a target of shape {values.shape}", why=f"the dyes stand on {len(weights.wavelength_nm)} wavelengths"
        )
    if not np.isfinite(values).all():
        raise InputError("a value of the target is not a finite number", do="mend or leave out that wavelength")
    XYZ100 = weights.response(values)
    return Target(frozen(XYZ100), frozen(Lab_from_XYZ(XYZ100, weights.white)), frozen(values))


def target_Lab(Lab: Array, weights: Weights) -> Target:
    """A target from L*a*b* (L, 3), one row for each lamp of the weights, against the white of that lamp.

    Raises InputError for another shape, L* outside 0–100, or a colour that no light has (negative XYZ).
    """
    values = np.atleast_2d(np.asarray(Lab, dtype=np.float64))
    if values.shape != weights.white.shape:
        raise InputError(
            f"L*a*b* of shape {values.shape}",
            why=f"one row of three is wanted for each of {', '.join(weights.illuminants)}",
            do="give the colour under each lamp, or match under the lamp it is known for",
        )
    if not np.isfinite(values).all() or (values[:, 0] < 0).any() or (values[:, 0] > 100).any():
        raise InputError(f"L* of {_worst_L(values):g}", why="a solution lies between black, 0, and a clear cell, 100")
    XYZ100 = XYZ_from_Lab(values, weights.white)
    none = (XYZ100 < -NOISE_XYZ100).any(axis=1)
    if none.any():
        lamp = int(np.argmax(none))
        raise InputError(
            f"L*a*b* {', '.join(f'{x:g}' for x in values[lamp])} under {weights.illuminants[lamp]}",
            why="its tristimulus values are negative, and no light has such a colour",
        )
    return Target(frozen(XYZ100), frozen(values))


@dataclass(frozen=True, eq=False)
class Goal:
    """A target with its weights, formula and limits (L,); ``metric`` (L, 3, 3) is the formula near the target.

    one_sided : (part, sign, limit) triples, part an index into dL, da, db, dC, dH; sign · part ≤ sign · limit is held.
    """

    target: Target
    weights: Weights
    formula: Formula
    limits: Array
    metric: Array
    one_sided: tuple[tuple[int, float, float], ...] = ()

    def Lab(self, absorbance: Array) -> Array:
        """L*a*b* (…, L, 3) of absorbances (…, B)."""
        return Lab_from_XYZ(self.weights.response(10.0**-absorbance), self.weights.white)

    def delta_e(self, Lab: Array) -> Array:
        """ΔE (…, L) of colours (…, L, 3)."""
        return self.formula.difference(self.target.Lab, Lab)

    def squares(self, Lab: Array) -> Array:
        """(ΔE/limit)² (…, L) of colours (…, L, 3)."""
        result: Array = (self.delta_e(Lab) / self.limits) ** 2
        return result

    def worst(self, Lab: Array) -> Array:
        """The largest ΔE/limit over the lamps (…)."""
        result: Array = np.sqrt(self.squares(Lab).max(axis=-1))
        return result

    def slacks(self, Lab: Array) -> Array:
        """(…, L, C) how much of each one-sided limit is left; negative where it is broken."""
        if not self.one_sided:
            return np.empty((*Lab.shape[:-1], 0))
        parts = components(self.target.Lab, Lab)
        return np.stack([sign * (limit - parts[..., part]) for part, sign, limit in self.one_sided], axis=-1)


def goal(
    target: Target,
    weights: Weights,
    formula: Formula,
    limits: float | Sequence[float] | Array = 1.0,
    one_sided: tuple[tuple[int, float, float], ...] = (),
) -> Goal:
    """A goal with one limit for all lamps, or one for each; raises InputError for limits that are not positive."""
    lamps = len(weights.illuminants)
    each = np.asarray(limits, dtype=np.float64)
    if each.shape not in ((), (1,), (lamps,)) or not (np.isfinite(each) & (each > 0)).all():
        raise InputError(
            f"limits {np.array2string(each, separator=', ')}", why=f"one positive number, or {lamps} of them, is wanted"
        )
    held = frozen(np.broadcast_to(each, (lamps,)))
    metric = _metric(formula, target.Lab) / held[:, None, None] ** 2
    return Goal(target, weights, formula, held, frozen(metric), one_sided)


def colour_and_slopes(weights: Weights, absorbance: Array, slopes: Array) -> tuple[Array, Array]:
    """L*a*b* (S, L, 3) of absorbances (S, B), and its slopes (S, k, L, 3) along those of the absorbance (S, k, B).

    From T = 10^-A, dT = -ln 10 · T dA; then through the weights and the cube roots of L*a*b* (CIE 15:2018, 8.2.1).
    """
    T = 10.0**-absorbance
    XYZ100 = weights.response(T)
    moved = weights.response(-LN10 * T[:, None, :] * slopes)
    return Lab_from_XYZ(XYZ100, weights.white), np.einsum("sklj,slij->skli", moved, Lab_jacobian(XYZ100, weights.white))


def with_gradient(function: Callable[[Array], Array], Lab: Array) -> tuple[Array, Array]:
    """A function of L*a*b* (…, L, 3), each lamp by itself, and its gradient (…, 3), by central differences."""
    values = function(Lab + STENCIL.reshape(7, *(1,) * (Lab.ndim - 1), 3))
    gradient = (values[1:4] - values[4:]) / (2 * SLOPE_STEP)
    return values[0], np.moveaxis(gradient, 0, -1)


def held_absorbance(transmittance: Array) -> Array:
    """Absorbance (…, B) of a measured transmittance, held at 5 where there is no light."""
    result: Array = -np.log10(np.maximum(transmittance, SMALLEST_TRANSMITTANCE))
    return result


def _metric(formula: Formula, Lab: Array) -> Array:
    """(L, 3, 3) M with ΔE² ≈ δᵀ M δ near each target, by polarisation of the formula's own values."""
    e = np.eye(3) * METRIC_STEP
    plus = Lab + (e[:, None, None] + e[None, :, None])
    minus = Lab + (e[:, None, None] - e[None, :, None])
    square = formula.difference(Lab, plus) ** 2 - formula.difference(Lab, minus) ** 2
    M = np.moveaxis(square / (4 * METRIC_STEP**2), -1, 0)
    result: Array = (M + np.swapaxes(M, 1, 2)) / 2
    return result


def _worst_L(Lab: Array) -> float:
    return float(Lab[int(np.argmax(np.abs(np.nan_to_num(Lab[:, 0], nan=np.inf) - 50))), 0])
