"""Spectra as JCAMP-DX 4.24: plain numbers, so that they come back to the last digit.

McDonald and Wilks (1988), Applied Spectroscopy 42, 151-162.
"""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import numpy as np

from chroma.spectra import Spectra
from observers.arrays import Array

_WIDTH = 80  # characters a line, by the standard


def write(spectra: Spectra, path: Path) -> None:
    """Write one block a sample, several of them in a LINK block."""
    with path.open("w", encoding="utf-8", newline="\r\n") as stream:
        if len(spectra) == 1:
            stream.writelines(f"{line}\n" for line in _block(spectra, 0))
            return
        stream.write(
            f"##TITLE= {len(spectra)} spectra\n##JCAMP-DX= 4.24\n##DATA TYPE= LINK\n##BLOCKS= {len(spectra)}\n"
        )
        for row in range(len(spectra)):
            stream.writelines(f"{line}\n" for line in _block(spectra, row))
        stream.write("##END=\n")


def _block(spectra: Spectra, row: int) -> Iterator[str]:
    x, y = spectra.wavelength_nm, spectra.values[row]
    name = " ".join(spectra.names[row].split()).replace("$$", "$")  # two of them begin a remark
    yield from (
        f"##TITLE= {name}",
        "##JCAMP-DX= 4.24",
        "##DATA TYPE= UV/VIS SPECTRUM",
        "##ORIGIN= lamplit",
        "##OWNER= ",
    )
    yield from ("##XUNITS= NANOMETERS", f"##YUNITS= {spectra.quantity.upper()}", "##XFACTOR= 1", "##YFACTOR= 1")
    if spectra.path_length_mm:
        yield f"##PATHLENGTH= {spectra.path_length_mm / 10!r}"
    yield from (f"##FIRSTX= {x[0].item()!r}", f"##LASTX= {x[-1].item()!r}", f"##NPOINTS= {len(x)}")
    yield from (f"##FIRSTY= {y[0].item()!r}", f"##MAXY= {y.max().item()!r}", f"##MINY= {y.min().item()!r}")
    if np.array_equal(np.linspace(x[0], x[-1], len(x)), x):
        yield "##XYDATA= (X++(Y..Y))"
        yield from _runs(x, y)
    else:
        yield "##XYPOINTS= (XY..XY)"
        yield from (f"{a!r}, {b!r}" for a, b in zip(x.tolist(), y.tolist(), strict=True))
    yield "##END="


def _runs(x: Array, y: Array) -> Iterator[str]:
    """Lines of an abscissa and as many ordinates as fit."""
    line = ""
    for nm, value in zip(x.tolist(), map(repr, y.tolist()), strict=True):
        if line and len(line) + 1 + len(value) > _WIDTH:
            yield line
            line = ""
        line = f"{line} {value}" if line else f"{nm!r} {value}"
    if line:
        yield line
