"""Simulated dyes and lamps that the tests of matching, correction and rounding share."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from chroma.dye.model import ConcentrationUnit, Dye
from chroma.dye.solution import Shelf, shelf
from chroma.viewing import conditions
from observers.arrays import Array
from observers.weights import Weights

NM = np.arange(380.0, 781.0, 5.0)
LAMPS = ("D65", "A", "FL11")
# Simulated dyes: peak (nm), full width at half height (1000 cm-1), height (L g-1 cm-1) of each band.
BANDS = {
    "blue": ((628, 2.4, 70), (578, 3.8, 56), (398, 3.4, 12)),
    "yellow": ((427, 4.1, 52), (398, 3.6, 14)),
    "red": ((512, 2.6, 38), (542, 1.7, 27)),
    "teal": ((672, 2.1, 84), (620, 2.8, 40), (380, 4.5, 14)),
    "violet": ((552, 2.0, 58), (516, 2.6, 30)),
    "orange": ((480, 2.8, 46), (440, 3.5, 20)),
}
SIX = tuple(BANDS)


def absorptivity(name: str, wavelength_nm: Array = NM) -> Array:
    """(B,) of a simulated dye: bands that are Gaussian in wavenumber."""
    wavenumber = 1e4 / wavelength_nm
    return np.asarray(sum(h * np.exp(-4 * np.log(2) * ((wavenumber - 1e4 / p) / w) ** 2) for p, w, h in BANDS[name]))


def dye(
    name: str,
    *,
    unit: ConcentrationUnit = "g/L",
    molar_mass: float | None = None,
    range_high: float = np.inf,
    called: str | None = None,
    wavelength_nm: Array = NM,
) -> Dye:
    """A simulated dye with no uncertainty."""
    none = np.zeros_like(wavelength_nm)
    return Dye(
        called or name,
        wavelength_nm,
        absorptivity(name, wavelength_nm),
        unit,
        none,
        none[None, :][:0],
        range_high=range_high,
        molar_mass=molar_mass,
    )


def nearly(name: str, called: str, bump: float) -> Dye:
    """A simulated dye that differs from another by a band at 510 nm, ``bump`` high."""
    own = dye(name, called=called)
    return replace(own, absorptivity=own.absorptivity + bump * np.exp(-(((NM - 510) / 20) ** 2)))


def stock_of(names: Sequence[str] = SIX, *, range_high: float = np.inf) -> Shelf:
    """A shelf of simulated dyes."""
    return shelf([dye(name, range_high=range_high) for name in names])


def seen(lamps: Sequence[str] = LAMPS, wavelength_nm: Array = NM) -> Weights:
    """Weights of the 10° observer."""
    return conditions(lamps, "10").weights(wavelength_nm)


def foreign_transmittance(seed: int) -> Array:
    """(B,) of three simulated bands that are none of the dyes', so that no recipe meets it."""
    rng = np.random.default_rng(seed)
    A = np.zeros_like(NM)
    for _ in range(3):
        A += rng.uniform(0.2, 0.9) * np.exp(-4 * np.log(2) * ((NM - rng.uniform(400, 680)) / rng.uniform(40, 140)) ** 2)
    return 10.0**-A


def at(concentrations: dict[str, float], stock: Shelf) -> Array:
    """(D,) in the order of the shelf."""
    return np.array([concentrations.get(name, 0.0) for name in stock.names])
