"""Relative strength: how much colour a batch has against its target, in per cent.

For solutions absorbance is proportional to how much dye there is; for opaque samples it is Kubelka and Munk's K/S.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from chroma.quantity import SMALLEST_TRANSMITTANCE
from chroma.spectra import Quantity
from observers.arrays import Array
from observers.errors import InputError

SUMMED_NM = (400.0, 700.0)
FAINTEST = 1e-3  # absorbance, or K/S, below which a target has no colour to be measured against


@dataclass(frozen=True, eq=False)
class Strength:
    """Per cent of the target (…): at the target's peak, peak_nm, and summed over 400–700 nm."""

    at_peak: Array
    summed: Array
    peak_nm: float


def relative_strength(
    target: Array, batch: Array, wavelength_nm: Array, quantity: Quantity = "transmittance"
) -> Strength:
    """Strength of batches (…, B) against a target (B,), both transmittance, absorbance or reflectance on one grid (B,).

    The sum is an integral over wavelength, so that an uneven grid gives the same answer. Common practice in dyehouses;
    for reflectance by K/S (AATCC Evaluation Procedure 6).

    Raises InputError for other quantities, shapes that differ, less than two bands in 400–700 nm, a target with no
    colour, or a reflectance that is not positive.
    """
    if target.shape != wavelength_nm.shape or batch.shape[-1:] != wavelength_nm.shape:
        raise InputError(f"target {target.shape} and batch {batch.shape} on {wavelength_nm.shape} wavelengths")
    seen = (wavelength_nm >= SUMMED_NM[0]) & (wavelength_nm <= SUMMED_NM[1])
    if np.count_nonzero(seen) < 2:
        raise InputError("fewer than two bands in 400–700 nm", why="strength is summed there")
    nm = wavelength_nm[seen]
    wanted, got = (_colour(values[..., seen], nm, quantity) for values in (target, batch))
    peak = int(np.argmax(wanted))
    if wanted[peak] < FAINTEST:
        raise InputError("the target has no colour", why=f"its largest {_name(quantity)} is {abs(wanted[peak]):.2g}")
    return Strength(
        100 * got[..., peak] / wanted[peak],
        100 * _integral(got, nm) / _integral(wanted, nm),
        float(nm[peak]),
    )


def kubelka_munk(reflectance: Array) -> Array:
    """K/S (…) = (1 - R)²/(2R) of an opaque layer; what reflects more than the white has none.

    Raises InputError for a reflectance that is not positive. Kubelka and Munk 1931, Zeitschrift für technische Physik
    12, 593.
    """
    if not (reflectance > 0).all():
        raise InputError(
            f"a reflectance of {np.min(reflectance):g} has no K/S",
            why="it must be positive",
            do="check the dark reading, or leave that range out",
        )
    result: Array = (1 - np.minimum(reflectance, 1.0)) ** 2 / (2 * reflectance)
    return result


def _colour(values: Array, wavelength_nm: Array, quantity: Quantity) -> Array:
    match quantity:
        case "absorbance":
            return values
        case "transmittance":
            result: Array = -np.log10(np.maximum(values, SMALLEST_TRANSMITTANCE))
            return result
        case "reflectance":
            return kubelka_munk(values)
        case _:
            raise InputError(f"{quantity} has no strength", do="take the blank off first, with --blank")


def _integral(values: Array, wavelength_nm: Array) -> Array:
    result: Array = ((values[..., 1:] + values[..., :-1]) / 2 * np.diff(wavelength_nm)).sum(axis=-1)
    return result


def _name(quantity: Quantity) -> str:
    return "K/S" if quantity == "reflectance" else "absorbance"
