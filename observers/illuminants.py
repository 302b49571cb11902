"""Illuminants: the relative spectral power of a lamp, by CIE name, by formula, or as measured."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from observers.arrays import Array, frozen, median
from observers.errors import InputError, unknown_name
from observers.grid import Rule, is_uniform, resampling
from observers.tables import table

# Every lamp × observer product is formed here: 1 nm over the range of the CIE observers (ISO/CIE 11664-1).
STANDARD_NM = frozen(np.arange(360.0, 831.0))

PLANCK_C2_M_K = 1.4388e-2  # CIE 15:2018, on the temperature scale of 1990; rounded there
A_C2_NM_K = 1.435e7  # CIE 15:2018, the value that defines illuminant A
A_TEMPERATURE_K = 2848.0
LED_HALF_WIDTH = 0.9218231197  # full width at half height of Ohno's shape, in units of its own width; see `led`


@dataclass(frozen=True, eq=False)
class Illuminant:
    """Relative spectral power ``power`` (B,) on ``wavelength_nm`` (B,), and the rule by which it is interpolated."""

    name: str
    wavelength_nm: Array
    power: Array
    rule: Rule
    notes: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        object.__setattr__(self, "wavelength_nm", frozen(self.wavelength_nm))
        object.__setattr__(self, "power", frozen(self.power))


def illuminant(spec: str) -> Illuminant:
    """A lamp by CIE name or by formula: ``D65``, ``daylight:5600K``, ``blackbody:2900K``, ``led:525nm/30nm``.

    Raises InputError for a name or value that is not known, with what is. References: CIE 15:2018.
    """
    kind, _, value = spec.strip().partition(":")
    if not value:
        return named(kind)
    if kind.lower() == "daylight":
        return daylight(_number(spec, value, "K"))
    if kind.lower() == "blackbody":
        return blackbody(_number(spec, value, "K"))
    if kind.lower() == "led":
        peak, _, width = value.partition("/")
        return led(_number(spec, peak, "nm"), _number(spec, width, "nm"))
    raise unknown_name("kind of lamp", kind, ["daylight:5600K", "blackbody:2900K", "led:525nm/30nm"])


def names() -> tuple[str, ...]:
    """The CIE illuminants that are known by name."""
    tabulated = [key for file in ("daylight", "lamps") for key in table(file) if key != "wavelength_nm"]
    return ("A", "E", *tabulated)


def named(name: str) -> Illuminant:
    """A CIE illuminant by name, in either case."""
    key = name.upper()
    if key == "A":
        return _smooth("A", _illuminant_a())
    if key == "E":
        return _smooth("E", np.full(STANDARD_NM.shape, 100.0))
    for file in ("daylight", "lamps"):
        columns = table(file)
        if key in columns:
            # ISO/CIE 11664-2 interpolates D65 linearly; the others follow CIE 167.
            return Illuminant(key, columns["wavelength_nm"], columns[key], "linear" if key == "D65" else "sprague")
    raise unknown_name(
        "illuminant", name, [*names(), "daylight:5600K", "blackbody:2900K", "led:525nm/30nm", "a lamp's file"]
    )


def daylight(temperature_K: float) -> Illuminant:
    """CIE daylight of a correlated colour temperature in 4000–25 000 K (CIE 15:2018; M1, M2 to three decimals)."""
    t = temperature_K
    if not 4000 <= t <= 25000:
        raise InputError(
            f"daylight of {t:g} K",
            why="the CIE daylight formula holds from 4000 K to 25000 K",
            do="below that take blackbody:…K",
        )
    if t <= 7000:
        x = -4.6070e9 / t**3 + 2.9678e6 / t**2 + 0.09911e3 / t + 0.244063
    else:
        x = -2.0064e9 / t**3 + 1.9018e6 / t**2 + 0.24748e3 / t + 0.237040
    y = -3.000 * x**2 + 2.870 * x - 0.275
    m = 0.0241 + 0.2562 * x - 0.7341 * y
    m1 = round((-1.3515 - 1.7703 * x + 5.9114 * y) / m, 3)
    m2 = round((0.0300 - 31.4424 * x + 30.0717 * y) / m, 3)
    basis = table("daylight_basis")
    return Illuminant(
        f"daylight:{t:g}K", basis["wavelength_nm"], basis["S0"] + m1 * basis["S1"] + m2 * basis["S2"], "linear"
    )


def blackbody(temperature_K: float) -> Illuminant:
    """Planck's radiator, relative to 100 at 560 nm (CIE 15:2018, c2 = 1.4388e-2 m K)."""
    if not 1000 <= temperature_K <= 100000:
        raise InputError(f"a blackbody of {temperature_K:g} K", why="temperatures from 1000 K to 100000 K are taken")
    return _smooth(f"blackbody:{temperature_K:g}K", _planck(STANDARD_NM, temperature_K, PLANCK_C2_M_K * 1e9))


