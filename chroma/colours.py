"""What it looks like: the colours of samples under each lamp, with what a screen can show of them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from chroma.colour.dominant import Dominant, dominant
from chroma.colour.screen import hex_codes, in_gamut, linear_rgb, nearest_linear_rgb
from chroma.colour.spaces import Lab_from_XYZ, LCh_from_Lab, Luv_from_XYZ, xyY_from_XYZ
from chroma.quantity import fraction
from chroma.spectra import Source, Spectra
from chroma.viewing import Conditions
from observers.arrays import Array, Mask
from observers.weights import Weights

if TYPE_CHECKING:
    from chroma.frames import Library


@dataclass(frozen=True, eq=False)
class Colours:
    """Colours of N samples under L lamps.

    XYZ100 and white100 hold the chosen observer; XYZ100_screen and white100_screen the 2° observer, for swatches.
    Shapes (N, L, 3) and (L, 3). u_Lab is the standard uncertainty of L*, a*, b* from replicates (N, L, 3), NaN where a
    sample was measured once.
    """

    names: tuple[str, ...]
    conditions: Conditions
    wavelength_nm: Array
    XYZ100: Array
    white100: Array
    XYZ100_screen: Array
    white100_screen: Array
    u_Lab: Array
    sources: tuple[Source, ...]
    notes: tuple[str, ...]

    @property
    def Lab(self) -> Array:
        """L*, a*, b* (N, L, 3)."""
        return Lab_from_XYZ(self.XYZ100, self.white100)

    @property
    def LCh(self) -> Array:
        """L*, C*ab, h_ab in degrees (N, L, 3)."""
        return LCh_from_Lab(self.Lab)

    @property
    def Luv(self) -> Array:
        """L*, u*, v* (N, L, 3)."""
        return Luv_from_XYZ(self.XYZ100, self.white100)

    @property
    def xyY(self) -> Array:
        """Chromaticity and Y (N, L, 3)."""
        return xyY_from_XYZ(self.XYZ100)

    @property
    def luminous_transmittance(self) -> Array:
        """(N, L) of the 2° observer, 0–1: Y against a clear cell (ISO 13468-1 takes D65, CIE 130 any lamp)."""
        result: Array = self.XYZ100_screen[..., 1] / self.white100_screen[:, 1]
        return result

    def dominant(self, row: int, lamp: int) -> Dominant:
        """Dominant wavelength and purities of one colour against its own lamp."""
        white_xy = xyY_from_XYZ(self.white100[lamp])[:2]
        return dominant(self.xyY[row, lamp, :2], white_xy, self.conditions.observer)

    def swatches(self) -> tuple[list[list[str]], Mask]:
        """``#rrggbb`` of the nearest colour a screen can show, by sample and lamp, and whether it is the true one."""
        linear = np.stack(
            [linear_rgb(self.XYZ100_screen[:, i], white) for i, white in enumerate(self.white100_screen)], axis=1
        )
        nearest = nearest_linear_rgb(linear)
        return [hex_codes(row) for row in nearest], in_gamut(linear)

    def _repr_html_(self) -> str:
        from chroma.notebook import colours_html

        return colours_html(self)

    def to_frame(self, library: Library | None = None) -> Any:
        """A table of pandas or polars, one row a sample and lamp."""
        from chroma.frames import colours_columns, frame

        return frame(colours_columns(self), library)


def predict(spectra: Spectra, conditions: Conditions) -> Colours:
    """The colours of measured or computed spectra (any quantity but counts) under the conditions.

    Raises InputError when the grid does not serve (`observers.weights.weights`) or for counts without a blank.
    """
    shares = fraction(spectra)
    W = conditions.weights(shares.wavelength_nm)
    screen = conditions.screen_weights(shares.wavelength_nm)
    XYZ100 = W.response(shares.values)
    return Colours(
        spectra.names,
        conditions,
        shares.wavelength_nm,
        XYZ100,
        W.white,
        screen.response(shares.values),
        screen.white,
        _replicate_uncertainty(shares, XYZ100, W),
        spectra.sources,
        shares.notes + W.notes,
    )


def _replicate_uncertainty(spectra: Spectra, XYZ100: Array, W: Weights) -> Array:
    result = np.full(XYZ100.shape, np.nan)
    if spectra.scatter is None:
        return result
    from chroma.scatter import Lab_deviations

    deviations = Lab_deviations(spectra, XYZ100, W)
    for row in np.unique(spectra.scatter.row):
        own = deviations[spectra.scatter.row == row]
        result[row] = np.sqrt((own**2).sum(axis=0) / (len(own) - 1) / len(own))
    return result
