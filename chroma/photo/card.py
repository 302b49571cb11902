"""The printed card: corner markers, a white field with numbered places for cuvettes, grey steps."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import numpy.typing as npt

from observers.arrays import Array
from observers.errors import InputError, unknown_name

PAPERS_MM = {"a4": (297.0, 210.0), "letter": (279.4, 215.9)}  # ISO 216, ANSI/ASME Y14.1; landscape
MARKER_MM, MARGIN_MM = 22.0, 10.0
CELLS = 6  # of a marker's side, its dark border included
PLACES = 10
FIELD_TOP_MM, FIELD_BOTTOM_MM, FIELD_SIDE_MM = 48.0, 6.0, 36.0
GREYS = (1.0, 0.8, 0.6, 0.4, 0.25, 0.1)  # as printed codes; what a printer makes of them is not relied on
STEP_MM = 14.0
INCH_MM = 25.4


@dataclass(frozen=True)
class Rectangle:
    """A printed rectangle in mm from the paper's upper left corner, of a grey between 0 (black) and 1 (white)."""

    x: float
    y: float
    width: float
    height: float
    grey: float


@dataclass(frozen=True, eq=False)
class Layout:
    """One paper's card: size, marker numbers with their corners (4, 4, 2), field, places, and all rectangles."""

    paper: str
    width: float
    height: float
    first_marker: int
    corners: Array
    field: Rectangle
    steps: tuple[Rectangle, ...]
    rectangles: tuple[Rectangle, ...]

    @property
    def places(self) -> Array:
        """(P,) middles of the numbered places, mm from the left."""
        result: Array = self.field.x + (np.arange(PLACES) + 0.5) * self.field.width / PLACES
        return result


def marker_library() -> tuple[Any, Any]:
    """The marker detector and its dictionary of 4 × 4 markers; raises InputError where the extra is not installed."""
    try:
        import cv2
    except ImportError:
        raise InputError(
            "the card needs a marker detector", do="pip install 'lamplit[photo]', or give boxes in the rack"
        ) from None
    return cv2, cv2.aruco.getPredefinedDictionary(cv2.aruco.DICT_4X4_50)


def layout(paper: str) -> Layout:
    """The card on A4 or Letter, landscape; raises InputError for another paper."""
    key = paper.lower()
    if key not in PAPERS_MM:
        raise unknown_name("paper", paper, tuple(PAPERS_MM))
    width, height = PAPERS_MM[key]
    first = 4 * list(PAPERS_MM).index(key)
    far_x, far_y = width - MARGIN_MM - MARKER_MM, height - MARGIN_MM - MARKER_MM
    lefts_tops = [(MARGIN_MM, MARGIN_MM), (far_x, MARGIN_MM), (far_x, far_y), (MARGIN_MM, far_y)]
    square = np.array([[0, 0], [1, 0], [1, 1], [0, 1]]) * MARKER_MM
    corners = np.array([np.array(place) + square for place in lefts_tops])
    field = Rectangle(
        FIELD_SIDE_MM, FIELD_TOP_MM, width - 2 * FIELD_SIDE_MM, height - FIELD_TOP_MM - FIELD_BOTTOM_MM, 1
    )
    start = width / 2 - STEP_MM * len(GREYS) / 2
    steps = tuple(Rectangle(start + i * STEP_MM, MARGIN_MM + 4, STEP_MM, STEP_MM, grey) for i, grey in enumerate(GREYS))
    markers = [cell for i, place in enumerate(lefts_tops) for cell in _marker(first + i, *place)]
    middles = field.x + (np.arange(PLACES) + 0.5) * field.width / PLACES
    ticks = [Rectangle(float(x) - 0.4, FIELD_TOP_MM - 5, 0.8, 4, 0.0) for x in middles]
    return Layout(key, width, height, first, corners, field, steps, (*markers, *steps, *ticks))


def _marker(number: int, left: float, top: float) -> list[Rectangle]:
    """A marker as its dark square with the light cells upon it."""
    cv2, dictionary = marker_library()
    bits = cv2.aruco.generateImageMarker(dictionary, number, CELLS) > 0
    cell = MARKER_MM / CELLS
    light = [
        Rectangle(left + j * cell, top + i * cell, cell, cell, 1.0) for i, j in zip(*np.nonzero(bits), strict=True)
    ]
    return [Rectangle(left, top, MARKER_MM, MARKER_MM, 0.0), *light]


def draw_card(paper: str, target: Path) -> None:
    """Write the card as a PDF page of exactly the paper's size."""
    from matplotlib.backends.backend_pdf import FigureCanvasPdf
    from matplotlib.figure import Figure
    from matplotlib.patches import Rectangle as Patch

    card = layout(paper)
    figure = Figure(figsize=(card.width / INCH_MM, card.height / INCH_MM))
    axes = figure.add_axes((0, 0, 1, 1))
    axes.set_xlim(0, card.width)
    axes.set_ylim(card.height, 0)
    axes.set_axis_off()
    for one in card.rectangles:
        axes.add_patch(Patch((one.x, one.y), one.width, one.height, color=str(one.grey), linewidth=0))
    axes.add_patch(Patch((card.steps[0].x, card.steps[0].y), STEP_MM * len(GREYS), STEP_MM, fill=False, linewidth=0.3))
    for number, x in enumerate(card.places, start=1):
        axes.text(float(x), FIELD_TOP_MM - 7, str(number), ha="center", va="bottom", fontsize=11)
    words = f"Print at 100 % ({card.paper}). Cuvettes before the white field, one a place, from the left; light from behind or even."
    axes.text(card.width / 2, MARGIN_MM + 1, words, ha="center", va="center", fontsize=7)
    axes.plot(
        [card.width / 2 - 25, card.width / 2 + 25], [MARGIN_MM + 22, MARGIN_MM + 22], color="black", linewidth=0.6
    )
    axes.text(card.width / 2, MARGIN_MM + 24.5, "50 mm", ha="center", va="center", fontsize=6)
    FigureCanvasPdf(figure)
    figure.savefig(target, format="pdf", metadata={"CreationDate": None, "Title": "lamplit photo card"})


def raster(paper: str, pixels_per_mm: float) -> npt.NDArray[np.float32]:
    """The card's rectangles as an image of reflectances' codes (H, W), white 1; words are left out."""
    card = layout(paper)
    picture = np.ones((round(card.height * pixels_per_mm), round(card.width * pixels_per_mm)), dtype=np.float32)
    for one in card.rectangles:
        rows = slice(round(one.y * pixels_per_mm), round((one.y + one.height) * pixels_per_mm))
        columns = slice(round(one.x * pixels_per_mm), round((one.x + one.width) * pixels_per_mm))
        picture[rows, columns] = one.grey
    return picture
