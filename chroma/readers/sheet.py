"""Rows of cells, from text or a workbook alike, and where among them the table of numbers stands."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass

import numpy as np

from chroma.readers.words import OVERFLOW, is_missing, number
from observers.arrays import Array
from observers.errors import InputError


@dataclass(frozen=True)
class Sheet:
    """A file as rows of cells.

    where : the file, for errors. count : how many rows. cells(i) : the stripped cells of a row. line(i) : its text.
    lead(i, n) : its first n cells.
    fast(rows, first, stop) : the numbers of these columns at once (R, C), or None when a cell is not a plain number.
    """

    where: str
    count: int
    cells: Callable[[int], list[str]]
    lead: Callable[[int, int], list[str]]
    line: Callable[[int], str]
    fast: Callable[[Sequence[int], int, int], Array | None]
    decimal: str
    described: str

    def number(self, cell: str) -> float | None:
        """The number in a cell, with this file's decimal sign."""
        return number(cell, self.decimal)

    def place(self, row: int, column: int) -> str:
        """A cell's place for a person, counted from one."""
        return f"{self.where} line {row + 1} column {column + 1}"


@dataclass(frozen=True)
class Region:
    """The table of numbers: its rows, how many columns of labels lead, how many columns there are in all."""

    rows: tuple[int, ...]
    labels: int
    columns: int
    header: tuple[int, ...]
    notes: tuple[str, ...]


def trimmed(cells: list[str]) -> list[str]:
    """Cells without the empty ones at the end."""
    stop = len(cells)
    while stop and not cells[stop - 1]:
        stop -= 1
    return cells[:stop]


def is_comment(line: str) -> bool:
    """Whether a line is a remark, and not a cell that an instrument filled with ####."""
    return line.startswith("#") and not line.startswith("##")


def spread(count: int, head: int = 60, rest: int = 140) -> list[int]:
    """Row numbers to look at first: the head, and some evenly from the whole."""
    even = np.linspace(0, max(count - 1, 0), rest).astype(int).tolist() if count else []
    return sorted({*range(min(head, count)), *even})


def locate(sheet: Sheet, labels: int | None = None) -> Region:
    """Find the table of numbers, after so many columns of labels where that is known; raises InputError for none."""
    shape = _shape(sheet, spread(sheet.count)) or _shape(sheet, range(min(sheet.count, 5000)))
    if shape is None:
        raise no_table(sheet.where)
    columns = shape[1]
    labels = shape[0] if labels is None else labels
    first = _first(sheet, range(sheet.count), labels, columns)
    last = _first(sheet, range(sheet.count - 1, -1, -1), labels, columns)
    if first is None or last is None:
        raise no_table(sheet.where)
    first = _grow(sheet, first, -1, labels, columns)
    last = _grow(sheet, last, 1, labels, columns)
    rows = tuple(i for i in range(first, last + 1) if _holds_cells(sheet, i, labels, columns))
    header = tuple(i for i in range(first) if sheet.line(i).strip(" \t,;|"))
    return Region(rows, labels, columns, header, _footer_note(sheet, last))


def no_table(where: str) -> InputError:
    """The refusal of a file in which no table of numbers was found."""
    return InputError(
        "no table of numbers was found",
        where=where,
        why="a table has at least two columns of numbers, the wavelengths among them",
        do="export the spectra as delimited text",
    )


def numbers(sheet: Sheet, rows: Sequence[int], first: int, stop: int) -> Array:
    """The cells of these rows and columns as numbers (R, C); NaN where there is none.

    Raises InputError with file, line and column for a cell that holds something else.
    """
    quick = sheet.fast(rows, first, stop)
    if quick is not None and quick.shape == (len(rows), stop - first) and not np.isinf(quick).any():
        return quick
    result = np.empty((len(rows), stop - first))
    for place, row in enumerate(rows):
        result[place] = _careful(sheet, row, first, stop)
    return result


def texts(sheet: Sheet, rows: Iterable[int], columns: int) -> list[list[str]]:
    """The leading cells of these rows, as text."""
    empty = [""] * columns
    return [(sheet.lead(row, columns) + empty)[:columns] for row in rows]


def _careful(sheet: Sheet, row: int, first: int, stop: int) -> list[float]:
    cells = sheet.cells(row)
    if len(cells) < stop:
        raise _interrupts(sheet, row, first) or InputError(
            f"{len(cells)} columns where {stop} are expected",
            where=f"{sheet.where} line {row + 1}",
            why="the line is cut short",
            do="export the file again",
        )
    if any(cells[stop:]):
        raise InputError(
            f"{len(trimmed(cells))} columns where {stop} are expected",
            where=f"{sheet.where} line {row + 1}",
            why=f"{shown(next(c for c in cells[stop:] if c))} stands outside the table",
            do="check the separators",
        )
    values = [sheet.number(cell) for cell in cells[first:stop]]
    for offset, value in enumerate(values):
        if value is None and is_missing(cells[first + offset]):
            values[offset] = np.nan
        elif value is None or value in (np.inf, -np.inf):
            raise _interrupts(sheet, row, first) or _bad_cell(sheet, row, first + offset, cells[first + offset])
    return [np.nan if value is None else value for value in values]


def _bad_cell(sheet: Sheet, row: int, column: int, cell: str) -> InputError:
    where = sheet.place(row, column)
    if OVERFLOW.fullmatch(cell) or sheet.number(cell) is not None:
        return InputError(
            f"{shown(cell)} where a number is expected",
            where=where,
            why="the instrument ran out of range, or the column was too narrow when it was exported",
            do="leave the sample or the wavelength out, or measure it in a shorter cell",
        )
    return InputError(
        f"{shown(cell)} where a number is expected", where=where, why="the column holds numbers", do="mend the cell"
    )


