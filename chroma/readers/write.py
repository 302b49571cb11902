"""Spectra and tables of results to files: written beside, then renamed, never half."""

from __future__ import annotations

import csv
import json
import os
import secrets
import stat
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import Any, TypeVar

import numpy as np

from chroma.readers.text import reason
from chroma.spectra import Spectra
from observers.errors import InputError

Writer = TypeVar("Writer")
Cell = str | float | int | bool | None


@contextmanager
def atomic_write(path: str, force: bool = False) -> Iterator[Path]:
    """A new file beside `path` to write into; renamed to `path` when the block ends well, removed when it does not.

    Raises InputError when `path` exists and `force` is not given, is no ordinary file, or cannot be written.
    """
    target = Path(os.path.realpath(path))  # a link stays a link, and what it points at is replaced
    beside = target.parent / f".{secrets.token_hex(6)}.part"
    try:
        _refuse_existing(target, path, force)
        with beside.open("xb"):
            pass
        yield beside
        with beside.open("rb") as written:
            os.fsync(written.fileno())
        _refuse_existing(target, path, force)
        beside.replace(target)
    except (OSError, ValueError) as error:
        if isinstance(error, InputError):
            raise
        raise InputError("cannot be written", where=path, why=reason(error), do="give another name") from None
    finally:
        _remove(beside)


def write_spectra(spectra: Spectra, path: str, *, force: bool = False) -> None:
    """Write spectra by suffix (.csv, .parquet, .jdx, .dx, .json, .xlsx), so that `read_spectra` gives them back.

    Raises InputError for another suffix, an existing file without `force`, or a place that cannot be written.
    """
    from chroma.readers import write_jcamp

    kinds: dict[str, Callable[[Spectra, Path], None]] = {
        ".csv": _spectra_csv,
        ".parquet": _spectra_parquet,
        ".jdx": write_jcamp.write,
        ".dx": write_jcamp.write,
        ".json": _spectra_json,
        ".xlsx": _spectra_xlsx,
    }
    writer = _by_suffix(kinds, path)
    with atomic_write(path, force) as beside:
        writer(spectra, beside)


def write_rows(rows: Sequence[Mapping[str, object]], path: str, *, force: bool = False) -> None:
    """Write a table of results by suffix: .csv, .parquet, .json, .xlsx; a row need not have every column.

    Raises InputError for another suffix, an existing file without `force`, or a place that cannot be written.
    """
    kinds: dict[str, Callable[[Sequence[Mapping[str, object]], Path], None]] = {
        ".csv": _rows_csv,
        ".parquet": _rows_parquet,
        ".json": _rows_json,
        ".xlsx": _rows_xlsx,
    }
    writer = _by_suffix(kinds, path)
    with atomic_write(path, force) as beside:
        writer(rows, beside)


def _refuse_existing(target: Path, path: str, force: bool) -> None:
    try:
        mode = target.stat().st_mode
    except FileNotFoundError:
        if not target.parent.is_dir():
            raise InputError(
                "cannot be written", where=path, why="there is no such folder", do="make it first"
            ) from None
        return
    if not stat.S_ISREG(mode):
        raise InputError("cannot be written", where=path, why="it is no ordinary file", do="give another name")
    if not force:
        raise InputError("the file exists already", where=path, do="give --force, or another name")


def _remove(path: Path) -> None:
    with suppress(OSError):  # it was never made, or its folder is gone
        path.unlink(missing_ok=True)


def _by_suffix(kinds: Mapping[str, Writer], path: str) -> Writer:
    suffix = Path(path).suffix.lower()
    if suffix not in kinds:
        known = ", ".join(kinds)
        raise InputError(f"cannot write {suffix or 'a file without suffix'!r}", where=path, why=f"known are {known}")
    return kinds[suffix]


def _header(spectra: Spectra) -> list[str]:
    lines = [f"# lamplit spectra: {spectra.quantity}"]
    return lines + ([f"# path length: {spectra.path_length_mm!r} mm"] if spectra.path_length_mm else [])


def _bands(spectra: Spectra) -> list[str]:
    return [f"{nm!r} nm" for nm in spectra.wavelength_nm.tolist()]


def _name(name: str) -> str:
    """A name on one line, as every form needs it."""
    return " ".join(name.split())


def _spectra_csv(spectra: Spectra, path: Path) -> None:
    # Samples in rows: a line stays short however many there are. Names are quoted, so that none reads as a remark.
    with path.open("w", encoding="utf-8", newline="") as stream:
        stream.writelines(f"{line}\n" for line in _header(spectra))
        stream.write(",".join(["name", *_bands(spectra)]) + "\n")
        for name, values in zip(spectra.names, spectra.values, strict=True):
            quoted = _name(name).replace('"', '""')
            stream.write(f'"{quoted}",' + ",".join(map(repr, values.tolist())) + "\n")


def _spectra_xlsx(spectra: Spectra, path: Path) -> None:
    head: list[list[object]] = [[line] for line in _header(spectra)]
    rows = ([_name(name), *values.tolist()] for name, values in zip(spectra.names, spectra.values, strict=True))
    _workbook(path, [*head, ["name", *_bands(spectra)]], rows)


