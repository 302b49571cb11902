"""From words on the command line to dyes, shelves and recipes."""

from __future__ import annotations

import re
from collections.abc import Sequence

import numpy as np

from chroma.cli.inputs import target_from
from chroma.cli.options import Reading
from chroma.dye.files import read_dye
from chroma.dye.model import Dye
from chroma.dye.solution import Cell, Shelf, shelf
from chroma.quantity import converted
from chroma.resample import on_grid
from chroma.units import concentration, path_length_mm
from observers.arrays import Array
from observers.errors import InputError


def recipe_from(texts: Sequence[str]) -> tuple[Shelf, Array]:
    """A shelf and its concentrations (D,) from ``NAME.dye.json=0.4g/L`` texts, in the unit of the first dye."""
    pairs = [_split(text) for text in texts]
    dyes = [read_dye(path) for path, _ in pairs]
    stock = shelf(dyes)
    amounts = [concentration(amount, stock.unit, dye.molar_mass) for (_, amount), dye in zip(pairs, dyes, strict=True)]
    return stock, np.array(amounts)


def dyes_from(paths: Sequence[str]) -> list[Dye]:
    """Dyes from their files."""
    return [read_dye(path) for path in paths]


def percent(text: str) -> float:
    """``2%`` or ``0.02`` as a fraction; raises InputError below 0 or from 100 % on."""
    match = re.fullmatch(r"\s*(\d+(?:\.\d+)?)\s*(%?)\s*", text)
    value = float(match.group(1)) / (100 if match.group(2) else 1) if match else -1.0
    if not 0 <= value < 1:
        raise InputError(f"{text!r}", why="a share from 0 to 100 % is wanted", do="write it as 2%")
    return value


def _split(text: str) -> tuple[str, str]:
    path, _, amount = text.rpartition("=")
    if not path or not amount:
        raise InputError(
            f"--dye {text!r}", why="a dye's file and its concentration are wanted", do="write NAME.dye.json=0.4g/L"
        )
    return path, amount


def solvent_from(
    file: str | None, path_length: str, reading: Reading, stock: Shelf, cell: Cell | None
) -> Array | float:
    """(B,) absorbance per cm of the solvent from its file, on the grid of the shelf; 0 where none is given."""
    if file is None:
        return 0.0
    if cell is None:
        raise InputError(
            "--solvent without --through-cell", why="against a blank the solvent falls out", do="give both"
        )
    measured = converted(target_from(file, reading), "absorbance")
    per_cm: Array = on_grid(measured, stock.wavelength_nm).values[0] * 10 / path_length_mm(path_length)
    return per_cm
