"""The absorptivity of a dye from a dilution series, with what is uncertain about it.

The model of a reading i of standard j at one wavelength is

    A_i = ε·x_j·(1 + δ_j) + β_i + a + noise,

x concentration × path length, δ the error of the concentration (shared by all wavelengths), β the offset of a reading,
a an optional intercept. The noise is constant in transmittance, so in absorbance it is σ/(T·ln 10) and its weight falls
with absorbance. σ, δ and β are estimated from the residuals; the line is fitted at each wavelength by weighted least
squares, reweighted with the fitted absorbance.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from chroma.dye.series import Series
from chroma.quantity import LN10
from observers.arrays import Array
from observers.errors import InputError

ROUNDS = 6  # of reweighting; the weights settle to a thousandth after three or four
FIRST_SIGMA_T = 5e-4  # a bench instrument's photometric noise, common practice; only where to begin
WINDOW = 7  # bands to either side over which the noise is taken as constant
LARGEST_STRAY = 0.05
KEPT_VARIANCE = 0.9999  # share of the common variance that the kept factors carry


@dataclass(frozen=True, eq=False)
class Fitted:
    """What a fit found.

    absorptivity, independent (B,), common (F, B) as in `chroma.dye.model.Dye`; intercept (B,); residual (R, B) in
    absorbance; sigma_T (B,) the noise in transmittance; strength (N,) how strong each standard came out against its
    concentration, with its standard uncertainty; sd_concentration (relative) and sd_offset (absorbance) of δ and β;
    explained (R, B) what δ and β put into each reading.
    """

    absorptivity: Array
    independent: Array
    common: Array
    intercept: Array
    residual: Array
    sigma_T: Array
    strength: Array
    u_strength: Array
    sd_concentration: float
    sd_offset: float
    stray_light: float
    u_stray_light: float
    freedom: float
    absorbance: Array
    explained: Array


def fit(data: Series, *, intercept: bool = False, stray_light: float | None = 0.0) -> Fitted:
    """Fit the absorptivity at every wavelength of a series.

    stray_light : the fraction s of T_observed = (T + s)/(1 + s) to take out, or None to fit it over the series.

    Raises InputError when a wavelength has fewer usable standards than unknowns, or for stray light out of range.
    """
    _judge(data, intercept)
    if stray_light is None:
        s, u_s = _fitted_stray(data, intercept)
        found = _fit_at(data, intercept, s)
        step = max(u_s, 1e-6)
        slope = (_fit_at(data, intercept, s + step).absorptivity - found.absorptivity) / step
        return _with_stray(found, s, u_s, slope)
    if not 0 <= stray_light <= LARGEST_STRAY:
        raise InputError(f"stray light of {stray_light:g}", why=f"a fraction from 0 to {LARGEST_STRAY:g} is taken")
    return _fit_at(data, intercept, stray_light)


def corrected_for_stray(absorbance: Array, s: float) -> Array:
    """Absorbance without the stray fraction s; what would need more light than the stray is held at 5."""
    if s == 0:
        return absorbance
    T = 10.0**-absorbance * (1 + s) - s
    result: Array = -np.log10(np.maximum(T, 1e-5))
    return result


def _fit_at(data: Series, intercept: bool, s: float) -> Fitted:
    A = corrected_for_stray(data.absorbance, s)
    columns = np.stack([data.x, np.ones_like(data.x)], axis=1) if intercept else data.x[:, None]
    sigma_T = np.full(A.shape[1], FIRST_SIGMA_T)
    sd_c = sd_o = 0.0
    model = A
    for _ in range(ROUNDS):
        variance = (sigma_T / (10.0**-model * LN10)) ** 2 + (sd_c * model) ** 2 + sd_o**2
        weights = np.where(data.usable, 1 / variance, 0.0)
        gain = gains(columns, weights)
        coefficients = np.einsum("pbr,rb->pb", gain, A)
        model = np.maximum(columns @ coefficients, 0.0)
        residual = np.where(data.usable, A - columns @ coefficients, 0.0)
        errors = _errors(data, residual, coefficients[0], sigma_T, intercept)
        sd_c, sd_o = errors.sd_concentration, errors.sd_offset
        sigma_T = _noise(data, residual - errors.explained, model, columns.shape[1])
    noise_A = np.where(data.usable, sigma_T / (10.0**-model * LN10), 0.0)
    independent = np.sqrt((gain[0].T ** 2 * noise_A**2).sum(axis=0))
    common = _common(data, gain[0], coefficients[0], sd_c, sd_o)
    standards = int((data.concentration > 0).sum())
    return Fitted(
        coefficients[0],
        independent,
        common,
        coefficients[1] if intercept else np.zeros(A.shape[1]),
        residual,
        sigma_T,
        1 + errors.delta,
        errors.u_delta,
        sd_c,
        sd_o,
        s,
        0.0,
        float(max(standards - columns.shape[1], 1)),
        A,
        errors.explained,
    )


def gains(columns: Array, weights: Array) -> Array:
    """(P, B, R) the linear map from absorbances to coefficients at each wavelength, (XᵀWX)⁻¹XᵀW."""
    normal = np.einsum("rp,rb,rq->bpq", columns, weights, columns)
    result: Array = np.einsum("bpq,rq,rb->pbr", np.linalg.inv(normal), columns, weights)
    return result


@dataclass(frozen=True, eq=False)
class _Errors:
    delta: Array
    u_delta: Array
    sd_concentration: float
    sd_offset: float
    explained: Array


def _errors(data: Series, residual: Array, absorptivity: Array, sigma_T: Array, intercept: bool) -> _Errors:
    """Concentration error of each standard and offset of each reading, from the residuals along ε and along 1."""
    model = np.maximum(data.x[:, None] * absorptivity, 0.0)
    weights = np.where(data.usable, (10.0**-model * LN10 / sigma_T) ** 2, 0.0)
    pattern = model
    pp, po, oo = (weights * pattern**2).sum(axis=1), (weights * pattern).sum(axis=1), weights.sum(axis=1)
    rp, ro = (weights * pattern * residual).sum(axis=1), (weights * residual).sum(axis=1)
    determinant = pp * oo - po**2
    solvable = determinant > 1e-9 * np.maximum(pp * oo, 1e-300)
    safe = np.where(solvable, determinant, 1.0)
    delta = np.where(solvable, (oo * rp - po * ro) / safe, 0.0)
    offset = np.where(solvable, (pp * ro - po * rp) / safe, ro / np.maximum(oo, 1e-300))
    var_delta, var_offset = (
        np.where(solvable, oo / safe, np.inf),
        np.where(solvable, pp / safe, 1 / np.maximum(oo, 1e-300)),
    )
    mean, u_mean = _by_standard(data, delta, var_delta)
    lost = 2 if intercept else 1
    sd_c = _excess(mean, u_mean, lost)
    sd_o = _excess(offset, np.sqrt(var_offset), lost)
    explained = np.where(solvable[:, None], delta[:, None] * pattern, 0.0) + offset[:, None]
    return _Errors(mean, u_mean, sd_c, sd_o, np.where(data.usable, explained, 0.0))


def _by_standard(data: Series, value: Array, variance: Array) -> tuple[Array, Array]:
    """Means over the readings of each standard, weighted by their variances; NaN where there is no information."""
    count = len(data.names)
    share = 1 / variance
    total = np.bincount(data.standard, share, count)
    with np.errstate(divide="ignore", invalid="ignore"):
        mean = np.bincount(data.standard, share * value, count) / total
        return np.where(total > 0, mean, np.nan), np.where(total > 0, 1 / np.sqrt(total), np.nan)


def _excess(value: Array, u: Array, lost: int) -> float:
    """The standard deviation that is in the values beyond what their own noise explains."""
    known = np.isfinite(value) & np.isfinite(u)
    freedom = np.count_nonzero(known) - lost
    if freedom < 1:
        return 0.0
    weight = 1 / (u[known] ** 2 + np.median(u[known]) ** 2)
    scale = np.count_nonzero(known) / freedom
    excess = scale * (weight @ value[known] ** 2) / weight.sum() - (weight @ u[known] ** 2) / weight.sum()
    return float(np.sqrt(max(excess, 0.0)))


def _noise(data: Series, left: Array, model: Array, unknowns: int) -> Array:
    """(B,) noise in transmittance, from what is left of the residuals, over a window of bands.

    Each reading has given one number to δ and one to β, spread over all bands, and each wavelength ``unknowns``.
    """
    bands = left.shape[1]
    square = np.where(data.usable, (left * 10.0**-model * LN10) ** 2, 0.0)
    points = data.usable.sum(axis=0)
    freedom = np.maximum(points - unknowns, 0) * max(1 - 2 / bands, 0.1)
    kernel = np.ones(2 * min(WINDOW, (bands - 1) // 2) + 1)
    total = np.convolve(square.sum(axis=0), kernel, "same")
    result: Array = np.sqrt(total / np.maximum(np.convolve(freedom, kernel, "same"), 1e-9))
    return np.maximum(result, 1e-7)


def _common(data: Series, gain: Array, absorptivity: Array, sd_c: float, sd_o: float) -> Array:
    """(F, B) errors of ε that all wavelengths share: one a standard from δ, one a reading from β, packed by SVD."""
    model = data.x[:, None] * absorptivity
    carried = gain.T * model * sd_c
    by_standard = np.stack([carried[data.standard == j].sum(axis=0) for j in range(len(data.names))])
    rows = np.concatenate([by_standard, gain.T * sd_o])
    _, size, pattern = np.linalg.svd(rows, full_matrices=False)
    if not size.size or size[0] == 0:
        return np.zeros((0, rows.shape[1]))
    kept = int(np.searchsorted(np.cumsum(size**2) / (size**2).sum(), KEPT_VARIANCE)) + 1
    result: Array = size[:kept, None] * pattern[:kept]
    return result


def _fitted_stray(data: Series, intercept: bool) -> tuple[float, float]:
    """The stray fraction with the smallest weighted residual, and its standard uncertainty from the curvature there."""
    from scipy.optimize import minimize_scalar

    columns = np.stack([data.x, np.ones_like(data.x)], axis=1) if intercept else data.x[:, None]
    plain = _fit_at(data, intercept, 0.0)
    model = np.maximum(data.x[:, None] * plain.absorptivity, 0.0)
    weights = np.where(data.usable, (10.0**-model * LN10 / plain.sigma_T) ** 2, 0.0)

    def misfit(s: float) -> float:
        A = corrected_for_stray(data.absorbance, s)
        coefficients = np.einsum("pbr,rb->pb", gains(columns, weights), A)
        residual = np.where(data.usable, A - columns @ coefficients, 0.0)
        # What concentration errors and offsets explain is no misfit: stray light bends a spectrum, they only scale it.
        explained = _errors(data, residual, coefficients[0], plain.sigma_T, intercept).explained
        return float((weights * (residual - explained) ** 2).sum())

    highest = min(LARGEST_STRAY, 0.9 * float(10.0 ** -data.absorbance[data.usable].max()))
    best = float(minimize_scalar(misfit, bounds=(0.0, highest), method="bounded", options={"xatol": 1e-8}).x)
    step = max(0.02 * highest, 1e-7)
    curvature = (misfit(best + step) - 2 * misfit(best) + misfit(max(best - step, 0.0))) / step**2
    freedom = max(np.count_nonzero(data.usable) - columns.shape[1] * data.absorbance.shape[1], 1)
    return best, float(np.sqrt(2 * misfit(best) / freedom / curvature)) if curvature > 0 else highest


def _with_stray(found: Fitted, s: float, u_s: float, slope: Array) -> Fitted:
    from dataclasses import replace

    return replace(found, stray_light=s, u_stray_light=u_s, common=np.concatenate([found.common, (slope * u_s)[None]]))


def _judge(data: Series, intercept: bool) -> None:
    wanted = 2 if intercept else 1
    distinct = np.array(
        [
            len(np.unique(data.x[column & (data.x > 0)])) + bool((column & (data.x == 0)).any() and intercept)
            for column in data.usable.T
        ]
    )
    if (distinct < wanted).any():
        at = data.wavelength_nm[np.flatnonzero(distinct < wanted)[0]]
        raise InputError(
            f"too few usable standards at {at:g} nm",
            why=f"{wanted} different concentrations are needed there",
            do="add weaker standards, or raise --absorbance-limit",
        )