def _spectra_json(spectra: Spectra, path: Path) -> None:
    samples = [{"name": n, "values": v.tolist()} for n, v in zip(spectra.names, spectra.values, strict=True)]
    _json(
        path,
        {
            "quantity": spectra.quantity,
            "wavelength_nm": spectra.wavelength_nm.tolist(),
            "path_length_mm": spectra.path_length_mm,
            "samples": samples,
            "sources": [{"path": source.path, "sha256": source.sha256} for source in spectra.sources],
            "notes": list(spectra.notes),
        },
    )


def _spectra_parquet(spectra: Spectra, path: Path) -> None:
    from chroma.readers.parquet import PATH_KEY, QUANTITY_KEY

    pyarrow, parquet = _pyarrow()
    columns = {"name": pyarrow.array(spectra.names, pyarrow.string())}
    columns |= {repr(nm): spectra.values[:, band] for band, nm in enumerate(spectra.wavelength_nm.tolist())}
    metadata = {QUANTITY_KEY: spectra.quantity.encode()}
    if spectra.path_length_mm:
        metadata[PATH_KEY] = repr(spectra.path_length_mm).encode()
    parquet.write_table(pyarrow.table(columns).replace_schema_metadata(metadata), path)


def _columns(rows: Sequence[Mapping[str, object]]) -> list[str]:
    """The columns of all rows, in the order in which they are first met."""
    return list(dict.fromkeys(key for row in rows for key in row))


def _cell(value: object) -> Cell:
    """A value as a table's cell: numpy's numbers become Python's, lists become JSON text."""
    if isinstance(value, np.generic):
        value = value.item()
    if value is None or isinstance(value, str | bool | int | float):
        return value
    return json.dumps(_plain(value), ensure_ascii=False)


def _plain(value: object) -> object:
    """A value as JSON can hold it; what is no finite number becomes null."""
    if isinstance(value, np.ndarray | np.generic):
        value = value.tolist()
    if isinstance(value, float):
        return value if np.isfinite(value) else None
    if isinstance(value, Mapping):
        return {str(key): _plain(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(item) for item in value]
    return value if value is None or isinstance(value, str | bool | int) else str(value)


def _rows_csv(rows: Sequence[Mapping[str, object]], path: Path) -> None:
    columns = _columns(rows)
    with path.open("w", encoding="utf-8", newline="") as stream:
        writer = csv.writer(stream, lineterminator="\n")
        writer.writerow(columns)
        writer.writerows([_cell(row.get(column)) for column in columns] for row in rows)


def _rows_json(rows: Sequence[Mapping[str, object]], path: Path) -> None:
    _json(path, [dict(row) for row in rows])


def _rows_xlsx(rows: Sequence[Mapping[str, object]], path: Path) -> None:
    columns = _columns(rows)
    _workbook(path, [list(columns)], ([_cell(row.get(column)) for column in columns] for row in rows))


def _rows_parquet(rows: Sequence[Mapping[str, object]], path: Path) -> None:
    pyarrow, parquet = _pyarrow()
    columns = {column: _uniform([_cell(row.get(column)) for row in rows]) for column in _columns(rows)}
    parquet.write_table(pyarrow.table(columns), path)


def _uniform(values: list[Cell]) -> list[Cell]:
    """A column of one kind, as Parquet needs it: whole numbers among others become floats, mixtures become text."""
    kinds = {type(value) for value in values if value is not None}
    if kinds == {int, float}:
        return [None if value is None else float(value) for value in values]
    return values if len(kinds) <= 1 else [None if value is None else str(value) for value in values]


def _json(path: Path, found: object) -> None:
    with path.open("w", encoding="utf-8") as stream:
        json.dump(_plain(found), stream, ensure_ascii=False, allow_nan=False, indent=1)
        stream.write("\n")


def _workbook(path: Path, head: Sequence[Sequence[object]], rows: Iterable[Sequence[object]]) -> None:
    try:
        import openpyxl
    except ImportError:
        raise InputError("writing a workbook needs openpyxl", do="pip install 'lamplit[workbook]'") from None
    book = openpyxl.Workbook(write_only=True)
    sheet = book.create_sheet("lamplit")
    for row in (*head, *rows):
        sheet.append([_storable(sheet, value) for value in row])
    with path.open("wb") as stream:  # by its file, since the library goes by the suffix of a name
        book.save(stream)


def _storable(sheet: Any, value: object) -> object:
    """A cell that a workbook can hold: text stays text even where it begins like a formula."""
    if isinstance(value, float) and not np.isfinite(value):
        return None
    if not isinstance(value, str):
        return value
    from openpyxl.cell import WriteOnlyCell

    cell = WriteOnlyCell(sheet, "".join(c for c in value if c >= " " or c in "\t\n"))
    cell.data_type = "s"
    return cell


def _pyarrow() -> tuple[Any, Any]:
    try:
        import pyarrow
        from pyarrow import parquet
    except ImportError:
        raise InputError("writing Parquet needs pyarrow", do="pip install 'lamplit[parquet]'") from None
    return pyarrow, parquet
