"""The bright panel around the cuvettes: a smooth surface, by which uneven light is divided out."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from chroma.photo.picture import Picture
from chroma.photo.rack import Box
from observers.arrays import Array, Mask, frozen
from observers.errors import InputError

SAMPLES = 8_000
DEGREE = 5  # of the surface; a cubic was found to miss broad spots of light by 1 %
ENVELOPE_STEPS, BELOW_WEIGHT = 15, 0.12  # of 100 samples about 89 may lie below the envelope
FIRST_BAND, BAND_FLOOR, BAND_SCALES = 0.06, 0.012, 3.5
LEAST_SAMPLES = 200
WALLS_AS_WIDE, GLASS_AS_HIGH = 0.65, 0.5  # of a box, how far its cuvette reaches beyond it


@dataclass(frozen=True, eq=False)
class Panel:
    """ln of the panel's linear light as a polynomial in scaled pixels: coefficients (terms, 3); scatter (3,) about it."""

    degree: int
    coefficients: Array
    centre: tuple[float, float]
    scale: tuple[float, float]
    scatter: Array
    share: float

    def __post_init__(self) -> None:
        object.__setattr__(self, "coefficients", frozen(self.coefficients))
        object.__setattr__(self, "scatter", frozen(self.scatter))

    def level(self, x: Array, y: Array) -> Array:
        """(…, 3) linear light of the panel at pixels."""
        terms = _terms((x - self.centre[0]) / self.scale[0], (y - self.centre[1]) / self.scale[1], self.degree)
        result: Array = np.exp(terms @ self.coefficients)
        return result


def fit_panel(
    picture: Picture,
    boxes: Sequence[Box],
    quad: Array | None = None,
    *,
    degree: int = DEGREE,
) -> Panel:
    """The panel around these boxes, or within a quadrangle (4, 2) known to be white (the field of a card).

    degree : of the surface. Raises InputError where too little even bright ground is found.
    """
    inside = _around(boxes, picture) if quad is None else bounding(quad, picture.width, picture.height)
    x, y, light = _samples(picture, inside)
    good = _outside(x, y, boxes) & within(x, y, quad) & (light < picture.linear[:, -2]).all(axis=1)
    x, y, light = x[good], y[good], light[good]
    if len(x) < LEAST_SAMPLES:
        raise _none_found()
    ln = np.log(np.maximum(light, 1e-5))
    centre = (inside.x + inside.width / 2, inside.y + inside.height / 2)
    scale = (inside.width / 2, inside.height / 2)
    terms = _terms((x - centre[0]) / scale[0], (y - centre[1]) / scale[1], degree)
    start = _brightest(terms, ln)
    coefficients, kept = _settle(terms, ln, start)
    residual = ln[kept] - terms[kept] @ coefficients
    return Panel(degree, coefficients, centre, scale, residual.std(axis=0), float(kept.mean()))


def _none_found() -> InputError:
    return InputError(
        "no even bright ground around the cuvettes",
        why="uneven light is divided out by it",
        do="put a white sheet or a lit panel behind them, and do not overexpose it",
    )


def bounding(quad: Array, width: int, height: int) -> Box:
    """The upright box around a quadrangle (4, 2), within the picture."""
    (left, top), (right, bottom) = np.maximum(quad.min(axis=0), 0), np.minimum(quad.max(axis=0), (width, height))
    return Box(float(left), float(top), float(max(right - left, 0)), float(max(bottom - top, 0)))


def within(x: Array, y: Array, quad: Array | None) -> Mask:
    """Which points lie within a quadrangle (4, 2) whose corners go round clockwise on the screen; all without one."""
    inside = np.ones(np.shape(x), dtype=bool)
    if quad is not None:
        for (x0, y0), (x1, y1) in zip(quad, np.roll(quad, -1, axis=0), strict=True):
            inside &= (x1 - x0) * (y - y0) - (y1 - y0) * (x - x0) > 0
    return inside


