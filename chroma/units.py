"""Quantities with units, as they are typed: ``10mm``, ``0.25g/L``, ``520nm``, ``400:700:10nm``."""

from __future__ import annotations

import re

import numpy as np

from observers.arrays import Array
from observers.errors import InputError

NUMBER = r"[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?"
LENGTH_MM = {"mm": 1.0, "cm": 10.0, "m": 1000.0, "um": 1e-3, "µm": 1e-3}


def path_length_mm(text: str) -> float:
    """A path length in mm from ``10mm``, ``1cm``; raises InputError without a unit or when not positive."""
    match = re.fullmatch(rf"\s*({NUMBER})\s*({'|'.join(LENGTH_MM)})\s*", text)
    if not match or float(match.group(1)) <= 0:
        raise InputError(
            f"path length {text!r}", why="a positive number with its unit is wanted", do="write it as 10mm or 1cm"
        )
    return float(match.group(1)) * LENGTH_MM[match.group(2)]


def grid_nm(text: str) -> Array:
    """A grid (B,) in nm from ``400:700:10nm`` (first, last, step); raises InputError for another form."""
    match = re.fullmatch(rf"\s*({NUMBER}):({NUMBER}):({NUMBER})\s*(?:nm)?\s*", text)
    hint = "write it as 400:700:10nm"
    if not match:
        raise InputError(f"grid {text!r}", why="first, last and step in nm are wanted", do=hint)
    first, last, step = (float(part) for part in match.groups())
    bands = (last - first) / step if step > 0 else -1
    if not 0 < first < last <= 1e5 or not 0 < bands <= 1e5 or abs(bands - round(bands)) > 1e-6:
        raise InputError(f"grid {text!r}", why="the step must divide the range, from low to high", do=hint)
    result: Array = first + step * np.arange(round(bands) + 1, dtype=np.float64)
    return result


def ratio(text: str, parts: int, example: str) -> tuple[float, ...]:
    """``2:1`` or ``1:1:1`` as numbers; raises InputError for another count."""
    pieces = text.split(":")
    if len(pieces) != parts or not all(re.fullmatch(rf"\s*{NUMBER}\s*", piece) for piece in pieces):
        raise InputError(
            f"{text!r}", why=f"{parts} numbers with colons between them are wanted", do=f"write it as {example}"
        )
    return tuple(float(piece) for piece in pieces)
