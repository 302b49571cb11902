"""What is in the cell: concentrations of several dyes from a measured spectrum, and whether something else is there.

A = Σ ε_i c_i d + baseline + noise. The noise is constant in transmittance, so each band weighs (T·ln 10/σ)². Dyes
cannot be negative: the estimate is non-negative least squares (Lawson and Hanson 1974), its interval comes from the
unconstrained fit, cut at zero.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal, get_args

import numpy as np

from chroma.dye.model import Dye
from chroma.dye.shared import shared
from chroma.dye.solution import Shelf
from chroma.quantity import LN10, converted
from chroma.spectra import Source, Spectra
from observers.arrays import Array, Mask
from observers.errors import InputError

if TYPE_CHECKING:
    from chroma.frames import Library

Baseline = Literal["none", "constant", "linear", "scatter"]
BASELINES: tuple[Baseline, ...] = get_args(Baseline)

ROUNDS = 3  # of reweighting with the fitted absorbance
RISK = 0.01  # of calling a clean cell dirty
SMOOTH_TERMS = 10  # cosines that stand for "a band of something else"; a dye's band spans two or three of them
UNTOLD = 1e-9  # a singular value this small against the largest is rounding
ALIKE = 0.995  # cosine between two dyes' weighted spectra above which they cannot be told apart in practice


@dataclass(frozen=True, eq=False)
class Unmixed:
    """Concentrations of D dyes in N samples, in the shelf's unit.

    value, low, high (N, D), the interval at ``confidence``; residual (N, B) in absorbance and its rms (N,); baseline
    (N, P) coefficients; noise (N,) in transmittance; foreign (N,) whether the residual says that something else is in
    the cell, with its probability by chance (N,) and the wavelength where it is largest (N,).
    """

    names: tuple[str, ...]
    shelf: Shelf
    path_length_mm: float
    baseline_kind: Baseline
    confidence: float
    value: Array
    low: Array
    high: Array
    baseline: Array
    residual: Array
    rms: Array
    noise: Array
    foreign: Mask
    foreign_p: Array
    foreign_nm: Array
    sources: tuple[Source, ...]
    notes: tuple[str, ...]

    def _repr_html_(self) -> str:
        from chroma.notebook import unmixed_html

        return unmixed_html(self)

    def to_frame(self, library: Library | None = None) -> Any:
        """A table of pandas or polars, one row a sample and dye."""
        from chroma.frames import frame, unmixed_columns

        return frame(unmixed_columns(self), library)


@dataclass(frozen=True, eq=False)
class _One:
    value: Array
    low: Array
    high: Array
    baseline: Array
    residual: Array
    noise: float
    p: float
    at: int


def unmix(
    spectra: Spectra,
    stock: Shelf,
    *,
    path_length_mm: float,
    baseline: Baseline = "constant",
    scatter_power: float = 2.0,
    noise_T: float | None = None,
    confidence: float = 0.95,
    absorbance_limit: float = 3.0,
) -> Unmixed:
    """Concentrations in each sample of blank-corrected spectra, on the grid of the shelf.

    baseline : an offset, an offset with a slope, or scattering that falls as λ^-scatter_power with an offset; may be
    negative, but scattering not. noise_T : standard deviation of the transmittance; by default it is taken from the
    differences between neighbouring bands of each residual.

    Raises InputError when the grids differ, fewer bands are usable than unknowns, or an option is not known.
    """
    if baseline not in BASELINES:
        raise InputError(f"unknown baseline {baseline!r}", why=f"known are {', '.join(BASELINES)}")
    if spectra.wavelength_nm.shape != stock.wavelength_nm.shape or not np.allclose(
        spectra.wavelength_nm, stock.wavelength_nm
    ):
        raise InputError("spectra and dyes stand on different grids", do="bring the dyes to the grid of the spectra")
    A = converted(spectra, "absorbance").values
    extra, signed = _baseline(stock.wavelength_nm, baseline, scatter_power)
    columns = np.column_stack([stock.absorptivity.T * path_length_mm / 10, extra])
    every = [
        _unmix_one(row, row <= absorbance_limit, columns, signed, stock, path_length_mm, noise_T, confidence)
        for row in A
    ]
    return Unmixed(
        spectra.names, stock, path_length_mm, baseline, confidence,
        np.stack([one.value for one in every]), np.stack([one.low for one in every]),
        np.stack([one.high for one in every]), np.stack([one.baseline for one in every]),
        np.stack([one.residual for one in every]),
        np.array([np.sqrt((one.residual**2).mean()) for one in every]), np.array([one.noise for one in every]),
        np.array([one.p < RISK for one in every]), np.array([one.p for one in every]),
        stock.wavelength_nm[[one.at for one in every]], spectra.sources, spectra.notes + _alike(stock, A),
    )  # fmt: skip


def unmix_spectra(
    spectra: Spectra, dyes: Sequence[Dye], *, span_nm: tuple[float, float] | None = None, path_length_mm: float,
    baseline: Baseline = "constant", scatter_power: float = 2.0, noise_T: float | None = None, confidence: float = 0.95,
    absorbance_limit: float = 3.0,
) -> Unmixed:  # fmt: skip
    """Like `unmix`, with the dyes brought to the grid of the spectra over the range that all of them cover."""
    cut, stock = shared(spectra, dyes, span_nm=span_nm)
    return unmix(
        cut, stock, path_length_mm=path_length_mm, baseline=baseline, scatter_power=scatter_power, noise_T=noise_T,
        confidence=confidence, absorbance_limit=absorbance_limit,
    )  # fmt: skip


def _baseline(wavelength_nm: Array, kind: Baseline, power: float) -> tuple[Array, Mask]:
    """Columns (B, P) of the baseline, and which of them may be negative."""
    one = np.ones_like(wavelength_nm)
    middle = wavelength_nm.mean()
    match kind:
        case "none":
            return np.empty((len(one), 0)), np.zeros(0, dtype=bool)
        case "constant":
            return one[:, None], np.array([True])
        case "linear":
            return np.column_stack([one, (wavelength_nm - middle) / np.ptp(wavelength_nm)]), np.array([True, True])
        case "scatter":
            return np.column_stack([one, (wavelength_nm / middle) ** -power]), np.array([True, False])


def _unmix_one(
    A: Array, usable: Mask, columns: Array, signed: Mask, stock: Shelf, path_length_mm: float, noise_T: float | None,
    confidence: float,
) -> _One:  # fmt: skip
    dyes, unknowns = len(stock.dyes), columns.shape[1]
    if np.count_nonzero(usable) <= unknowns + 3:
        raise InputError(
            f"{np.count_nonzero(usable)} usable bands for {unknowns} unknowns",
            why="too few",
            do="measure more bands, or a thinner cell where the absorbance is below the limit",
        )
    fitted, sigma = np.maximum(A, 0.0), noise_T or 5e-4
    solution = np.zeros(unknowns)
    for _ in range(ROUNDS):
        own = _dye_noise(stock, solution[:dyes], path_length_mm)
        scale = np.where(usable, 1 / np.sqrt((sigma / (10.0**-fitted * LN10)) ** 2 + own**2), 0.0)
        solution = _non_negative(columns * scale[:, None], A * scale, dyes, signed)
        fitted = np.maximum(columns @ solution, 0.0)
        residual = A - columns @ solution
        if noise_T is None:
            sigma = _noise(residual * 10.0**-fitted * LN10, usable)
    whitened = columns * scale[:, None]
    free, _, _, _ = np.linalg.lstsq(whitened, A * scale, rcond=None)
    half = _half_widths(whitened, scale, A - columns @ free, stock, solution[:dyes], path_length_mm, confidence)
    p, at = _foreign(residual * scale, whitened, _shared(stock, solution[:dyes], path_length_mm) * scale, usable)
    low, high = np.maximum(free[:dyes] - half, 0), np.maximum(free[:dyes], 0) + half
    return _One(solution[:dyes], low, high, solution[dyes:], np.where(usable, residual, 0.0), sigma, p, at)


def _non_negative(X: Array, y: Array, dyes: int, signed: Mask) -> Array:
    """Least squares with the dyes, and what of the baseline is not signed, held at or above zero."""
    from scipy.optimize import nnls

    free = np.concatenate([np.zeros(dyes, dtype=bool), signed])
    size = np.maximum(np.sqrt((X**2).sum(axis=0)), 1e-300)
    scaled = X / size
    split = np.column_stack([scaled, -scaled[:, free]])  # a signed unknown is the difference of two non-negative ones
    found = nnls(split, y)[0]
    result = found[: X.shape[1]].copy()
    result[free] -= found[X.shape[1] :]
    return np.asarray(result / size, dtype=np.float64)


def _dye_noise(stock: Shelf, c: Array, path_length_mm: float) -> Array:
    """(B,) noise in absorbance from what each band's absorptivity is uncertain by on its own."""
    own = np.stack([dye.independent for dye in stock.dyes])
    result: Array = np.sqrt(((c[:, None] * own) ** 2).sum(axis=0)) * path_length_mm / 10
    return result


