"""Under which lamps a photo may have been taken: those that were named, or a mixture when none was."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from chroma.photo.forward import channels_of
from observers.arrays import Array
from observers.camera_population import population
from observers.illuminants import Illuminant, illuminant

# One of each kind of lamp that lights a bench: daylight, filament, fluorescent (halophosphate, three-band), LED
# (warm, neutral, cold, violet-pumped). A named lamp may be somewhat off its name, an unknown one more.
CANDIDATES = ("D65", "A", "FL2", "FL11", "LED-B1", "LED-B3", "LED-B5", "LED-V2")
UNNAMED_TILT = 0.15


def lamp_channels(lamps: Sequence[Illuminant], without: tuple[str, ...] = ()) -> tuple[Array, tuple[str, ...]]:
    """(L, 1 + P, 3, B) channels of the camera population under each lamp, and the lamps' names."""
    if lamps:
        people = [population(lamp, without=without) for lamp in lamps]
    else:
        people = [population(illuminant(name), without=without, tilt=UNNAMED_TILT) for name in CANDIDATES]
    return channels_of([(one.mean, one.directions) for one in people]), tuple(one.lamp for one in people)


def lamp_shares(lamp: np.ndarray, weight: Array, names: Sequence[str]) -> dict[str, float]:
    """How much of the answer rests on each lamp."""
    return {name: float(weight[lamp == number].sum()) for number, name in enumerate(names)}
