"""``rack.csv``: what stands where in a photo."""

from __future__ import annotations

import csv
import io
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Literal, get_args

from observers.errors import InputError, unreadable

Role = Literal["blank", "standard", "unknown"]
ROLES: tuple[Role, ...] = get_args(Role)
BOX = ("x", "y", "width", "height")
SIZE_LIMIT = 1_000_000
MOST_CUVETTES = 200


@dataclass(frozen=True)
class Box:
    """A box in pixels of the upright photo; it encloses liquid only."""

    x: float
    y: float
    width: float
    height: float

    @property
    def right(self) -> float:
        """One past the last column."""
        return self.x + self.width

    @property
    def bottom(self) -> float:
        """One past the last row."""
        return self.y + self.height


@dataclass(frozen=True)
class Cuvette:
    """One row of the rack: concentration in the dye's unit, one a dye; empty for an unknown, zero for a blank."""

    name: str
    role: Role
    concentration: tuple[float, ...] = ()
    box: Box | None = None


def read_rack(path: str, dyes: Sequence[str] = ("",)) -> tuple[Cuvette, ...]:
    """The rack of a file with the columns name, role, concentration, x, y, width, height, in the order of the rows.

    With several dyes each has a column ``concentration:NAME``. Raises InputError with file, line and column.
    """
    try:
        data = Path(path).read_bytes()
        if len(data) > SIZE_LIMIT:
            raise InputError("is too large for a rack", why=f"{len(data)} bytes, at most {SIZE_LIMIT} are read")
        return rack_from(data.decode("utf-8-sig"), dyes)
    except OSError as error:
        raise unreadable(path, error) from None
    except UnicodeDecodeError:
        raise InputError("is no rack", where=path, why="it is not text in UTF-8", do="save it as CSV UTF-8") from None
    except InputError as error:
        raise error.at(path) from None


def rack_from(text: str, dyes: Sequence[str] = ("",)) -> tuple[Cuvette, ...]:
    """The rack of a CSV's text; separators comma, semicolon or tab, with a decimal comma where it is not the first."""
    first = next((line for line in text.splitlines() if line.strip()), "")
    separator = max(";\t,", key=first.count)
    try:
        rows = list(csv.reader(io.StringIO(text), delimiter=separator, strict=True))
    except csv.Error as error:
        raise InputError("is no rack", why=str(error)) from None
    numbered = [(line, row) for line, row in enumerate(rows, start=1) if any(cell.strip() for cell in row)]
    if not numbered:
        raise InputError("is empty", do=f"give the columns name,role,concentration,{','.join(BOX)}")
    header = [cell.strip().lower() for cell in numbered[0][1]]
    wanted = _columns(header, dyes)
    cuvettes = tuple(_cuvette(line, row, header, wanted, separator != ",") for line, row in numbered[1:])
    _judge(cuvettes)
    return cuvettes


def _columns(header: Sequence[str], dyes: Sequence[str]) -> tuple[str, ...]:
    """The columns of the concentrations; raises InputError for a header that lacks what is needed."""
    wanted = ("concentration",) if len(dyes) == 1 else tuple(f"concentration:{dye.lower()}" for dye in dyes)
    missing = [name for name in ("name", "role", *wanted) if name not in header]
    if missing:
        raise InputError(
            f"the column {missing[0]} is missing",
            why=f"its columns are {', '.join(header) or 'none'}",
            do=f"name the columns name,role,{','.join(wanted)},{','.join(BOX)}",
            where="line 1",
        )
    if len(set(header)) != len(header):
        raise InputError("two columns have one name", where="line 1")
    return wanted


def _cuvette(line: int, row: Sequence[str], header: Sequence[str], wanted: Sequence[str], comma: bool) -> Cuvette:
    if len(row) > len(header) and any(cell.strip() for cell in row[len(header) :]):
        raise InputError(f"{len(row)} cells for {len(header)} columns", where=f"line {line}")
    cells = {key: cell.strip() for key, cell in zip(header, row, strict=False)}
    role, name = cells.get("role", "").lower(), cells.get("name", "")
    if role not in ROLES:
        raise InputError(f"role {role!r}", why=f"known are {', '.join(ROLES)}", where=f"line {line}, column role")
    if not name:
        raise InputError("a cuvette without a name", where=f"line {line}, column name")
    given = [_number(cells.get(key, ""), line, key, comma) for key in wanted]
    box = [_number(cells.get(key, ""), line, key, comma) for key in BOX]
    return Cuvette(name, role, _concentration(role, given, line), _box(box, line))


