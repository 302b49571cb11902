"""Tables of ISO 28178 (CGATS.17) text: fields, sets, and the spectra among them."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

import numpy as np

from chroma.readers import words
from chroma.readers.table import Table
from chroma.readers.words import Meaning
from observers.arrays import Array
from observers.errors import InputError

_TOKEN = re.compile(r'"((?:[^"]|"")*)"|(\S+)')
_SPECTRAL = re.compile(r"(?:SPECTRAL_?(?:NM|PCT|DEC)?|NM|R)_?([0-9]{3,4}(?:\.[0-9]+)?)(?:_?NM)?", re.IGNORECASE)
_PAIR_VALUE = ("SPECTRAL_PCT", "SPECTRAL_DEC")


@dataclass
class Part:
    """One table of a file: what its header says, its fields, and its cells with the lines they stand on."""

    header: list[str] = field(default_factory=list)
    counts: dict[str, tuple[int, str]] = field(default_factory=dict)
    fields: list[str] = field(default_factory=list)
    cells: list[str] = field(default_factory=list)
    lines: list[int] = field(default_factory=list)
    begun: int = 0
    ended: bool = False


def looks_like(text: str) -> bool:
    """Whether a text has the words that open a table of this form."""
    return bool(re.search(r"^[ \t]*BEGIN_DATA_FORMAT[ \t]*$", text[:200_000].replace("\r", "\n"), re.MULTILINE))


def tables_of(lines: list[str], where: str) -> list[Table]:
    """The spectra of the tables that have spectral fields, one `Table` each.

    Raises InputError when counts of fields or sets do not hold, a cell is no number, or no table has spectra.
    """
    parts = [part for part in _parts(lines, where) if part.fields]
    found = [_table(part, where) for part in parts]
    spectral = [table for table in found if table is not None]
    if not spectral:
        names = ", ".join(parts[0].fields[:6]) if parts else "none"
        raise InputError("no spectral fields", where=where, why=f"the fields are {names}", do="export with spectra")
    left = len(found) - len(spectral)
    return [spectral[0].noted(f"{left} tables without spectra left out"), *spectral[1:]] if left else spectral


def _parts(lines: list[str], where: str) -> list[Part]:
    parts, state = [Part()], ""
    fields: list[str] = []
    for number, line in enumerate(lines, 1):
        found = [bare or quoted.replace('""', '"') for quoted, bare in _TOKEN.findall(line)]
        if not found or (found[0].startswith("#") and not line.lstrip().startswith('"')):
            continue
        part, word = parts[-1], found[0].upper()
        if word == "BEGIN_DATA_FORMAT":
            if part.begun:
                parts.append(part := Part())
            state, part.fields = "format", []
        elif word == "BEGIN_DATA":
            if part.begun:  # a further table with the format of the one before
                parts.append(part := Part(fields=fields))
            state, part.begun = "data", number
        elif word in ("END_DATA_FORMAT", "END_DATA"):
            part.ended, state, fields = word == "END_DATA", "", part.fields
        elif state == "format":
            part.fields += [name.upper() for name in found]
        elif state == "data":
            part.cells += found
            part.lines += [number] * len(found)
        else:
            _header(parts, word, found, number, line)
    return parts


def _header(parts: list[Part], word: str, found: list[str], number: int, line: str) -> None:
    if parts[-1].begun:
        parts.append(Part())
    parts[-1].header.append(line.strip())
    if word in ("NUMBER_OF_FIELDS", "NUMBER_OF_SETS") and len(found) > 1:
        parts[-1].counts[word] = (number, found[1])


def _table(part: Part, where: str) -> Table | None:
    _check_counts(part, where)
    columns, axis, said = _spectral_columns(part, where)
    if not columns:
        return None
    width = len(part.fields)
    sets = len(part.cells) // width
    values = np.array([[_number(part, row * width + c, where) for c in columns] for row in range(sets)])
    names = _names(part, sets)

    def place(sample: int, band: int) -> str:
        return _place(part, max(sample, 0) * width + columns[band], where)

    meaning = _meaning(part, said)
    return Table(names, axis, "nm", values, (meaning,) * sets, tuple(part.header), (f"{sets} samples in rows",), place)


def _check_counts(part: Part, where: str) -> None:
    width = len(part.fields)
    sets, rest = divmod(len(part.cells), width)
    for word, got in () if rest else (("NUMBER_OF_FIELDS", width), ("NUMBER_OF_SETS", sets)):
        if word in part.counts and part.counts[word][1] != str(got):
            line, said = part.counts[word]
            raise InputError(
                f"{word} is {said[:20]} and the table has {got}", where=f"{where} line {line}",
                why="the table is cut or damaged", do="export it again",
            )  # fmt: skip
    if rest or not sets or not part.ended:
        line = (
            next((n for n in dict.fromkeys(part.lines) if part.lines.count(n) != width), part.begun)
            if rest
            else part.begun
        )
        what = (
            f"a row without its {width} fields"
            if rest
            else "a table without END_DATA"
            if sets
            else "a table without rows"
        )
        raise InputError(what, where=f"{where} line {line}", why="the table is cut or damaged", do="export it again")


def _spectral_columns(part: Part, where: str) -> tuple[list[int], Array, str]:
    """The columns of values, their wavelengths (B,) nm, and the word that says fraction or per cent."""
    named = [(i, m[1], name) for i, name in enumerate(part.fields) if (m := _SPECTRAL.fullmatch(name))]
    if named:
        word = "PCT" if "PCT" in named[0][2] else "DEC" if "DEC" in named[0][2] else ""
        return [i for i, _, _ in named], np.array([float(nm) for _, nm, _ in named]), word
    columns = [i for i, name in enumerate(part.fields) if name in _PAIR_VALUE]
    if not columns:
        return [], np.empty(0), ""
    width, sets = len(part.fields), len(part.cells) // len(part.fields)
    if any(part.fields[i - 1] != "SPECTRAL_NM" for i in columns):
        raise InputError(
            "a spectral value without its SPECTRAL_NM", where=where, why="each stands behind its wavelength"
        )
    axis = np.array([[_number(part, row * width + i - 1, where) for i in columns] for row in range(sets)])
    if np.ptp(axis, axis=0).any():
        raise InputError("sets on different wavelengths", where=where, why="one table stands on one grid")
    return columns, axis[0], "PCT" if part.fields[columns[0]] == "SPECTRAL_PCT" else "DEC"


def _meaning(part: Part, word: str) -> Meaning:
    """Reflectance, as the standard has it, unless the header says that light went through."""
    transmitted = any(re.search(r"\btransmi(?:ttance|ssion|ssive)\b", line, re.IGNORECASE) for line in part.header)
    percent = word == "PCT"
    said = "SPECTRAL fields, transmittance" if transmitted else "SPECTRAL fields"
    return Meaning("transmittance" if transmitted else "reflectance", percent, True, said)


def _names(part: Part, sets: int) -> tuple[str, ...]:
    width = len(part.fields)
    for label in ("SAMPLE_NAME", "SAMPLE_ID", "SAMPLEID", "SAMPLE_LOC"):
        if label in part.fields:
            column = part.fields.index(label)
            return tuple(part.cells[row * width + column] for row in range(sets))
    return tuple(f"set {row + 1}" for row in range(sets))


def _number(part: Part, index: int, where: str) -> float:
    value = words.number(part.cells[index])
    if value is None:
        raise InputError(
            f"{part.cells[index][:40]!r} where a number is expected",
            where=_place(part, index, where),
            do="mend the cell",
        )
    return value


def _place(part: Part, index: int, where: str) -> str:
    return f"{where} line {part.lines[index]} field {part.fields[index % len(part.fields)]}"