def _shared(stock: Shelf, c: Array, path_length_mm: float) -> Array:
    """(F, B) absorbance that the errors shared by all bands of a dye may have put there."""
    cm = path_length_mm / 10
    return np.concatenate([amount * cm * dye.common for amount, dye in zip(c, stock.dyes, strict=True)])


def _half_widths(
    X: Array, scale: Array, residual: Array, stock: Shelf, c: Array, path_length_mm: float, confidence: float
) -> Array:
    """(D,) half widths of the intervals: noise, widened where the residual is larger than it, and the dyes' shared errors.

    The factor is Student's t at the effective degrees of freedom of Welch and Satterthwaite (JCGM 100, G.4): the noise
    is known from all bands, what a dye's bands share only from as many numbers as its series had standards.
    """
    from scipy.special import stdtrit

    freedom = np.count_nonzero(scale) - X.shape[1]
    inverse, dyes = _inverse(X), len(stock.dyes)
    noise = np.diag(inverse)[:dyes] * max(float(((residual * scale) ** 2).sum()) / freedom, 1.0)
    gain = inverse[:dyes] @ X.T * scale
    cm = path_length_mm / 10
    by_dye = np.stack(
        [((gain @ (amount * cm * dye.common).T) ** 2).sum(axis=1) for amount, dye in zip(c, stock.dyes, strict=True)]
    )
    each = np.array([dye.freedom for dye in stock.dyes])
    variance = noise + by_dye.sum(axis=0)
    effective = variance**2 / (noise**2 / freedom + (by_dye**2 / each[:, None]).sum(axis=0))
    result: Array = stdtrit(effective, (1 + confidence) / 2) * np.sqrt(variance)
    return result


