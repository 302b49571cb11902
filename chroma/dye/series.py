"""A dilution series: absorbance of readings at known concentrations in one cell."""

from __future__ import annotations

import csv
import hashlib
import io
import re
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from chroma.quantity import converted
from chroma.spectra import ABSORBANCE_LIMIT, Source, Spectra, stem
from chroma.units import NUMBER, concentration_factor
from observers.arrays import Array, Index, Mask
from observers.errors import InputError, unreadable


@dataclass(frozen=True, eq=False)
class Series:
    """R readings of N standards.

    absorbance (R, B) as measured; concentration (N,) in ``unit``; standard (R,) the standard that each reading is of;
    usable (R, B) is False beyond the photometric range.
    """

    names: tuple[str, ...]
    concentration: Array
    unit: str
    path_length_mm: float
    wavelength_nm: Array
    absorbance: Array
    standard: Index
    usable: Mask
    sources: tuple[Source, ...]
    notes: tuple[str, ...]

    @property
    def x(self) -> Array:
        """(R,) concentration × path length in cm, so that A = ε·x."""
        result: Array = self.concentration[self.standard] * self.path_length_mm / 10
        return result


def series(
    readings: Spectra,
    concentrations: Mapping[str, float],
    *,
    unit: str,
    path_length_mm: float,
    absorbance_limit: float = ABSORBANCE_LIMIT,
    up_to: float = np.inf,
) -> Series:
    """A series from readings (replicates apart, named alike or ``name#1``) and concentrations by name, in ``unit``.

    Readings without a concentration and concentrations without a reading are refused; standards above ``up_to`` are
    left out and noted. Raises InputError also for fewer than two different concentrations.
    """
    absorbances = converted(readings, "absorbance")
    stems = [stem(name) for name in absorbances.names]
    _matched(stems, concentrations)
    kept = [i for i, stem in enumerate(stems) if concentrations[stem] <= up_to]
    names = tuple(dict.fromkeys(stems[i] for i in kept))
    values = np.array([concentrations[name] for name in names])
    if len(np.unique(values[values > 0])) + (values == 0).any() < 2 or not (values > 0).any():
        raise InputError(
            f"{len(np.unique(values))} concentration(s) in the series",
            why="a line needs two or more that differ",
            do="add standards",
        )
    A = absorbances.values[kept]
    usable = absorbance_limit >= A
    left_out = sorted(set(stems) - set(names))
    notes = absorbances.notes + ((f"left out, above {up_to:g} {unit}: {', '.join(left_out)}",) if left_out else ())
    place = {name: i for i, name in enumerate(names)}
    standard = np.array([place[stems[i]] for i in kept], dtype=np.intp)
    notes += _beyond(names, standard, absorbances.wavelength_nm, usable, absorbance_limit)
    return Series(
        names, values, unit, path_length_mm, absorbances.wavelength_nm, A, standard, usable, absorbances.sources, notes
    )


def read_concentrations(
    path: str, unit: str, wanted: str, molar_mass: float | None = None
) -> tuple[dict[str, float], Source]:
    """Concentrations by name from a CSV file with the columns name, concentration and, if it has one, unit.

    A number may carry its unit (``5mg/L``); without any, it is taken in ``unit``. They are returned in ``wanted``, with
    the file as a source. Raises InputError naming file and line.
    """
    try:
        data = Path(path).read_bytes()
        text = data.decode("utf-8-sig")
    except OSError as error:
        raise unreadable(path, error) from None
    except UnicodeDecodeError:
        raise InputError("is not text", where=path, why="a CSV file in UTF-8 is wanted") from None
    lines = [
        (number, line) for number, line in enumerate(text.splitlines(), 1) if line.strip() and not line.startswith("#")
    ]
    if not lines:
        raise InputError("is empty", where=path, why="the columns name, concentration, unit are wanted")
    separator = max(",;\t", key=lines[0][1].count)
    header = [cell.strip().lower() for cell in lines[0][1].split(separator)]
    if "name" not in header or "concentration" not in header:
        raise InputError(
            f"columns {', '.join(header)[:80]}",
            where=f"{path} line {lines[0][0]}",
            why="name and concentration are wanted",
        )
    result: dict[str, float] = {}
    source = Source(path, hashlib.sha256(data).hexdigest())
    for number, line in lines[1:]:
        cells = next(csv.reader(io.StringIO(line), delimiter=separator))
        row = dict(zip(header, (cell.strip() for cell in cells), strict=False))
        try:
            value = _value(row, unit, wanted, molar_mass)
        except InputError as error:
            raise error.at(f"{path} line {number}") from None
        if result.setdefault(row["name"], value) != value:
            raise InputError(f"{row['name']!r} has two concentrations", where=f"{path} line {number}", do="leave one")
    return result, source


def _value(row: Mapping[str, str], unit: str, wanted: str, molar_mass: float | None) -> float:
    text = row.get("concentration", "").replace(",", ".")
    match = re.fullmatch(rf"({NUMBER})\s*(\S.*)?", text)
    if not match:
        raise InputError(f"concentration {text!r}", why="a number is wanted")
    value = float(match.group(1)) * concentration_factor(match.group(2) or row.get("unit") or unit, wanted, molar_mass)
    if not (np.isfinite(value) and value >= 0):
        raise InputError(f"concentration {text!r}", why="it must be finite and not negative")
    return value


def _matched(stems: list[str], concentrations: Mapping[str, float]) -> None:
    missing = list(dict.fromkeys(stem for stem in stems if stem not in concentrations))
    if missing:
        raise InputError(
            f"no concentration for {', '.join(missing[:6])}",
            why="each reading needs one",
            do="add the lines to the concentrations file, or take the readings out",
        )
    unmet = [name for name in concentrations if name not in stems]
    if unmet:
        raise InputError(
            f"no reading of {', '.join(unmet[:6])}",
            why=f"the readings are {', '.join(dict.fromkeys(stems))[:120]}",
            do="mend the names in the concentrations file",
        )


def _beyond(
    names: tuple[str, ...], standard: Index, wavelength_nm: Array, usable: Mask, limit: float
) -> tuple[str, ...]:
    out = ~usable
    if not out.any():
        return ()
    who = ", ".join(dict.fromkeys(names[standard[row]] for row in np.flatnonzero(out.any(axis=1))))
    low, high = wavelength_nm[np.flatnonzero(out.any(axis=0))[[0, -1]]]
    return (
        f"left out, above absorbance {limit:g}: {np.count_nonzero(out)} points of {who} within {low:g}–{high:g} nm",
    )
