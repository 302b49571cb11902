"""Cameras: measured sensitivities, and the effective channels of a finished picture.

A finished picture has gone through white balance and a colour matrix, so each of its channels mixes the three of the
sensor; what counts for a transparent sample is lamp × mixed channel, scaled to 1 for the blank.
"""

from __future__ import annotations

import numpy as np

from observers.arrays import Array, frozen
from observers.errors import unknown_name
from observers.human import Observer, observer, responsivity_at
from observers.illuminants import Illuminant, illuminant, power_at
from observers.tables import table

CAMERA_NM = frozen(np.arange(380.0, 781.0, 5.0))
LINEAR_SRGB = frozen(  # IEC 61966-2-1, XYZ to linear sRGB
    [[3.2406, -1.5372, -0.4986], [-0.9689, 1.8758, 0.0415], [0.0557, -0.2040, 1.0570]]
)
BRADFORD = frozen(
    [[0.8951, 0.2664, -0.1614], [-0.7502, 1.7135, 0.0367], [0.0389, -0.0685, 1.0296]]
)  # as in ISO 15076-1
D65_XYZ1 = frozen([0.95047, 1.0, 1.08883])
# The spectra that a colour matrix is made for: smooth reflectances about a grey, common practice.
REFLECTANCE_CORRELATION_NM = 60.0
REFLECTANCE_SPREAD = 0.2
WHITE_SPREAD = 10.0  # so much more than the rest that white stays white


def names() -> tuple[str, ...]:
    """The measured cameras, numbered."""
    return tuple(dict.fromkeys(key.rsplit("-", 1)[0] for key in table("cameras") if key != "wavelength_nm"))


def camera(name: str) -> Observer:
    """A measured camera as an observer with K = 3 (red, green, blue of the sensor).

    Raises InputError for an unknown name, with those that are known.
    """
    columns = table("cameras")
    if f"{name}-r" not in columns:
        raise unknown_name("camera", name, names())
    curves = np.column_stack([columns[f"{name}-{channel}"] for channel in "rgb"])
    return Observer(name, f"measured camera {name}", columns["wavelength_nm"], curves)


def sensitivities(cameras: tuple[str, ...]) -> Array:
    """(N, 3, B) of these cameras on `CAMERA_NM`."""
    return np.stack([responsivity_at(camera(name), CAMERA_NM).T for name in cameras])


def balanced(channels: Array, power: Array) -> Array:
    """Channels (…, 3, B) × lamp (B,), each scaled to a sum of 1: the white balance of a lamp."""
    lit = channels * power
    result: Array = lit / lit.sum(axis=-1, keepdims=True)
    return result


def srgb_channels(power: Array) -> Array:
    """(3, B) what an ideal camera's linear sRGB would see under a lamp (B,), each with a sum of 1.

    The curves are the CIE 1931 2° observer's, the lamp's white carried to D65 by the linear Bradford transform
    (ISO 15076-1), then through the matrix of IEC 61966-2-1.
    """
    xyz = responsivity_at(observer("2"), CAMERA_NM).T
    white = xyz @ power
    cones = BRADFORD @ D65_XYZ1 / (BRADFORD @ (white / white[1]))
    adapted = np.linalg.solve(BRADFORD, cones[:, None] * BRADFORD)
    return balanced(LINEAR_SRGB @ adapted @ xyz, power)


def reflectance_covariance() -> Array:
    """(B, B) of smooth reflectances about a grey level that varies much more."""
    apart = CAMERA_NM[:, None] - CAMERA_NM[None, :]
    smooth = np.exp(-0.5 * (apart / REFLECTANCE_CORRELATION_NM) ** 2)
    result: Array = REFLECTANCE_SPREAD**2 * smooth + WHITE_SPREAD**2
    return result


def colour_matrix(sensor: Array, wanted: Array, covariance: Array) -> Array:
    """The matrix (…, 3, 3) by which balanced sensor channels (…, 3, B) come nearest to wanted ones (…, 3, B).

    Least squares over reflectances of the covariance (B, B); with a large variance of the grey level white stays white.
    """
    seen = sensor @ covariance
    own = seen @ np.swapaxes(sensor, -1, -2)
    other = seen @ np.swapaxes(wanted, -1, -2)
    result: Array = np.swapaxes(np.linalg.solve(own, other), -1, -2)
    return result


def effective_channels(looker: Observer, lamp: Illuminant) -> Array:
    """(3, B) on `CAMERA_NM`: what each channel of a finished picture sees, white balance and colour matrix included.

    Each channel has a sum of 1, so that `channels @ transmittance` is the linear ratio to the blank.
    """
    power = power_at(lamp, CAMERA_NM)
    sensor = balanced(responsivity_at(looker, CAMERA_NM).T, power)
    aim = srgb_channels(power_at(illuminant("D65"), CAMERA_NM))
    mixed = colour_matrix(sensor, aim, reflectance_covariance()) @ sensor
    result: Array = mixed / mixed.sum(axis=-1, keepdims=True)
    return result
