"""The printed card found in a photo, and the cuvettes before its white field."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from chroma.photo.card import PAPERS_MM, Layout, layout, marker_library
from chroma.photo.find import NARROWEST, columns_in
from chroma.photo.picture import Picture
from chroma.photo.rack import Box
from observers.arrays import Array
from observers.errors import InputError

WORKING_SIDE = 1800  # pixels; markers are sought in a picture no larger
LEAST_MARKERS = 3
WORST_FIT_MM = 1.5  # by which a marker's corner may lie off the plane of the others
INSET_MM = 3.0  # of the white field, left out at its edges
PIXELS_PER_MM = 2.0  # of the field as it is looked at to find cuvettes


@dataclass(frozen=True, eq=False)
class Card:
    """A card in a photo: its layout, the homography (3, 3) from mm to pixels, the markers seen, and notes."""

    layout: Layout
    to_pixels: Array
    markers: int
    notes: tuple[str, ...] = ()

    @property
    def field(self) -> Array:
        """(4, 2) corners of the white field in the photo, clockwise from the upper left, a little within its edges."""
        return self.pixels(_corners(*_field(self.layout)))

    def pixels(self, points_mm: Array) -> Array:
        """Points (…, 2) in mm on the card as pixels of the photo."""
        full = points_mm @ self.to_pixels[:, :2].T + self.to_pixels[:, 2]
        result: Array = full[..., :2] / full[..., 2:]
        return result


def find_card(picture: Picture) -> Card | None:
    """The card in a photo, or None where fewer than three of its markers are seen.

    Raises InputError where the marker detector is not installed, or markers of a card are seen that do not lie as a
    card's do (a bent sheet).
    """
    cv2, dictionary = marker_library()
    step = max(1, max(picture.width, picture.height) // WORKING_SIDE)
    shift = 8 if picture.top_code > 255 else 0
    grey = np.ascontiguousarray((picture.codes[::step, ::step, 1] >> shift).astype(np.uint8))
    settings = cv2.aruco.DetectorParameters()
    # Large windows find markers in blurred pictures too; a false one would not lie on the plane of the others.
    settings.adaptiveThreshWinSizeMax, settings.errorCorrectionRate = 53, 0.9
    # More samples a cell and a margin around it: blurred cells are read right.
    settings.perspectiveRemovePixelPerCell, settings.perspectiveRemoveIgnoredMarginPerCell = 8, 0.2
    settings.cornerRefinementMethod = cv2.aruco.CORNER_REFINE_SUBPIX
    found, numbers, _ = cv2.aruco.ArucoDetector(dictionary, settings).detectMarkers(grey)
    if numbers is None:
        return None
    seen = {
        int(n): (np.asarray(c, dtype=np.float64).reshape(4, 2) + 0.5) * step
        for n, c in zip(numbers.ravel(), found, strict=True)
    }
    cards = [card for paper in PAPERS_MM if (card := _fitted(layout(paper), seen)) is not None]
    return cards[0] if len(cards) == 1 else None


def _fitted(card: Layout, seen: dict[int, Array]) -> Card | None:
    """The card laid through the markers of its own numbers."""
    cv2, _ = marker_library()
    own = [number for number in range(4) if card.first_marker + number in seen]
    if len(own) < LEAST_MARKERS:
        return None
    on_card = card.corners[own].reshape(-1, 2)
    in_photo = np.concatenate([seen[card.first_marker + number] for number in own])
    matrix, _ = cv2.findHomography(on_card, in_photo)
    if matrix is None or not np.isfinite(matrix).all():
        return None
    laid = Card(card, matrix, len(own))
    per_mm = np.linalg.norm(in_photo[1] - in_photo[0]) / np.linalg.norm(on_card[1] - on_card[0])
    off_mm = float(np.linalg.norm(laid.pixels(on_card) - in_photo, axis=1).max() / per_mm)
    if off_mm > WORST_FIT_MM:
        raise InputError(
            f"the card is bent: its markers lie {off_mm:.1f} mm off a plane", do="lay it flat, or glue it to a board"
        )
    return laid


def _field(card: Layout) -> tuple[float, float, float, float]:
    """Left, top, right and bottom, in mm, of the white field within its edges."""
    f = card.field
    return f.x + INSET_MM, f.y + INSET_MM, f.x + f.width - INSET_MM, f.y + f.height - INSET_MM


def _corners(left: float, top: float, right: float, bottom: float) -> Array:
    return np.array([[left, top], [right, top], [right, bottom], [left, bottom]])


def cuvettes_on_card(picture: Picture, card: Card, count: int) -> tuple[Box, ...]:
    """Boxes of liquid before the card's white field, from left to right, each at a place of its own.

    They are sought in the field as it would be seen from straight before it. Raises InputError when they are not as
    many as the rack has rows, or two stand at one place.
    """
    left, top, _, _ = _field(card.layout)
    found = columns_in(_rectified(picture, card), count)
    per = 1.0 / PIXELS_PER_MM
    on_card = [(left + b.x * per, top + b.y * per, left + b.right * per, top + b.bottom * per) for b in found]
    middles = np.array([[(b[0] + b[2]) / 2] for b in on_card])
    places = np.abs(middles - card.layout.places).argmin(axis=1)
    if len(set(places.tolist())) < len(found):
        raise InputError("two cuvettes stand at one place of the card", do="stand one at each number")
    return tuple(_upright(card, *box) for box in on_card)


def _rectified(picture: Picture, card: Card) -> Array:
    """(H, W, 3) ln of linear light over the white field, each pixel the mean of a few of the photo's."""
    left, top, right, bottom = _field(card.layout)
    total = None
    for down, across in ((0.2, 0.2), (0.2, 0.8), (0.5, 0.5), (0.8, 0.2), (0.8, 0.8)):
        y = top + (np.arange(int((bottom - top) * PIXELS_PER_MM)) + down) / PIXELS_PER_MM
        x = left + (np.arange(int((right - left) * PIXELS_PER_MM)) + across) / PIXELS_PER_MM
        at = card.pixels(np.stack(np.meshgrid(x, y), axis=-1)).astype(np.intp)
        at = np.clip(at, 0, (picture.width - 1, picture.height - 1))
        codes = picture.codes[at[..., 1], at[..., 0]]
        light = np.stack([picture.linear[k][codes[..., k]] for k in range(3)], axis=-1)
        total = light if total is None else total + light
    assert total is not None
    result: Array = np.log(np.maximum(total / 5, 1e-4))
    return result