def fit_surface(ln: Array, degree: int) -> Array:
    """The bright ground's ln of linear light (H, W, 3) of a small picture (H, W, 3) in ln, at every pixel.

    Raises InputError where no even ground is found.
    """
    high, wide = ln.shape[:2]
    v, u = np.meshgrid(np.linspace(-1, 1, high), np.linspace(-1, 1, wide), indexing="ij")
    terms = _terms(u.ravel(), v.ravel(), degree)
    flat = ln.reshape(-1, 3)
    some = slice(None, None, max(1, len(flat) // SAMPLES))
    coefficients, _ = _settle(terms[some], flat[some], _brightest(terms[some], flat[some]))
    result: Array = (terms @ coefficients).reshape(ln.shape)
    return result


def _terms(u: Array, v: Array, degree: int) -> Array:
    """Every uⁱ vʲ with i + j up to the degree, along a new last axis; powers by products, which cost far less."""
    across, along = [np.ones_like(u)], [np.ones_like(v)]
    for _ in range(degree):
        across.append(across[-1] * u)
        along.append(along[-1] * v)
    terms = [across[i] * along[j] for i in range(degree + 1) for j in range(degree + 1 - i)]
    return np.stack(terms, axis=-1)


def _around(boxes: Sequence[Box], picture: Picture) -> Box:
    """The boxes' surroundings, as far as the cuvettes are wide and high."""
    across = max(box.width for box in boxes) * 1.5
    along = max(box.height for box in boxes) * 0.8
    left, top = max(min(b.x for b in boxes) - across, 0), max(min(b.y for b in boxes) - along, 0)
    right = min(max(b.right for b in boxes) + across, picture.width)
    bottom = min(max(b.bottom for b in boxes) + along, picture.height)
    return Box(left, top, right - left, bottom - top)


def _samples(picture: Picture, inside: Box) -> tuple[Array, Array, Array]:
    """Pixels (x, y) on a lattice with the linear light there (M, 3): the mean of four neighbours, to quiet the noise."""
    step = max(2, int(np.sqrt(inside.width * inside.height / SAMPLES)))
    left, top, apart = int(inside.x), int(inside.y), min(3, step - 1)
    columns, rows = int(inside.width - apart) // step, int(inside.height - apart) // step
    if rows < 2 or columns < 2:
        raise _none_found()
    light = np.zeros((rows, columns, 3))
    for down, right in ((0, 0), (0, apart), (apart, 0), (apart, apart)):
        codes = picture.lattice(left + right, top + down, columns, rows, step)
        for k in range(3):
            light[..., k] += picture.linear[k][codes[..., k]] / 4
    half = step // 2 + 0.5 + apart / 2
    y, x = np.meshgrid(top + half + step * np.arange(rows), left + half + step * np.arange(columns), indexing="ij")
    return x.ravel(), y.ravel(), light.reshape(-1, 3)


def _outside(x: Array, y: Array, boxes: Sequence[Box]) -> Mask:
    """What is clearly no cuvette: boxes and their walls left out, and the glass above and below them."""
    free = np.ones(len(x), dtype=bool)
    for box in boxes:
        aside, above = WALLS_AS_WIDE * box.width, GLASS_AS_HIGH * box.height
        free &= ~((x > box.x - aside) & (x < box.right + aside) & (y > box.y - above) & (y < box.bottom + above))
    return free


def _brightest(terms: Array, ln: Array) -> Mask:
    """Samples near the upper envelope, from which the surface is started.

    A dye may brighten one channel, but every cuvette darkens some channel against the panel: the envelope is of the
    darkest channel, each against its own median of the bright half.
    """
    usual = np.median(ln[ln[:, 1] >= np.median(ln[:, 1])], axis=0)
    darkest = (ln - usual).min(axis=1)
    few = _low_order(terms)
    weight = (darkest > -1.0).astype(np.float64)
    for _ in range(ENVELOPE_STEPS):
        weighed = few * weight[:, None]
        curve = few @ np.linalg.solve(weighed.T @ few + 1e-9 * len(few) * np.eye(few.shape[1]), weighed.T @ darkest)
        # Quantile regression by reweighting: what lies below counts little.
        weight = np.where(darkest > curve, 1.0, BELOW_WEIGHT) / np.maximum(np.abs(darkest - curve), 0.005)
    result: Mask = np.abs(darkest - curve) < FIRST_BAND / 2
    return result


def _low_order(terms: Array) -> Array:
    """The terms 1, v, v², u, uv, u² of a polynomial of any degree, which cannot dip between cuvettes."""
    degree = round((np.sqrt(8 * terms.shape[1] + 1) - 3) / 2)
    powers = [(i, j) for i in range(degree + 1) for j in range(degree + 1 - i)]
    return terms[:, [number for number, (i, j) in enumerate(powers) if i + j <= 2]]


def _settle(terms: Array, ln: Array, start: Mask) -> tuple[Array, Mask]:
    """Least squares on what lies near the surface, until that settles."""
    kept, band = start, FIRST_BAND
    for _ in range(8):
        if np.count_nonzero(kept) < LEAST_SAMPLES // 2:
            raise _none_found()
        coefficients: Array = _least_squares(terms[kept], ln[kept])
        apart = np.abs(ln - terms @ coefficients)
        scale = 1.4826 * np.median(apart[kept].max(axis=1))
        band = max(BAND_FLOOR, min(FIRST_BAND, BAND_SCALES * float(scale)))
        now: Mask = np.all(apart < band, axis=1)
        if np.count_nonzero(now != kept) < 1e-3 * len(kept):
            break
        kept = now
    return coefficients, kept


def _least_squares(terms: Array, ln: Array) -> Array:
    """A touch of ridge keeps the surface quiet where no panel is seen."""
    count = terms.shape[1]
    ridge = 1e-6 * len(terms) * np.eye(count)
    return np.asarray(np.linalg.solve(terms.T @ terms + ridge, terms.T @ ln), dtype=np.float64)
