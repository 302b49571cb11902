"""A measured lamp: relative spectral power from text, a workbook, or IES TM-27."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from chroma.readers import text
from chroma.readers.text import SIZE_LIMIT, Raw
from chroma.spectra import Source
from observers.arrays import Array, frozen
from observers.errors import InputError

NOISE = 0.01  # of the largest value: so little below zero is the noise of a dark reading


@dataclass(frozen=True, eq=False)
class LampTable:
    """A measured lamp: wavelengths (B,) nm ascending, relative power (B,) not negative, and where it came from."""

    name: str
    wavelength_nm: Array
    power: Array
    notes: tuple[str, ...]
    source: Source


def read_lamp(path: str, *, sheet: str | None = None, size_limit: int = SIZE_LIMIT) -> LampTable:
    """A lamp's relative spectral power from delimited text, a workbook, or ANSI/IES TM-27 XML.

    Raises InputError when the file holds not one lamp, fewer than two points, or negative power beyond noise.
    """
    raw = text.load(path, size_limit)
    name, axis, power, notes = _from_xml(raw) if _is_xml(raw) else _from_table(raw, sheet)
    if len(axis) < 2:
        raise InputError(f"{len(axis)} spectral points", where=path, why="a lamp has at least two")
    order = np.argsort(axis, kind="stable")
    axis, power = axis[order], power[order]
    power, more = _judged(axis, power, path)
    return LampTable(name, frozen(axis), frozen(power), notes + more, raw.source)


def _is_xml(raw: Raw) -> bool:
    head = raw.data[:400].replace(b"\x00", b"").lstrip(b"\xef\xbb\xbf\xff\xfe \t\r\n")
    return head.startswith(b"<")


def _from_xml(raw: Raw) -> tuple[str, Array, Array, tuple[str, ...]]:
    from chroma.readers import assemble, tm27
    from chroma.readers.table import Table

    document = tm27.read(raw.data, raw.path)
    kind = document.texts.get("SpectralQuantity", "").strip().lower()
    if kind in ("transmittance", "reflectance", "absorptance", "r-factor", "t-factor"):
        raise InputError(f"{kind}, and no lamp", where=raw.path, do="give a file of spectral power")
    axis, power = tm27.points(document, raw.path)
    lines = [line for line, _, _ in document.points]
    name = document.texts.get("Description", "").strip() or raw.stem
    place = lambda _, band: f"{raw.path} line {lines[band]}"  # noqa: E731
    table = assemble.on_grid(Table((name,), axis, "nm", power[None, :], (None,), (), (), place), raw.path)
    return name, table.axis, table.values[0], (f"IES TM-27, {kind or 'quantity not said'}", *table.notes)


def _from_table(raw: Raw, sheet: str | None) -> tuple[str, Array, Array, tuple[str, ...]]:
    from chroma.readers import assemble
    from chroma.readers.content import contents

    found = contents(raw, sheet=sheet, grid=None, quantity_known=True)
    names = [name for table in found.tables for name in table.names]
    if len(names) != 1:
        some = ", ".join(names[:5])
        raise InputError(
            f"{len(names)} columns of numbers ({some})", where=raw.path, why="a lamp is one", do="save it alone"
        )
    table = found.tables[0]
    said = table.said[0]
    if said is not None and said.strong and said.quantity != "counts":
        raise InputError(f"{said.quantity}, and no lamp", where=raw.path, do="give a file of spectral power")
    table = assemble.on_grid(table, raw.path)
    return names[0], table.axis, table.values[0], ("; ".join((found.described, *table.notes)), *found.notes)


def _judged(axis: Array, power: Array, where: str) -> tuple[Array, tuple[str, ...]]:
    largest = float(power.max())
    if largest <= 0:
        raise InputError("a lamp without power", where=where, why="every value is zero or below")
    lowest = int(np.argmin(power))
    if power[lowest] < -NOISE * largest:
        raise InputError(
            f"a power of {power[lowest]:.4g} at {axis[lowest]:g} nm", where=where, why="power cannot be negative",
            do="take the dark reading off, or set it to zero",
        )  # fmt: skip
    below = int((power < 0).sum())
    return np.maximum(power, 0.0), (f"{below} values a little below zero set to zero",) if below else ()
