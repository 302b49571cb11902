"""Samples in columns: the wavelengths run down the first column, or down several."""

from __future__ import annotations

import numpy as np

from chroma.readers import words
from chroma.readers.header import Head
from chroma.readers.sheet import Region, Sheet, no_table, numbers
from chroma.readers.table import LIKELY_NM, Table
from chroma.readers.words import Meaning
from observers.arrays import Array
from observers.errors import InputError


def axis_columns(sheet: Sheet, region: Region, head: Head) -> tuple[int, ...]:
    """The columns that hold wavelengths; empty when the first does not."""
    if region.labels or len(region.rows) < 2:
        return ()
    sample = _column(sheet, region, 0)
    if not _is_axis(sample, head.cell(0)):
        return ()
    named = [c for c in range(1, region.columns) if any(words.is_axis_word(cell) for cell in head.cell(c))]
    more = [c for c in named if _is_axis(_column(sheet, region, c), [])]
    if not more and region.columns >= 4 and not region.columns % 2:
        pairs = range(2, region.columns, 2)
        if all(_is_axis(_column(sheet, region, c), []) and not _says_quantity(head, c) for c in pairs):
            more = list(pairs)
    return (0, *more)


def _says_quantity(head: Head, column: int) -> bool:
    return any(words.meaning(cell)[0] is not None for cell in head.cell(column))


def _column(sheet: Sheet, region: Region, column: int) -> Array:
    """A column's numbers, NaN where there is none; for looking at, so bad cells do not matter yet."""
    quick = sheet.fast(region.rows, column, column + 1)
    if quick is not None and len(quick) == len(region.rows):
        return quick[:, 0]
    found = (sheet.cells(row) for row in region.rows)
    values = (sheet.number(cells[column]) if column < len(cells) else None for cells in found)
    return np.array([np.nan if value is None else value for value in values])


def _is_axis(column: Array, title: list[str]) -> bool:
    """Whether a column can be wavelengths: it runs one way (but for the row of names), in a range that light has."""
    rest = column[1:] if len(column) > 2 else column
    rest = rest[np.isfinite(rest)]
    if len(rest) < 2:
        return False
    steps = np.sign(np.diff(rest))
    astray = len(steps) - max((steps > 0).sum(), (steps < 0).sum())
    if any(words.is_axis_word(cell) for cell in title):
        return bool(astray <= max(1, 0.4 * len(steps)) and rest.min() > 0)  # a slip is refused later, with its line
    likely = LIKELY_NM[0] <= rest.min() and rest.max() <= 50_000
    small = rest.max() <= 3.5 and rest.min() >= 0.15 and not astray and len(rest) > 4
    return bool((likely and astray <= 0.1 * len(steps)) or small)


def read_down(sheet: Sheet, region: Region, head: Head, columns: tuple[int, ...]) -> list[Table]:
    """The tables beside these columns of wavelengths; raises InputError for a cell that is no number."""
    rows, notes = list(region.rows), list(region.notes)
    names_row = _names_row(_column(sheet, region, 0))
    numbered: list[str] = []
    if names_row:
        numbered = sheet.cells(rows.pop(0))
        notes.append(f"line {region.rows[0] + 1} read as names: its first cell is no wavelength")
    block = numbers(sheet, rows, 0, region.columns)
    tables = []
    for start, stop in zip(columns, (*columns[1:], region.columns), strict=True):
        given = [numbered[c] if c < len(numbered) else "" for c in range(start + 1, stop)] if numbered else []
        over = head.name(start)[0] if len(columns) > 1 else ""
        tables.append(_one_down(sheet, head, rows, block[:, start:stop], start, given or [over] * (over != "")))
    tables[0] = tables[0].noted(*notes)
    return tables


def _names_row(column: Array) -> bool:
    """Whether the first row of numbers is a row of names: its own wavelength is none, or runs the wrong way."""
    if column[0] < 0:  # a slip of the pen, which is refused later with its line
        return False
    if len(column) < 4:
        return bool(np.isnan(column[0]) or column[0] == 0)
    steps = np.diff(column[1:])
    if not (np.all(steps > 0) or np.all(steps < 0)):
        return False
    wrong_way = np.sign(column[1] - column[0]) != np.sign(steps[0])
    far = column[1:].min() >= 100 and not 100 <= column[0] <= 1e6
    return bool(np.isnan(column[0]) or column[0] == 0 or wrong_way or far)


