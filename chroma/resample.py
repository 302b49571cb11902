"""Spectra carried to another wavelength grid, by the same matrices that the weights use."""

from __future__ import annotations

from dataclasses import replace

from chroma.spectra import Scatter, Spectra, grid_text
from observers.arrays import Array
from observers.grid import resampling, stated_rule


def on_grid(spectra: Spectra, wavelength_nm: Array) -> Spectra:
    """The spectra on another grid (B,): Sprague from even grids, else cubic Lagrange; never beyond what was measured.

    Raises InputError where the wanted grid reaches outside the measured one.
    """
    rule = stated_rule(spectra.wavelength_nm)
    matrix = resampling(spectra.wavelength_nm, wavelength_nm, rule)
    scatter = spectra.scatter
    if scatter is not None:
        scatter = Scatter(scatter.row, scatter.deviation @ matrix.T)
    note = f"resampled from {grid_text(spectra.wavelength_nm)} to {grid_text(wavelength_nm)} ({rule} interpolation)"
    return replace(spectra, wavelength_nm=wavelength_nm, values=spectra.values @ matrix.T, scatter=scatter).noted(note)
