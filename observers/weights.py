"""Weights: illuminant × observer × interpolation, folded to one matrix on the grid of the spectra.

With weights W (B, 3L) for L illuminants, the tristimulus values of N spectra T (N, B) are one product: T @ W.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal, get_args

import numpy as np

from observers.arrays import Array, frozen, median
from observers.errors import InputError
from observers.grid import held, is_uniform, stated_rule
from observers.human import Observer, responsivity_at
from observers.illuminants import STANDARD_NM, Illuminant, power_at

Method = Literal["cie", "astm"]
METHODS: tuple[Method, ...] = get_args(Method)
Ends = Literal["nearest", "strict", "insist"]
ENDS: tuple[Ends, ...] = get_args(Ends)

# ASTM E308, 7.3.2.2 allows the missing ends to be added to the nearest band; what must have been measured at least.
NEEDED_NM = (400.0, 700.0)
FULL_NM = (380.0, 780.0)
WIDEST_GAP_NM = 20.0  # ASTM E308 has tables for steps of up to 20 nm
STEARNS_ALPHA = 0.083  # Stearns and Stearns 1988, Color Research and Application 13, 257


@dataclass(frozen=True, eq=False)
class Weights:
    """One (B, 3L) matrix for L illuminants side by side; ``white`` (L, 3) is the response to a clear cell.

    Y of each white is 100. ``notes`` says what was done at the ends of the grid.
    """

    wavelength_nm: Array
    matrix: Array
    white: Array
    illuminants: tuple[str, ...]
    observer: str
    method: Method
    notes: tuple[str, ...] = ()

    def response(self, fraction: Array) -> Array:
        """XYZ100 (…, L, 3) of transmittance or reflectance (…, B)."""
        flat: Array = fraction @ self.matrix
        return flat.reshape(*flat.shape[:-1], len(self.illuminants), 3)


def weights(
    wavelength_nm: Array,
    illuminants: Sequence[Illuminant],
    observer: Observer,
    *,
    method: Method = "cie",
    ends: Ends = "nearest",
    bandpass: bool = False,
) -> Weights:
    """The weights of these lamps and this observer (K = 3) for spectra on a grid (B,).

    method : ``cie`` interpolates the spectrum to 1 nm (Sprague, CIE 167; uneven grids by cubic Lagrange, CIE 15) and
    sums; ``astm`` takes the Lagrange weights of ASTM E2022 as used by ASTM E308, on even grids only.
    ends : ``nearest`` adds the weights of missing ends to the nearest band, and refuses less than 400–700 nm (E308);
    ``strict`` refuses less than 380–780 nm; ``insist`` takes any range.
    bandpass : undo a triangular bandpass as wide as the step (Stearns and Stearns 1988).

    Raises InputError for a grid that the method or the policy does not take.
    """
    if not illuminants:
        raise InputError("no illuminant was given", do="name at least one")
    if method not in METHODS or ends not in ENDS:
        raise InputError(f"unknown weights {method!r} or ends {ends!r}", why=f"known are {METHODS} and {ENDS}")
    grid = tuple(np.asarray(wavelength_nm, dtype=np.float64).tolist())
    return _cached(grid, tuple(illuminants), observer, method, ends, bandpass)


# Lamps and observers hash by identity, so one that was built twice is folded twice; that costs 2 ms.
@lru_cache(maxsize=64)
def _cached(
    grid: tuple[float, ...],
    lamps: tuple[Illuminant, ...],
    observer: Observer,
    method: Method,
    ends: Ends,
    bandpass: bool,
) -> Weights:
    wavelength_nm = frozen(grid)
    notes = _judge_ends(wavelength_nm, ends)
    carry = _astm_fold(wavelength_nm) if method == "astm" else _cie_fold(wavelength_nm)
    if bandpass:
        carry = carry @ bandpass_correction(wavelength_nm)
        notes += (f"bandpass of {wavelength_nm[1] - wavelength_nm[0]:g} nm undone (Stearns and Stearns 1988)",)
    eye = responsivity_at(observer, STANDARD_NM)
    columns = [_normalised(carry.T @ (power_at(lamp, STANDARD_NM)[:, None] * eye), lamp) for lamp in lamps]
    matrix = frozen(np.hstack(columns))
    white = frozen(matrix.sum(axis=0).reshape(len(lamps), -1))
    lamp_notes = tuple(note for lamp in lamps for note in lamp.notes)
    return Weights(
        wavelength_nm, matrix, white, tuple(lamp.name for lamp in lamps), observer.key, method, notes + lamp_notes
    )


def bandpass_correction(wavelength_nm: Array) -> Array:
    """The matrix (B, B) that undoes a triangular bandpass as wide as the step of an even grid."""
    if len(wavelength_nm) < 3 or not is_uniform(wavelength_nm):
        raise InputError("no bandpass correction", why="it is defined for three or more evenly spaced bands")
    bands, a = len(wavelength_nm), STEARNS_ALPHA
    matrix = (1 + 2 * a) * np.eye(bands) - a * (np.eye(bands, k=1) + np.eye(bands, k=-1))
    matrix[0, 0] = matrix[-1, -1] = 1 + a
    return matrix


def _cie_fold(wavelength_nm: Array) -> Array:
    """(471, B): spectrum to 1 nm, ends held; a grid finer than that is averaged onto the 1 nm points instead."""
    steps = np.diff(wavelength_nm)
    if len(steps) and median(steps) < 0.75:
        return _fine_fold(wavelength_nm)
    return held(wavelength_nm, STANDARD_NM, stated_rule(wavelength_nm))


def _fine_fold(wavelength_nm: Array) -> Array:
    """Means over each 1 nm step of the straight lines between the points of a fine spectrum, as a matrix."""
    first, last = STANDARD_NM[0] - 0.5, STANDARD_NM[-1] + 0.5
    edges = np.linspace(first, last, len(STANDARD_NM) + 1)
    inner = edges[(edges > wavelength_nm[0]) & (edges < wavelength_nm[-1])]
    cuts = np.union1d(wavelength_nm, inner)
    cuts = cuts[(cuts >= edges[0]) & (cuts <= edges[-1])]
    middle, width = (cuts[1:] + cuts[:-1]) / 2, np.diff(cuts)
    step, interval = np.searchsorted(edges, middle) - 1, np.searchsorted(wavelength_nm, middle) - 1
    passed = (middle - wavelength_nm[interval]) / np.diff(wavelength_nm)[interval]
    share = np.zeros((len(STANDARD_NM), len(wavelength_nm)))
    np.add.at(share, (step, interval), width * (1 - passed))
    np.add.at(share, (step, interval + 1), width * passed)
    total = share.sum(axis=1, keepdims=True)
    empty = total[:, 0] == 0
    share[~empty] /= total[~empty]
    share[empty] = held(wavelength_nm, STANDARD_NM[empty], "linear")
    return share


def _astm_fold(wavelength_nm: Array) -> Array:
    """(471, B): E2022 on the full table of this step over 360–830 nm, missing ends added to the nearest band."""
    if not is_uniform(wavelength_nm):
        raise InputError(
            "ASTM E308 weights need evenly spaced bands",
            why="E2022 defines them for even steps only",
            do="take --weights cie, or put the spectra on an even grid",
        )
    step = float(np.diff(wavelength_nm).mean())
    before = int((wavelength_nm[0] - STANDARD_NM[0] + 1e-6) // step)
    after = int((STANDARD_NM[-1] - wavelength_nm[-1] + 1e-6) // step)
    count = len(wavelength_nm)
    full = wavelength_nm[0] + step * np.arange(-before, count + after)
    fold = held(full, STANDARD_NM, "lagrange")
    trim = np.zeros((len(full), count))
    trim[np.arange(len(full)), np.clip(np.arange(len(full)) - before, 0, count - 1)] = 1.0
    result: Array = fold @ trim
    return result


def _normalised(columns: Array, lamp: Illuminant) -> Array:
    total = columns[:, 1].sum()
    if not total > 0:
        raise InputError(f"lamp {lamp.name} gives this observer no light", why="its power lies outside 360–830 nm")
    result: Array = columns * (100.0 / total)
    return result


def _judge_ends(wavelength_nm: Array, ends: Ends) -> tuple[str, ...]:
    low, high = float(wavelength_nm[0]), float(wavelength_nm[-1])
    slack = 1e-6
    if ends == "strict" and (low > FULL_NM[0] + slack or high < FULL_NM[1] - slack):
        raise InputError(
            f"spectra over {low:g}–{high:g} nm",
            why="--ends strict wants 380–780 nm or more",
            do="measure the whole range, or take --ends nearest",
        )
    if ends != "insist":
        _refuse_short(wavelength_nm, low, high, slack)
    missing = [f"{FULL_NM[0]:g}–{low:g} nm"] if low > FULL_NM[0] + slack else []
    missing += [f"{high:g}–{FULL_NM[1]:g} nm"] if high < FULL_NM[1] - slack else []
    if not missing:
        return ()
    return (f"{' and '.join(missing)} not measured: their weights added to the nearest band (ASTM E308 7.3.2.2)",)


def _refuse_short(wavelength_nm: Array, low: float, high: float, slack: float) -> None:
    if low > NEEDED_NM[0] + slack or high < NEEDED_NM[1] - slack:
        raise InputError(
            f"spectra over {low:g}–{high:g} nm",
            why="colour needs 400–700 nm at least (ASTM E308)",
            do="measure the whole range, or say --ends insist to hold the end values",
        )
    inner = wavelength_nm[
        (wavelength_nm >= NEEDED_NM[0] - WIDEST_GAP_NM) & (wavelength_nm <= NEEDED_NM[1] + WIDEST_GAP_NM)
    ]
    gaps = np.diff(inner)
    if len(gaps) and gaps.max() > WIDEST_GAP_NM + slack:
        at = inner[int(gaps.argmax())]
        raise InputError(
            f"a gap of {gaps.max():g} nm after {at:g} nm",
            why="colour needs a step of 20 nm or less (ASTM E308)",
            do="measure at smaller steps, or say --ends insist",
        )
