"""Sweeps: one recipe at many strengths, path lengths or mixing ratios, and where its hue turns."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from chroma.colours import Colours
from chroma.dye.solution import Shelf
from chroma.units import NUMBER, concentration, path_length_mm
from observers.arrays import Array
from observers.errors import InputError

MOST_STEPS = 1000
LEAST_CHROMA = 2.0  # below this a hue angle says nothing
EXAMPLES = "strength=0.1:4:9, path-length=1mm:100mm:9, NAME=0g/L:0.4g/L:9 or NAME/NAME=9"


@dataclass(frozen=True, eq=False)
class Sweep:
    """S solutions: names, concentrations (S, D) in the shelf's unit, path_length_mm (S,)."""

    kind: str
    names: tuple[str, ...]
    concentrations: Array
    path_length_mm: Array


def sweep(text: str, stock: Shelf, concentrations: Array, cell_mm: float) -> Sweep:
    """A sweep from its text, about a recipe (D,) in a cell.

    ``strength=0.1:4:9`` multiplies the recipe, in even ratios; ``path-length=1mm:100mm:9`` likewise the cell;
    ``NAME=0g/L:0.4g/L:9`` varies one dye, in even steps; ``NAME/NAME=9`` moves from the first dye to the second at their
    summed concentration. Raises InputError for another form or an unknown dye.
    """
    what, _, values = text.partition("=")
    if not values:
        raise InputError(f"sweep {text!r}", why=f"it is one of {EXAMPLES}")
    what = what.strip()
    if "/" in what and what not in stock.names:
        return _mix(what, values, stock, concentrations, cell_mm)
    low, high, steps = _ends(text, values)
    if what == "strength":
        factor = _ratios(_plain(text, low), _plain(text, high), steps)
        names = tuple(f"× {value:.4g}" for value in factor)
        return Sweep("strength", names, factor[:, None] * concentrations, np.full(steps, cell_mm))
    if what == "path-length":
        lengths = _ratios(path_length_mm(low), path_length_mm(high), steps)
        names = tuple(f"{value:.4g} mm" for value in lengths)
        return Sweep("path length", names, np.tile(concentrations, (steps, 1)), lengths)
    which = _which(what, stock)
    amounts = np.linspace(concentration(low, stock.unit), concentration(high, stock.unit), steps)
    table = np.tile(concentrations, (steps, 1))
    table[:, which] = amounts
    return Sweep(what, tuple(f"{value:.4g} {stock.unit}" for value in amounts), table, np.full(steps, cell_mm))


def hue_turns(LCh: Array, angle_deg: float) -> list[tuple[int, float]]:
    """Where along a sweep (S, 3) the hue has turned by more than an angle since it was last said, and by how much.

    The first colour of enough chroma is where it is counted from.
    """
    seen = np.flatnonzero(LCh[:, 1] >= LEAST_CHROMA)
    turns: list[tuple[int, float]] = []
    if not len(seen):
        return turns
    last = LCh[seen[0], 2]
    for i in seen[1:]:
        turned = float((LCh[i, 2] - last + 180) % 360 - 180)
        if abs(turned) > angle_deg:
            turns.append((int(i), turned))
            last = LCh[i, 2]
    return turns


def _mix(what: str, values: str, stock: Shelf, concentrations: Array, cell_mm: float) -> Sweep:
    first, _, second = what.partition("/")
    i, j = _which(first, stock), _which(second, stock)
    total = concentrations[i] + concentrations[j]
    if i == j or not total > 0:
        raise InputError(f"no mixture of {first} and {second}", why="two dyes with a concentration are needed")
    share = np.linspace(0, 1, _steps(what, values))
    table = np.tile(concentrations, (len(share), 1))
    table[:, i], table[:, j] = (1 - share) * total, share * total
    return Sweep(what, tuple(f"{100 * value:.4g} % {second}" for value in share), table, np.full(len(share), cell_mm))


def _ends(text: str, values: str) -> tuple[str, str, int]:
    parts = values.split(":")
    if len(parts) != 3:
        raise InputError(
            f"sweep {text!r}", why="first, last and the number of steps are wanted", do=f"write {EXAMPLES}"
        )
    return parts[0], parts[1], _steps(text, parts[2])


def _steps(text: str, part: str) -> int:
    if not re.fullmatch(r"\s*\d+\s*", part) or not 2 <= int(part) <= MOST_STEPS:
        raise InputError(f"sweep {text!r}", why=f"the number of steps is from 2 to {MOST_STEPS}")
    return int(part)


def _plain(text: str, part: str) -> float:
    if not re.fullmatch(rf"\s*{NUMBER}\s*", part) or not float(part) > 0:
        raise InputError(f"sweep {text!r}", why="a strength is a positive number")
    return float(part)


def _ratios(low: float, high: float, steps: int) -> Array:
    result: Array = np.geomspace(low, high, steps)
    return result


def _which(name: str, stock: Shelf) -> int:
    if name not in stock.names:
        raise InputError(f"no dye is named {name!r}", why=f"there are {', '.join(stock.names)}")
    return stock.names.index(name)


def one_solution(stock: Shelf, concentrations: Array, cell_mm: float) -> Sweep:
    """A single recipe (D,) as a sweep of one step, named by what is in it."""
    parts = [f"{c:.4g} {stock.unit} {name}" for c, name in zip(concentrations, stock.names, strict=True)]
    return Sweep("recipe", (" + ".join(parts),), concentrations[None], np.array([cell_mm]))


def turn_sentences(steps: Sweep, colours: Colours, angle_deg: float) -> tuple[str, ...]:
    """Where the hue turns along a sweep, one sentence a lamp."""
    said = []
    for j, lamp in enumerate(colours.conditions.illuminants):
        turns = hue_turns(colours.LCh[:, j], angle_deg)
        places = ", ".join(f"by {turned:+.0f}° at {steps.names[i]}" for i, turned in turns)
        said.append(
            f"{lamp.name}: the hue turns {places}"
            if places
            else f"{lamp.name}: the hue turns by less than {angle_deg:g}°"
        )
    return tuple(said)
