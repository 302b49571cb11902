"""JCAMP-DX files (IUPAC 4.24 and 5.01): blocks, labels, units, and what is not a spectrum of light.

McDonald and Wilks (1988), Applied Spectroscopy 42, 151-162; the numbers themselves are decoded in asdf.py.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field

import numpy as np

from chroma.readers import asdf, words
from chroma.readers.asdf import Line, Scale
from chroma.readers.table import Table
from observers.arrays import Array
from observers.errors import InputError

_TABLES = ("XYDATA", "XYPOINTS", "PEAKTABLE", "PEAKASSIGNMENTS", "NTUPLES", "DATATABLE")
_LIGHT = re.compile(r"INFRARED|\bN?IR\b|\bUV|VIS|ULTRAVIOLET|TRANSMI|REFLECT|ABSORB|OPTICAL", re.IGNORECASE)


@dataclass
class Block:
    """One block: its labels as (line, value), and its table with the form that is written behind the label."""

    line: int
    labels: dict[str, tuple[int, str]] = field(default_factory=dict)
    table: str = ""
    form: str = ""
    data: list[Line] = field(default_factory=list)
    ended: bool = False

    def text(self, label: str) -> str:
        """A label's value, empty when it is not there."""
        return self.labels.get(label, (0, ""))[1].strip()


def looks_like(text: str) -> bool:
    """Whether a text begins as JCAMP-DX does, with a labelled record."""
    lines = (line.strip() for line in text[:5000].replace("\r", "\n").split("\n"))
    first = next((line for line in lines if line and not line.startswith("$$")), "")
    return bool(re.match(r"##\s*(?:TITLE|JCAMP[-_ ]?DX)\s*=", first, re.IGNORECASE))


def tables_of(lines: list[str], where: str, *, quantity_known: bool = False) -> list[Table]:
    """The spectra of the blocks, one `Table` each.

    Raises InputError for what is no transmittance, reflectance or absorbance over wavelength or wavenumber, naming
    what it is, and for data that fail a check.
    """
    found = blocks(lines)
    with_data = [block for block in found if block.table]
    if not with_data:
        kinds = ", ".join(dict.fromkeys(b.text("DATATYPE") for b in found if b.text("DATATYPE"))) or "no data type"
        raise InputError(f"a JCAMP-DX file without a table of data ({kinds})", where=where, do="export it again")
    return [_table(block, where, quantity_known) for block in with_data]


def blocks(lines: list[str]) -> list[Block]:
    """The blocks of a file in order, blocks inside a link as well; ``$$`` begins a remark."""
    found: list[Block] = []
    stack: list[Block] = []
    label = ""
    for number, line in enumerate(lines, 1):
        line = line.split("$$", 1)[0].rstrip()
        record = re.match(r"\s*##([^=]*)=(.*)", line)
        if not record:
            if stack and line.strip():
                _continue(stack[-1], label, number, line)
            continue
        label = re.sub(r"[\s\-/_]", "", record[1]).upper()
        if label == "TITLE" or not stack:
            stack.append(Block(number))
            found.append(stack[-1])
        if label == "END":
            stack.pop().ended = True
        elif label in _TABLES:
            stack[-1].table, stack[-1].form, stack[-1].data = label, re.sub(r"\s", "", record[2]), []
        else:
            stack[-1].labels[label] = (number, record[2])
    return found


def _continue(block: Block, label: str, number: int, line: str) -> None:
    if label in _TABLES:
        block.data.append(Line(number, line.strip()))
    elif label in block.labels:
        at, text = block.labels[label]
        if len(text) < 10_000:
            block.labels[label] = (at, f"{text} {line.strip()}")


def ordinates(block: Block, where: str) -> tuple[Array, Array]:
    """Abscissae and ordinates (N,) of a block in its own units; raises InputError where a check fails."""
    if not block.data:
        raise InputError("a table without data", where=f"{where} line {block.line}", why="the file is cut short")
    x_factor, y_factor = _factor(block, "XFACTOR", where), _factor(block, "YFACTOR", where)
    if block.form.upper().startswith("(XY..XY"):
        points = asdf.pairs(block.data, where)
        x, y = points[:, 0] * x_factor, points[:, 1] * y_factor
    else:
        scale = _scale(block, x_factor, where)
        y = asdf.decode(block.data, scale, where) * y_factor
        x = _abscissa(block, scale, len(y), where)
    _check_counts(block, x, y, where)
    return x, y


def _scale(block: Block, factor: float, where: str) -> Scale:
    first, last = _number(block, "FIRSTX", where), _number(block, "LASTX", where)
    count, step = _number(block, "NPOINTS", where), _number(block, "DELTAX", where)
    if first is not None and last is not None and count is not None and count > 1:
        step = (last - first) / (count - 1)
    return Scale(first, step, factor)


