"""Additions to a batch: the fewest components, and the least of them, that bring its colour within reach of a goal.

Nothing can be taken out of a batch; only water thins what is in it. Amounts are a litre of the batch as it stands.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import combinations

import numpy as np

from chroma.dye.solution import Shelf
from chroma.matching.goal import Goal
from chroma.matching.mixture import Mixtures
from chroma.matching.problem import peak_absorbance
from chroma.matching.search import least, polish, settle
from observers.arrays import Array, Index

MOST_ADDED = 3.0  # absorbance at a dye's peak in the batch's own cell
WATER_G_PER_L = 1000.0
WORTH = 0.99  # of the worst ratio: what more components must come under to be named as the closest


@dataclass(frozen=True, eq=False)
class Amounts:
    """Concentration that each dye is raised by (D,) before water, water in shares of the batch, the worst ratio."""

    dyes: Array
    water: float
    worst: float


@dataclass(frozen=True, eq=False)
class _Sets:
    """Sets (S, m) of dyes, each with or without water, and their mixtures settled: amounts (S, k), floor (S,)."""

    dyes: Index
    mixtures: Mixtures
    amounts: Array
    floor: Array
    worst: Array


@dataclass(frozen=True, eq=False)
class Tank:
    """A batch to be corrected: its absorbance (B,), the shelf, absorbance (D,) at each dye's peak, and the room there is.

    mass (D,) grams a unit of concentration and litre.
    """

    base: Array
    stock: Shelf
    peak: Array
    mass: Array
    path_length_mm: float
    most_water: float


def tank(base: Array, stock: Shelf, path_length_mm: float, most_water: float) -> Tank:
    """A tank; dyes by the mole weigh what their molar mass says, or all alike where one is not known."""
    by_mole = stock.unit == "mol/L" and all(dye.molar_mass is not None for dye in stock.dyes)
    mass = np.array([dye.molar_mass if by_mole and dye.molar_mass else 1.0 for dye in stock.dyes])
    return Tank(base, stock, peak_absorbance(stock, path_length_mm), mass, path_length_mm, most_water)


def smallest(goal: Goal, batch: Tank, *, aim: float, most_components: int) -> tuple[Amounts | None, Amounts]:
    """The smallest addition that brings every ΔE within its limit, or None; and the one that comes closest.

    Fewest components first (water is one), then least mass. The set is the first that reaches ``aim`` times the limits,
    and of it no more is added than that takes; where none does, the first that reaches the limits at all, as near the
    target as it comes.
    """
    sizes = [
        [_settled(goal, batch, n, water) for n, water in ((size - 1, True), (size, False)) if n <= len(batch.peak)]
        for size in range(1, most_components + 1)
    ]
    for share in (aim, 1.0):
        for sets in (group for size in sizes for group in size):
            found = _least_of(goal, batch, sets, share, share if share == aim else None)
            if found is not None:
                return found, found
    return None, _closest(goal, batch, [group for size in sizes for group in size])


def _settled(goal: Goal, batch: Tank, n: int, water: bool) -> _Sets:
    """Every set of n dyes, with or without water, settled from nothing added."""
    sets = np.array(list(combinations(range(len(batch.peak)), n)), dtype=np.intp)
    unit = batch.stock.absorptivity * (batch.path_length_mm / 10) / batch.peak[:, None]
    k = n + water
    high = np.full((len(sets), k), MOST_ADDED)
    if water:
        high[:, -1] = batch.most_water
    mixtures = Mixtures(batch.base, unit[sets], np.zeros((len(sets), k)), high, water)
    amounts = settle(goal, mixtures, np.zeros((len(sets), k)))
    squares = goal.squares(goal.Lab(mixtures.absorbance(amounts)))
    return _Sets(sets, mixtures, amounts, np.sqrt(squares.mean(axis=-1)), np.sqrt(squares.max(axis=-1)))


def _least_of(goal: Goal, batch: Tank, sets: _Sets, share: float, aim: float | None) -> Amounts | None:
    """Of the sets that reach ``share`` times the limits, the one that takes the least mass to do it."""
    best, least_mass = None, np.inf
    # the worst of L ratios is never below the root of their mean square: no set above the share can come under it
    for i in np.flatnonzero(sets.floor <= share):
        one = sets.mixtures.row(int(i))
        x = polish(goal, one, sets.amounts[i])
        if not _reaches(goal, one, x, share):
            continue
        cost = _cost(batch, sets, int(i))
        if aim is not None:
            x = least(goal, one, x, aim, cost)
        if cost @ x < least_mass:
            best, least_mass = _amounts(goal, batch, sets, int(i), x), float(cost @ x)
    return best


def _reaches(goal: Goal, one: Mixtures, x: Array, share: float) -> bool:
    Lab = goal.Lab(one.absorbance(x[None]))[0]
    return bool(goal.worst(Lab) <= share and (goal.slacks(Lab) >= 0).all())


def _cost(batch: Tank, sets: _Sets, i: int) -> Array:
    """(k,) grams a litre for each unit of amount."""
    dyes = sets.dyes[i]
    grams: Array = batch.mass[dyes] / batch.peak[dyes]
    return np.append(grams, WATER_G_PER_L) if sets.mixtures.water else grams


def _closest(goal: Goal, batch: Tank, every: list[_Sets]) -> Amounts:
    """The addition with the least worst ratio; one with more components must be worth it."""
    best = Amounts(np.zeros(len(batch.peak)), 0.0, float(goal.worst(goal.Lab(batch.base))))
    for sets in every:
        i = int(sets.worst.argmin())
        x = polish(goal, sets.mixtures.row(i), sets.amounts[i])
        found = _amounts(goal, batch, sets, i, x)
        if found.worst < best.worst * WORTH:
            best = found
    return best


def _amounts(goal: Goal, batch: Tank, sets: _Sets, i: int, x: Array) -> Amounts:
    dyes = np.zeros(len(batch.peak))
    own = sets.dyes[i]
    dyes[own] = x[: len(own)] / batch.peak[own]
    worst = float(goal.worst(goal.Lab(sets.mixtures.row(i).absorbance(x[None]))[0]))
    return Amounts(dyes, float(x[-1]) if sets.mixtures.water else 0.0, worst)