def led(peak_nm: float, width_nm: float) -> Illuminant:
    """A single-colour LED of given peak and full width at half height.

    The shape is (g + 2 g^5)/3 with a Gaussian g (Ohno 2005, Optical Engineering 44, 111302), scaled so that the width
    is the width at half height.
    """
    if not 380 <= peak_nm <= 780:
        raise InputError(f"an LED at {peak_nm:g} nm", why="peaks from 380 nm to 780 nm are taken")
    if not 3 <= width_nm <= 200:
        raise InputError(f"an LED {width_nm:g} nm wide", why="widths at half height from 3 nm to 200 nm are taken")
    g = np.exp(-(((STANDARD_NM - peak_nm) * LED_HALF_WIDTH / width_nm) ** 2))
    return _smooth(f"led:{peak_nm:g}nm/{width_nm:g}nm", 100.0 * (g + 2.0 * g**5) / 3.0)


def measured_lamp(name: str, wavelength_nm: Array, power: Array) -> Illuminant:
    """A lamp as measured: even spacing is interpolated by Sprague, uneven by straight lines (lamps have lines).

    Raises InputError for negative or vanishing power or for fewer than two points inside 360–830 nm.
    """
    if np.count_nonzero((wavelength_nm >= 360) & (wavelength_nm <= 830)) < 2:
        raise InputError("a lamp needs two points or more within 360–830 nm", where=name)
    if not (np.isfinite(power).all() and power.min() >= 0 and power.max() > 0):
        raise InputError("a lamp's power must be finite, nowhere negative, and somewhere above zero", where=name)
    low, high = wavelength_nm[[0, -1]]
    short = low > 400 or high < 700
    note = (f"lamp {name} is measured over {low:g}–{high:g} nm only and taken as dark outside",) if short else ()
    rule: Rule = "sprague" if len(wavelength_nm) >= 6 and is_uniform(wavelength_nm) else "linear"
    return Illuminant(name, wavelength_nm, power, rule, note)


def power_at(lamp: Illuminant, wavelength_nm: Array) -> Array:
    """Relative power (B,) at given wavelengths: zero outside what the lamp's table covers.

    A table finer than the wanted grid is averaged over each step first, so that no line is lost between two points.
    """
    own = lamp.wavelength_nm
    if len(own) == len(wavelength_nm) and np.array_equal(own, wavelength_nm):
        return lamp.power
    result = np.zeros(len(wavelength_nm))
    inside = (wavelength_nm >= own[0]) & (wavelength_nm <= own[-1])
    wanted = wavelength_nm[inside]
    if len(own) > 1 and median(np.diff(own)) < 0.75 * median(np.diff(wavelength_nm)):
        result[inside] = _step_means(own, lamp.power, wanted)
    elif inside.any():
        result[inside] = resampling(own, wanted, lamp.rule) @ lamp.power
    return result


def _step_means(own_nm: Array, power: Array, wanted_nm: Array) -> Array:
    edges = np.concatenate([wanted_nm[:1] - 0.5, (wanted_nm[1:] + wanted_nm[:-1]) / 2, wanted_nm[-1:] + 0.5])
    edges = np.clip(edges, own_nm[0], own_nm[-1])
    all_nm = np.union1d(own_nm, edges)
    values = np.interp(all_nm, own_nm, power)
    area = np.concatenate([[0.0], np.cumsum(np.diff(all_nm) * (values[1:] + values[:-1]) / 2)])
    at_edges = area[np.searchsorted(all_nm, edges)]
    result: Array = np.diff(at_edges) / np.diff(edges)
    return result


def _illuminant_a() -> Array:
    return _planck(STANDARD_NM, A_TEMPERATURE_K, A_C2_NM_K)


def _planck(wavelength_nm: Array, temperature_K: float, c2_nm_K: float) -> Array:
    """Planck's law relative to 100 at 560 nm."""
    ratio = np.expm1(c2_nm_K / (560.0 * temperature_K)) / np.expm1(c2_nm_K / (wavelength_nm * temperature_K))
    result: Array = 100.0 * (560.0 / wavelength_nm) ** 5 * ratio
    return result


def _smooth(name: str, power: Array) -> Illuminant:
    return Illuminant(name, STANDARD_NM, power, "linear")


def _number(spec: str, text: str, unit: str) -> float:
    match = re.fullmatch(rf"\s*(\d+(?:\.\d+)?)\s*{unit}\s*", text, re.IGNORECASE)
    if not match:
        raise InputError(
            f"{text!r} in lamp {spec!r}",
            why=f"a number with the unit {unit} is wanted there",
            do="write it as in daylight:5600K, blackbody:2900K or led:525nm/30nm",
        )
    return float(match.group(1))
