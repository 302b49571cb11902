"""What several of these tests need: scenes rendered once, and their estimates."""

from __future__ import annotations

from functools import cache

import numpy as np
from photo.render.scenes import CUVETTES, Scene, picture_of, scene
from photo.render.world import twins

from chroma.photo.estimate import PhotoEstimate, Reading, estimate, read_photo
from chroma.photo.rack import Cuvette
from observers.illuminants import illuminant


@cache
def made(number: int) -> Scene:
    return scene(number)


def rack_of(one: Scene, standards: int, *, spoilt: bool = False, blank: bool = True) -> tuple[Cuvette, ...]:
    """The scene's rack with boxes; c0 is the blank, c11 the contaminated one."""
    known = one.known(standards)[:, 0]
    rows = []
    for number in range(CUVETTES + (2 if spoilt else 1)):
        c = known[number] if number <= CUVETTES else np.nan
        role = "blank" if number == 0 else "unknown" if np.isnan(c) else "standard"
        rows.append(Cuvette(f"c{number}", role, () if role == "unknown" else (float(c),), one.boxes[number]))
    return tuple(rows if blank else rows[1:])


@cache
def reading_of(number: int, standards: int, spoilt: bool = False, blank: bool = True) -> Reading:
    one = made(number)
    return read_photo(picture_of(one.jpeg), rack_of(one, standards, spoilt=spoilt, blank=blank))


def estimated(
    number: int, standards: int, *, named: bool = True, spoilt: bool = False, blank: bool = True
) -> PhotoEstimate:
    one = made(number)
    lamps = [illuminant(one.setting.lamp)] if named else []
    reading = reading_of(number, standards, spoilt, blank)
    return estimate(picture_of(one.jpeg), reading, [one.dye], 10.0, lamps=lamps, without=twins(one.setting.camera))


def truths(number: int, found: PhotoEstimate) -> np.ndarray:
    return np.array([made(number).concentration[int(row.name[1:])] for row in found.estimates])
