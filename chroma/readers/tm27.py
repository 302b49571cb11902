"""Lamps in the XML of ANSI/IES TM-27 (spectral data interchange), read without trusting the file."""

from __future__ import annotations

from dataclasses import dataclass, field
from xml.parsers import expat

import numpy as np

from chroma.readers.words import number
from observers.arrays import Array
from observers.errors import InputError


@dataclass
class Document:
    """What is kept of a file: the root, the texts of the header, and the points with their lines."""

    root: str = ""
    texts: dict[str, str] = field(default_factory=dict)
    points: list[tuple[int, str, str]] = field(default_factory=list)


def read(data: bytes, where: str) -> Document:
    """Parse the XML; raises InputError when it is not well formed, declares entities, or has another root."""
    found = Document()
    open_tags: list[str] = []
    parser = expat.ParserCreate(namespace_separator=" ")
    parser.buffer_text = True

    def start(tag: str, attributes: dict[str, str]) -> None:
        tag = tag.rpartition(" ")[2]
        if not open_tags:
            found.root = tag
            _check_root(tag, where)
        open_tags.append(tag)
        if tag == "SpectralData":
            found.points.append((parser.CurrentLineNumber, attributes.get("wavelength", ""), ""))

    def text(piece: str) -> None:
        tag = open_tags[-1]
        if tag == "SpectralData":
            line, wavelength, before = found.points[-1]
            found.points[-1] = (line, wavelength, before + piece)
        elif len(found.texts.get(tag, "")) < 10_000:
            found.texts[tag] = found.texts.get(tag, "") + piece

    def doctype(*_: object) -> None:
        # Entities are how a small file asks for all memory, or for another file; this form has no need of them.
        raise InputError("a document type declaration", where=where, why="such files may not declare entities")

    parser.StartElementHandler, parser.CharacterDataHandler = start, text
    parser.EndElementHandler = lambda _: open_tags.pop() and None
    parser.StartDoctypeDeclHandler = doctype
    try:
        parser.Parse(data, True)
    except (expat.ExpatError, LookupError, ValueError) as error:
        if isinstance(error, InputError):
            raise
        raise InputError("not well-formed XML", where=where, why=str(error), do="export it again") from None
    return found


def points(found: Document, where: str) -> tuple[Array, Array]:
    """Wavelengths (B,) nm and values (B,); raises InputError for a point that is not two numbers."""
    if len(found.points) < 2:
        raise InputError(f"{len(found.points)} spectral points", where=where, why="a spectrum has at least two")
    rows = []
    for line, *pair in found.points:
        values = [number(text.strip()) for text in pair]
        if None in values:
            bad = next(text for text, value in zip(pair, values, strict=True) if value is None)
            raise InputError(f"{bad.strip()[:40]!r} where a number is expected", where=f"{where} line {line}")
        rows.append(values)
    table = np.array(rows, dtype=float)
    return table[:, 0], table[:, 1]


def _check_root(tag: str, where: str) -> None:
    if not tag.upper().startswith("IESTM27"):
        raise InputError(
            f"XML with the root <{tag[:40]}>", where=where, why="of XML, only lamps in IES TM-27 are read",
            do="export the lamp as text or TM-27",
        )  # fmt: skip