def _one_down(sheet: Sheet, head: Head, rows: list[int], block: Array, start: int, given: list[str]) -> Table:
    """The table of one column of wavelengths; `given` are names that do not stand over the columns themselves."""
    filled = np.asarray(np.isfinite(block).any(axis=1))
    axis = block[filled, 0]
    kept = [row for row, full in zip(rows, filled, strict=True) if full]
    if np.isnan(axis).any():
        line = kept[int(np.flatnonzero(np.isnan(axis))[0])]
        raise InputError("a row without its wavelength", where=sheet.place(line, start), do="fill the cell in")
    values = block[filled, 1:].T
    used = [i for i in range(len(values)) if np.isfinite(values[i]).any()]
    values = values[used]
    if not used:
        raise no_table(sheet.where)
    found = _titles(head, [start + 1 + i for i in used])
    names = [name for name, _ in found]
    if len(given) == 1 and not any(names):
        names = given * len(used)
    elif len(given) > 1 or (given and len(used) == 1):
        names = [given[i] for i in used]
    keep, notes = _without_flags(names, values, [said for _, said in found])
    columns = [start + 1 + used[i] for i in keep]
    _refuse_unnamed(sheet, head, [(names[i], found[i][1]) for i in keep], columns)
    unit = next((u for cell in head.cell(start) if (u := words.unit_of(cell))), None)
    final = fill_names([names[i] for i in keep], columns, head)
    count = f"{len(keep)} {'sample' if len(keep) == 1 else 'samples'} in columns"
    return Table(
        tuple(final),
        axis,
        unit,
        values[keep],
        tuple(found[i][1] for i in keep),
        head.meta,
        (count, *notes),
        lambda sample, band: sheet.place(kept[band], columns[sample] if sample >= 0 else start),
    )


def _titles(head: Head, columns: list[int]) -> list[tuple[str, Meaning | None]]:
    """Names and quantities of columns; a word that only some of them have, or a letter that differs, is a name."""
    found = [head.name(column) for column in columns]
    if any(name and said is None for name, said in found):  # a sample may be called "raw" beside others with names
        return [(said.word, None) if said is not None and not name else (name, said) for name, said in found]
    weak = [said.word for _, said in found if said is not None and not said.strong]
    if not weak or (len(weak) == len(found) and len(set(weak)) == 1):
        return found
    return [(s.word, None) if s is not None and not s.strong and not name else (name, s) for name, s in found]


def _without_flags(names: list[str], values: Array, said: list[Meaning | None]) -> tuple[list[int], list[str]]:
    """Leave out columns of flags: a second run of all the names over one constant, or nameless constant columns."""
    count, half = len(names), len(names) // 2
    constant = [bool(np.nanmin(row) == np.nanmax(row)) for row in values] if values.shape[1] > 2 else [False] * count
    if count > 1 and count % 2 == 0 and names[:half] == names[half:] and any(names):
        second = values[half:]
        if all(constant[half:]) and np.nanmin(second) == np.nanmax(second) and not all(constant[:half]):
            note = f"{half} columns left out as flags: they repeat all the names and hold {second[0, 0]:g} throughout"
            return list(range(half)), [note]
    flags = [i for i in range(count) if constant[i] and not names[i] and said[i] is None]
    keep = [i for i in range(count) if i not in flags]
    if not flags or not any(names[i] or said[i] for i in keep):
        return list(range(count)), []
    return keep, [f"a column without a name left out as flags: it holds {values[i][0]:g} throughout" for i in flags]


def _refuse_unnamed(sheet: Sheet, head: Head, found: list[tuple[str, Meaning | None]], columns: list[int]) -> None:
    """Fewer names than columns between commas: the commas may be decimal signs as well, and 0,912 two cells."""
    nameless = [c for c, (name, said) in zip(columns, found, strict=True) if not name and said is None]
    if head.rows and nameless and len(nameless) < len(columns) and "comma" in sheet.described.split(", ")[1]:
        raise InputError(
            f"column {nameless[0] + 1} has no name and others have",
            where=f"{sheet.where} line {head.rows[0][0] + 1}",
            why="commas may part the cells and the decimals alike",
            do="export with semicolons or decimal points, or name every column",
        )


def fill_names(names: list[str], columns: list[int], head: Head) -> list[str]:
    """Names where the header has none: the title or the file's for one sample, with the column for several."""
    if all(names):
        return names
    if len(names) == 1:
        return [head.title or head.stem]
    return [name or f"{head.stem} column {column + 1}" for name, column in zip(names, columns, strict=True)]
