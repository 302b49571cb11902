"""What a finished picture shows of solutions: lamp × dye × effective channel, stray light, tone curve; with slopes.

Everything is done for H hypotheses at once (lamps, sizes of the model's error, draws of a sample), so that a mixture
costs little more than one of its parts.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from chroma.quantity import LN10
from observers.arrays import Array, Index, frozen

LEAST_SIGNAL = 0.003  # of the panel: below this a clipped channel's mean bends towards zero instead of crossing it
SMALL_ABSORBANCE = 0.02  # where the scale of an unknown goes over from linear to logarithmic

# Priors (mean, standard deviation) of the numbers that describe a photo besides its camera; judgement, and wide.
VEIL = (0.015, 0.012)  # stray light as a share of the panel, before it is kept from turning negative
LEAST_VEIL = 0.002
POWER = (1.05, 0.05)  # of the tone curve beyond sRGB's: makers add some contrast
SHOULDER = (-0.10, 0.10)  # change of that power from dark to bright
TOE = (0.0, 0.02)  # change of that power per e-fold of light, halved
LINEAR_TONE = ((1.0, 0.003), (0.0, 0.005), (0.0, 0.001))  # the same three for a file developed without a curve
LN_CELL = (np.log(0.92), 0.10)  # a filled cell against the bare panel


@dataclass(frozen=True, eq=False)
class Optics:
    """What does not change during a fit: L lamps' channels, D dyes on the same grid, the readings' surroundings.

    channels (L, 1 + P, 3, B): mean and directions; absorbance (D, B) per unit of concentration in the cell; modes
    (F, D, B): errors of that which all bands share, each with a standard normal prior; level (N, 3): the panel at each
    cuvette in linear light; known (N, D): concentrations, NaN where wanted.
    """

    channels: Array
    absorbance: Array
    modes: Array
    level: Array
    known: Array

    def __post_init__(self) -> None:
        for name in ("channels", "absorbance", "modes", "level", "known"):
            object.__setattr__(self, name, frozen(getattr(self, name)))

    @property
    def directions(self) -> int:
        """P."""
        return int(self.channels.shape[1] - 1)

    @property
    def wanted(self) -> Index:
        """Rows of the cuvettes whose concentrations are sought."""
        return np.flatnonzero(np.isnan(self.known).any(axis=1))

    @property
    def small(self) -> Array:
        """(D,) concentrations below which the scale of an unknown is linear."""
        result: Array = SMALL_ABSORBANCE / self.absorbance.max(axis=1)
        return result

    @property
    def layout(self) -> Layout:
        """Where each number stands in the vector that is fitted."""
        return Layout(self.directions, len(self.modes), len(self.wanted) * len(self.absorbance))


@dataclass(frozen=True)
class Layout:
    """The vector of a fit: z (P), ln cell (3), veil, power, shoulder, toe, dye modes (F), unknowns (U·D)."""

    directions: int
    modes: int
    unknowns: int

    @property
    def cell(self) -> slice:
        """Ln of a filled cell against the panel, per channel."""
        return slice(self.directions, self.directions + 3)

    @property
    def veil(self) -> int:
        """Ln of stray light."""
        return self.directions + 3

    @property
    def power(self) -> int:
        """Power of the tone curve."""
        return self.directions + 4

    @property
    def shoulder(self) -> int:
        """Change of the power towards white."""
        return self.directions + 5

    @property
    def toe(self) -> int:
        """Change of the power towards black."""
        return self.directions + 6

    @property
    def mode(self) -> slice:
        """Shared errors of the dye."""
        return slice(self.toe + 1, self.nuisance)

    @property
    def unknown(self) -> slice:
        """Unknown concentrations, on the scale of `concentration`."""
        return slice(self.nuisance, self.size)

    @property
    def size(self) -> int:
        """How many numbers."""
        return self.nuisance + self.unknowns

    @property
    def nuisance(self) -> int:
        """How many of them come before the unknowns."""
        return self.toe + 1 + self.modes


def concentration(u: Array, small: Array) -> Array:
    """Concentration from the scale of the fit: linear near zero, where it may be negative, logarithmic above."""
    result: Array = small * np.sinh(u)
    return result


def scaled(c: Array, small: Array) -> Array:
    """The inverse of `concentration`."""
    result: Array = np.arcsinh(c / small)
    return result


def prior(layout: Layout) -> tuple[Array, Array]:
    """Mean and standard deviation (n,) of every number; unknowns are left nearly free."""
    mean, spread = np.zeros(layout.size), np.ones(layout.size)
    mean[layout.cell], spread[layout.cell] = LN_CELL
    tone = ((layout.veil, VEIL), (layout.power, POWER), (layout.shoulder, SHOULDER), (layout.toe, TOE))
    for at, (centre, width) in tone:
        mean[at], spread[at] = centre, width
    mean[layout.unknown], spread[layout.unknown] = 2.0, 6.0
    return mean, spread


def concentrations(optics: Optics, x: Array) -> Array:
    """(H, N, D) of every cuvette, known and sought."""
    c = np.broadcast_to(optics.known, (len(x), *optics.known.shape)).copy()
    rows = optics.wanted
    c[:, rows] = concentration(x[:, optics.layout.unknown].reshape(len(x), len(rows), len(optics.small)), optics.small)
    return c


def predict(optics: Optics, x: Array, lamp: npt.NDArray[np.intp], *, slopes: bool = True) -> tuple[Array, Array | None]:
    """Readings relative to the panel (H, N, 3) for numbers x (H, n) under lamps (H,), and slopes (H, N, 3, n)."""
    layout = optics.layout
    c = concentrations(optics, x)
    # A dye's table is changed by its modes alike in every cuvette.
    eps = optics.absorbance + np.einsum("hf,fdb->hdb", x[:, layout.mode], optics.modes)
    through = np.exp(-LN10 * np.einsum("hnd,hdb->hnb", c, eps))
    z1 = np.concatenate([np.ones((len(x), 1)), x[:, : layout.directions]], axis=1)
    seen = _seen(optics, through, lamp)
    ratio = np.einsum("hnmk,hm->hnk", seen, z1)
    value, by_ratio, by_tone = _tone(optics, x, ratio)
    if not slopes:
        return value, None
    slope = np.zeros((*value.shape, layout.size))
    slope[..., : layout.directions] = by_ratio[..., None] * np.swapaxes(seen[:, :, 1:], 2, 3)
    slope[..., layout.directions : layout.toe + 1] = by_tone
    own = np.einsum("hm,hmkb->hkb", z1, optics.channels[lamp])
    for f in range(layout.modes):
        ran = np.einsum("hnd,db->hnb", c, optics.modes[f]) * through
        slope[..., layout.mode.start + f] = -LN10 * by_ratio * np.einsum("hnb,hkb->hnk", ran, own)
    _unknown_slopes(optics, x, slope, by_ratio, through, eps, own)
    return value, slope


def own_slopes(optics: Optics, x: Array, lamp: npt.NDArray[np.intp]) -> tuple[Array, Array]:
    """Readings (H, N, 3) and their slopes (H, N, 3, D) by each cuvette's own unknowns, where all are sought."""
    layout, dyes = optics.layout, len(optics.absorbance)
    u = x[:, layout.unknown].reshape(len(x), -1, dyes)
    eps = optics.absorbance + np.einsum("hf,fdb->hdb", x[:, layout.mode], optics.modes)
    through = np.exp(-LN10 * (concentration(u, optics.small) @ eps))
    own = effective(optics, x, lamp)
    value, by_ratio, _ = _tone(optics, x, through @ np.swapaxes(own, 1, 2))
    slope = np.empty((*value.shape, dyes))
    for d in range(dyes):
        ran = (through * eps[:, None, d]) @ np.swapaxes(own, 1, 2)
        slope[..., d] = -LN10 * by_ratio * ran * (optics.small[d] * np.cosh(u[..., d]))[..., None]
    return value, slope


