"""Conditions: under which lamps, by which observer, with which weights a colour is computed."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from observers.arrays import Array
from observers.human import Observer, observer
from observers.illuminants import Illuminant, illuminant
from observers.weights import Ends, Method, Weights, weights


@dataclass(frozen=True)
class Conditions:
    """Lamps, observer, kind of weights, policy for missing ends, and whether the bandpass is undone."""

    illuminants: tuple[Illuminant, ...]
    observer: Observer
    method: Method = "cie"
    ends: Ends = "nearest"
    bandpass: bool = False

    def weights(self, wavelength_nm: Array) -> Weights:
        """The weights for spectra on this grid (B,)."""
        return weights(
            wavelength_nm, self.illuminants, self.observer, method=self.method, ends=self.ends, bandpass=self.bandpass
        )

    def screen_weights(self, wavelength_nm: Array) -> Weights:
        """The same with the 2° observer, for which sRGB is defined."""
        return weights(
            wavelength_nm, self.illuminants, observer("2"), method=self.method, ends=self.ends, bandpass=self.bandpass
        )

    def __str__(self) -> str:
        lamps = ", ".join(lamp.name for lamp in self.illuminants)
        return f"{lamps}; {self.observer.name} observer; {self.method.upper()} weights"


def conditions(
    illuminants: Sequence[str | Illuminant] = ("D65",),
    observer_key: str = "10",
    *,
    method: Method = "cie",
    ends: Ends = "nearest",
    bandpass: bool = False,
) -> Conditions:
    """Conditions from names: lamps as `observers.illuminants.illuminant` reads them, the observer by its key."""
    lamps = tuple(lamp if isinstance(lamp, Illuminant) else illuminant(lamp) for lamp in illuminants)
    return Conditions(lamps, observer(observer_key), method, ends, bandpass)
