"""The job: concentrations of the unknowns in one photo, with intervals and flags in words."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from chroma.dye.model import Dye
from chroma.photo.boxes import Readings, read_boxes
from chroma.photo.calibration import Calibration, carried, differences
from chroma.photo.fit import Prior, default_prior, hypotheses
from chroma.photo.forward import LINEAR_TONE, Optics
from chroma.photo.lamps import lamp_channels, lamp_shares
from chroma.photo.panel import Panel, fit_panel
from chroma.photo.picture import Picture
from chroma.photo.rack import Box, Cuvette, judge_boxes
from chroma.photo.solve import CLIPPED_SHARE, DARK_SHARE, Solved, absorbance_of, data_of, judge_two_dyes, solve
from chroma.spectra import Source
from observers.arrays import Array
from observers.errors import InputError
from observers.illuminants import Illuminant

CAUTIONS = (
    "A screening value: confirm with a calibrated instrument before anything depends on it.",
    "Same cuvettes, same light from behind, no flash, no direct sun, panel not overexposed; wipe fingerprints off.",
    "Turbid, fluorescing or ageing solutions and other dyes mislead a camera; it is told of none of them.",
)
UNEVEN_FACTOR = 1.6  # brightest over darkest panel among the cuvettes
ROUGH_PANEL = 0.03
LEAST_PLAIN = 0.6
ABOVE = 1.05


@dataclass(frozen=True)
class Part:
    """One dye's concentration with its 95 % interval."""

    middle: float
    low: float
    high: float


@dataclass(frozen=True)
class Estimate:
    """One unknown: a part for each dye, flags in words, and the probability of a colour so far off the dye's path."""

    name: str
    parts: tuple[Part, ...]
    flags: tuple[str, ...]
    on_path: float


@dataclass(frozen=True, eq=False)
class PhotoEstimate:
    """Everything that a photo told: estimates, what they rest on, and what is to be said beside them."""

    dyes: tuple[str, ...]
    unit: str
    estimates: tuple[Estimate, ...]
    standards: tuple[str, ...]
    detection: tuple[float, ...]
    lamps: dict[str, float]
    unexplained: float
    flags: tuple[str, ...]
    notes: tuple[str, ...]
    sources: tuple[Source, ...]
    boxes: dict[str, Box] = field(default_factory=dict)


@dataclass(frozen=True, eq=False)
class Reading:
    """What was measured in one photo, before any model of it: boxes, readings, panel."""

    cuvettes: tuple[Cuvette, ...]
    readings: Readings
    panel: Panel


def read_photo(picture: Picture, cuvettes: Sequence[Cuvette], field_quad: Array | None = None) -> Reading:
    """Measure every box of a rack in a photo; raises InputError for boxes that cannot be, or no even ground."""
    boxes = [cuvette.box for cuvette in cuvettes if cuvette.box is not None]
    if len(boxes) != len(cuvettes):
        raise InputError("the cuvettes have no boxes", do="give them in the rack, or find them in the photo first")
    judge_boxes(cuvettes, picture.width, picture.height)
    panel = fit_panel(picture, boxes, field_quad)
    return Reading(tuple(cuvettes), read_boxes(picture, boxes, panel), panel)


def estimate(
    picture: Picture,
    reading: Reading,
    dyes: Sequence[Dye],
    path_length_mm: float,
    *,
    lamps: Sequence[Illuminant] = (),
    calibration: Calibration | None = None,
    without: tuple[str, ...] = (),
) -> PhotoEstimate:
    """Concentrations of the unknowns of a photo that was read.

    path_length_mm : of the cuvettes. lamps : those it may have been taken under; none means unknown, and a mixture is
    taken. calibration : what an earlier photo told of the same phone, lamp and cell. without : cameras that the
    population leaves out, for tests.

    Raises InputError when there is neither blank nor standard, no unknown, or two dyes that look alike.
    """
    judge_rack(reading.cuvettes, has_calibration=calibration is not None)
    solved, names, notes = solved_photo(picture, reading, dyes, path_length_mm, lamps, calibration, without)
    best = solved.found.weight
    drawn = solved.found.hypotheses.lamp[solved.drawn.hypothesis]
    return PhotoEstimate(
        tuple(dye.name for dye in dyes),
        dyes[0].unit,
        tuple(_estimates(reading, dyes, solved, calibration.highest_standard if calibration else 0.0)),
        tuple(cuvette.name for cuvette in reading.cuvettes if cuvette.role == "standard"),
        tuple(float(value) for value in solved.detection),
        lamp_shares(drawn, solved.drawn.weight, names),
        float(np.exp(best @ np.log(solved.found.hypotheses.error))),
        tuple(photo_flags(reading, solved)),
        (*notes, *picture.notes, *(differences(calibration, picture, dyes, path_length_mm) if calibration else ())),
        (picture.source, *(source for dye in dyes for source in dye.sources[:1])),
        {cuvette.name: cuvette.box for cuvette in reading.cuvettes if cuvette.box is not None},
    )


def judge_rack(cuvettes: Sequence[Cuvette], *, has_calibration: bool = False, unknowns: bool = True) -> None:
    """Raises InputError for a rack from which nothing can be told."""
    roles = [cuvette.role for cuvette in cuvettes]
    if "blank" not in roles and ("standard" not in roles or has_calibration):
        raise InputError(
            "no blank in the rack",
            why="concentration is read from the ratio to a cuvette without dye",
            do="put one in the photo, and give it the role blank",
        )
    if unknowns and "unknown" not in roles:
        raise InputError("no unknown in the rack", do="give the role unknown to what is to be measured")


