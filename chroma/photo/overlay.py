"""A picture of what was measured: the photo with every box and its name drawn on it."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

import numpy as np

from chroma.photo.picture import Picture
from chroma.photo.rack import Box

WIDEST = 1600
MARK = "lamplit overlay"
INK, EDGE = (255, 60, 0), (255, 255, 255)


def draw_overlay(
    picture: Picture, boxes: Mapping[str, Box], target: Path, texts: Mapping[str, str] | None = None
) -> None:
    """Write the photo, reduced, with boxes and names (and a line of text under each), as a PNG."""
    from PIL import Image, ImageDraw, PngImagePlugin

    step = max(1, -(-picture.width // WIDEST))
    shift = 8 if picture.top_code > 255 else 0
    small = np.ascontiguousarray((picture.codes[::step, ::step] >> shift).astype(np.uint8))
    image = Image.fromarray(small)
    pen = ImageDraw.Draw(image)
    for row, (name, box) in enumerate(boxes.items()):
        corners = [box.x / step, box.y / step, (box.right - 1) / step, (box.bottom - 1) / step]
        pen.rectangle(corners, outline=INK, width=2)
        # Names of neighbours stand at two heights, so that they do not run into each other.
        at = (corners[0], corners[1] - 14 - 12 * (row % 2))
        pen.text(at, name, fill=INK, stroke_width=2, stroke_fill=EDGE)
        if texts and name in texts:
            pen.text(
                (corners[0], corners[3] + 3 + 12 * (row % 2)), texts[name], fill=INK, stroke_width=2, stroke_fill=EDGE
            )
    mark = PngImagePlugin.PngInfo()
    mark.add_text(MARK, "boxes that were measured")
    image.save(target, "PNG", pnginfo=mark)


def is_overlay(path: str) -> bool:
    """Whether a file is an overlay that this program wrote."""
    from PIL import Image

    try:
        with Image.open(path, formats=("PNG",)) as picture:
            return MARK in picture.info
    except (OSError, ValueError, SyntaxError):
        return False