def _inverse(X: Array) -> Array:
    """The inverse of XᵀX; directions that the data do not tell apart come out as good as unknown, not as known."""
    size = np.maximum(np.sqrt((X**2).sum(axis=0)), 1e-300)
    _, s, V = np.linalg.svd(X / size, full_matrices=False)
    rows = V / np.maximum(s, UNTOLD * s[0])[:, None] / size
    result: Array = rows.T @ rows
    return result


def _noise(left: Array, usable: Mask) -> float:
    """Noise in transmittance from second differences between neighbouring usable bands, by their median."""
    second = left[2:] - 2 * left[1:-1] + left[:-2]
    whole = usable[2:] & usable[1:-1] & usable[:-2]
    if np.count_nonzero(whole) < 5:
        return 5e-4
    return max(float(np.median(np.abs(second[whole])) / 0.6745 / np.sqrt(6.0)), 1e-6)


def _foreign(whitened: Array, X: Array, shared: Array, usable: Mask) -> tuple[float, int]:
    """Whether the residual holds a broad band that nothing explains: its probability by chance, and where.

    The residual is laid on slow cosines, made orthogonal to what was fitted and to the dyes' shared errors; on noise
    alone the energy there against the noise follows the F distribution.
    """
    from scipy.special import fdtrc

    rows = np.flatnonzero(usable)
    slow = np.cos(
        np.pi * np.outer((np.arange(len(rows)) + 0.5) / len(rows), np.arange(min(SMOOTH_TERMS, len(rows) // 3)))
    )
    fitted = np.column_stack([X[rows], shared[:, rows].T]) if len(shared) else X[rows]
    known = _orthonormal(fitted)
    slow = _orthonormal(slow - known @ (known.T @ slow))
    left = whitened[rows] - known @ (known.T @ whitened[rows])
    amplitude = slow.T @ left
    rest = left - slow @ amplitude
    freedom = max(len(rows) - known.shape[1] - slow.shape[1], 1)
    # Whitened noise is 1; where it turns out larger than that on the quick cosines, those say what the noise is.
    noise = max(float(rest @ rest) / freedom, 1.0)
    F = float(amplitude @ amplitude) / slow.shape[1] / noise
    return float(fdtrc(slow.shape[1], freedom, F)), int(rows[np.argmax(np.abs(slow @ amplitude))])


def _orthonormal(columns: Array) -> Array:
    """An orthonormal basis of the columns' span."""
    size = np.sqrt((columns**2).sum(axis=0))
    kept = columns[:, size > 1e-9 * max(float(size.max(initial=0.0)), 1e-300)]
    if not kept.shape[1]:
        return kept
    U, s, _ = np.linalg.svd(kept / np.sqrt((kept**2).sum(axis=0)), full_matrices=False)
    return np.asarray(U[:, s > 1e-7 * s[0]], dtype=np.float64)


def _alike(stock: Shelf, A: Array) -> tuple[str, ...]:
    """A note for each pair of dyes whose spectra are too alike to be told apart."""
    weight = 10.0 ** -np.maximum(np.median(A, axis=0), 0.0)
    weighted = stock.absorptivity * weight
    unit = weighted / np.linalg.norm(weighted, axis=1, keepdims=True)
    cosine = unit @ unit.T
    pairs = [(i, j) for i in range(len(unit)) for j in range(i) if cosine[i, j] > ALIKE]
    return tuple(
        f"{stock.names[i]} and {stock.names[j]} can hardly be told apart here (their spectra have a cosine of "
        f"{cosine[i, j]:.4f}): only their sum is sure"
        for i, j in pairs
    )
