"""A certificate: what was found for one batch, on one page, to send to a customer."""

from __future__ import annotations

import textwrap
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from chroma.batches import Checked
from chroma.colours import Colours
from chroma.decision import WORDS
from chroma.readers.write import atomic_write
from chroma.report.check_report import check_rows
from chroma.report.colour_plots import plot_ab, plot_LC
from chroma.report.page import made_on
from chroma.report.plots import MARKS, plot_swatches
from chroma.report.sections_check import held_to
from chroma.report.sections_svg import SETTINGS, quiet_letters
from chroma.version import PROGRAM
from observers.errors import InputError

if TYPE_CHECKING:
    from matplotlib.figure import Figure
    from matplotlib.lines import Line2D

A4_IN = (8.27, 11.69)
LEFT, RIGHT = 0.09, 0.91  # of the width
MOST_LAMPS = 6  # that fit on the page with their numbers
LOWER = 0.016  # of the page's height that each further lamp, signed limit or file takes from the pictures
FOLD = 92  # letters a line
SOFT = "#545a60"


def certificate(
    checked: Checked, row: int, target: Colours, batches: Colours, path: str, *, force: bool = False
) -> None:
    """Write one page (A4, PDF) on the batch of this row; target and batches are the colours, for the swatches.

    Raises InputError for a suffix other than .pdf, a row that is not there, more lamps than fit on a page, or a file
    that is there already without ``force``.
    """
    if Path(path).suffix.lower() != ".pdf":
        raise InputError(f"a certificate named {path!r}", why="it is a PDF", do="name it FILE.pdf")
    if not 0 <= row < len(checked.names):
        raise InputError(f"batch {row + 1} of {len(checked.names)}", why="there is no such batch")
    lamps = len(checked.conditions.illuminants)
    if lamps > MOST_LAMPS:
        raise InputError(
            f"a certificate under {lamps} illuminants", why=f"{MOST_LAMPS} fit on its page", do="check under fewer"
        )
    import matplotlib as mpl

    with mpl.rc_context(SETTINGS | {"pdf.fonttype": 42}), quiet_letters(), atomic_write(path, force) as beside:
        figure = draw_certificate(one_batch(checked, row), target, _one_colour(batches, row))
        # What the clock says stands on the page; the file's own date would make each copy another file.
        about = {
            "Title": f"Certificate of {checked.names[row]}",
            "Creator": PROGRAM,
            "Producer": None,
            "CreationDate": None,
        }
        figure.savefig(beside, format="pdf", metadata=about)


def one_batch(checked: Checked, row: int) -> Checked:
    """The same check with one of its batches alone."""
    per_batch = ("delta_e", "parts", "expanded", "expanded_parts", "within", "verdicts", "XYZ100", "Lab")
    cut: dict[str, Any] = {
        key: None if (own := getattr(checked, key)) is None else own[row : row + 1] for key in per_batch
    }
    return replace(checked, names=checked.names[row : row + 1], **cut)


def _one_colour(colours: Colours, row: int) -> Colours:
    cut: dict[str, Any] = {
        key: getattr(colours, key)[row : row + 1] for key in ("names", "XYZ100", "XYZ100_screen", "u_Lab")
    }
    return replace(colours, **cut)