def _interrupts(sheet: Sheet, row: int, first: int) -> InputError | None:
    """The refusal of a line of words between two tables; None when the line is of the table and a cell is bad."""
    cells = sheet.cells(row)
    if sum(sheet.number(cell) is not None for cell in cells[first:]) >= 1 or len(trimmed(cells)) > 3:
        return None
    return InputError(
        f"{shown(sheet.line(row).strip())} stands in the middle of the numbers",
        where=f"{sheet.where} line {row + 1}",
        why="one table is read from a file, and here a second seems to begin",
        do="save each table in a file of its own",
    )


def shown(text: str) -> str:
    """A cell as an error shows it: quoted, and not longer than a person reads."""
    return repr(text if len(text) <= 40 else text[:37] + "...")


def _shape(sheet: Sheet, rows: Iterable[int]) -> tuple[int, int] | None:
    """Leading label columns and all columns, as most of the numbers have it."""
    weight: Counter[int] = Counter()
    widths: dict[int, list[tuple[int, int]]] = {}
    for row in rows:
        cells = sheet.cells(row)
        found = _pattern(sheet, trimmed(cells))
        if found is not None and (found[0] or not is_comment(sheet.line(row))):
            labels, stop, count = found
            weight[labels] += count
            widths.setdefault(labels, []).append((stop, len(cells)))
    if not weight:
        return None
    labels = weight.most_common(1)[0][0]
    held = [full for _, full in widths[labels]]
    # The widest row counts when most rows at least have the separators for it: their last cells are then empty.
    for width in sorted({short for short, _ in widths[labels]}, reverse=True):
        if 2 * sum(full >= width for full in held) >= len(held):
            return labels, width
    return None


def _pattern(sheet: Sheet, cells: list[str]) -> tuple[int, int, int] | None:
    """Leading cells that are no numbers, where the numbers stop, and how many they are; None for no row of numbers."""
    values = [sheet.number(cell) is not None for cell in cells]
    count = sum(values)
    if count < 2:
        return None
    labels, stop = values.index(True), len(values) - values[::-1].index(True)
    good = all(value or is_missing(cell) for cell, value in zip(cells[labels:stop], values[labels:stop], strict=True))
    return (labels, stop, count) if good and 2 * count >= len(cells) - labels else None


def _first(sheet: Sheet, rows: Iterable[int], labels: int, columns: int) -> int | None:
    """The first of these rows that is a full row of numbers; remarks may follow them."""
    for row in rows:
        cells = sheet.cells(row)
        if len(cells) < columns or _is_remark(sheet, row, labels, columns):
            continue
        known = [sheet.number(cell) is not None for cell in cells[labels:columns]]
        odd = [cell for cell, good in zip(cells[labels:columns], known, strict=True) if not good]
        beyond = any(sheet.number(cell) is not None for cell in cells[columns:])
        if not beyond and all(map(is_missing, odd)) and sum(known) >= min(2, columns - labels):
            return row
    return None


def _grow(sheet: Sheet, edge: int, step: int, labels: int, columns: int) -> int:
    """Take in rows at the edge that are of the table but for a bad cell, so that they are refused and not dropped."""
    while 0 <= edge + step < sheet.count and _belongs(sheet, edge, step, labels, columns):
        edge += step
    return edge


def _belongs(sheet: Sheet, edge: int, step: int, labels: int, columns: int) -> bool:
    cells = sheet.cells(edge + step)
    inner = trimmed(cells)[labels:columns]
    if not inner or sheet.number(inner[0]) is None or _is_remark(sheet, edge + step, labels, columns):
        return False
    odd = [cell for cell in inner if sheet.number(cell) is None and not is_missing(cell)]
    if step < 0:
        ruined = bool(odd) and all(OVERFLOW.fullmatch(cell) for cell in odd)
        return len(cells) >= columns and (ruined or _continues(sheet, edge, -1, labels))
    if len(cells) < columns:  # a file cut short ends in such a row
        return not odd and (labels > 0 or _continues(sheet, edge, 1, labels))
    return not any(cells[columns:]) or not odd


def _continues(sheet: Sheet, edge: int, step: int, column: int) -> bool:
    """Whether the row beyond the edge goes on by the step before it, and so is no row of names, and no remark."""
    near = [row for row in (edge + step, edge, edge - step) if 0 <= row < sheet.count]
    rows = [sheet.cells(row)[column : column + 1] for row in near]
    found = [value for cells in rows if cells and (value := sheet.number(cells[0])) is not None]
    return len(found) == 3 and abs(found[2] - 2 * found[1] + found[0]) <= 0.5 * abs(found[2] - found[1])


def _holds_cells(sheet: Sheet, row: int, labels: int, columns: int) -> bool:
    return bool(sheet.line(row).strip(" \t,;|")) and not _is_remark(sheet, row, labels, columns)


def _is_remark(sheet: Sheet, row: int, labels: int, columns: int) -> bool:
    """Whether a line is a remark, and not the sample that somebody named "#1"."""
    if not is_comment(sheet.line(row)):
        return False
    cells = sheet.cells(row)
    known = [sheet.number(cell) is not None for cell in cells[labels:columns]]
    return not labels or len(cells) < columns or 2 * sum(known) < len(known)


def _footer_note(sheet: Sheet, last: int) -> tuple[str, ...]:
    after = [i for i in range(last + 1, sheet.count) if sheet.line(i).strip(" \t,;|")]
    if not after:
        return ()
    what = shown(sheet.line(after[0]).strip())
    count = f"{len(after)} {'line' if len(after) == 1 else 'lines'}"
    return (f"{count} after the table left out, from line {after[0] + 1}: {what}",)
