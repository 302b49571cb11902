"""Cuvettes found without boxes: columns of changed colour on a bright even ground, counted from the left."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from chroma.photo.panel import fit_surface
from chroma.photo.picture import Picture
from chroma.photo.rack import Box
from observers.arrays import Array, Mask
from observers.errors import InputError

WORKING_WIDTH = 400  # pixels; what is looked for is large
GROUND_DEGREE = 3  # a surface that cannot dip between cuvettes; 3 % is all it must be good to
CHANGED = 0.035  # of the ln of a channel against the ground, from which a pixel belongs to something
LEAST_HEIGHT, WIDEST = 0.12, 0.2  # of the picture, for a column
ALIKE = 1.8  # columns of one rack are alike in width and height within this factor
NARROWEST = 0.5  # of the inner width, for the box in a column that leans
SIDE = 0.27  # of a column's width, left out on each side for the walls
LIQUID_SAME = 0.05  # of the ln of a channel, within which a row still shows the same liquid


@dataclass(frozen=True, eq=False)
class Small:
    """A reduced picture in ln of linear light (H, W, 3), each pixel a mean of its neighbours, and the step taken."""

    ln: Array
    step: int


def reduced(picture: Picture, width: int = WORKING_WIDTH) -> Small:
    """The picture at about this width; every pixel is the mean of up to nine."""
    step = max(1, picture.width // width)
    rows, columns = picture.height // step, picture.width // step
    offsets = sorted({0, step // 2, step - 1})
    total = np.zeros((rows, columns, 3), dtype=np.float32)
    tables = picture.linear.astype(np.float32)
    for down in offsets:
        for right in offsets:
            part = picture.codes[down::step, right::step][:rows, :columns]
            for k in range(3):
                total[..., k] += tables[k][part[..., k]]
    total /= len(offsets) ** 2
    return Small(np.log(np.maximum(total, 1e-4)).astype(np.float64), step)


def find_columns(picture: Picture, count: int) -> tuple[Box, ...]:
    """Boxes of liquid in the cuvettes of a photo, from left to right.

    Raises InputError when the number of columns found is not the number of rows in the rack, or there is no even
    bright ground: a photo in which cuvettes are not plainly seen gives no number.
    """
    small = reduced(picture)
    scale = small.step
    return tuple(
        Box(box.x * scale, box.y * scale, box.width * scale, box.height * scale) for box in columns_in(small.ln, count)
    )


def columns_in(ln: Array, count: int) -> list[Box]:
    """Boxes, in its own pixels, of so many columns of liquid in a small picture (H, W, 3) in ln of linear light."""
    changed = np.abs(ln - fit_surface(ln, GROUND_DEGREE)).max(axis=-1) > CHANGED
    columns = _columns(changed)
    if len(columns) != count:
        raise InputError(
            f"{len(columns)} cuvettes found in the photo, {count} rows in the rack",
            why="without boxes the cuvettes are counted from the left on a bright even ground",
            do="photograph them apart and upright before a white sheet or the card, or give boxes in the rack",
        )
    return [_liquid(ln, mask) for mask in columns]


def _columns(changed: Mask) -> list[Mask]:
    """Upright pieces of the changed area, alike in size, from left to right."""
    from scipy.ndimage import binary_fill_holes, binary_opening, find_objects, label

    solid = binary_fill_holes(binary_opening(changed, np.ones((2, 2))))
    numbers, _ = label(solid)
    high, wide = changed.shape
    found = []
    for number, where in enumerate(find_objects(numbers), start=1):
        rows, columns = (part.stop - part.start for part in where)
        touches = where[1].start == 0 or where[1].stop == wide
        if (
            rows > LEAST_HEIGHT * high
            and columns < WIDEST * wide
            and rows > 1.2 * columns
            and columns >= 6
            and not touches
        ):
            mask = np.zeros_like(changed)
            mask[where] = numbers[where] == number
            found.append((where[1].start, rows, columns, mask))
    if not found:
        return []
    usual_rows, usual_columns = np.median([f[1] for f in found]), np.median([f[2] for f in found])
    alike = [
        f for f in found
        if usual_rows / ALIKE < f[1] < usual_rows * ALIKE and usual_columns / ALIKE < f[2] < usual_columns * ALIKE
    ]  # fmt: skip
    return [f[3] for f in sorted(alike, key=lambda f: f[0])]


def _liquid(ln: Array, mask: Mask) -> Box:
    """The box of one column's liquid: where rows look like those of its lower middle, walls left out."""
    rows = np.flatnonzero(mask.any(axis=1))
    edges = np.array([(np.argmax(mask[r]), mask.shape[1] - np.argmax(mask[r][::-1])) for r in rows])
    left, right = _straight(rows, edges[:, 0]), _straight(rows, edges[:, 1])
    width = right - left
    spans = zip(rows, (left + SIDE * width).astype(int), (right - SIDE * width).astype(int), strict=True)
    inner = np.array([np.median(ln[r, a : max(b, a + 1)], axis=0) for r, a, b in spans])
    low, high = int(0.5 * len(rows)), int(0.85 * len(rows))
    same = np.abs(inner - np.median(inner[low:high], axis=0)).max(axis=1) < LIQUID_SAME
    top = low
    while top > 0 and same[max(top - 2, 0) : top].any():
        top -= 1
    bottom = high
    while bottom < len(rows) and same[bottom : bottom + 2].any():
        bottom += 1
    inset = max(2, int(0.06 * (bottom - top)))
    top, bottom = top + inset, bottom - inset
    inside_left, inside_right = left + SIDE * width, right - SIDE * width
    # An upright box in a column that leans: as much of its middle as leaves a fair width.
    least = NARROWEST * float(np.median(inside_right - inside_left))
    while bottom - top > 4 and inside_right[top:bottom].min() - inside_left[top:bottom].max() < least:
        top, bottom = top + 1, bottom - 1
    x0, x1 = float(inside_left[top:bottom].max()), float(inside_right[top:bottom].min())
    if bottom - top < 4 or x1 - x0 < 2:
        raise InputError("a cuvette without a plain upright column of liquid", do="give boxes in the rack")
    return Box(x0, float(rows[top]), x1 - x0, float(bottom - top))


def _straight(rows: npt.NDArray[np.intp], edge: npt.NDArray[np.intp]) -> Array:
    """A straight line through an edge, blind to outliers: median of a few slopes."""
    half = len(rows) // 2
    first, second = np.median(edge[:half]), np.median(edge[half:])
    slope = (second - first) / max(float(np.median(rows[half:]) - np.median(rows[:half])), 1.0)
    offset = np.median(edge - slope * rows)
    result: Array = offset + slope * rows
    return result
