"""From a target's file or colour to what a match is aimed at: one grid, one path length, weights of all lamps."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from chroma.dye.model import Dye
from chroma.dye.shared import shared
from chroma.dye.solution import Shelf, shelf
from chroma.matching.goal import Target, target_Lab, target_spectrum
from chroma.quantity import at_path_length, fraction
from chroma.spectra import Source, Spectra
from chroma.viewing import Conditions
from observers.arrays import Array
from observers.errors import InputError
from observers.weights import Weights


@dataclass(frozen=True, eq=False)
class Aim:
    """What a match is held to: target, shelf and weights on one grid, with what was done and the target's files."""

    target: Target
    stock: Shelf
    weights: Weights
    notes: tuple[str, ...]
    sources: tuple[Source, ...]


def aimed_at(
    spectrum: Spectra | None, Lab: Array | None, dyes: Sequence[Dye], conditions: Conditions, *, path_length_mm: float,
    target_path_length_mm: float | None = None,
) -> Aim:  # fmt: skip
    """The aim of a match, from a target's spectrum or its L*a*b* (L, 3).

    A target is met as it was measured, whatever cell the recipe is looked at in; where the path length that it was
    measured in is given, it is a solution to be made, and is first rescaled to the recipe's. Raises InputError for
    reflectance or for L*a*b* without a row for each lamp.
    """
    if spectrum is None:
        assert Lab is not None
        stock = shelf(dyes)
        weights = conditions.weights(stock.wavelength_nm)
        return Aim(target_Lab(Lab, weights), stock, weights, weights.notes, ())
    wanted = fraction(spectrum)
    if wanted.quantity != "transmittance":
        raise InputError(f"a target of {wanted.quantity}", why="recipes are for solutions, which are looked through")
    if target_path_length_mm is not None and target_path_length_mm != path_length_mm:
        wanted = at_path_length(wanted, target_path_length_mm, path_length_mm)
    cut, stock = shared(wanted, dyes)
    weights = conditions.weights(cut.wavelength_nm)
    aim = target_spectrum(cut.values[0], weights)
    return Aim(aim, stock, weights, cut.notes + weights.notes, spectrum.sources)
