"""Parquet tables: one sample a row, one column a wavelength, the quantity in the file's metadata."""

from __future__ import annotations

from typing import Any

import numpy as np

from chroma.readers import words
from chroma.readers.table import LIKELY_NM, Table
from chroma.readers.text import Raw
from observers.errors import InputError

QUANTITY_KEY, PATH_KEY = b"lamplit.quantity", b"lamplit.path_length_mm"
MEMORY_LIMIT = 4 << 30  # bytes of numbers; a small file can promise more


def tables_of(raw: Raw) -> list[Table]:
    """The spectra of a Parquet file; raises InputError when it is damaged or has no columns of wavelengths."""
    try:
        import pyarrow
        from pyarrow import parquet
    except ImportError:
        raise InputError("reading Parquet needs pyarrow", where=raw.path, do="pip install 'lamplit[parquet]'") from None
    try:
        source = parquet.ParquetFile(pyarrow.BufferReader(raw.data))
        _refuse_huge(source, raw.path)
        return [_table(source, raw)]
    except InputError:
        raise
    except Exception as error:  # damaged bytes make the library raise nearly anything
        raise InputError("a damaged Parquet file", where=raw.path, why=str(error).split("\n")[0][:200]) from None


def _refuse_huge(source: Any, where: str) -> None:
    size = source.metadata.num_rows * source.metadata.num_columns * 8
    if size > MEMORY_LIMIT:
        raise InputError(
            f"{size / (1 << 30):.0f} GiB of numbers", where=where, why="so much is not read into memory at once",
            do="give it in parts",
        )  # fmt: skip


def _table(source: Any, raw: Raw) -> Table:
    schema = source.schema_arrow
    bands = [(name, band) for name in schema.names if (band := words.band(name)) is not None]
    axis = np.array([number for _, (number, _, _) in bands])
    units = {unit for _, (_, _, unit) in bands}
    if len(bands) < 2 or (units == {""} and not (LIKELY_NM[0] <= axis.min() and axis.max() <= LIKELY_NM[1])):
        some = ", ".join(schema.names[:6])
        raise InputError("no columns named by wavelengths", where=raw.path, why=f"the columns are {some}")
    if len(units) > 1:
        raise InputError("columns in different units", where=raw.path, why=", ".join(sorted(units)))
    texts = [name for name in schema.names if _is_text(schema.field(name).type)]
    table = source.read(columns=[name for name, _ in bands] + texts[:1])
    values = np.empty((table.num_rows, len(bands)))
    for column, (name, _) in enumerate(bands):
        values[:, column] = _floats(table.column(name), name, raw.path)
    names = table.column(texts[0]).to_pylist() if texts else [f"row {i + 1}" for i in range(table.num_rows)]
    names = tuple(f"row {i + 1}" if name is None else str(name) for i, name in enumerate(names))
    if not names:
        raise InputError("a table without rows", where=raw.path)
    return _said(
        Table(names, axis, units.pop() or None, values, (), (), _notes(schema, bands, texts), _place(raw)),
        schema,
        bands,
    )


def _place(raw: Raw) -> Any:
    return lambda sample, band: (
        f"{raw.path} row {sample + 1} band {band + 1}" if sample >= 0 else f"{raw.path} band {band + 1}"
    )


def _is_text(kind: Any) -> bool:
    return str(kind) in ("string", "large_string", "string_view") or str(kind).startswith("dictionary<values=string")


def _floats(column: Any, name: str, where: str) -> Any:
    kind = str(column.type)
    if not kind.startswith(("double", "float", "halffloat", "int", "uint", "decimal")):
        raise InputError(f"the column {name!r} holds {kind}", where=where, why="a band holds numbers")
    return column.cast("double").to_numpy(zero_copy_only=False)


def _notes(schema: Any, bands: list[tuple[str, Any]], texts: list[str]) -> tuple[str, ...]:
    used = {name for name, _ in bands} | set(texts[:1])
    others = [name for name in schema.names if name not in used]
    return ("samples in rows", *((f"columns not read: {', '.join(others[:8])}",) if others else ()))


def _said(table: Table, schema: Any, bands: list[tuple[str, Any]]) -> Table:
    """The table with its quantity: from the file's metadata, else from the word before the wavelengths."""
    from dataclasses import replace

    metadata = schema.metadata or {}
    text = (metadata.get(QUANTITY_KEY) or b"").decode("utf-8", "replace")
    path = (metadata.get(PATH_KEY) or b"").decode("utf-8", "replace")
    said = words.meaning(text or bands[0][1][1])[0]
    meta = (f"path length: {path} mm",) if path else ()
    return replace(table, said=(said,) * len(table.names), meta=meta)
