"""What is measured in a box: the mean in linear light of its liquid, and how well that is known."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from chroma.photo.panel import Panel
from chroma.photo.picture import Picture
from chroma.photo.rack import Box
from observers.arrays import Array, frozen
from observers.noise import jpeg_level_covariance, quantisation_variance

DARK_CODE = 2 / 255  # at or below this share of the top code a channel is taken for black
SCALES, LEAST_SCALE = 3.0, 1.0 / 255
BLOCKS = (6, 4)  # pieces of a box; neighbours within a piece are alike, pieces are not
LEAST_KEPT = 0.3
MOST_PIXELS = 4_000  # of a box; more would only lower the photon noise, which is the least of its errors


@dataclass(frozen=True, eq=False)
class Readings:
    """Boxes in linear sRGB relative to the panel (N, 3), the covariance of their noise (N, 3, 3), and what was lost.

    level (N, 3) is the panel's linear light at the box; clipped and dark (N, 3) are shares of what was kept; kept (N,)
    is the share of the box that is plain liquid.
    """

    value: Array
    covariance: Array
    level: Array
    clipped: Array
    dark: Array
    kept: Array

    def __post_init__(self) -> None:
        for name in ("value", "covariance", "level", "clipped", "dark", "kept"):
            object.__setattr__(self, name, frozen(getattr(self, name)))


def read_boxes(picture: Picture, boxes: Sequence[Box], panel: Panel | None) -> Readings:
    """What each box shows, divided by the panel there (by 1 where there is none)."""
    return Readings(*(np.stack(column) for column in zip(*(_read(picture, box, panel) for box in boxes), strict=True)))


def _read(picture: Picture, box: Box, panel: Panel | None) -> tuple[Array, ...]:
    left, top = max(int(np.ceil(box.x)), 0), max(int(np.ceil(box.y)), 0)
    wide, high = min(int(box.right), picture.width) - left, min(int(box.bottom), picture.height) - top
    step = max(1, int(np.sqrt(wide * high / MOST_PIXELS)))
    # Channels as planes: sums along the last axis are what numpy does quickest.
    some: npt.NDArray[np.integer] = picture.lattice(left, top, wide // step, high // step, step)
    codes = some.transpose(2, 0, 1).copy()
    kept = plain(codes, picture.top_code)
    level = _levels((high, wide), top, left, panel)
    linear = np.stack([picture.linear[k][codes[k]] for k in range(3)])
    value, covariance = _block_means(linear, kept, level)
    own = level.mean(axis=(0, 1))
    chosen = codes[:, kept]
    covariance = covariance + _rounding(picture, chosen, value * own, own)
    # Into linear sRGB, relative to the panel there; its level is the scale of each side.
    mixed = picture.to_srgb * own / (picture.to_srgb @ own)[:, None]
    count = chosen.shape[1]
    clipped = np.count_nonzero(chosen >= picture.top_code * (1 - 1 / 255), axis=1) / count
    dark = np.count_nonzero(chosen <= DARK_CODE * picture.top_code, axis=1) / count
    share = np.asarray(count / kept.size)
    return mixed @ value, mixed @ covariance @ mixed.T, picture.to_srgb @ own, clipped, dark, share


def _rounding(picture: Picture, chosen: npt.NDArray[np.integer], mean: Array, own: Array) -> Array:
    """(3, 3) of what rounding did to the mean: JPEG's, else that of the codes."""
    at = np.array([np.searchsorted(table, light) for table, light in zip(picture.linear, mean, strict=True)])
    at = np.clip(at, 1, picture.top_code - 1)
    slope = np.array([picture.linear[k, i + 1] - picture.linear[k, i - 1] for k, i in enumerate(at)]) / 2 / own
    if picture.jpeg_steps is None:
        # Noise of half a code and more makes rounding average out: its bias falls as exp(-2 π² σ²) (dither).
        codes = np.diag(quantisation_variance() * np.exp(-4 * np.pi**2 * chosen.var(axis=1)))
    else:
        codes = jpeg_level_covariance(*picture.jpeg_steps) * (picture.top_code / 255) ** 2
    result: Array = slope[:, None] * codes * slope
    return result


def plain(codes: npt.NDArray[np.integer], top_code: int) -> npt.NDArray[np.bool_]:
    """The pixels (H, W) of a box (3, H, W) that show plain liquid: near the median in every channel, as are those beside
    them.
    """
    kept = np.ones(codes.shape[1:], dtype=bool)
    for plane in codes:
        middle, scale = histogram_median(plane.ravel(), top_code)
        band = SCALES * max(1.4826 * scale, LEAST_SCALE * top_code) + 0.5
        low, high = max(int(np.ceil(middle - band)), 0), int(middle + band)
        kept &= (plane >= low) & (plane <= high)
    grown = kept.copy()
    grown[1:] &= kept[:-1]
    grown[:-1] &= kept[1:]
    grown[:, 1:] &= kept[:, :-1]
    grown[:, :-1] &= kept[:, 1:]
    return grown if np.count_nonzero(grown) > LEAST_KEPT * grown.size else kept


def histogram_median(codes: npt.NDArray[np.integer], top_code: int) -> tuple[float, float]:
    """Median and median deviation of codes from their histogram, without sorting."""
    counts = np.bincount(codes, minlength=top_code + 1)
    middle = _middle(counts)
    apart = np.abs(np.arange(len(counts)) - middle)
    order = np.bincount((apart + 0.5).astype(np.intp), weights=counts)
    return middle, _middle(order)


def _middle(counts: npt.NDArray[np.generic]) -> float:
    """The median of a histogram, by a line within its bin."""
    total = np.cumsum(counts)
    half = float(total[-1]) / 2
    at = int(np.searchsorted(total, half))
    before = float(total[at - 1]) if at else 0.0
    return at - 0.5 + (half - before) / max(float(total[at]) - before, 1e-9)


def _levels(shape: tuple[int, ...], top: int, left: int, panel: Panel | None) -> Array:
    """(BLOCKS…, 3) of the panel at the middle of each block."""
    if panel is None:
        return np.ones((*BLOCKS, 3))
    y = top + (np.arange(BLOCKS[0]) + 0.5) / BLOCKS[0] * shape[0]
    x = left + (np.arange(BLOCKS[1]) + 0.5) / BLOCKS[1] * shape[1]
    yy, xx = np.meshgrid(y, x, indexing="ij")
    return panel.level(xx, yy)


def _block_means(linear: Array, kept: npt.NDArray[np.bool_], level: Array) -> tuple[Array, Array]:
    """Mean (3,) over the panel's level, and its covariance from the scatter of blocks, which counts correlation."""
    edges_y = np.linspace(0, kept.shape[0], BLOCKS[0] + 1).astype(int)[:-1]
    edges_x = np.linspace(0, kept.shape[1], BLOCKS[1] + 1).astype(int)[:-1]
    planes = np.concatenate([kept[None].astype(np.float64), np.where(kept, linear, 0.0)])
    sums = np.add.reduceat(np.add.reduceat(planes, edges_y, axis=1), edges_x, axis=2)
    weight = sums[0]
    enough = weight > 0.25 * weight.max()
    means = (sums[1:, enough] / weight[enough]).T / level[enough]
    share = weight[enough][:, None] / weight[enough].sum()
    mean = (share * means).sum(axis=0)
    apart = share * (means - mean)
    return mean, apart.T @ apart * (len(means) / max(len(means) - 1, 1))
