"""Files to spectra: what a file is follows from its first bytes, then from its words; its suffix only settles a tie."""

from __future__ import annotations

from typing import TYPE_CHECKING

from chroma.readers import text
from chroma.readers.text import SIZE_LIMIT
from chroma.spectra import ABSORBANCE_LIMIT, Quantity, Spectra
from observers.arrays import Array

if TYPE_CHECKING:
    from chroma.readers.lamp import LampTable

__all__ = ["SIZE_LIMIT", "read_lamp", "read_spectra"]


def read_spectra(
    path: str,
    *,
    quantity: Quantity | None = None,
    absorbance_limit: float = ABSORBANCE_LIMIT,
    sheet: str | None = None,
    grid: Array | None = None,
    size_limit: int = SIZE_LIMIT,
) -> tuple[Spectra, ...]:
    """The spectra of a file, one `Spectra` for each wavelength grid in it (nearly always one); replicates stay apart.

    path : a file, or ``-`` for standard input. quantity : settles what the file leaves open, and must not contradict
    it. sheet : a workbook's sheet by name. grid : wavelengths (B,) nm, for a file that holds none. size_limit : bytes.

    Raises InputError with file, line and column for whatever cannot be read without guessing.
    """
    from chroma.readers import assemble
    from chroma.readers.content import contents

    raw = text.load(path, size_limit)
    found = contents(raw, sheet=sheet, grid=grid, quantity_known=quantity is not None)
    return assemble.spectra_of(
        found.tables,
        found.described,
        raw.source,
        quantity=quantity,
        absorbance_limit=absorbance_limit,
        notes=found.notes,
    )


def read_lamp(path: str, *, sheet: str | None = None, size_limit: int = SIZE_LIMIT) -> LampTable:
    """A measured lamp from delimited text or IES TM-27; see `chroma.readers.lamp.read_lamp`."""
    from chroma.readers import lamp

    return lamp.read_lamp(path, sheet=sheet, size_limit=size_limit)