def _upright(card: Card, left: float, top: float, right: float, bottom: float) -> Box:
    """The widest fair upright box of the photo within a rectangle of the card, shortened where that leans."""
    for _ in range(60):
        p = card.pixels(_corners(left, top, right, bottom))
        x0, x1 = max(p[0, 0], p[3, 0]), min(p[1, 0], p[2, 0])
        y0, y1 = max(p[0, 1], p[1, 1]), min(p[2, 1], p[3, 1])
        if x1 - x0 >= NARROWEST * np.linalg.norm(p[1] - p[0]):
            break
        step = 0.04 * (bottom - top)
        top, bottom = top + step / 2, bottom - step / 2
    if x1 - x0 < 4 or y1 - y0 < 4:
        raise InputError("the card is seen too much aslant", do="hold the camera straighter")
    return Box(float(x0), float(y0), float(x1 - x0), float(y1 - y0))


def steps_in_order(picture: Picture, card: Card) -> bool:
    """Whether the grey steps fall from white to black as printed; glare or overexposure upsets them."""
    levels = []
    for one in card.layout.steps:
        x, y = card.pixels(np.array([one.x + one.width / 2, one.y + one.height / 2])).astype(int)
        if not (3 <= x < picture.width - 3 and 3 <= y < picture.height - 3):
            return False
        levels.append(float(np.median(picture.codes[y - 3 : y + 4, x - 3 : x + 4, 1])))
    clipped = levels[0] >= picture.top_code and levels[1] >= picture.top_code
    return bool(np.all(np.diff(levels) < 0)) and not clipped
