"""Relative strength of each batch against its target, where the target has colour."""

from __future__ import annotations

from chroma.quantity import fraction
from chroma.resample import on_grid, within
from chroma.spectra import Spectra
from chroma.strength import Strength, relative_strength
from observers.errors import InputError


def batch_strength(target: Spectra, batches: Spectra) -> Strength:
    """Per cent strength (N,) at the target's peak and summed over 400–700 nm, on the grid of the batches.

    Absorbance for transmittance, Kubelka and Munk's K/S for reflectance. Raises InputError for a target without colour, a
    reflectance that is not positive, or grids that do not overlap.
    """
    shares, wanted = fraction(batches), fraction(target)
    if shares.quantity != wanted.quantity:
        raise InputError(
            f"the target is {wanted.quantity}, the batches are {shares.quantity}", why="they cannot be compared"
        )
    cut = within(shares, wanted.wavelength_nm[0], wanted.wavelength_nm[-1])
    own = on_grid(within(wanted, cut.wavelength_nm[0], cut.wavelength_nm[-1]), cut.wavelength_nm)
    return relative_strength(own.values[0], cut.values, cut.wavelength_nm, cut.quantity)
