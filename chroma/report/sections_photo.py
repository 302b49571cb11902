"""The page of a photo's estimate: what was measured, the concentrations with their intervals, and what to mind."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from chroma.photo.estimate import CAUTIONS, PhotoEstimate
from chroma.photo.words import below, header, lines
from chroma.report.plots import new_axes
from chroma.report.sections_base import Page, Picture, Section, number, table, words
from chroma.report.sections_svg import picture

if TYPE_CHECKING:
    from matplotlib.axes import Axes

UNCERTAINTY = "95 % intervals: noise of the photo, camera, lamp and cell by their priors, and the standards"
WIDEST = 900  # pixels of an overlay in the page


def photo_page(found: PhotoEstimate, overlays: Sequence[str]) -> Page:
    """The page of an estimate, with the overlay pictures that were written."""
    flagged = sum(bool(one.flags) for one in found.estimates)
    photos = "one photo" if len(overlays) == 1 else f"{len(overlays)} photos"
    answer = f"{len(found.estimates)} unknowns read from {photos} with {len(found.standards)} standards"
    answer += f"; {flagged} of them with a flag." if flagged else "; none with a flag."
    pictures = [picture(lambda: plot_intervals(found), "Concentrations", "Each unknown with its 95 % interval.")]
    pictures += [_shown(path) for path in overlays]
    heading = header(found)
    rows = [[words(row[0]), *(number(cell) for cell in row[1:-1]), words(row[-1])] for row in lines(found)]
    said = (*_said(found), *found.flags, *found.notes)
    return Page(
        "Concentrations from a photo",
        answer,
        (
            Section("Picture", tuple(pictures)),
            Section("Concentrations", (), (table("Concentrations with 95 % intervals", heading, rows),), said),
        ),
        (
            ("Dyes", ", ".join(found.dyes) or "none: a smooth response fitted to the standards"),
            ("Unit", found.unit),
            ("Uncertainty", UNCERTAINTY),
        ),
        found.sources,
        CAUTIONS,
    )


def _said(found: PhotoEstimate) -> list[str]:
    """What stands below the table, but for the cautions, which close the page."""
    return [line for line in below(found) if not line.startswith("Caution")]


def plot_intervals(found: PhotoEstimate, *, ax: Axes | None = None) -> Axes:
    """Each unknown's concentration as a point with its 95 % interval; flagged ones are hollow."""
    ax = ax or new_axes(6.5, 0.9 + 0.3 * len(found.estimates))
    for row, one in enumerate(found.estimates):
        for shift, part in zip(
            np.linspace(-0.12, 0.12, len(one.parts)) if len(one.parts) > 1 else (0.0,), one.parts, strict=True
        ):
            ax.plot([part.low, part.high], [row + shift] * 2, color="black", linewidth=1.6)
            ax.plot(part.middle, row + shift, "o", color="black", markerfacecolor="white" if one.flags else "black")
        if one.flags:
            ax.annotate(
                "; ".join(one.flags),
                (one.parts[-1].high, row),
                xytext=(6, 0),
                textcoords="offset points",
                fontsize=7,
                va="center",
            )
    ax.set_yticks(range(len(found.estimates)), [one.name for one in found.estimates])
    ax.invert_yaxis()
    ax.set_xlabel(f"concentration / ({found.unit})")
    ax.set_xlim(left=0)
    ax.margins(y=0.2)
    return ax


def _shown(path: str) -> Picture:
    return picture(lambda: _overlay(path), f"What was measured: {path}", "The photo with the boxes that were read.")


def _overlay(path: str) -> Axes:
    from PIL import Image

    with Image.open(path) as opened:
        opened.thumbnail((WIDEST, WIDEST))
        shown = np.asarray(opened.convert("RGB"))
    ax = new_axes(6.5, 6.5 * shown.shape[0] / shown.shape[1])
    ax.imshow(shown)
    ax.set_axis_off()
    return ax
