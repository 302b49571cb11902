"""Standard tables, packaged as data: each file names what it holds, where it came from, and its checksum."""

from __future__ import annotations

from functools import cache
from os.path import dirname, join  # pathlib costs 4 % of the start of a check

import numpy as np

from observers.arrays import Array, frozen

HERE = dirname(__file__)


@cache
def table(name: str) -> dict[str, Array]:
    """One packaged table by its file's name, as columns (B,); ``wavelength_nm`` is the first of them."""
    with open(join(HERE, f"{name}.csv"), encoding="utf-8") as lines:
        body = [line for line in lines if not line.startswith("#")]
    columns = np.loadtxt(body[1:], delimiter=",", dtype=np.float64).T
    return dict(zip(body[0].strip().split(","), map(frozen, columns), strict=True))
