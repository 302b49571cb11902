"""Spectra carried to another wavelength grid, by the same matrices that the weights use."""

from __future__ import annotations

from dataclasses import replace

from chroma.spectra import Scatter, Spectra, grid_text
from observers.arrays import Array
from observers.errors import InputError
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


def matched(target: Spectra, spectra: Spectra) -> tuple[Spectra, Spectra]:
    """Target and spectra on the grid of the spectra, over the range that both cover.

    Raises InputError where that holds fewer than two bands.
    """
    cut = within(spectra, target.wavelength_nm[0], target.wavelength_nm[-1])
    return on_grid(within(target, cut.wavelength_nm[0], cut.wavelength_nm[-1]), cut.wavelength_nm), cut


def within(spectra: Spectra, low_nm: float, high_nm: float) -> Spectra:
    """The bands of the spectra from low to high; raises InputError when fewer than two are left."""
    inside = (spectra.wavelength_nm >= low_nm - 1e-9) & (spectra.wavelength_nm <= high_nm + 1e-9)
    if inside.all():
        return spectra
    if inside.sum() < 2:
        raise InputError(
            f"no bands between {low_nm:g} and {high_nm:g} nm",
            why=f"the spectra cover {grid_text(spectra.wavelength_nm)}",
        )
    scatter = spectra.scatter
    if scatter is not None:
        scatter = Scatter(scatter.row, scatter.deviation[:, inside])
    wavelength_nm = spectra.wavelength_nm[inside]
    note = f"used: {grid_text(wavelength_nm)}"
    return replace(spectra, wavelength_nm=wavelength_nm, values=spectra.values[:, inside], scatter=scatter).noted(note)
