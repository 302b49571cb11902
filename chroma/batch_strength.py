"""Relative strength of each batch against its target, where the target has colour."""

from __future__ import annotations

from chroma.quantity import comparable
from chroma.resample import matched
from chroma.spectra import Spectra
from chroma.strength import Strength, relative_strength


def batch_strength(target: Spectra, batches: Spectra) -> Strength:
    """Per cent strength (N,) at the target's peak and summed over 400–700 nm, on the grid of the batches.

    Absorbance for transmittance, Kubelka and Munk's K/S for reflectance. Raises InputError for a target without colour, a
    reflectance that is not positive, or grids that do not overlap.
    """
    own, cut = matched(*comparable(target, batches))
    return relative_strength(own.values[0], cut.values, cut.wavelength_nm, cut.quantity)
