"""What a match is asked: which dyes are free, between which bounds, and what is fixed; judged at the door."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from itertools import combinations
from math import comb

import numpy as np

from chroma.dye.solution import Shelf
from chroma.matching.mixture import Mixtures
from chroma.matching.rounding import lattice_bounds
from observers.arrays import Array, Index
from observers.errors import InputError, unknown_name

MOST_SUBSETS = 50_000


@dataclass(frozen=True, eq=False)
class Problem:
    """F free dyes of a shelf of D.

    free (F,) their places on the shelf; directions (F, B) absorbance a unit of amount, which is absorbance at the dye's
    own peak; scale (F,) amount a unit of concentration; low, high (F,) in amounts; base (B,) absorbance of what is
    fixed, at concentrations fixed (D,). required : free dyes (as places in ``free``) that every recipe holds.
    """

    free: Index
    directions: Array
    scale: Array
    low: Array
    high: Array
    required: tuple[int, ...]
    base: Array
    fixed: Array

    def mixtures(self, subsets: Index) -> Mixtures:
        """The mixtures of these subsets (S, k) of the free dyes."""
        return Mixtures(self.base, self.directions[subsets], self.low[subsets], self.high[subsets])


def problem(
    stock: Shelf, path_length_mm: float, bounds: Mapping[str, tuple[float, float]], fixed: Mapping[str, float]
) -> Problem:
    """The free dyes with their bounds (the fitted range where none is given), and the base of what is fixed.

    Raises InputError for a path length, bounds or fixed parts that cannot be, or when no dye is left free.
    """
    if not (np.isfinite(path_length_mm) and path_length_mm > 0):
        raise InputError(f"path length {path_length_mm:g} mm", why="it must be positive")
    known(stock, bounds, "bounds")
    known(stock, fixed, "fixed parts")
    for name, value in fixed.items():
        if not (np.isfinite(value) and value >= 0):
            raise InputError(f"{name} fixed at {value:g}", why="a concentration is not negative")
        if name in bounds:
            raise InputError(f"{name} is fixed and has bounds", why="it can be held by one of them", do="give one")
    free = np.array([i for i, name in enumerate(stock.names) if name not in fixed], dtype=np.intp)
    if not len(free):
        raise InputError("every dye is fixed", why="nothing is left to find", do="leave one of them free")
    per_unit = stock.absorptivity * (path_length_mm / 10)
    at = np.array([fixed.get(name, 0.0) for name in stock.names])
    scale = peak_absorbance(stock, path_length_mm)[free]
    pairs = np.array([_bounds(stock, i, bounds) for i in free])
    required = tuple(int(i) for i in np.flatnonzero(pairs[:, 0] > 0))
    return Problem(
        free,
        per_unit[free] / scale[:, None],
        scale,
        pairs[:, 0] * scale,
        pairs[:, 1] * scale,
        required,
        at @ per_unit,
        at,
    )


def peak_absorbance(stock: Shelf, path_length_mm: float) -> Array:
    """(D,) absorbance of each dye at its peak, a unit of concentration.

    Raises InputError for a dye that absorbs nothing on the shelf's grid.
    """
    top: Array = stock.absorptivity.max(axis=1) * (path_length_mm / 10)
    for name, value in zip(stock.names, top, strict=True):
        if not value > 0:
            span = f"{stock.wavelength_nm[0]:g}–{stock.wavelength_nm[-1]:g} nm"
            raise InputError(f"{name} absorbs nothing over {span}", do="leave it out, or fit it over its own bands")
    return top


def known(stock: Shelf, names: Mapping[str, object], kind: str) -> None:
    """Raises InputError for a name that is no dye of the shelf."""
    for name in names:
        if name not in stock.names:
            raise unknown_name("dye", name, stock.names).at(kind)


def subsets(count: int, required: tuple[int, ...], most: int) -> list[Index]:
    """Every subset of ``count`` dyes that holds the required ones, by size: arrays (S, k), k = 0 … most.

    Raises InputError when there are more required than most, or more subsets than can be searched.
    """
    if len(required) > most:
        raise InputError(
            f"{len(required)} dyes have a lower bound above zero",
            why=f"a recipe may hold {most} besides those that are fixed",
            do="raise --most-dyes, or lower a bound",
        )
    others = [i for i in range(count) if i not in required]
    sizes = range(min(most - len(required), len(others)) + 1)
    total = sum(comb(len(others), size) for size in sizes)
    if total > MOST_SUBSETS:
        raise InputError(
            f"{total} sets of up to {most} of {count} dyes",
            why=f"no more than {MOST_SUBSETS} are searched",
            do="take fewer dyes, or a smaller --most-dyes",
        )
    return [np.array([sorted(required + extra) for extra in combinations(others, n)], dtype=np.intp) for n in sizes]


def weighable(stock: Shelf, step: float | Mapping[str, float] | None, asked: Problem) -> Array | None:
    """(F,) steps of the free dyes; raises InputError for a step that is not positive or fits no bounds."""
    if step is None:
        return None
    if isinstance(step, Mapping):
        known(stock, step, "steps")
    names = tuple(stock.names[i] for i in asked.free)
    each = np.array([step.get(name, np.nan) if isinstance(step, Mapping) else step for name in names], dtype=np.float64)
    for name, value in zip(names, each, strict=True):
        if not (np.isfinite(value) and value > 0):
            raise InputError(f"step {value:g} for {name}", why="a positive step is wanted for every free dye")
    lattice_bounds(asked.low / asked.scale, asked.high / asked.scale, each, names)
    return each


def prices_per_litre(stock: Shelf, price: Mapping[str, float] | None) -> Array | None:
    """(D,) price of one unit of concentration in a litre.

    Raises InputError for a price that is missing, negative, or by the gram where the molar mass is not known.
    """
    if price is None:
        return None
    known(stock, price, "prices")
    missing = [name for name in stock.names if name not in price]
    if missing:
        raise InputError(f"no price for {', '.join(missing)}", do="give one for every dye, or none at all")
    for dye in stock.dyes:
        if not (np.isfinite(price[dye.name]) and price[dye.name] >= 0):
            raise InputError(f"price {price[dye.name]:g} of {dye.name}", why="it cannot be negative")
        if stock.unit == "mol/L" and dye.molar_mass is None:
            raise InputError(f"a price by the gram for {dye.name}, per mol/L", why="its molar mass is not known")
    grams = [1.0 if stock.unit == "g/L" else dye.molar_mass or 1.0 for dye in stock.dyes]
    return np.array([price[name] for name in stock.names]) * grams


def _bounds(stock: Shelf, i: int, bounds: Mapping[str, tuple[float, float]]) -> tuple[float, float]:
    name = stock.names[i]
    low, high = bounds.get(name, (0.0, stock.dyes[i].range_high))
    if not (0 <= low <= high) or not np.isfinite(low) or high == 0:
        raise InputError(
            f"bounds {low:g} to {high:g} of {name}", why="they go from zero or more up to something that is more"
        )
    return low, high
