"""Human observers: the CIE standard observers as responsivity curves."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from observers.arrays import Array, frozen
from observers.errors import unknown_name
from observers.tables import table

# The key that the command line takes, with the table's file and the name in words.
STANDARD = {
    "2": ("cie_1931_2deg", "CIE 1931 2°"),
    "10": ("cie_1964_10deg", "CIE 1964 10°"),
    "2-2015": ("cie_2015_2deg", "CIE 2015 2°"),
    "10-2015": ("cie_2015_10deg", "CIE 2015 10°"),
}


@dataclass(frozen=True, eq=False)
class Observer:
    """What looks: ``responsivity`` (B, K) on ``wavelength_nm`` (B,), one column a channel; zero outside the table."""

    key: str
    name: str
    wavelength_nm: Array
    responsivity: Array

    def __post_init__(self) -> None:
        object.__setattr__(self, "wavelength_nm", frozen(self.wavelength_nm))
        object.__setattr__(self, "responsivity", frozen(self.responsivity))


def observer(key: str) -> Observer:
    """A CIE standard observer by key: ``2``, ``10``, ``2-2015``, ``10-2015``; K = 3.

    Raises InputError for another key. References: ISO/CIE 11664-1; CIE 170-2:2015.
    """
    if key not in STANDARD:
        raise unknown_name("observer", key, tuple(STANDARD))
    file, name = STANDARD[key]
    columns = table(file)
    return Observer(key, name, columns["wavelength_nm"], np.column_stack([columns[axis] for axis in "xyz"]))


def responsivity_at(looker: Observer, wavelength_nm: Array) -> Array:
    """(B, K) responsivity at given wavelengths, by straight lines between the 1 nm points, zero outside the table."""
    return np.column_stack(
        [np.interp(wavelength_nm, looker.wavelength_nm, curve, left=0.0, right=0.0) for curve in looker.responsivity.T]
    )
