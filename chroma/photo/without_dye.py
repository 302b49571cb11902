"""A photo without a dye's spectrum: the second-best way, by a curve through its own standards."""

from __future__ import annotations

import numpy as np

from chroma.photo.boxes import Readings
from chroma.photo.estimate import Estimate, Part, PhotoEstimate, Reading, judge_rack
from chroma.photo.picture import Picture
from chroma.photo.response import ADVICE, LEAST_STANDARDS, Response, fit_response, read_off
from chroma.photo.solve import CLIPPED_SHARE, DARK_SHARE
from observers.arrays import Array
from observers.errors import InputError

UNIT = "as in the rack"


def estimate_without_dye(picture: Picture, reading: Reading) -> PhotoEstimate:
    """Concentrations of the unknowns from a smooth monotone response of each channel through the standards.

    Raises InputError without a blank, without unknowns, or with fewer than four standards.
    """
    judge_rack(reading.cuvettes)
    roles = np.array([cuvette.role for cuvette in reading.cuvettes])
    if np.count_nonzero(roles == "standard") < LEAST_STANDARDS:
        raise InputError(
            f"{np.count_nonzero(roles == 'standard')} standards and no dye",
            why=f"without a dye's spectrum {LEAST_STANDARDS} standards are needed at least",
            do="give --dye NAME.dye.json, or more standards",
        )
    if "blank" not in roles:
        raise InputError("no blank in the rack", why="concentration is read from the ratio to it", do="add one")
    ln_ratio, variance = ln_ratios(reading.readings, roles == "blank")
    standards = np.flatnonzero(roles == "standard")
    known = np.array([reading.cuvettes[i].concentration[0] for i in standards])
    response = fit_response(known, ln_ratio[standards], variance[standards])
    unknowns = np.flatnonzero(roles == "unknown")
    middle, low, high, beyond = read_off(response, ln_ratio[unknowns], variance[unknowns])
    least = _detection(response)
    estimates = []
    for row, i in enumerate(unknowns):
        part = Part(float(middle[row]), float(low[row]), float(high[row]))
        flags = _flags(reading.readings, int(i), bool(beyond[row]), part, least, float(known.min()))
        estimates.append(Estimate(reading.cuvettes[i].name, (part,), flags, 1.0))
    return PhotoEstimate(
        ("",), UNIT, tuple(estimates), tuple(reading.cuvettes[i].name for i in standards), (least,), {},
        float(response.error[response.used].min()), (), (ADVICE, *picture.notes), (picture.source,),
        {cuvette.name: cuvette.box for cuvette in reading.cuvettes if cuvette.box is not None},
    )  # fmt: skip


def ln_ratios(readings: Readings, blanks: Array) -> tuple[Array, Array]:
    """(N, 3) ln of each reading over the mean blank, and its variance with the blank's."""
    value = np.maximum(readings.value, 1e-4)
    own = np.einsum("nii->ni", readings.covariance) / value**2
    blank = value[blanks].mean(axis=0)
    shared = own[blanks].sum(axis=0) / np.count_nonzero(blanks) ** 2
    return np.log(value / blank), own + shared


def _detection(response: Response) -> float:
    """Where the strongest channel has fallen by 3.29 of its error (ISO 11843-1)."""
    strongest = int(np.argmax(np.where(response.used, np.abs(response.ln_ratio[-1]) / response.error, -1.0)))
    grid = np.linspace(0.0, response.level[-1], 500)
    fallen = np.abs(response.curve(grid)[:, strongest]) > 3.29 * response.error[strongest]
    return float(grid[np.argmax(fallen)]) if fallen.any() else float(grid[-1])


def _flags(readings: Readings, row: int, beyond: bool, part: Part, least: float, lowest: float) -> tuple[str, ...]:
    flags = []
    if readings.clipped[row].max() >= CLIPPED_SHARE:
        flags.append("clipped")
    if readings.dark[row].max() >= DARK_SHARE:
        flags.append("too dark")
    if beyond:
        flags.append("above the standards")
    if part.middle < least:
        flags.append("below detection")
    elif part.high < lowest:
        flags.append("below the standards")
    return tuple(flags)