def draw_certificate(checked: Checked, target: Colours, batch: Colours) -> Figure:
    """The page of a check of one batch as a figure."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=A4_IN)
    y = _heading(figure, checked)
    swatches = plot_swatches(checked, target, batch, ax=figure.add_axes((LEFT, y - 0.09, RIGHT - LEFT, 0.055)))
    swatches.set_yticks([])  # the batch is named above
    y = _planes(figure, checked, y - 0.13)
    y = _numbers(figure, checked, y - 0.06)
    y = _pairs(figure, checked, y - 0.02)
    _foot(figure, checked, y)
    return figure


def _planes(figure: Figure, checked: Checked, y: float) -> float:
    """a*, b* and C*, L* under the lamp where the batch takes most of its limit; lower where more numbers follow."""
    lamp = int(np.argmax(checked.delta_e[0] / checked.limits))
    height = 0.22 - LOWER * (len(checked.limits) + len(checked.tolerance.one_sided) + min(len(checked.sources), 3) - 3)
    places = [(x, y - 0.015 - height, 0.33, height) for x in (LEFT + 0.05, LEFT + 0.48)]
    plot_ab(checked, lamp, ax=figure.add_axes(places[0]))
    plot_LC(checked, lamp, ax=figure.add_axes(places[1]), legend=False)
    for axes in figure.axes[-2:]:
        axes.tick_params(labelsize=7)
        axes.xaxis.label.set_fontsize(8)
        axes.yaxis.label.set_fontsize(8)
    return y - 0.015 - height


def _heading(figure: Figure, checked: Checked) -> float:
    word = WORDS[checked.worst[0]]
    figure.text(LEFT, 0.955, f"{PROGRAM} · {made_on()}", fontsize=7.5, color=SOFT)
    y = 0.93
    for line in _folded(f"Certificate of colour: {checked.names[0]}", 56, 2):
        figure.text(LEFT, y, line, fontsize=14, weight="bold")
        y -= 0.022
    lamps = ", ".join(lamp.name for lamp in checked.conditions.illuminants)
    for line in _folded(f"Held against {checked.target} under {lamps}", 80, 2):
        figure.text(LEFT, y, line, fontsize=10)
        y -= 0.017
    figure.text(LEFT, y - 0.01, f"{MARKS[word][0]} {word}", fontsize=17, weight="bold", color=MARKS[word][1])
    said = check_rows(checked)
    for line in _folded("; ".join(f"{one['illuminant']}: {one['reason']}" for one in said), FOLD, 3):
        figure.text(LEFT + 0.22, y, line, fontsize=8)
        y -= 0.014
    return min(y, 0.865) - 0.03


def _numbers(figure: Figure, checked: Checked, y: float) -> float:
    """A line of numbers a lamp, under their headings."""
    heads = ("lamp", "limit", "ΔE", "U", "ΔL*", "Δa*", "Δb*", "ΔC*", "ΔH*", "verdict")
    columns = np.array([0.0, 0.2, 0.27, 0.34, 0.41, 0.48, 0.55, 0.62, 0.69, 0.72]) + LEFT
    _line(figure, columns, y, heads, bold=True)
    for j, lamp in enumerate(checked.conditions.illuminants):
        y -= 0.017
        U = "–" if checked.expanded is None else f"{checked.expanded[0, j]:.2f}"
        word = WORDS[checked.verdicts[0, j]]
        parts = [f"{part:+.2f}" for part in checked.parts[0, j]]
        cells = (_cut(lamp.name, 20), f"{checked.limits[j]:g}", f"{checked.delta_e[0, j]:.2f}", U, *parts)
        _line(figure, columns, y, (*cells, f"{MARKS[word][0]} {word}"))
    return y - 0.02


def _line(figure: Figure, columns: np.ndarray, y: float, cells: tuple[str, ...], *, bold: bool = False) -> None:
    """Cells at their columns: the first and the last start there, numbers end there."""
    for at, (x, cell) in enumerate(zip(columns, cells, strict=True)):
        words = at in (0, len(cells) - 1)
        figure.text(
            x, y, cell, fontsize=8, ha="left" if words else "right", weight="bold" if bold else "normal"
        )  # fmt: skip


def _pairs(figure: Figure, checked: Checked, y: float) -> float:
    for name, text in (*held_to(checked), ("Batch, target", f"{checked.names[0]}, {checked.target}")):
        figure.text(LEFT, y, name, fontsize=7.5, color=SOFT)
        for line in _folded(text, 74, 2):
            figure.text(LEFT + 0.24, y, line, fontsize=7.5)
            y -= 0.0135
    return y


def _foot(figure: Figure, checked: Checked, y: float) -> None:
    """Files with their checksums, what the numbers do not tell, and room for a signature."""
    y -= 0.006
    figure.text(LEFT, y, "Files", fontsize=7.5, color=SOFT)
    for source in checked.sources[:3]:
        figure.text(LEFT + 0.24, y, _cut(source.path, 70), fontsize=7.5)
        figure.text(LEFT + 0.24, y - 0.011, f"SHA-256 {source.sha256}", fontsize=5.6, family="DejaVu Sans Mono")
        y -= 0.026
    if len(checked.sources) > 3:
        figure.text(LEFT + 0.24, y, f"and {len(checked.sources) - 3} more", fontsize=7.5)
    said = (
        "Swatches are computed for sRGB with the 2° observer and stand for no measurement. The ellipse is where the difference "
        "equals the limit, at the target's lightness and hue, under the lamp where the batch takes most of its limit."
    )
    for i, line in enumerate(_folded(said, 112, 3)):
        figure.text(LEFT, 0.083 - 0.012 * i, line, fontsize=6.5, color=SOFT)
    for x, name in ((LEFT, "Date"), (LEFT + 0.3, "Name and signature")):
        width = 0.22 if name == "Date" else RIGHT - LEFT - 0.3
        figure.add_artist(_rule(x, 0.038, width))
        figure.text(x, 0.026, name, fontsize=6.5, color=SOFT)


def _rule(x: float, y: float, width: float) -> Line2D:
    from matplotlib.lines import Line2D

    return Line2D((x, x + width), (y, y), color="black", linewidth=0.6)


def _folded(text: str, width: int, most: int) -> list[str]:
    """Lines of a text; what does not fit ends in dots."""
    return textwrap.wrap(text, width, max_lines=most, placeholder=" …") or [""]


def _cut(text: str, most: int) -> str:
    return text if len(text) <= most else f"{text[: most - 1]}…"
