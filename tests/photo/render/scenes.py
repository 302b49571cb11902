"""Simulated scenes for the benchmark and the tests: ten cuvettes of one dye, a blank, and one that is contaminated."""

from __future__ import annotations

import io
from dataclasses import dataclass

import numpy as np
from photo.render.geometry import boxes
from photo.render.picture import jpeg, render
from photo.render.world import DYES, LAMPS, Setting, absorptivity, draw_setting, dye

from chroma.dye.model import Dye
from chroma.photo.boxes import Readings, read_boxes
from chroma.photo.panel import fit_panel
from chroma.photo.picture import Picture, srgb_table
from chroma.photo.rack import Box
from chroma.spectra import Source
from observers.arrays import Array

CUVETTES, SPAN = 10, 16.0
PITCH = 88.0
FOREIGN_SHARE = 0.2  # of the dye's peak absorbance, in the contaminated cuvette
STANDARDS = (0, 4, 9)  # by rank of concentration, as a person would choose them: lowest, middle, highest
LONE_STANDARD = 6


@dataclass(frozen=True, eq=False)
class Scene:
    """A photo with its truth: concentrations (12,) of blank, ten cuvettes in random order, and the contaminated one."""

    setting: Setting
    dye: Dye
    concentration: Array
    jpeg: bytes
    boxes: tuple[Box, ...]
    foreign: str

    @property
    def ranked(self) -> list[int]:
        """Numbers of the ten cuvettes by rising concentration."""
        return [int(i) + 1 for i in np.argsort(self.concentration[1 : CUVETTES + 1])]

    def known(self, standards: int) -> Array:
        """(11, 1) concentrations of blank and standards (3, 1 or 0), NaN for the rest."""
        known = np.full((CUVETTES + 1, 1), np.nan)
        known[0] = 0.0
        chosen = {3: STANDARDS, 1: (LONE_STANDARD,), 0: ()}[standards]
        for rank in chosen:
            known[self.ranked[rank], 0] = self.concentration[self.ranked[rank]]
        return known

    @property
    def scored(self) -> list[int]:
        """The cuvettes that are never a standard, so that every case is judged on the same."""
        return [number for rank, number in enumerate(self.ranked) if rank not in (*STANDARDS, LONE_STANDARD)]


def scene(number: int, *, width: int = 1200, height: int = 900, quality: int | None = None) -> Scene:
    """Scene of this number: dyes and lamps in turns, everything else drawn from its seed."""
    name = list(DYES)[number % len(DYES)]
    setting = draw_setting(number, lamp=LAMPS[(number // len(DYES)) % len(LAMPS)])
    rng = np.random.default_rng([number, 5])
    own = dye(name)
    strongest = rng.uniform(0.8, 1.4) / own.absorptivity.max()
    steps = np.sort(np.geomspace(1 / SPAN, 1, CUVETTES) * np.exp(rng.uniform(-0.12, 0.12, CUVETTES)))
    spoilt = strongest * np.exp(rng.uniform(np.log(1 / SPAN), 0))
    concentration = np.concatenate([[0.0], rng.permutation(strongest * steps), [spoilt]])
    foreign = str(rng.choice([key for key in DYES if key != name]))
    absorbance = np.outer(concentration, own.absorptivity)
    other = absorptivity(foreign, own.wavelength_nm)
    absorbance[-1] += FOREIGN_SHARE * spoilt * own.absorptivity.max() * other / other.max()
    made = render(setting, 10.0**-absorbance, width=width, height=height, pitch=PITCH)
    found = [Box(b.x, b.y, b.width, b.height) for b in boxes(made.matrix, len(concentration), PITCH)]
    return Scene(setting, own, concentration, jpeg(made.codes, quality or setting.quality), tuple(found), foreign)


def picture_of(data: bytes) -> Picture:
    """A JPEG's bytes as a picture in sRGB, without the road through a file."""
    from PIL import Image

    with Image.open(io.BytesIO(data)) as opened:
        tables = opened.quantization
        opened.load()
    steps = (float(tables[0][0]), float(tables[1][0]))
    return Picture(opened, srgb_table(256), np.eye(3), Source("simulated", ""), jpeg_steps=steps)


def readings_of(made: Scene) -> Readings:
    """What the reader finds in the scene's boxes."""
    picture = picture_of(made.jpeg)
    return read_boxes(picture, made.boxes, fit_panel(picture, made.boxes))


def first(readings: Readings, count: int) -> Readings:
    """The readings of the first cuvettes."""
    return Readings(*(getattr(readings, name)[:count] for name in Readings.__dataclass_fields__))