def _abscissa(block: Block, scale: Scale, count: int, where: str) -> Array:
    first, last = scale.first, _number(block, "LASTX", where)
    stated = _number(block, "NPOINTS", where)
    if first is not None and last is not None and (stated is None or stated == count):
        return np.linspace(first, last, count, dtype=np.float64)
    if first is None or scale.step is None:
        raise InputError("no FIRSTX with LASTX or DELTAX", where=f"{where} line {block.line}", why="X is unknown")
    return first + scale.step * np.arange(count, dtype=np.float64)


def _check_counts(block: Block, x: Array, y: Array, where: str) -> None:
    at = f"{where} line {block.data[-1].number}"
    stated = _number(block, "NPOINTS", where)
    if stated is not None and stated != len(y):
        raise InputError(
            f"{len(y)} points where NPOINTS says {stated:g}", where=at, why="the data are cut or damaged",
            do="export the file again",
        )  # fmt: skip
    for label, value in (("FIRSTX", x[0]), ("LASTX", x[-1])):
        said = _number(block, label, where)
        if said is not None and abs(said - value) > 1e-4 * abs(said) + abs(np.ptp(x)) / max(len(x), 2):
            raise InputError(f"{label} is {said:g} and the data have {value:g}", where=at, do="export the file again")


def _first_y(block: Block, y: Array, where: str) -> tuple[str, ...]:
    """FIRSTY against the first ordinate: a wrong YFACTOR shows here and nowhere else."""
    said = _number(block, "FIRSTY", where)
    if said is None or not np.isfinite(y[0]) or abs(said - y[0]) <= 1e-3 * max(abs(said), np.nanmax(np.abs(y)) / 100):
        return ()
    if abs(said - y[0]) <= 0.01 * max(abs(said), np.nanmax(np.abs(y))):
        return (f"FIRSTY says {said:g} and the data begin with {y[0]:g}: read with YFACTOR as it stands",)
    raise InputError(
        f"FIRSTY is {said:g} and the data begin with {y[0]:g}",
        where=f"{where} line {block.labels['FIRSTY'][0]}",
        why="YFACTOR or the data are wrong",
        do="export the file again",
    )


def _table(block: Block, where: str, quantity_known: bool) -> Table:
    _refuse_other_kinds(block, where)
    unit, said = words.unit_of(block.text("XUNITS")), words.meaning(block.text("YUNITS"))[0]
    missing = [label for label in ("XUNITS", "YUNITS", "DATATYPE") if not block.text(label)]
    if "XUNITS" in missing or ("YUNITS" in missing and not quantity_known):
        raise InputError(
            f"{', '.join(missing)} missing", where=f"{where} line {block.line}",
            why="without them the numbers have no meaning", do="write them into the file",
        )  # fmt: skip
    if unit is None:
        raise _units_refused(block, "XUNITS", "wavelengths in nm or µm, or wavenumbers in 1/CM, are read", where)
    if said is None and "YUNITS" not in missing:
        raise _units_refused(block, "YUNITS", "transmittance, reflectance and absorbance are read", where)
    x, y = ordinates(block, where)
    notes = ("1 block", *_first_y(block, y, where))
    notes += () if block.ended else ("the last line ##END= is missing",)
    numbers = [line.number for line in block.data]

    def place(_: int, band: int) -> str:
        return f"{where} line {numbers[0]} and following, point {band + 1}"

    name = " ".join(block.text("TITLE").split()) or "untitled"
    meta = (f"path length: {block.text('PATHLENGTH')} cm",) if block.text("PATHLENGTH") else ()
    return Table((name,), x, unit, y[None, :], (said,), meta, notes, place)


def _refuse_other_kinds(block: Block, where: str) -> None:
    kind, at = block.text("DATATYPE"), f"{where} line {block.line}"
    if kind and not _LIGHT.search(kind):
        raise InputError(
            f"{kind} {block.text('TITLE')[:60]!r}",
            where=at,
            why="only spectra of light can be read: UV-visible, infrared",
        )
    if block.table not in ("XYDATA", "XYPOINTS"):
        raise InputError(f"a {block.table} and no spectrum", where=at, why="XYDATA and XYPOINTS are read")
    if not re.match(r"\(X\+\+\(Y\.\.Y\)\)|\(XY\.\.XY\)", block.form, re.IGNORECASE):
        raise InputError(f"the form {block.form[:40]!r}", where=at, why="(X++(Y..Y)) and (XY..XY) are read")


def _units_refused(block: Block, label: str, why: str, where: str) -> InputError:
    return InputError(f"{label} {block.text(label)[:60]!r}", where=f"{where} line {block.labels[label][0]}", why=why)


def _number(block: Block, label: str, where: str) -> float | None:
    if label not in block.labels:
        return None
    line, text = block.labels[label]
    value = words.number(text.strip().removesuffix("."))
    if value is None or not np.isfinite(value):
        raise InputError(f"{label} is {text.strip()[:40]!r}", where=f"{where} line {line}", why="it must be a number")
    return value


def _factor(block: Block, label: str, where: str) -> float:
    value = _number(block, label, where)
    if value == 0:
        raise InputError(
            f"{label} is 0", where=f"{where} line {block.labels[label][0]}", why="nothing is left of the data"
        )
    return 1.0 if value is None else value
