"""From readings to concentrations: the fit of one photo, with what lies off the dye's path set aside."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from chroma.dye.model import Dye
from chroma.photo import off_path
from chroma.photo.boxes import Readings
from chroma.photo.fit import Data, Fit, Hypotheses, Prior, fit, whitener
from chroma.photo.forward import Optics, concentrations, predict
from chroma.photo.sample import Sample, quantiles, sample
from chroma.quantity import LN10
from observers.arrays import Array, Mask
from observers.cameras import CAMERA_NM, srgb_channels
from observers.errors import InputError
from observers.grid import held, stated_rule

CLIPPED_SHARE, DARK_SHARE = 0.02, 0.05
DARK_ERROR = 0.008  # of the panel: what clipping at black does to a mean
PATH_ERROR = 0.002  # cells of one set differ in path by this much, common practice
NEEDED_NM = (400.0, 700.0)
SET_ASIDE = 30.0  # factor on the error of what lies off the path
INTERVAL = (0.025, 0.5, 0.975)
DETECTION = 3.29  # times the standard deviation at zero: 5 % risks both ways, ISO 11843-1
LEAST_ANGLE_DEGREES = 8.0


@dataclass(frozen=True, eq=False)
class Solved:
    """Concentrations (Q = low, middle, high; N, D), and what they rest on.

    off (N,) marks what lies off the dye's path; detection (D,) is the least concentration that is told from none.
    """

    low: Array
    middle: Array
    high: Array
    off: Mask
    off_probability: Array
    detection: Array
    optics: Optics
    data: Data
    found: Fit
    drawn: Sample


def data_of(readings: Readings, blank: Array | None) -> Data:
    """Readings with the errors that are known beforehand; channels that are clipped at white do not count."""
    value = readings.value
    reference = blank if blank is not None else value.max(axis=0)
    bent = PATH_ERROR * value * np.log(np.clip(value / reference, 1e-3, 1.0))
    dark = DARK_ERROR * np.minimum(readings.dark / DARK_SHARE, 1.0)
    covariance = readings.covariance + bent[:, :, None] * bent[:, None, :]
    covariance = covariance + np.einsum("ni,ij->nij", dark**2 + 1e-10, np.eye(3))
    return Data(value, covariance, readings.clipped < CLIPPED_SHARE)


def absorbance_of(dyes: Sequence[Dye], path_length_mm: float) -> tuple[Array, Array, tuple[str, ...]]:
    """(D, B) absorbance per unit of concentration in the cell, its shared errors (F, D, B), and notes.

    A dye measured over 400–700 nm or more has its ends held. Raises InputError for less.
    """
    tables, modes, notes = [], [], []
    for number, dye in enumerate(dyes):
        own = dye.wavelength_nm
        if own[0] > NEEDED_NM[0] + 1e-6 or own[-1] < NEEDED_NM[1] - 1e-6:
            raise InputError(
                f"dye {dye.name} is known over {own[0]:g}–{own[-1]:g} nm",
                why="a camera needs 400–700 nm at least",
                do="measure its series over the whole range",
            )
        if own[0] > CAMERA_NM[0] or own[-1] < CAMERA_NM[-1]:
            notes.append(f"dye {dye.name} is known over {own[0]:g}–{own[-1]:g} nm: its ends are held beyond")
        matrix = held(own, CAMERA_NM, stated_rule(own)) * path_length_mm / 10.0
        tables.append(matrix @ np.maximum(dye.absorptivity, 0.0))
        for row in (*(dye.common @ matrix.T), *_band_modes(matrix * dye.independent)):
            mode = np.zeros((len(dyes), len(CAMERA_NM)))
            mode[number] = row
            modes.append(mode)
    shared = np.array(modes) if modes else np.zeros((0, len(dyes), len(CAMERA_NM)))
    return np.array(tables), shared, tuple(notes)


def _band_modes(root: Array) -> Array:
    """(3, B) shared errors that do to three broad channels what independent errors of the bands do.

    root (B, M) is a root of their covariance. Nothing else of them can be seen by a camera; none where there is none.
    """
    if not root.any():
        return np.zeros((0, len(root)))
    broad = srgb_channels(np.ones(len(CAMERA_NM))) @ root
    sizes, axes = np.linalg.eigh(broad @ broad.T)
    kept = sizes > 1e-12 * sizes.max()
    result: Array = (axes[:, kept] / np.sqrt(sizes[kept])).T @ (broad @ root.T)
    return result


def solve(optics: Optics, data: Data, hypotheses: Hypotheses, believed: Prior, *, seed: int = 7) -> Solved:
    """Fit, set aside what lies off the path, fit again, draw; everything of one photo."""
    off = np.zeros(len(data.value), dtype=bool)
    blank = (optics.known == 0).all(axis=1)
    found = fit(optics, data, hypotheses, believed)
    chance = off_path.probabilities(optics, data, found)
    kept = data
    for _ in range(len(off)):
        worst = np.where(off | blank, 1.0, chance)
        if worst.min() >= off_path.FLAG_BELOW or (~(off | blank)).sum() <= 1:
            break
        off[worst.argmin()] = True
        kept = set_aside(data, off)
        found = fit(optics, kept, hypotheses, believed, start=found.x)
        now = off_path.probabilities(optics, kept, found)
        chance = np.where(off, chance, now)
    drawn = sample(optics, kept, found, believed, seed=seed)
    c = concentrations(optics, drawn.x)
    low, middle, high = quantiles(c, drawn.weight, INTERVAL)
    return Solved(low, middle, high, off, chance, detection(optics, kept, found), optics, kept, found, drawn)


def set_aside(data: Data, off: npt.NDArray[np.bool_]) -> Data:
    """The same readings with the error of some so large that they say little of the photo."""
    return replace(data, covariance=np.where(off[:, None, None], data.covariance + _wide(data), data.covariance))


def _wide(data: Data) -> Array:
    size = SET_ASIDE * 0.005 * (np.maximum(data.value, 0.0) + 0.03)
    result: Array = np.einsum("ni,ij->nij", size**2, np.eye(3))
    return result


def detection(optics: Optics, data: Data, found: Fit) -> Array:
    """(D,) the least concentration that is told from none, from the error of a clear cuvette and of the photo's fit."""
    best = int(found.weight.argmax())
    few = optics.layout.nuisance
    blank = int(np.argmin(np.abs(data.value - data.value.max(axis=0)).sum(axis=1)))
    clear = replace(optics, known=np.zeros((1, len(optics.absorbance))), level=optics.level[blank : blank + 1])
    lamp = found.hypotheses.lamp[best : best + 1]
    numbers = found.x[best : best + 1, :few]
    value, slope = predict(clear, numbers, lamp)
    assert slope is not None
    one = Data(data.value[blank : blank + 1], data.covariance[blank : blank + 1], data.used[blank : blank + 1])
    white, _ = whitener(one, found.hypotheses.error[best : best + 1])
    noise = np.linalg.inv(white[0, 0].T @ white[0, 0])
    spread = noise + slope[0, 0] @ found.covariance[best, :few, :few] @ slope[0, 0].T
    by_c = colour_slopes(optics, found.x[best], int(lamp[0])) * value[0, 0]
    information = by_c @ np.linalg.solve(spread, by_c.T)
    result: Array = DETECTION * np.sqrt(np.diag(np.linalg.inv(information)))
    return result


def colour_slopes(optics: Optics, x: Array, lamp: int) -> Array:
    """(D, 3) change of the ln ratio of each channel by each dye's concentration, in thin solution."""
    z1 = np.concatenate([[1.0], x[: optics.directions]])
    channels = np.einsum("m,mkb->kb", z1, optics.channels[lamp])
    result: Array = -LN10 * optics.absorbance @ channels.T
    return result


def judge_two_dyes(optics: Optics, names: Sequence[str]) -> None:
    """Raises InputError where two dyes change the three channels so much alike that a photo cannot tell them apart."""
    slopes = colour_slopes(optics, np.zeros(optics.directions), 0)
    unit = slopes / np.linalg.norm(slopes, axis=1, keepdims=True)
    angle = float(np.degrees(np.arccos(np.clip(abs(unit[0] @ unit[1]), 0.0, 1.0))))
    if angle < LEAST_ANGLE_DEGREES:
        raise InputError(
            f"{names[0]} and {names[1]} cannot be told apart in a photo",
            why=f"they change the three channels alike (directions {angle:.1f}° apart, {LEAST_ANGLE_DEGREES:g}° are needed)",
            do="measure spectra, and use lamplit unmix",
        )
