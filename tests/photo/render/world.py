"""What a rendered scene is made of. Everything here is simulated: dyes, accidents and settings are invented; the
cameras and base lamps are measured ones."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cache

import numpy as np
from helpers import read_gold

from chroma.dye.model import Dye
from observers.arrays import Array
from observers.cameras import CAMERA_NM, LINEAR_SRGB, camera, names
from observers.human import observer, responsivity_at
from observers.illuminants import illuminant, power_at

LN10 = np.log(10.0)
# Invented dyes: peak (nm), full width at half height (nm), height (L/(g cm)); none is a dye of the demo.
DYES: dict[str, tuple[tuple[float, float, float], ...]] = {
    "simulated blue": ((632, 62, 60), (590, 70, 26), (410, 70, 9)),
    "simulated yellow": ((428, 78, 48), (395, 60, 18)),
    "simulated red": ((514, 64, 36), (545, 44, 22), (360, 60, 20)),
    "simulated violet": ((572, 60, 45), (538, 70, 28), (400, 80, 6)),
}
# The estimator is told the name; the real lamp is a tilted, rippled one. None of these is a candidate of the estimator
# when the lamp is unknown.
LAMPS = ("D50", "D75", "blackbody:2750K", "FL3.4", "FL3.9", "LED-B2", "LED-B4", "LED-V1")
TWIN = 0.05  # cameras whose curves differ by less are the same sensor under two names


def dye(name: str) -> Dye:
    """A simulated dye with exact absorptivity on 380–780 nm at 5 nm."""
    wavelength_nm = CAMERA_NM
    nothing = np.zeros(len(wavelength_nm))
    return Dye(name, wavelength_nm, absorptivity(name, wavelength_nm), "g/L", nothing, np.zeros((0, len(nothing))))


def absorptivity(name: str, wavelength_nm: Array) -> Array:
    bands = DYES[name]
    return sum(
        (h * np.exp(-4 * np.log(2) * ((wavelength_nm - peak) / width) ** 2) for peak, width, h in bands),
        np.zeros(len(wavelength_nm)),
    )


def twins(name: str) -> tuple[str, ...]:
    """A camera and all whose curves are nearly its own, which an estimator that shall not know it must leave out."""
    curves = {key: responsivity_at(camera(key), CAMERA_NM) for key in names()}
    flat = {key: (value / value.sum(axis=0)).ravel() for key, value in curves.items()}
    size = np.mean([np.linalg.norm(value) for value in flat.values()])
    return tuple(key for key in flat if np.linalg.norm(flat[key] - flat[name]) < TWIN * size)


@dataclass(frozen=True, eq=False)
class Setting:
    """One photo's circumstances, drawn at random: what the estimator is not told."""

    camera: str
    lamp: str
    channels: Array  # (3, B) of the sensor × the real lamp
    matrix: Array  # (3, 3) to linear sRGB, white balance included
    exposure: float
    gamma: float
    contrast: float
    veil: float
    halo: float
    light: tuple[float, ...]
    tilt_degrees: tuple[float, float]
    roll_degrees: float
    blur_px: float
    full_well_e: float
    read_e: float
    quality: int
    seed: int
    extra: dict[str, float] = field(default_factory=dict)