def effective(optics: Optics, x: Array, lamp: npt.NDArray[np.intp]) -> Array:
    """(H, 3, B) channels of each hypothesis."""
    members = optics.channels.shape[1]
    result = np.empty((len(x), *optics.channels.shape[2:]))
    z1 = np.concatenate([np.ones((len(x), 1)), x[:, : optics.directions]], axis=1)
    for number in np.unique(lamp):
        rows = lamp == number
        result[rows] = (z1[rows] @ optics.channels[number].reshape(members, -1)).reshape(-1, *result.shape[1:])
    return result


def _seen(optics: Optics, through: Array, lamp: npt.NDArray[np.intp]) -> Array:
    """(H, N, 1 + P, 3): each solution through mean and directions of its lamp, one product a lamp."""
    members, bands = optics.channels.shape[1:3], through.shape[-1]
    result = np.empty((*through.shape[:2], *members))
    for number in np.unique(lamp):
        rows = lamp == number
        flat = optics.channels[number].reshape(-1, bands)
        result[rows] = (through[rows].reshape(-1, bands) @ flat.T).reshape(-1, through.shape[1], *members)
    return result


def _tone(optics: Optics, x: Array, ratio: Array) -> tuple[Array, Array, Array]:
    """Readings, their slope by the ratio to the blank, and by (ln cell ×3, veil, power, shoulder, toe) as (…, 3, 7)."""
    layout = optics.layout
    cell = np.exp(x[:, None, layout.cell])
    plain, power, shoulder, toe = (
        x[:, at, None, None] for at in (layout.veil, layout.power, layout.shoulder, layout.toe)
    )
    # Nearly the number itself where it is positive: on a logarithmic scale its curvature would tell little of its tails.
    hyperbola = np.sqrt(plain**2 + LEAST_VEIL**2)
    veil, by_plain = 0.5 * (plain + hyperbola), 0.5 * (1 + plain / hyperbola)
    signal = (cell * ratio + veil) / (1 + veil)
    root = np.sqrt(signal**2 + 4 * LEAST_SIGNAL**2)
    light = 0.5 * (signal + root)
    by_signal = light / root
    bend = shoulder * optics.level
    ln_light = np.log(light)
    value = np.exp(power * ln_light + bend * (light - 1) + toe * ln_light**2)
    by_light = value * ((power + 2 * toe * ln_light) / light + bend)
    by_ratio = by_light * by_signal * cell / (1 + veil)
    by_tone = np.zeros((*value.shape, 7))
    for k in range(3):
        by_tone[:, :, k, k] = by_ratio[:, :, k] * ratio[:, :, k]
    by_tone[..., 3] = by_light * by_signal * by_plain * (1 - signal) / (1 + veil)
    by_tone[..., 4] = value * ln_light
    by_tone[..., 5] = value * optics.level * (light - 1)
    by_tone[..., 6] = value * ln_light**2
    return value, by_ratio, by_tone


def _unknown_slopes(
    optics: Optics, x: Array, slope: Array, by_ratio: Array, through: Array, eps: Array, own: Array
) -> None:
    """Write the slopes by each unknown into its own cuvette's rows."""
    rows, dyes, layout = optics.wanted, len(optics.absorbance), optics.layout
    u = x[:, layout.unknown].reshape(len(x), len(rows), dyes)
    for d in range(dyes):
        ran = through[:, rows] * eps[:, None, d]
        by_c = -LN10 * by_ratio[:, rows] * np.einsum("hnb,hkb->hnk", ran, own)
        by_u = by_c * (optics.small[d] * np.cosh(u[..., d]))[..., None]
        for i, row in enumerate(rows):
            slope[:, row, :, layout.unknown.start + i * dyes + d] = by_u[:, i]


def channels_of(populations: Sequence[tuple[Array, Array]]) -> Array:
    """(L, 1 + P, 3, B) from means (3, B) and directions (P, 3, B)."""
    return np.stack([np.concatenate([mean[None], directions]) for mean, directions in populations])
