"""Quantities with units, as they are typed: ``10mm``, ``0.25g/L``, ``520nm``, ``400:700:10nm``."""

from __future__ import annotations

import re

import numpy as np

from observers.arrays import Array
from observers.errors import InputError

NUMBER = r"[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?"
LENGTH_MM = {"mm": 1.0, "cm": 10.0, "m": 1000.0, "um": 1e-3, "µm": 1e-3}


def path_length_mm(text: str) -> float:
    """A path length in mm from ``10mm``, ``1cm``; raises InputError without a unit or when not positive."""
    match = re.fullmatch(rf"\s*({NUMBER})\s*({'|'.join(LENGTH_MM)})\s*", text)
    if not match or float(match.group(1)) <= 0:
        raise InputError(
            f"path length {text!r}", why="a positive number with its unit is wanted", do="write it as 10mm or 1cm"
        )
    return float(match.group(1)) * LENGTH_MM[match.group(2)]


def grid_nm(text: str) -> Array:
    """A grid (B,) in nm from ``400:700:10nm`` (first, last, step); raises InputError for another form."""
    match = re.fullmatch(rf"\s*({NUMBER}):({NUMBER}):({NUMBER})\s*(?:nm)?\s*", text)
    hint = "write it as 400:700:10nm"
    if not match:
        raise InputError(f"grid {text!r}", why="first, last and step in nm are wanted", do=hint)
    first, last, step = (float(part) for part in match.groups())
    bands = (last - first) / step if step > 0 else -1
    if not 0 < first < last <= 1e5 or not 0 < bands <= 1e5 or abs(bands - round(bands)) > 1e-6:
        raise InputError(f"grid {text!r}", why="the step must divide the range, from low to high", do=hint)
    result: Array = first + step * np.arange(round(bands) + 1, dtype=np.float64)
    return result


def ratio(text: str, parts: int, example: str) -> tuple[float, ...]:
    """``2:1`` or ``1:1:1`` as numbers; raises InputError for another count."""
    pieces = text.split(":")
    if len(pieces) != parts or not all(re.fullmatch(rf"\s*{NUMBER}\s*", piece) for piece in pieces):
        raise InputError(
            f"{text!r}", why=f"{parts} numbers with colons between them are wanted", do=f"write it as {example}"
        )
    return tuple(float(piece) for piece in pieces)


# Each unit of concentration as a multiple of g/L or mol/L.
CONCENTRATIONS = {
    "kg/m3": (1.0, "g/L"), "g/L": (1.0, "g/L"), "mg/L": (1e-3, "g/L"), "ug/L": (1e-6, "g/L"), "µg/L": (1e-6, "g/L"),
    "g/mL": (1e3, "g/L"), "mg/mL": (1.0, "g/L"), "ug/mL": (1e-3, "g/L"), "µg/mL": (1e-3, "g/L"),
    "mol/L": (1.0, "mol/L"), "mmol/L": (1e-3, "mol/L"), "umol/L": (1e-6, "mol/L"), "µmol/L": (1e-6, "mol/L"),
    "M": (1.0, "mol/L"), "mM": (1e-3, "mol/L"), "uM": (1e-6, "mol/L"), "µM": (1e-6, "mol/L"),
}  # fmt: skip


def concentration_factor(unit: str, wanted: str, molar_mass: float | None = None) -> float:
    """What a number in ``unit`` is multiplied by to be in ``wanted``; mass and amount by the molar mass in g/mol.

    Raises InputError for a unit that is not known, or where the molar mass would be needed.
    """
    own, to = _concentration_unit(unit), _concentration_unit(wanted)
    if own[1] == to[1]:
        return own[0] / to[0]
    if molar_mass is None:
        raise InputError(
            f"{unit} cannot become {wanted}",
            why="the molar mass is not known",
            do="give --molar-mass, as in 319.85g/mol",
        )
    mass_to_amount = 1 / molar_mass if own[1] == "g/L" else molar_mass
    return own[0] * mass_to_amount / to[0]


def base_unit(unit: str) -> str:
    """g/L or mol/L, whichever a unit is a multiple of; raises InputError for a unit that is not known."""
    return _concentration_unit(unit)[1]


def concentration(text: str, wanted: str, molar_mass: float | None = None) -> float:
    """A concentration in ``wanted`` from ``0.25g/L`` or ``250mg/L``; raises InputError without a unit or below zero."""
    match = re.fullmatch(rf"\s*({NUMBER})\s*([^\s\d].*?)\s*", text)
    if not match:
        raise InputError(
            f"concentration {text!r}", why="a number with its unit is wanted", do="write it as 0.25g/L or 250mg/L"
        )
    value = float(match.group(1)) * concentration_factor(match.group(2), wanted, molar_mass)
    if value < 0:
        raise InputError(f"concentration {text!r}", why="it cannot be negative")
    return value


def molar_mass(text: str) -> float:
    """A molar mass in g/mol from ``319.85g/mol``; raises InputError for another form."""
    match = re.fullmatch(rf"\s*({NUMBER})\s*(?:g/mol)\s*", text)
    if not match or not float(match.group(1)) > 0:
        raise InputError(
            f"molar mass {text!r}", why="a positive number in g/mol is wanted", do="write it as 319.85g/mol"
        )
    return float(match.group(1))


def _concentration_unit(unit: str) -> tuple[float, str]:
    if unit in CONCENTRATIONS:
        return CONCENTRATIONS[unit]
    if unit.replace("l", "L") in CONCENTRATIONS:  # mg/l is as common as mg/L; no other letter may change its case
        return CONCENTRATIONS[unit.replace("l", "L")]
    raise InputError(
        f"unit {unit!r} of concentration", why=f"known are {', '.join(CONCENTRATIONS)}", do="use one of these"
    )


def wavelength_range_nm(text: str) -> tuple[float, float]:
    """``420:700nm`` as its two ends; raises InputError for another form."""
    match = re.fullmatch(rf"\s*({NUMBER}):({NUMBER})\s*(?:nm)?\s*", text)
    low, high = (float(part) for part in match.groups()) if match else (0.0, 0.0)
    if not 0 < low < high:
        raise InputError(
            f"range {text!r}", why="two wavelengths are wanted, the lower first", do="write it as 420:700nm"
        )
    return low, high


VOLUME_L = {"m3": 1e3, "m³": 1e3, "L": 1.0, "l": 1.0, "mL": 1e-3, "ml": 1e-3}


def volume_L(text: str) -> float:
    """A volume in litres from ``500L``, ``250mL`` or ``2m3``; raises InputError without a unit or when not positive."""
    match = re.fullmatch(rf"\s*({NUMBER})\s*({'|'.join(VOLUME_L)})\s*", text)
    if not match or float(match.group(1)) <= 0:
        raise InputError(
            f"volume {text!r}", why="a positive number with its unit is wanted", do="write it as 500L or 2m3"
        )
    return float(match.group(1)) * VOLUME_L[match.group(2)]
