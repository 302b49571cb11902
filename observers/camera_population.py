"""A population of cameras: the mean effective channels of a finished picture under a lamp, and how they vary.

A camera that nobody has measured is the mean plus a few principal directions, each with a standard normal prior. The
population is made from measured cameras, each seen through many small accidents: a lamp somewhat warmer or colder than
its name, a white balance that is a little off, a colour matrix made for another lamp, more or less saturation, channels
shifted against those measured.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from observers.arrays import Array, frozen
from observers.cameras import (
    CAMERA_NM,
    balanced,
    colour_matrix,
    names,
    reflectance_covariance,
    sensitivities,
    srgb_channels,
)
from observers.errors import InputError
from observers.illuminants import Illuminant, illuminant, power_at

SEED = 20_001
DRAWS = 12  # accidents a camera
DIRECTIONS = 16
# Standard deviations of the accidents; judgement, as no survey of them is published.
LAMP_TILT = 0.08  # change of ln power over 100 nm
LAMP_BOW = 0.04  # of its curvature, over (100 nm)²
BALANCE = 0.04  # relative, of a channel of the sensor
SATURATION_MEAN, SATURATION_SPREAD = 0.06, 0.08
SHIFT_NM = 2.0
# A sensor of stacked layers: its channels overlap so widely that its colour matrix is nearly singular.
UNUSUAL = ("camera-54",)
# A colour matrix may aim at the colours that things have by daylight, or at those that they have under the lamp, carried
# over to daylight; and it may have been made for one of a few other lamps. Relative weights, judgement.
OTHER_LAMPS = ("D55", "D65", "A")
AIM_DAYLIGHT, AIM_LAMP, AIM_OTHER = 2.0, 0.25, 0.1


@dataclass(frozen=True, eq=False)
class Population:
    """Effective channels under a lamp: mean (3, B) and directions (P, 3, B) on `CAMERA_NM`, by falling weight.

    A camera is mean + Σ zₚ directionₚ with z standard normal; the sums over the wavelength are 1 and 0.
    """

    lamp: str
    mean: Array
    directions: Array
    cameras: tuple[str, ...]

    def __post_init__(self) -> None:
        for name in ("mean", "directions"):
            object.__setattr__(self, name, frozen(getattr(self, name)))


@lru_cache(maxsize=64)
def population(
    lamp: Illuminant, *, without: tuple[str, ...] = (), directions: int = DIRECTIONS, tilt: float = LAMP_TILT
) -> Population:
    """The population under a lamp, leaving out some cameras (as a test must that renders with them).

    tilt : standard deviation of the change of ln lamp power over 100 nm. Raises InputError when fewer than five cameras
    are left or the lamp gives no light.
    """
    kept = tuple(name for name in names() if name not in (*without, *UNUSUAL))
    if len(kept) < 5:
        raise InputError(f"a population of {len(kept)} cameras", why="five are needed at least")
    power = power_at(lamp, CAMERA_NM)
    if not power.sum() > 0:
        raise InputError(f"lamp {lamp.name} gives a camera no light", why="its power lies outside 380–780 nm")
    members = _members(sensitivities(kept), power, tilt)
    mean = members.mean(axis=0)
    return Population(lamp.name, mean, _directions(members - mean, directions), kept)


def _directions(apart: Array, count: int) -> Array:
    """Principal directions (P, 3, B), scaled by their standard deviations."""
    flat = apart.reshape(len(apart), -1)
    values, vectors = np.linalg.eigh(flat.T @ flat / (len(flat) - 1))
    order = np.argsort(values)[::-1][:count]
    kept = vectors[:, order] * np.sqrt(np.maximum(values[order], 0.0))
    result: Array = kept.T.reshape(-1, *apart.shape[1:])
    return result


def _members(sensor: Array, power: Array, tilt: float) -> Array:
    """(N × DRAWS, 3, B) effective channels of cameras (N, 3, B), each with its accidents."""
    rng = np.random.default_rng(SEED)
    shape = (DRAWS, len(sensor))
    shifted = _shifted(sensor, SHIFT_NM * rng.standard_normal((*shape, 3)))
    lit = _tilted(power, tilt * rng.standard_normal(shape), LAMP_BOW * rng.standard_normal(shape))
    share = rng.dirichlet([AIM_DAYLIGHT, AIM_LAMP, *[AIM_OTHER] * len(OTHER_LAMPS)], shape)
    matrix = np.einsum("dnl,lnjk->dnjk", share, _matrices(sensor, power))
    own = shifted * lit[:, :, None, :]
    own = own / own.sum(axis=-1, keepdims=True) * np.exp(BALANCE * rng.standard_normal((*shape, 3, 1)))
    mixed = matrix @ own
    mixed = mixed / mixed.sum(axis=-1, keepdims=True)
    grey = mixed.mean(axis=-2, keepdims=True)
    more = SATURATION_MEAN + SATURATION_SPREAD * rng.standard_normal((*shape, 1, 1))
    members: Array = (mixed + more * (mixed - grey)).reshape(-1, *sensor.shape[1:])
    return members


def _matrices(sensor: Array, power: Array) -> Array:
    """(L, N, 3, 3) colour matrices of each camera, one for each aim."""
    others = [power_at(illuminant(name), CAMERA_NM) for name in OTHER_LAMPS]
    daylight = srgb_channels(power_at(illuminant("D65"), CAMERA_NM))
    aims = [(power, daylight), (power, srgb_channels(power)), *((lamp, srgb_channels(lamp)) for lamp in others)]
    covariance = reflectance_covariance()
    return np.stack([colour_matrix(balanced(sensor, lamp), wanted[None], covariance) for lamp, wanted in aims])


def _shifted(sensor: Array, by_nm: Array) -> Array:
    """(D, N, 3, B): each channel moved along the wavelength by its own amount (D, N, 3), by its slope."""
    slope = np.gradient(sensor, CAMERA_NM, axis=-1)
    return np.maximum(sensor - by_nm[..., None] * slope, 0.0)


def _tilted(power: Array, tilt: Array, bow: Array) -> Array:
    """(D, N, B) lamp power with tilts and bows of its logarithm, per 100 nm and its square."""
    x = (CAMERA_NM - 560.0) / 100.0
    result: Array = power * np.exp(tilt[..., None] * x + bow[..., None] * (x**2 - 1.0))
    return result
