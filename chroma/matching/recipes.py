"""Recipes that meet a target: which dyes, and how much of each, come closest under all the lamps."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

import numpy as np

from chroma.colour.spaces import Lab_from_XYZ
from chroma.difference.formulas import Formula
from chroma.difference.metameric_index import special_index
from chroma.dye.model import ConcentrationUnit
from chroma.dye.solution import Shelf, range_notes, transmittance
from chroma.matching.goal import Goal, Target, goal
from chroma.matching.problem import Problem, prices_per_litre, problem, subsets, weighable
from chroma.matching.rounding import rounded
from chroma.matching.search import polish, settle
from chroma.matching.start import coarse_start, spectral_start
from observers.arrays import Array, Index, frozen
from observers.errors import InputError
from observers.weights import Weights

if TYPE_CHECKING:
    from chroma.frames import Library

TIE = 0.01  # worst ΔE/limit that round to the same hundredth are one for every purpose; cost and number of dyes decide
UNSEEN = 2e-4  # absorbance at a dye's peak that no bench instrument tells from none: such a dye is not in a recipe


@dataclass(frozen=True, eq=False)
class Recipe:
    """Dyes at concentrations, and what they come to under L lamps.

    delta_e (L,); spread: largest less smallest ΔE over the lamps; special_index (L - 1,): CIE special index of each
    further lamp against the first, NaN where the first is not within its limit; cost: price of a litre, or None;
    within: every ΔE within its limit; XYZ100 and Lab (L, 3); transmittance (B,) on the shelf's grid.
    """

    concentrations: Mapping[str, float]
    delta_e: Array
    spread: float
    special_index: Array
    cost: float | None
    within: bool
    XYZ100: Array
    Lab: Array
    transmittance: Array
    notes: tuple[str, ...]


@dataclass(frozen=True, eq=False)
class Matches:
    """Recipes, best first, and what they were held to; ``said`` is the answer in one sentence."""

    recipes: tuple[Recipe, ...]
    unit: ConcentrationUnit
    path_length_mm: float
    illuminants: tuple[str, ...]
    observer: str
    formula: Formula
    limits: Array
    target: Target
    reached: bool
    said: str
    notes: tuple[str, ...]

    def _repr_html_(self) -> str:
        from chroma.notebook import matches_html

        return matches_html(self)

    def to_frame(self, library: Library | None = None) -> Any:
        """A table of pandas or polars, one row a recipe."""
        from chroma.frames import frame, matches_columns

        return frame(matches_columns(self), library)


def match(
    target: Target,
    stock: Shelf,
    *,
    path_length_mm: float,
    weights: Weights,
    formula: Formula,
    limits: float | Sequence[float] | Array = 1.0,
    most_dyes: int = 3,
    bounds: Mapping[str, tuple[float, float]] = MappingProxyType({}),
    fixed: Mapping[str, float] = MappingProxyType({}),
    step: float | Mapping[str, float] | None = None,
    price: Mapping[str, float] | None = None,
    keep: int = 5,
) -> Matches:
    """The recipes of up to ``most_dyes`` dyes, besides those that are fixed, that come closest to the target.

    target : `target_spectrum` or `target_Lab` under the same weights; its spectrum as this path length shows it.
    limits : ΔE within which a lamp counts as met, one for all or one for each; recipes are ranked by the worst
    ΔE/limit over the lamps, those that tie by cost, then by how few dyes they take.
    bounds : dye → (low, high) in the shelf's unit, else from zero to the top of its fitted range; a low above zero puts
    the dye into every recipe. fixed : dye → concentration that is there already. step : the smallest step of
    concentration that can be weighed, for all dyes or by dye. price : dye → price of a gram.

    Raises InputError for names, bounds, steps, prices or numbers that cannot be, and for weights on another grid.
    """
    _judge(stock, weights, most_dyes, keep)
    asked = problem(stock, path_length_mm, bounds, fixed)
    steps = weighable(stock, step, asked)
    prices = prices_per_litre(stock, price)
    aim = goal(target, weights, formula, limits)
    groups = subsets(len(asked.free), asked.required, most_dyes)
    settled = [_settled(aim, asked, group) for group in groups]
    amounts = _finalists(aim, asked, groups, settled, steps, keep)
    recipes = [_recipe(aim, stock, asked, row, path_length_mm, prices) for row in amounts]
    ranked = sorted(recipes, key=lambda recipe: _rank(aim, recipe))[:keep]
    reached = ranked[0].within
    return Matches(
        tuple(ranked), stock.unit, path_length_mm, weights.illuminants, weights.observer, formula, aim.limits, target,
        reached, _said(aim, ranked[0], reached, most_dyes), weights.notes,
    )  # fmt: skip


def _settled(aim: Goal, asked: Problem, group: Index) -> Array:
    """(S, k) amounts of least squares for each subset of one size."""
    mixtures = asked.mixtures(group)
    if aim.target.transmittance is None:
        start = coarse_start(aim, mixtures)
    else:
        start = spectral_start(aim.weights, aim.target.transmittance, asked.directions, asked.base, group)
    return settle(aim, mixtures, start)


def _finalists(
    aim: Goal, asked: Problem, groups: list[Index], settled: list[Array], steps: Array | None, keep: int
) -> list[Array]:
    """Amounts (F,) of the best recipes, polished and rounded, one for each set of dyes that is really used.

    The worst of L ratios is never less than the root of their mean square, so a subset whose least mean square lies
    above what ``keep`` recipes reach already cannot be among them; subsets are taken up in that order.
    """
    waiting = []
    for group, x in zip(groups, settled, strict=True):
        totals = aim.squares(aim.Lab(asked.mixtures(group).absorbance(x))).mean(axis=-1)
        waiting += [(float(np.sqrt(total)), subset, own) for total, subset, own in zip(totals, group, x, strict=True)]
    best: dict[tuple[int, ...], tuple[float, Array]] = {}
    for floor, subset, start in sorted(waiting, key=lambda entry: entry[0]):
        so_far = sorted(worst for worst, _ in best.values())
        if len(so_far) >= keep and floor > so_far[keep - 1] + TIE:
            break
        full = _finished(aim, asked, subset, start, steps)
        used = tuple(int(i) for i in np.flatnonzero(full > 0))
        if steps is None and len(used) > 1 and _idle(asked, full, used):
            continue  # the subset without the idle dye is searched by itself
        worst = float(aim.worst(aim.Lab(asked.base + full @ asked.directions)))
        if used not in best or worst < best[used][0]:
            best[used] = worst, full
    real = [full for used, (worst, full) in best.items() if used or asked.base.any() or worst <= 1]
    return real or [full for _, full in best.values()]


def _finished(aim: Goal, asked: Problem, subset: Index, start: Array, steps: Array | None) -> Array:
    """(F,) amounts of one subset, polished for the worst lamp and brought to multiples of the steps."""
    mixture = asked.mixtures(subset[None])
    x = polish(aim, mixture, start)
    if steps is not None and len(subset):
        x = rounded(aim, mixture, x, (steps * asked.scale)[subset])
    full = np.zeros(len(asked.free))
    full[subset] = x
    return full


def _idle(asked: Problem, full: Array, used: tuple[int, ...]) -> bool:
    return any(full[i] < UNSEEN and i not in asked.required for i in used)


def _recipe(
    aim: Goal, stock: Shelf, asked: Problem, amounts: Array, path_length_mm: float, prices: Array | None
) -> Recipe:
    c = asked.fixed.copy()
    # a multiple of a step such as 0.001 is printed as it would be typed
    c[asked.free] = [float(f"{value:.12g}") for value in amounts / asked.scale]
    T = transmittance(stock, c, path_length_mm)
    XYZ100 = aim.weights.response(T)
    Lab = Lab_from_XYZ(XYZ100, aim.weights.white)
    delta_e = aim.delta_e(Lab)
    return Recipe(
        MappingProxyType({name: float(value) for name, value in zip(stock.names, c, strict=True) if value > 0}),
        frozen(delta_e), float(np.ptp(delta_e)), frozen(_special_index(aim, XYZ100, delta_e)),
        None if prices is None else float(c @ prices), bool((delta_e <= aim.limits).all()),
        frozen(XYZ100), frozen(Lab), frozen(T), range_notes(stock, c),
    )  # fmt: skip


def _special_index(aim: Goal, XYZ100: Array, delta_e: Array) -> Array:
    """(L - 1,) ΔE*ab under each further lamp, once the sample is corrected to match under the first (CIE 15, 9.2)."""
    if delta_e[0] > aim.limits[0]:
        return np.full(len(delta_e) - 1, np.nan)
    wanted = aim.target.XYZ100
    return special_index(wanted[0], wanted[1:], XYZ100[0], XYZ100[1:], aim.weights.white[1:])


def _rank(aim: Goal, recipe: Recipe) -> tuple[bool, float, float, int, float]:
    worst = float((recipe.delta_e / aim.limits).max())
    return not recipe.within, round(worst / TIE), recipe.cost or 0.0, len(recipe.concentrations), worst


def _said(aim: Goal, best: Recipe, reached: bool, most_dyes: int) -> str:
    lamp = int(np.argmax(best.delta_e / aim.limits))
    at = f"ΔE {best.delta_e[lamp]:.2f} under {aim.weights.illuminants[lamp]}, limit {aim.limits[lamp]:g}"
    if reached:
        return f"{_mixed(best)} meets the target; at worst {at}"
    return (
        f"no recipe of up to {most_dyes} of these dyes meets the target within its bounds; "
        f"the closest, {_mixed(best)}, stays at {at}"
    )


def _mixed(recipe: Recipe) -> str:
    return " with ".join(recipe.concentrations) or "plain solvent"


def _judge(stock: Shelf, weights: Weights, most_dyes: int, keep: int) -> None:
    if weights.wavelength_nm.shape != stock.wavelength_nm.shape or not np.allclose(
        weights.wavelength_nm, stock.wavelength_nm, rtol=0, atol=1e-6
    ):
        raise InputError("weights and dyes stand on different grids", do="make the weights on the grid of the shelf")
    if most_dyes < 1 or keep < 1:
        raise InputError(f"{most_dyes} dyes, {keep} recipes", why="at least one of each is wanted")
