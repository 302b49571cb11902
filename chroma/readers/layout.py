"""From rows of cells to tables: which way the wavelengths run, and whose numbers are whose."""

from __future__ import annotations

from collections.abc import Callable

from chroma.readers import words
from chroma.readers.across import Across, bands_across, labels_of, read_across
from chroma.readers.down import axis_columns, fill_names, read_down
from chroma.readers.header import Head
from chroma.readers.sheet import Region, Sheet, locate, numbers
from chroma.readers.table import Table
from observers.arrays import Array
from observers.errors import InputError


def tables_of(sheet: Sheet, stem: str, grid: Array | None = None) -> list[Table]:
    """The tables of a sheet, one for each column of wavelengths.

    grid : wavelengths (B,) nm for a file that holds none. Raises InputError when no axis, or two, can be made out.
    """
    region = locate(sheet)
    across = bands_across(sheet, region)
    head = Head(sheet, region, stem)
    down = axis_columns(sheet, region, head)
    if across and not down and across.columns[0] > region.labels:
        # Samples numbered 1, 2, 3, 3b: the header knows better than the majority that these are no values.
        region = locate(sheet, labels=across.columns[0])
        head = Head(sheet, region, stem)
    if across and down and not _settle(across, head):
        raise InputError(
            "wavelengths could run across the first row or down the first column",
            where=f"{sheet.where} line {across.row + 1}",
            why="both ascend in the range of wavelengths, and no word says which",
            do="write 'wavelength' or 'sample' into the first cell",
        )
    if across and (not down or _settle(across, head) == "across"):
        return [read_across(sheet, region, head, across)]
    if down:
        return read_down(sheet, region, head, down)
    return [_without_axis(sheet, region, head, grid)]


def _settle(across: Across, head: Head) -> str | None:
    """Which way the wavelengths run, by the word in the corner."""
    corner = across.corner or next(iter(head.cell(0)), "")
    if words.names_samples(corner):
        return "across"
    if words.is_axis_word(corner):
        return "down"
    return "across" if across.unit or across.said else None


def _without_axis(sheet: Sheet, region: Region, head: Head, grid: Array | None) -> Table:
    """Samples whose file holds no wavelengths: they stand on the grid that the caller gives."""
    rows, width = list(region.rows), region.columns - region.labels
    if grid is None:
        raise InputError(
            f"{len(rows)} rows of {width} numbers and no wavelengths",
            where=sheet.where,
            why="neither a column nor a row of names holds a run of wavelengths",
            do="give them with --wavelengths 350:750:1nm, if these are spectra",
        )
    values = numbers(sheet, rows, region.labels, region.columns)
    said = next((head.name(region.labels + i)[1] for i in range(width) if head.rows), None)
    if width == len(grid):
        columns = [(c, next(iter(head.cell(c)), "")) for c in range(region.labels)]
        names, notes = labels_of(sheet, rows, columns, head.stem)
        first = region.labels
        place: Callable[[int, int], str] = lambda sample, band: sheet.place(rows[sample], first + band)  # noqa: E731
        note = f"{len(rows)} samples in rows, wavelengths given by the caller"
    elif len(rows) == len(grid):
        values, notes = values.T, ()
        names = tuple(fill_names([head.name(c)[0] for c in range(width)], list(range(width)), head))
        place = lambda sample, band: sheet.place(rows[band], sample)  # noqa: E731
        note = f"{width} samples in columns, wavelengths given by the caller"
    else:
        raise InputError(
            f"{len(rows)} rows of {width} numbers",
            where=sheet.where,
            why=f"{len(grid)} wavelengths were given",
            do="give as many wavelengths as there are numbers",
        )
    said_of = (said,) * len(names)
    return Table(names, grid, "nm", values, said_of, head.meta, (note, *notes, *region.notes), place)
