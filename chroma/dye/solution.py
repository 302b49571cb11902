"""A solution: dyes at concentrations in a cell of a path length, with its walls and against a solvent blank.

Beer's law: A = Σ ε_i c_i d, with d in cm; T = 10^-A. Concentrations are arrays (…, D) so that many recipes are one
product.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from chroma.dye.model import ConcentrationUnit, Dye, in_unit, on_grid
from observers.arrays import Array, frozen
from observers.errors import InputError, unknown_name

# Refractive indices at 589 nm and 20 °C; water from IAPWS R9-97, the others handbook values from memory.
REFRACTIVE = {
    "air": 1.000, "water": 1.333, "ethanol": 1.361, "methanol": 1.329, "acetone": 1.359, "toluene": 1.497,
    "glass": 1.5, "quartz": 1.4585, "acrylic": 1.491, "polystyrene": 1.590,
}  # fmt: skip


@dataclass(frozen=True, eq=False)
class Shelf:
    """D dyes on one grid and in one unit; absorptivity (D, B)."""

    dyes: tuple[Dye, ...]
    wavelength_nm: Array
    absorptivity: Array
    unit: ConcentrationUnit

    @property
    def names(self) -> tuple[str, ...]:
        """The dyes' names."""
        return tuple(dye.name for dye in self.dyes)


@dataclass(frozen=True)
class Cell:
    """Path length, and refractive indices of walls and liquid for the light that the walls turn back."""

    path_length_mm: float
    wall: float = REFRACTIVE["glass"]
    liquid: float = REFRACTIVE["water"]

    def __post_init__(self) -> None:
        if not (np.isfinite(self.path_length_mm) and self.path_length_mm > 0):
            raise InputError(f"path length {self.path_length_mm:g} mm", why="it must be positive")
        if not (1 <= self.wall < 5 and 1 <= self.liquid < 5):
            raise InputError(f"refractive indices {self.wall:g} and {self.liquid:g}", why="they lie between 1 and 5")


def shelf(dyes: Sequence[Dye], *, wavelength_nm: Array | None = None, unit: ConcentrationUnit | None = None) -> Shelf:
    """Dyes brought to one grid and one unit: those given, else the grid of the first cut to what all dyes cover.

    Raises InputError for no dye, two dyes of one name, grids that do not overlap, or units that cannot be converted.
    """
    if not dyes:
        raise InputError("no dye was given", do="name one with --dye")
    names = [dye.name for dye in dyes]
    if len(set(names)) < len(names):
        raise InputError(
            f"two dyes are named {max(names, key=names.count)!r}", do="give one of them another name in its file"
        )
    if wavelength_nm is None:
        low, high = max(d.wavelength_nm[0] for d in dyes), min(d.wavelength_nm[-1] for d in dyes)
        own = dyes[0].wavelength_nm
        wavelength_nm = own[(own >= low - 1e-9) & (own <= high + 1e-9)]
        if len(wavelength_nm) < 2:
            spans = ", ".join(f"{d.name} {d.wavelength_nm[0]:g}–{d.wavelength_nm[-1]:g} nm" for d in dyes)
            raise InputError("the dyes' wavelengths do not overlap", why=spans, do="fit them over a common range")
    matched = tuple(on_grid(in_unit(dye, unit or dyes[0].unit), wavelength_nm) for dye in dyes)
    return Shelf(matched, frozen(wavelength_nm), frozen([dye.absorptivity for dye in matched]), matched[0].unit)


def absorbance(stock: Shelf, concentrations: Array, path_length_mm: float) -> Array:
    """(…, B) decadic absorbance of recipes (…, D) against their solvent."""
    result: Array = concentrations @ stock.absorptivity * (path_length_mm / 10)
    return result


def transmittance(stock: Shelf, concentrations: Array, path_length_mm: float) -> Array:
    """(…, B) transmittance of recipes (…, D) against a blank of the same cell and solvent."""
    result: Array = 10.0 ** -absorbance(stock, concentrations, path_length_mm)
    return result


def walls(cell: Cell) -> float:
    """The share of light that four interfaces (air, wall, liquid, wall, air) let through once, at normal incidence.

    Light that is turned back twice is left out (less than 0.4 % for glass and water). Fresnel; Born and Wolf, 1.5.
    """
    outer, inner = fresnel(1.0, cell.wall), fresnel(cell.wall, cell.liquid)
    return (1 - outer) ** 2 * (1 - inner) ** 2


def seen_through(transmission: Array, cell: Cell, solvent_absorptivity_per_cm: Array | float = 0.0) -> Array:
    """What passes the cell with its walls and solvent, not divided by a blank (…, B)."""
    solvent = 10.0 ** -(np.asarray(solvent_absorptivity_per_cm) * cell.path_length_mm / 10)
    result: Array = transmission * solvent * walls(cell)
    return result


def fresnel(n1: float, n2: float) -> float:
    """The share of light that an interface turns back at normal incidence, ((n1 - n2)/(n1 + n2))²."""
    return ((n1 - n2) / (n1 + n2)) ** 2


def refractive_index(text: str) -> float:
    """A refractive index from a number or a name (water, glass, quartz, …)."""
    if text in REFRACTIVE:
        return REFRACTIVE[text]
    try:
        value = float(text)
    except ValueError:
        raise unknown_name("medium", text, tuple(REFRACTIVE)) from None
    if not 1 <= value < 5:
        raise InputError(f"refractive index {text}", why="it lies between 1 and 5")
    return value


def range_notes(stock: Shelf, concentrations: Array) -> tuple[str, ...]:
    """What lies above the concentrations that a dye was fitted over, or beyond where Beer's law was found to hold."""
    notes = []
    for dye, own in zip(stock.dyes, np.moveaxis(np.atleast_2d(concentrations), -1, 0), strict=True):
        top = float(own.max())
        if top > dye.range_high * (1 + 1e-9):
            notes.append(
                f"{dye.name}: {top:g} {dye.unit} is above the {dye.range_high:g} {dye.unit} that it was fitted over"
            )
        elif top > dye.linear_to * (1 + 1e-9):
            notes.append(
                f"{dye.name}: Beer's law was found to hold only up to {dye.linear_to:g} {dye.unit}, wanted is {top:g}"
            )
    return tuple(notes)