def solved_photo(
    picture: Picture,
    reading: Reading,
    dyes: Sequence[Dye],
    path_length_mm: float,
    lamps: Sequence[Illuminant],
    calibration: Calibration | None,
    without: tuple[str, ...] = (),
) -> tuple[Solved, tuple[str, ...], tuple[str, ...]]:
    """The fit of a photo, the lamps' names, and notes."""
    if not 1 <= len(dyes) <= 2:
        raise InputError(f"{len(dyes)} dyes", why="three channels tell one dye or two", do="measure spectra for more")
    if len({dye.unit for dye in dyes}) > 1:
        raise InputError("two dyes of different units", do="fit both in g/L or both in mol/L")
    absorbance, modes, notes = absorbance_of(dyes, path_length_mm)
    blanks = np.array([cuvette.role == "blank" for cuvette in reading.cuvettes])
    data = data_of(reading.readings, reading.readings.value[blanks].mean(axis=0) if blanks.any() else None)
    known = known_of(reading.cuvettes, len(dyes))
    if calibration is None:
        channels, names = lamp_channels(lamps, without)
    else:
        channels, names = calibration.channels[None], (calibration.lamp,)
    optics = Optics(channels, absorbance, modes, reading.readings.level, known)
    if len(dyes) == 2:
        judge_two_dyes(optics, [dye.name for dye in dyes])
    believed = _believed(optics, picture, calibration)
    tried = hypotheses(len(names)) if calibration is None else hypotheses(1, widenings=((1.0, 1.0),))
    said = () if lamps or calibration else ("no lamp was named: a mixture of eight kinds is taken",)
    return solve(optics, data, tried, believed), names, (*notes, *said)


def _believed(optics: Optics, picture: Picture, calibration: Calibration | None) -> Prior:
    believed = default_prior(optics) if calibration is None else carried(calibration, optics)
    if not picture.linear_file or calibration is not None:
        return believed
    mean, precision = believed.mean.copy(), believed.precision.copy()
    for at, (centre, width) in zip(
        (optics.layout.power, optics.layout.shoulder, optics.layout.toe), LINEAR_TONE, strict=True
    ):
        mean[at], precision[at, at] = centre, width**-2.0
    return Prior(mean, precision)


def known_of(cuvettes: Sequence[Cuvette], dyes: int) -> Array:
    """(N, D) concentrations, NaN where wanted."""
    rows = [cuvette.concentration if cuvette.role != "unknown" else (np.nan,) * dyes for cuvette in cuvettes]
    return np.array(rows, dtype=np.float64).reshape(len(rows), dyes)


def _estimates(reading: Reading, dyes: Sequence[Dye], solved: Solved, calibrated_to: float) -> list[Estimate]:
    highest = np.max(np.where(np.isnan(solved.optics.known), -np.inf, solved.optics.known), axis=0)
    highest = np.maximum(highest, calibrated_to)
    result = []
    for i, cuvette in enumerate(reading.cuvettes):
        if cuvette.role != "unknown":
            continue
        ends = zip(solved.middle[i], solved.low[i], solved.high[i], strict=True)
        parts = tuple(Part(*(float(max(value, 0.0)) for value in row)) for row in ends)
        flags = [*_light_flags(reading.readings, i), *_dye_flags(parts, dyes, highest, solved.detection)]
        if solved.off[i]:
            flags.append("off the dye's path")
        result.append(Estimate(cuvette.name, parts, tuple(flags), float(solved.off_probability[i])))
    return result


def _light_flags(readings: Readings, row: int) -> list[str]:
    flags = []
    if readings.clipped[row].max() >= CLIPPED_SHARE:
        flags.append("clipped")
    if readings.dark[row].max() >= DARK_SHARE:
        flags.append("too dark")
    if readings.kept[row] < LEAST_PLAIN:
        flags.append("little plain liquid in the box")
    return flags


def _dye_flags(parts: Sequence[Part], dyes: Sequence[Dye], highest: Array, detection: Array) -> list[str]:
    flags = []
    for part, dye, top, least in zip(parts, dyes, highest, detection, strict=True):
        of = f" ({dye.name})" if len(dyes) > 1 else ""
        if top > 0 and part.middle > ABOVE * top:
            flags.append(f"above the standards{of}")
        if part.middle > min(dye.range_high, dye.linear_to):
            flags.append(f"above the dye's fitted range{of}")
        if part.middle < least:
            flags.append(f"below detection{of}")
    return flags


def photo_flags(reading: Reading, solved: Solved) -> list[str]:
    """What is to be said of the photo as a whole."""
    flags = []
    level = reading.readings.level
    if (level.max(axis=0) / level.min(axis=0)).max() > UNEVEN_FACTOR or reading.panel.scatter.max() > ROUGH_PANEL:
        flags.append("uneven light")
    roles = [cuvette.role for cuvette in reading.cuvettes]
    if "blank" not in roles:
        flags.append("no blank")
    standards = [i for i, role in enumerate(roles) if role == "standard"]
    if standards and solved.off[standards].any():
        names = ", ".join(reading.cuvettes[i].name for i in standards if solved.off[i])
        flags.append(f"standard off the dye's path: {names}")
    return flags
