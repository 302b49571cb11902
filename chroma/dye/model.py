"""A dye: absorptivity on a grid with its covariance, the range it was fitted over, and where it came from."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from types import MappingProxyType
from typing import Any, Literal, get_args

import numpy as np

from chroma.spectra import Source
from observers.arrays import Array, frozen
from observers.errors import InputError
from observers.grid import resampling, stated_rule

ConcentrationUnit = Literal["g/L", "mol/L"]
UNITS: tuple[ConcentrationUnit, ...] = get_args(ConcentrationUnit)


@dataclass(frozen=True, eq=False)
class Dye:
    """Decadic absorptivity (B,) in L g⁻¹ cm⁻¹ or L mol⁻¹ cm⁻¹, as ``unit`` of concentration is g/L or mol/L.

    The covariance of the absorptivity is diag(independent²) + commonᵀ common: independent (B,) is photometric noise,
    each row of common (F, B) an error that all bands share (a concentration, stray light). range_low and range_high
    bound the concentrations it was fitted over; up to linear_to Beer's law was found to hold.

    Raises InputError for shapes that differ or values that are not finite.
    """

    name: str
    wavelength_nm: Array
    absorptivity: Array
    unit: ConcentrationUnit
    independent: Array
    common: Array
    freedom: float = np.inf
    range_low: float = 0.0
    range_high: float = np.inf
    linear_to: float = np.inf
    path_length_mm: float = 10.0
    molar_mass: float | None = None
    stray_light: float = 0.0
    findings: Mapping[str, Any] = field(default_factory=lambda: MappingProxyType({}))
    sources: tuple[Source, ...] = ()
    created: str = ""
    program: str = ""
    notes: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        for name in ("wavelength_nm", "absorptivity", "independent", "common"):
            object.__setattr__(self, name, frozen(getattr(self, name)))
        bands = self.wavelength_nm.shape
        if self.unit not in UNITS:
            raise InputError(f"unit {self.unit!r} of dye {self.name}", why=f"known are {', '.join(UNITS)}")
        shapes = (self.absorptivity.shape, self.independent.shape, self.common.shape[1:])
        if len(bands) != 1 or any(shape != bands for shape in shapes):
            raise InputError(
                f"dye {self.name}: tables of shapes {shapes} on {bands} wavelengths", why="they must agree"
            )
        tables = (self.wavelength_nm, self.absorptivity, self.independent, self.common)
        if not all(np.isfinite(table).all() for table in tables) or (np.diff(self.wavelength_nm) <= 0).any():
            raise InputError(f"dye {self.name}: a value is not finite or the wavelengths do not ascend")

    @property
    def standard_uncertainty(self) -> Array:
        """(B,) of the absorptivity."""
        result: Array = np.sqrt(self.independent**2 + (self.common**2).sum(axis=0))
        return result

    @property
    def half_width95(self) -> Array:
        """(B,) half of the 95 % interval of the absorptivity.

        The factor is Student's t at the effective degrees of freedom of Welch and Satterthwaite (JCGM 100, G.4): the
        noise is known from many bands, the common errors from as many numbers as there are standards.
        """
        from scipy.special import ndtri, stdtrit

        u, shared = self.standard_uncertainty, (self.common**2).sum(axis=0)
        with np.errstate(divide="ignore", invalid="ignore"):
            freedom = np.where(shared > 0, u**4 / shared**2 * self.freedom, np.inf)
        many = ~(freedom < 1e6)
        factor = np.where(many, ndtri(0.975), stdtrit(np.where(many, 1e6, freedom), 0.975))
        result: Array = factor * u
        return result

    @property
    def peak(self) -> int:
        """The band of the largest absorptivity within 380–780 nm, or anywhere when the table has none there."""
        return peak_band(self.wavelength_nm, self.absorptivity)


def peak_band(wavelength_nm: Array, absorptivity: Array) -> int:
    """The band of the largest absorptivity within 380–780 nm, or anywhere when the table has none there."""
    visible = (wavelength_nm >= 380) & (wavelength_nm <= 780)
    return int(np.argmax(np.where(visible | ~visible.any(), absorptivity, -np.inf)))


def on_grid(dye: Dye, wavelength_nm: Array) -> Dye:
    """The dye on another grid within its own, by the rule for its grid; never beyond it.

    Raises InputError where the wanted grid reaches outside.
    """
    if len(wavelength_nm) == len(dye.wavelength_nm) and np.allclose(
        wavelength_nm, dye.wavelength_nm, rtol=0, atol=1e-6
    ):
        return dye
    try:
        matrix = resampling(dye.wavelength_nm, wavelength_nm, stated_rule(dye.wavelength_nm))
    except InputError as error:
        raise error.at(f"dye {dye.name}") from None
    independent = np.sqrt(matrix**2 @ dye.independent**2)
    return replace(
        dye,
        wavelength_nm=wavelength_nm,
        absorptivity=matrix @ dye.absorptivity,
        independent=independent,
        common=dye.common @ matrix.T,
    )


def in_unit(dye: Dye, unit: ConcentrationUnit) -> Dye:
    """The dye per g/L or per mol/L; raises InputError when its molar mass is not known."""
    if unit == dye.unit:
        return dye
    if dye.molar_mass is None:
        raise InputError(
            f"dye {dye.name} is per {dye.unit}, wanted per {unit}",
            why="its molar mass is not known",
            do="fit it with --molar-mass, or give concentrations in its own unit",
        )
    # 1 mol/L is M g/L, so what absorbs ε per g/L absorbs M·ε per mol/L.
    factor = dye.molar_mass if unit == "mol/L" else 1 / dye.molar_mass
    return replace(
        dye,
        unit=unit,
        absorptivity=dye.absorptivity * factor,
        independent=dye.independent * factor,
        common=dye.common * factor,
        range_low=dye.range_low / factor,
        range_high=dye.range_high / factor,
        linear_to=dye.linear_to / factor,
    )
