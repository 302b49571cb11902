"""Samples in rows: the wavelengths run across a row of names."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from chroma.readers import words
from chroma.readers.header import Head
from chroma.readers.sheet import Region, Sheet, is_comment, no_table, numbers, texts
from chroma.readers.table import LIKELY_NM, Table
from chroma.readers.words import Meaning


@dataclass(frozen=True)
class Across:
    """Wavelengths that run across a row of names: the row, the columns they stand in, and what is said with them."""

    row: int
    columns: tuple[int, ...]
    axis: tuple[float, ...]
    unit: str | None
    said: Meaning | None
    labels: tuple[tuple[int, str], ...]
    corner: str


def bands_across(sheet: Sheet, region: Region) -> Across | None:
    """Wavelengths in the row of names over the numbers, or in the first row of numbers itself."""
    above = [i for i in region.header if not is_comment(sheet.line(i))][:-12:-1]
    for row in (*region.rows[:1], *above):
        found = _bands(sheet, row)
        # Further up only a row that says what it is: the samples between may be numbered 1, 2, 2b.
        if found is not None and (row in above[:1] or row >= region.rows[0] or words.names_samples(found.corner)):
            return found
    return None


def _bands(sheet: Sheet, row: int) -> Across | None:
    cells = sheet.cells(row)
    bands = [(column, words.band(cell, sheet.decimal)) for column, cell in enumerate(cells)]
    found = [(column, *band) for column, band in bands if band is not None]
    corner = cells[0]
    if found and found[0][0] == 0 and len(found) > 3 and not _runs([number for _, number, _, _ in found]):
        found = found[1:]  # a number in the corner, over a column of numbered samples
    bare = words.number(corner, sheet.decimal) is not None and not any(word or unit for *_, word, unit in found)
    if len(found) < (3 if bare else 2) or not _runs([number for _, number, _, _ in found]):
        return None  # two bare numbers that rise are more often a wavelength and its value
    dress = {(word.lower(), unit) for _, _, word, unit in found}
    columns = tuple(column for column, *_ in found)
    if len(dress) != 1 or columns != tuple(range(columns[0], columns[-1] + 1)):
        return None
    word, unit = dress.pop()
    axis = tuple(number for _, number, _, _ in found)
    named = unit or words.unit_of(corner)
    if named is None and not (LIKELY_NM[0] <= min(axis) and max(axis) <= LIKELY_NM[1]):
        return None
    said = words.meaning(word)[0] if word else None
    labels = tuple((i, cell) for i, cell in enumerate(cells) if i < columns[0] or (i > columns[-1] and cell))
    return Across(row, columns, axis, named, said, labels, corner if columns[0] else "")


def _runs(axis: Sequence[float]) -> bool:
    """Whether numbers all rise, or all fall."""
    pairs = list(pairwise(axis))
    return all(a < b for a, b in pairs) or all(a > b for a, b in pairs)


def read_across(sheet: Sheet, region: Region, head: Head, across: Across) -> Table:
    """The table under a row of wavelengths; raises InputError for a cell that is no number."""
    rows = [row for row in region.rows if row > across.row]
    if not rows:
        raise no_table(sheet.where)
    first, stop = across.columns[0], across.columns[-1] + 1
    remarks_follow = any(column >= stop for column, _ in across.labels)
    values = numbers(_cut(sheet, stop) if remarks_follow else sheet, rows, first, stop)
    names, notes = labels_of(sheet, rows, across.labels, head.stem)
    count = f"{len(rows)} {'sample' if len(rows) == 1 else 'samples'} in rows"
    said = across.said or (words.meaning(across.corner)[0] if across.corner else None)
    meta = (*head.meta, *(line for row, _ in head.rows if row != across.row for line in [sheet.line(row)]))
    return Table(
        names,
        np.array(across.axis),
        across.unit,
        values,
        (said,) * len(rows),
        meta,
        (count, *notes, *region.notes),
        lambda sample, band: sheet.place(rows[sample], first + band),
    )


def _cut(sheet: Sheet, stop: int) -> Sheet:
    """The sheet without the columns that follow the numbers (remarks)."""
    return replace(sheet, cells=lambda row: (sheet.cells(row) + [""] * stop)[:stop], fast=lambda *_: None)


def labels_of(
    sheet: Sheet, rows: list[int], columns: Sequence[tuple[int, str]], stem: str
) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Names from the columns of labels: the one headed so, else the first in which every row differs."""
    if not columns:
        names = (stem,) if len(rows) == 1 else tuple(f"row {row + 1}" for row in rows)
        return names, ("samples named by their line",) if len(rows) > 1 else ()
    cells = texts(sheet, rows, columns[-1][0] + 1)
    kinds = [len({line[column] for line in cells}) for column, _ in columns]
    headed = [i for i, (_, title) in enumerate(columns) if words.names_samples(title)]
    full = [i for i, kind in enumerate(kinds) if kind == len(rows)]
    chosen = (headed or full or [kinds.index(max(kinds))])[0]
    column = columns[chosen][0]
    others = [title or f"column {c + 1}" for c, title in columns if c != column]
    notes = (f"columns not read: {', '.join(others)}",) if others else ()
    return tuple(line[column] or f"row {row + 1}" for line, row in zip(cells, rows, strict=True)), notes