def draw_setting(seed: int, *, lamp: str | None = None, camera_name: str | None = None) -> Setting:
    """A setting: a measured camera, a lamp near its name, and accidents of moderate size."""
    rng = np.random.default_rng([seed, 1])
    usual = [key for key in names() if key != "camera-54"]
    name = camera_name or str(rng.choice(usual))
    lamp = lamp or str(rng.choice(LAMPS))
    channels = _sensor(name, rng) * _lamp(lamp, rng)
    balance = 1.0 / channels.sum(axis=1) * rng.uniform(0.96, 1.04, 3)
    matrix = _matrix(name, lamp, rng) * balance
    matrix = matrix / (matrix @ channels.sum(axis=1))[:, None] * rng.uniform(0.97, 1.03, (3, 1))
    return Setting(
        name, lamp, channels, matrix,
        exposure=rng.uniform(0.6, 0.85), gamma=rng.uniform(0.93, 1.07), contrast=rng.uniform(0.0, 0.2),
        veil=rng.uniform(0.002, 0.025), halo=rng.uniform(0.0, 0.01),
        light=tuple(rng.uniform(-1, 1, 6)),
        tilt_degrees=tuple(rng.uniform(-6, 6, 2)), roll_degrees=rng.uniform(-2, 2),
        blur_px=rng.uniform(0.6, 1.6), full_well_e=rng.uniform(4000, 12000), read_e=rng.uniform(2, 8),
        quality=int(rng.integers(92, 99)), seed=seed,
    )  # fmt: skip


def _sensor(name: str, rng: np.random.Generator) -> Array:
    """The measured camera with a smooth error of its own, so that the scene's camera is no table's camera."""
    curves = responsivity_at(camera(name), CAMERA_NM).T
    moved = [np.interp(CAMERA_NM - rng.uniform(-2.5, 2.5), CAMERA_NM, curve, left=0.0, right=0.0) for curve in curves]
    return np.stack(moved) * np.exp(_ripple(rng, (3,), 0.03))


def _lamp(name: str, rng: np.random.Generator) -> Array:
    x = (CAMERA_NM - 560.0) / 100.0
    tilt, bow = rng.uniform(-0.15, 0.15), rng.uniform(-0.06, 0.06)
    return power_at(illuminant(name), CAMERA_NM) * np.exp(tilt * x + bow * (x**2 - 1) + _ripple(rng, (), 0.015))


def _ripple(rng: np.random.Generator, shape: tuple[int, ...], size: float) -> Array:
    """Smooth random waves over the wavelength, of about this root-mean-square."""
    phase = rng.uniform(0, 2 * np.pi, (*shape, 4, 1))
    period_nm = rng.uniform(60, 250, (*shape, 4, 1))
    return size / np.sqrt(2) * np.cos(2 * np.pi * CAMERA_NM / period_nm + phase).sum(axis=-2)


def _matrix(name: str, lamp: str, rng: np.random.Generator) -> Array:
    """A colour matrix fitted to a published chart of 24 patches, for this lamp or partly for daylight; more saturated."""
    chart, share = _chart(), float(rng.choice([0.0, 0.0, rng.uniform(0, 0.5)]))
    found = (1 - share) * _fitted(name, lamp, chart) + share * _fitted(name, "D65", chart)
    more = rng.uniform(0.95, 1.2)
    return (more * np.eye(3) + (1 - more) / 3.0) @ found


@cache
def _chart() -> Array:
    """(24, B) reflectances of a published chart, ends held."""
    rows = read_gold("colour_chart_spectra.csv")
    own = [key for key in rows[0] if key != "name"]
    return np.array([np.interp(CAMERA_NM, [float(k) for k in own], [float(row[k]) for k in own]) for row in rows])


def _fitted(name: str, lamp: str, chart: Array) -> Array:
    """The matrix from white-balanced sensor signals under the lamp to the chart's linear sRGB under D65; white kept."""
    lit = responsivity_at(camera(name), CAMERA_NM) * power_at(illuminant(lamp), CAMERA_NM)[:, None]
    sensor = chart @ (lit / lit.sum(axis=0))
    seen = responsivity_at(observer("2"), CAMERA_NM) * power_at(illuminant("D65"), CAMERA_NM)[:, None]
    wanted = chart @ (seen / seen[:, 1].sum()) @ LINEAR_SRGB.T
    weight = np.sqrt(np.concatenate([np.ones(len(chart)), [1e4]]))[:, None]
    white = np.ones((1, 3))
    solved = np.linalg.lstsq(weight * np.vstack([sensor, white]), weight * np.vstack([wanted, white]), rcond=None)
    return solved[0].T
