"""The colours of solutions that nobody has mixed yet, with how sure they are."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from chroma.colours import Colours, predict
from chroma.dye.propagate import Lab_covariance
from chroma.dye.solution import Cell, Shelf, range_notes, seen_through, transmittance
from chroma.spectra import Source, Spectra
from chroma.viewing import Conditions
from observers.arrays import Array


def predict_solutions(
    names: tuple[str, ...],
    stock: Shelf,
    concentrations: Array,
    path_length_mm: Array,
    conditions: Conditions,
    *,
    relative_u: float = 0.0,
    cell: Cell | None = None,
    solvent_absorptivity_per_cm: Array | float = 0.0,
) -> Colours:
    """Colours of S solutions, concentrations (S, D) in the shelf's unit, path lengths (S,) in mm.

    relative_u : relative standard uncertainty of each concentration. cell : when given, what its walls turn back and what
    the solvent absorbs is left in; otherwise colours are as against a blank. u_Lab holds the standard uncertainties from
    dyes and concentrations.

    Raises InputError when the dyes' range does not serve for colour.
    """
    solutions = solution_spectra(names, stock, concentrations, path_length_mm, cell, solvent_absorptivity_per_cm)
    colours = predict(solutions, conditions)
    W = conditions.weights(stock.wavelength_nm)
    u = np.stack([
        np.sqrt(np.einsum("lii->li", Lab_covariance(stock, c, relative_u * c, d, W)))
        for c, d in zip(concentrations, path_length_mm, strict=True)
    ])  # fmt: skip
    return replace(colours, u_Lab=u)


def solution_spectra(
    names: tuple[str, ...], stock: Shelf, concentrations: Array, path_length_mm: Array, cell: Cell | None = None,
    solvent_absorptivity_per_cm: Array | float = 0.0,
) -> Spectra:  # fmt: skip
    """Transmittances of solutions as spectra; see `predict_solutions`."""
    T = np.stack([transmittance(stock, c, d) for c, d in zip(concentrations, path_length_mm, strict=True)])
    notes = range_notes(stock, concentrations)
    if cell is not None:
        T = np.stack([
            seen_through(row, replace(cell, path_length_mm=float(d)), solvent_absorptivity_per_cm)
            for row, d in zip(T, path_length_mm, strict=True)
        ])  # fmt: skip
        notes += (
            f"seen through the cell's walls (refractive index {cell.wall:g}, liquid {cell.liquid:g}), not against a blank",
        )
    sources: tuple[Source, ...] = tuple(dict.fromkeys(dye.sources[0] for dye in stock.dyes if dye.sources))
    single = float(path_length_mm[0]) if np.ptp(path_length_mm) == 0 else None
    return Spectra(names, stock.wavelength_nm, T, "transmittance", None, single, sources, notes)
