"""Workbooks (.xlsx): a sheet's cells take the same road as delimited text."""

from __future__ import annotations

import io
import re
import warnings
import zipfile
from collections.abc import Iterator
from typing import Any

from chroma.readers.sheet import Sheet, locate
from chroma.readers.text import Raw, not_text
from observers.errors import InputError

UNPACKED_LIMIT = 200 << 20  # bytes; a workbook that unpacks to more is a trap, or belongs into Parquet
CELL_LIMIT = 20_000_000


def sheet_of(raw: Raw, name: str | None = None) -> tuple[Sheet, tuple[str, ...]]:
    """The named sheet of a workbook, or the first that holds a table, and notes.

    Raises InputError when it is no workbook, unpacks to too much, or has no such sheet or table.
    """
    _check_archive(raw)
    try:
        import openpyxl
    except ImportError:
        raise InputError(
            "reading a workbook needs openpyxl", where=raw.path, do="pip install 'lamplit[workbook]'"
        ) from None
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # about styles and extensions, which hold no numbers
            book = openpyxl.load_workbook(io.BytesIO(raw.data), read_only=True, data_only=True)
            return _choose(book, raw, name)
    except InputError:
        raise
    except Exception as error:  # damaged bytes make the library raise nearly anything
        raise InputError("a damaged workbook", where=raw.path, why=str(error)[:200], do="save it again") from None


def _check_archive(raw: Raw) -> None:
    try:
        with zipfile.ZipFile(io.BytesIO(raw.data)) as archive:
            entries = archive.infolist()
    except (zipfile.BadZipFile, ValueError, OSError, NotImplementedError, EOFError, IndexError):
        raise InputError("a damaged zip archive", where=raw.path, do="save it again") from None
    if not any(entry.filename.startswith("xl/") for entry in entries):
        raise not_text(raw, "it holds no workbook")
    size = sum(entry.file_size for entry in entries)
    if size > UNPACKED_LIMIT:
        raise InputError(
            f"the workbook unpacks to {size >> 20} MiB", where=raw.path, why=f"the limit is {UNPACKED_LIMIT >> 20} MiB",
            do="save it as CSV or Parquet",
        )  # fmt: skip


def _choose(book: Any, raw: Raw, name: str | None) -> tuple[Sheet, tuple[str, ...]]:
    if name is not None and name not in book.sheetnames:
        raise InputError(f"no sheet is named {name!r}", where=raw.path, why=f"there are {', '.join(book.sheetnames)}")
    titles = [name] if name is not None else list(book.sheetnames)
    refusal: InputError | None = None
    for title in titles:
        sheet = _sheet(list(_rows(book[title], raw.path)), raw, title)
        try:
            locate(sheet)
        except InputError as error:
            refusal = refusal or error
            continue
        others = [other for other in book.sheetnames if other != title]
        return sheet, (f"sheet {title!r} read; not read: {', '.join(others)}",) if others else ()
    raise refusal or InputError("a workbook without sheets", where=raw.path)


def _rows(sheet: Any, where: str) -> Iterator[list[str]]:
    if not hasattr(sheet, "iter_rows"):  # a sheet of one chart
        return
    sheet.reset_dimensions()  # what a file says of its own size need not be so
    budget = CELL_LIMIT
    for row in sheet.iter_rows(values_only=True):
        budget -= len(row) + 1
        if budget < 0:
            raise InputError(f"more than {CELL_LIMIT} cells", where=where, do="save the table as CSV or Parquet")
        yield [_text(cell) for cell in row]


def _text(cell: object) -> str:
    if cell is None:
        return ""
    if isinstance(cell, float):
        return repr(int(cell)) if cell.is_integer() and abs(cell) < 1e15 else repr(cell)
    text = str(cell).strip()
    # A number typed with a decimal comma where the program expected a point stays text in the file.
    return text.replace(",", ".") if re.fullmatch(r"[+-]?\d{1,9},\d{1,20}", text, re.ASCII) else text


def _sheet(rows: list[list[str]], raw: Raw, title: str) -> Sheet:
    width = max((len(row) for row in rows), default=0)
    where = f"{raw.path} sheet {title!r}"

    def cells(row: int) -> list[str]:
        return rows[row] + [""] * (width - len(rows[row]))

    def line(row: int) -> str:
        return "\t".join(rows[row])

    return Sheet(
        where,
        len(rows),
        cells,
        lambda row, count: rows[row][:count],
        line,
        lambda *_: None,
        ".",
        f"workbook, sheet {title!r}",
    )
