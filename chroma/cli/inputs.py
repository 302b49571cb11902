"""From words on the command line to spectra, lamps and conditions."""

from __future__ import annotations

import os
from collections.abc import Sequence
from dataclasses import replace
from functools import lru_cache
from types import MappingProxyType
from typing import TYPE_CHECKING

from chroma.cli.options import Reading, Viewing
from chroma.cli.progress import counted
from chroma.quantity import corrected
from chroma.readers import read_spectra
from chroma.resample import on_grid
from chroma.spectra import Spectra, averaged, joined
from chroma.units import grid_nm
from chroma.viewing import Conditions
from observers.errors import InputError
from observers.human import observer
from observers.illuminants import Illuminant, illuminant, measured_lamp

if TYPE_CHECKING:
    from chroma.tolerance import Tolerance


def spectra_from(files: Sequence[str], reading: Reading, *, grid: str | None = None) -> Spectra:
    """All samples of the files on one grid, replicates averaged, blank and dark taken off."""
    parts = [part for file in counted(files, "reading file") for part in read_one(file, reading)]
    if grid is not None:
        parts = [on_grid(part, grid_nm(grid)) for part in parts]
    return corrected(averaged(joined(parts)), blank=reading.blank, dark=reading.dark)


def read_one(file: str, reading: Reading) -> tuple[Spectra, ...]:
    """The spectra of one file, as its options say; a file that was just read, as batches and as target, is not read again."""
    return _read(file, _version(file), reading)


def _version(file: str) -> tuple[int, int, int] | None:
    """What changes when a file does; None for a stream, which can be read but once."""
    try:
        found = os.stat(file)
    except OSError:
        return None
    return found.st_mtime_ns, found.st_size, found.st_ino


@lru_cache(maxsize=4)
def _read(file: str, version: tuple[int, int, int] | None, reading: Reading) -> tuple[Spectra, ...]:
    grid = grid_nm(reading.wavelengths) if reading.wavelengths is not None else None
    parts = read_spectra(
        file, quantity=reading.quantity, absorbance_limit=reading.absorbance_limit, sheet=reading.sheet, grid=grid
    )
    name = "stdin" if file == "-" else os.path.basename(file)
    return tuple(replace(part, notes=tuple(f"{name}: {note}" for note in part.notes)) for part in parts)


def target_from(text: str, reading: Reading) -> Spectra:
    """One sample from ``FILE`` or ``FILE:NAME``; the blank and dark of the options apply where the file holds them."""
    file, _, name = text.rpartition(":")
    if os.path.exists(text) or not file or not (file == "-" or os.path.exists(file)):
        file, name = text, ""
    found = averaged(joined(read_one(file, reading)))
    if reading.blank in found.names:
        found = corrected(found, blank=reading.blank, dark=reading.dark)
    if name:
        try:
            return found.take([found.row(name)])
        except InputError as error:
            raise error.at(file) from None
    if len(found) > 1:
        some = ", ".join(found.names[:8])
        raise InputError(
            f"{len(found)} samples", where=file, why=f"a target is one; there are {some}", do=f"say {file}:NAME"
        )
    return found


def conditions_from(viewing: Viewing) -> Conditions:
    """Conditions of the options."""
    resolved = tuple({lamp.name: lamp for lamp in map(lamp_from, viewing.illuminant or ("D65",))}.values())
    return Conditions(
        resolved, observer(viewing.observer or "10"), viewing.weights or "cie", viewing.ends, viewing.bandpass
    )


def with_lamps(tolerance: Tolerance, viewing: Viewing, folder: str | None = None) -> tuple[Tolerance, Conditions]:
    """A tolerance whose limits bear the names of its lamps, and its conditions; lamp files are sought beside it too."""
    lamps = {spec: lamp_from(spec, folder) for spec in tolerance.limits}
    limits = {lamps[spec].name: limit for spec, limit in tolerance.limits.items()}
    named = replace(tolerance, limits=MappingProxyType(limits))
    conditions = Conditions(
        tuple({lamp.name: lamp for lamp in lamps.values()}.values()),
        observer(tolerance.observer),
        tolerance.weights,
        viewing.ends,
        viewing.bandpass,
    )
    return named, conditions


def lamp_from(spec: str, folder: str | None = None) -> Illuminant:
    """A lamp by name, by formula, or from its file (also sought in ``folder``)."""
    for path in (spec, os.path.join(folder or "", spec)):
        if os.path.splitext(path)[1] and os.path.isfile(path):
            from chroma.readers import read_lamp

            table = read_lamp(path)
            return measured_lamp(os.path.splitext(os.path.basename(spec))[0], table.wavelength_nm, table.power)
    return illuminant(spec)
