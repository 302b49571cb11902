"""A photo as it is measured: codes of the upright picture, and what carries them to linear light."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np
import numpy.typing as npt

from chroma.colour.screen import decoded
from chroma.spectra import Source
from observers.arrays import Array

CodeArray = npt.NDArray[np.uint8] | npt.NDArray[np.uint16]


@dataclass(frozen=True, eq=False)
class Picture:
    """Codes (H, W, 3) of the upright photo with a table of linear light (3, levels) and a matrix to linear sRGB.

    pixels is an array, or a decoded picture of the imaging library in 8-bit RGB: few of its pixels are ever needed, and
    to copy all of them takes as long as to decode them. A mean in linear light may be taken before the matrix, so only
    what is measured is ever converted. ``taken`` is what the file says of phone, lens, exposure and white balance;
    ``jpeg_steps`` the steps by which JPEG rounds an even field's luma and colour differences; ``linear_file`` says that
    no tone curve was laid on it.
    """

    pixels: CodeArray | Any
    linear: Array
    to_srgb: Array
    source: Source
    notes: tuple[str, ...] = ()
    taken: Mapping[str, str] = field(default_factory=dict)
    jpeg_steps: tuple[float, float] | None = None
    linear_file: bool = False

    @property
    def width(self) -> int:
        """In pixels."""
        return int(self.pixels.shape[1] if isinstance(self.pixels, np.ndarray) else self.pixels.width)

    @property
    def height(self) -> int:
        """In pixels."""
        return int(self.pixels.shape[0] if isinstance(self.pixels, np.ndarray) else self.pixels.height)

    @property
    def top_code(self) -> int:
        """The largest code there is."""
        return int(self.linear.shape[1] - 1)

    @cached_property
    def codes(self) -> CodeArray:
        """All codes (H, W, 3)."""
        return np.asarray(self.pixels)

    def lattice(self, x: int, y: int, columns: int, rows: int, step: int = 1) -> CodeArray:
        """Codes (rows, columns, 3) at x + step // 2 + step · i, and so down from y; all must lie within the picture."""
        if isinstance(self.pixels, np.ndarray):
            half = step // 2
            part = self.pixels[y + half : y + rows * step : step, x + half : x + columns * step : step]
            return part
        from PIL import Image

        box = (x, y, x + columns * step, y + rows * step)
        return np.asarray(self.pixels.resize((columns, rows), Image.Resampling.NEAREST, box))


def srgb_table(levels: int) -> Array:
    """(3, levels) linear light of sRGB codes, IEC 61966-2-1."""
    return np.tile(decoded(np.arange(levels) / (levels - 1)), (3, 1))
