"""Spectra and dyes on one grid: the spectra's own, over the range that all of them cover."""

from __future__ import annotations

from collections.abc import Sequence

from chroma.dye.model import Dye
from chroma.dye.solution import Shelf, shelf
from chroma.resample import within
from chroma.spectra import Spectra
from observers.errors import InputError


def shared(
    spectra: Spectra, dyes: Sequence[Dye], *, span_nm: tuple[float, float] | None = None
) -> tuple[Spectra, Shelf]:
    """The spectra cut to what the dyes (and the span, where one is given) cover, and the dyes on that grid.

    Raises InputError for no dye, or a range with fewer than two bands.
    """
    if not dyes:
        raise InputError("no dye was given", do="name one with --dye")
    low = max(dye.wavelength_nm[0] for dye in dyes)
    high = min(dye.wavelength_nm[-1] for dye in dyes)
    if span_nm is not None:
        low, high = max(low, span_nm[0]), min(high, span_nm[1])
    cut = within(spectra, low, high)
    return cut, shelf(dyes, wavelength_nm=cut.wavelength_nm)
