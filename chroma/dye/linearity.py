"""Does Beer's law hold: how strong each standard came out, where the fit bends, whether the shape changes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from chroma.dye.fit import Fitted, gains
from chroma.dye.series import Series
from chroma.quantity import LN10
from observers.arrays import Array

FRACTION = 0.02  # the departure from Beer's law that is allowed, unless another is given
RISK = 0.01  # of calling a straight series bent, or a constant shape changing
WINDOW_NM = 40.0
SCORE_RISK = 0.05  # of saying that a change of shape, itself beyond chance, goes with concentration
SHAPE_MARGIN = 1.1  # the noise that the shape is held against is itself known to a few per cent only
TRACY_WIDOM_99 = (
    2.0234  # 99 % quantile of the Tracy–Widom law of order 1 (Johnstone 2001, Annals of Statistics 29, 295)
)


@dataclass(frozen=True, eq=False)
class Window:
    """A band of wavelengths: how much the response bends at the highest standard, relative.

    p is the probability of as much by chance, rms the residual there in absorbance.
    """

    low_nm: float
    high_nm: float
    bend: float
    p: float
    rms: float


@dataclass(frozen=True, eq=False)
class Linearity:
    """What was found of a series.

    deviation (N,) of each standard's strength from the line and its standard uncertainty; holds_to : the concentration
    up to which Beer's law holds within ``fraction``; bend_p : probability of as much bend by chance. shape : the second
    singular value of the whitened series over what noise would give; associates : whether the shape changes with
    concentration beyond noise.
    """

    fraction: float
    holds_to: float
    bend: float
    bend_p: float
    deviation: Array
    u_deviation: Array
    windows: tuple[Window, ...]
    shape: float
    associates: bool
    shape_nm: float


def linearity(data: Series, found: Fitted, *, fraction: float = FRACTION) -> Linearity:
    """Judge a fitted series; needs three different concentrations to say anything of a bend (else p is 1)."""
    c = data.concentration
    known = np.isfinite(found.strength) & (c > 0)
    slope, p, start = _bend(c[known], found.strength[known], found.u_strength[known], found.sd_concentration)
    top = float(c.max())
    holds = top
    if p < RISK and slope != 0:
        holds = min(top, fraction * abs(start / slope))
    shape, associates, at = _shape(data, found)
    return Linearity(
        fraction,
        holds,
        slope * top / start,
        p,
        found.strength - 1,
        found.u_strength,
        _windows(data, found),
        shape,
        associates,
        at,
    )


def _bend(c: Array, strength: Array, u: Array, sd: float) -> tuple[float, float, float]:
    """Slope of strength against concentration, the probability of as steep a one by chance, and strength at zero."""
    from scipy.special import stdtr

    if len(np.unique(c)) < 3:
        return 0.0, 1.0, 1.0
    w = 1 / (u**2 + sd**2 + 1e-12)
    mean_c, mean_s = (w @ c) / w.sum(), (w @ strength) / w.sum()
    Scc = w @ (c - mean_c) ** 2
    slope = float(w @ ((c - mean_c) * (strength - mean_s)) / Scc)
    start = float(mean_s - slope * mean_c)
    freedom = len(c) - 2
    residual = strength - start - slope * c
    # The scatter is what the points show, and never less than what is known of their noise.
    scale = max(float(w @ residual**2) / freedom, float((w * u**2).mean()))
    t = abs(slope) / np.sqrt(scale / Scc)
    return slope, float(2 * stdtr(freedom, -t)), start


def _windows(data: Series, found: Fitted) -> tuple[Window, ...]:
    """The same test on bands of wavelengths, where the dye absorbs enough to be seen."""
    nm = data.wavelength_nm
    edges = np.arange(nm[0], nm[-1] + WINDOW_NM, WINDOW_NM)
    result = []
    for low in edges[:-1]:
        inside = (nm >= low) & (nm < low + WINDOW_NM)
        if inside.any():
            result.append(_window(data, found, inside))
    return tuple(result)


def _window(data: Series, found: Fitted, inside: np.ndarray) -> Window:
    nm = data.wavelength_nm[inside]
    x, eps = data.x, found.absorptivity[inside]
    model = np.maximum(x[:, None] * eps, 0.0)
    w = np.where(data.usable[:, inside], (10.0**-model * LN10 / found.sigma_T[inside]) ** 2, 0.0)
    A = found.absorbance[:, inside] - found.intercept[inside]
    information = (w * model**2).sum(axis=1)
    used = (information > 1.0) & (x > 0)  # the standard is seen here at all
    rms = float(np.sqrt((found.residual[:, inside] ** 2).mean()))
    if np.count_nonzero(used) < 3:
        return Window(float(nm[0]), float(nm[-1]), 0.0, 1.0, rms)
    strength = (w * model * A).sum(axis=1)[used] / information[used]
    c = data.concentration[data.standard][used]
    u = 1 / np.sqrt(information[used]) + found.sd_offset / np.maximum(model[used].max(axis=1), 1e-9)
    slope, p, start = _bend(c, strength, u, found.sd_concentration)
    return Window(float(nm[0]), float(nm[-1]), slope * float(c.max()) / start, p, rms)


def _shape(data: Series, found: Fitted) -> tuple[float, bool, float]:
    """Second singular value of the residuals that are left when strength and offset are taken out, against noise.

    Noise alone gives a largest singular value near (√n + √m)·σ (Johnstone 2001); the noise is taken from the
    differences between neighbouring wavelengths, so that a smooth change of shape does not hide in it. Whether the
    change goes with concentration is told by its scores.
    """
    rows = data.x > 0
    bands = data.usable[rows].all(axis=0)
    if np.count_nonzero(rows) < 4 or np.count_nonzero(bands) < 8:
        return 0.0, False, float("nan")
    model = np.maximum(data.x[rows][:, None] * found.absorptivity[bands], 0.0)
    weight = 10.0**-model * LN10 / found.sigma_T[bands]
    A = (found.absorbance - found.explained)[rows][:, bands]
    # A blank that was subtracted left its noise in every reading alike; a line with an intercept takes that out.
    columns = np.stack([data.x[rows], np.ones(np.count_nonzero(rows))], axis=1)
    A = A - columns @ np.einsum("pbr,rb->pb", gains(columns, weight**2), A)
    left = weight * A - _projected(weight * A, weight * found.absorptivity[bands], weight)
    sigma = _local_noise(left)
    score, size, pattern = np.linalg.svd(left, full_matrices=False)
    n, m = left.shape[0] - 2, left.shape[1] - 2
    edge = np.sqrt(n - 0.5) + np.sqrt(m - 0.5)
    width = edge * (1 / np.sqrt(n - 0.5) + 1 / np.sqrt(m - 0.5)) ** (1 / 3)
    ratio = float(size[0] / sigma / np.sqrt(edge**2 + TRACY_WIDOM_99 * width))
    strength = np.sqrt(((weight * pattern[0]) ** 2).sum(axis=1))
    at = float(data.wavelength_nm[bands][np.argmax(np.abs(pattern[0]))])
    return (
        ratio,
        ratio > SHAPE_MARGIN and _goes_with(data.concentration[data.standard][rows], score[:, 0], strength),
        at,
    )


def _projected(values: Array, *patterns: Array) -> Array:
    """Each row's least-squares share along its own row of every pattern."""
    basis = np.stack(patterns, axis=-1)
    normal = np.einsum("rbp,rbq->rpq", basis, basis)
    right = np.einsum("rbp,rb->rp", basis, values)
    result: Array = np.einsum("rbp,rp->rb", basis, np.linalg.solve(normal, right[..., None])[..., 0])
    return result


def _local_noise(left: Array) -> float:
    """Noise from second differences along wavelength, by their median, so that single bad bands do not count."""
    second = left[:, 2:] - 2 * left[:, 1:-1] + left[:, :-2]
    return float(np.median(np.abs(second)) / 0.6745 / np.sqrt(6.0))


def _goes_with(c: Array, score: Array, strength: Array) -> bool:
    """Whether a pattern's amplitude follows concentration (a parabola) beyond chance, by a weighted F test.

    score (R,) is the amplitude times ``strength``, which is how strongly each reading shows the pattern above its noise.
    """
    from scipy.special import fdtrc

    X = np.stack([np.ones_like(c), c, c**2], axis=1)
    if len(c) < 5 or np.linalg.matrix_rank(X) < 3:
        return True
    fitted = (X * strength[:, None]) @ np.linalg.lstsq(X * strength[:, None], score, rcond=None)[0]
    constant = strength * (strength @ score) / (strength @ strength)
    explained = ((fitted - constant) ** 2).sum() / 2
    rest = ((score - fitted) ** 2).sum() / (len(c) - 3)
    return bool(fdtrc(2, len(c) - 3, explained / max(rest, 1e-300)) < SCORE_RISK)
