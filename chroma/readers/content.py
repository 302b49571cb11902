"""What a file is, by its content, and its tables of numbers."""

from __future__ import annotations

from dataclasses import dataclass

from chroma.readers import text
from chroma.readers.table import Table
from chroma.readers.text import Raw
from observers.arrays import Array
from observers.errors import InputError


@dataclass(frozen=True)
class Contents:
    """The tables of a file, what kind of file it was, and notes that hold for all of it."""

    tables: list[Table]
    described: str
    notes: tuple[str, ...] = ()


def contents(raw: Raw, *, sheet: str | None, grid: Array | None, quantity_known: bool) -> Contents:
    """The tables of a file of any kind that is read; raises InputError for other kinds."""
    kind = text.kind(raw.data)
    if kind == "parquet":
        from chroma.readers import parquet

        return Contents(parquet.tables_of(raw), "Parquet")
    if kind == "zip":
        return _workbook(raw, sheet, grid)
    if kind != "text":
        do = "unpack it first" if "archive" in kind else "export the spectra as delimited text"
        raise InputError(f"{kind} and no spectra", where=raw.path, do=do)
    words, notes = text.decode(raw)
    found = _text(raw, words, grid, quantity_known)
    return Contents(found.tables, found.described, (*found.notes, *notes))


def _workbook(raw: Raw, name: str | None, grid: Array | None) -> Contents:
    from chroma.readers import layout, workbook

    found, notes = workbook.sheet_of(raw, name)
    return Contents(layout.tables_of(found, raw.stem, grid), found.described, notes)


def _text(raw: Raw, words: str, grid: Array | None, quantity_known: bool) -> Contents:
    head = words[:200].lstrip()
    if head.startswith("<"):
        return _xml(raw)
    if head.startswith("{"):
        from chroma.readers import json_

        return Contents(json_.tables_of(words, raw.path), "JSON")
    labelled = _labelled(raw, words, quantity_known)
    if labelled is not None:
        return labelled
    from chroma.readers import delimited, layout

    cells = delimited.sheet_of(raw, words)
    return Contents(layout.tables_of(cells, raw.stem, grid), cells.described)


def _labelled(raw: Raw, words: str, quantity_known: bool) -> Contents | None:
    """JCAMP-DX or CGATS.17, where the text is either; their readers are loaded only for a text that has their marks."""
    if "##" in words[:5000]:
        from chroma.readers import jcamp

        if jcamp.looks_like(words):
            lines = text.lines_of(raw, words)
            return Contents(jcamp.tables_of(lines, raw.path, quantity_known=quantity_known), "JCAMP-DX")
    if "BEGIN_DATA_FORMAT" in words[:200_000]:
        from chroma.readers import cgats

        if cgats.looks_like(words):
            return Contents(cgats.tables_of(text.lines_of(raw, words), raw.path), "CGATS.17 text")
    return None


def _xml(raw: Raw) -> Contents:
    """Samples in the XML of lamps: the form has a word for transmittance and reflectance too."""
    from chroma.readers import tm27
    from chroma.readers.words import meaning

    document = tm27.read(raw.data, raw.path)
    kind = document.texts.get("SpectralQuantity", "").strip()
    said = meaning(kind)[0]
    if said is None or said.quantity not in ("transmittance", "reflectance"):
        raise InputError(
            f"a lamp ({kind or 'no SpectralQuantity'}) and no sample", where=raw.path, do="give it with --illuminant"
        )
    axis, values = tm27.points(document, raw.path)
    name = document.texts.get("Description", "").strip() or raw.stem
    lines = [line for line, _, _ in document.points]
    place = lambda _, band: f"{raw.path} line {lines[band]}"  # noqa: E731
    return Contents([Table((name,), axis, "nm", values[None, :], (said,), (), ("1 sample",), place)], "IES TM-27")