def _concentration(role: str, given: Sequence[float | None], line: int) -> tuple[float, ...]:
    where = f"line {line}, column concentration"
    numbers = [value for value in given if value is not None]
    if role == "unknown":
        if numbers:
            raise InputError("an unknown with a concentration", do="make it a standard, or empty the cell", where=where)
        return ()
    if role == "blank":
        if any(numbers):
            raise InputError("a blank with a concentration", do="write 0, or empty the cell", where=where)
        return (0.0,) * len(given)
    if len(numbers) != len(given) or not any(numbers) or min(numbers) < 0:
        raise InputError("a standard needs its concentration", why="a number above 0 in the dye's unit", where=where)
    return tuple(numbers)


def _box(numbers: Sequence[float | None], line: int) -> Box | None:
    given = [value for value in numbers if value is not None]
    if not given:
        return None
    if len(given) < 4:
        raise InputError("half a box", why="x, y, width and height are needed", where=f"line {line}")
    if given[2] < 4 or given[3] < 4:
        raise InputError(
            f"a box of {given[2]:g} × {given[3]:g} pixels",
            why="four pixels each way are needed at least",
            where=f"line {line}",
        )
    return Box(*given)


def _number(text: str, line: int, column: str, comma: bool) -> float | None:
    if not text:
        return None
    try:
        value = float(text.replace(",", ".") if comma else text)
    except ValueError:
        value = float("nan")
    if not -1e12 < value < 1e12:
        raise InputError(f"{text!r} is no number", where=f"line {line}, column {column}")
    return value


def _judge(cuvettes: Sequence[Cuvette]) -> None:
    """Raises InputError for a rack that says too little, too much, or the same twice."""
    if not cuvettes:
        raise InputError("holds no cuvettes", do="write one row a cuvette")
    if len(cuvettes) > MOST_CUVETTES:
        raise InputError(f"{len(cuvettes)} cuvettes", why=f"{MOST_CUVETTES} are taken at most")
    names = [cuvette.name for cuvette in cuvettes]
    twice = next((name for name in names if names.count(name) > 1), None)
    if twice is not None:
        raise InputError(f"two cuvettes named {twice!r}", do="give each a name of its own")
    boxed = [cuvette.box is not None for cuvette in cuvettes]
    if any(boxed) and not all(boxed):
        raise InputError(
            f"{cuvettes[boxed.index(False)].name} has no box", why="all have one or none has", do="complete the boxes"
        )


def judge_boxes(cuvettes: Sequence[Cuvette], width: int, height: int) -> None:
    """Raises InputError for a box that reaches outside a photo (width × height) or overlaps another."""
    boxed = [(cuvette.name, cuvette.box) for cuvette in cuvettes if cuvette.box is not None]
    for i, (name, box) in enumerate(boxed):
        if box.x < 0 or box.y < 0 or box.right > width or box.bottom > height:
            raise InputError(
                f"the box of {name} reaches outside the photo",
                why=f"x {box.x:g}–{box.right:g}, y {box.y:g}–{box.bottom:g} in {width} × {height} pixels",
                do="boxes are in pixels of the upright photo",
            )
        for other, second in boxed[:i]:
            if _overlap(box, second):
                raise InputError(f"the boxes of {other} and {name} overlap", do="a box encloses one liquid only")


def _overlap(one: Box, two: Box) -> bool:
    return one.x < two.right and two.x < one.right and one.y < two.bottom and two.y < one.bottom


def with_boxes(cuvettes: Sequence[Cuvette], boxes: Mapping[str, Box]) -> tuple[Cuvette, ...]:
    """The rack with boxes that were found in the photo."""
    return tuple(replace(cuvette, box=boxes.get(cuvette.name, cuvette.box)) for cuvette in cuvettes)
