"""Pictures of results. Each function draws on the axes it is given, or on new ones, and returns them."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from chroma.batches import Checked
from chroma.colour.screen import spectrum_rgb
from chroma.colours import Colours
from chroma.decision import WORDS
from chroma.spectra import Spectra

if TYPE_CHECKING:
    from matplotlib.axes import Axes

GREY = "#777777"
MOST_LETTERS = 28  # of a name in a picture
# A verdict is told by its word and its mark; the tint only helps.
# Each tint stands out 4.5:1 from white and from the grey behind swatches.
MARKS = {"pass": ("○", "#1f5a8a"), "undecided": ("△", "#6b5310"), "fail": ("✕", "#9c2f2c")}


def short(name: str) -> str:
    """A name as a picture has room for; the table holds it whole."""
    return name if len(name) <= MOST_LETTERS else f"{name[: MOST_LETTERS - 1]}…"


def new_axes(width_in: float = 7.0, height_in: float = 4.0) -> Axes:
    """Axes on a figure of their own, without a window and without any global state."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=(width_in, height_in), layout="constrained")
    return figure.add_subplot()


def plot_spectra(spectra: Spectra, *, ax: Axes | None = None, emphasise: str | None = None) -> Axes:
    """Spectra over a wavelength axis tinted by the visible spectrum; one of them may be drawn bold."""
    ax = ax or new_axes()
    for name, values in zip(spectra.names, spectra.values, strict=True):
        bold = name == emphasise
        ax.plot(
            spectra.wavelength_nm,
            values,
            color="black" if bold else GREY,
            linewidth=2.2 if bold else 0.8,
            zorder=3 if bold else 2,
            label=name if bold else None,
        )
    low, high = spectra.wavelength_nm[[0, -1]]
    ax.set_xlim(low, high)
    if spectra.quantity != "absorbance":
        ax.set_ylim(bottom=min(0.0, float(spectra.values.min())))
    ax.set_xlabel("wavelength / nm")
    ax.set_ylabel(spectra.quantity)
    tint(ax, float(low), float(high))
    if emphasise is not None:
        ax.legend(frameon=False, loc="best")
    return ax


def plot_swatches(
    checked: Checked, target: Colours, batches: Colours, *, ax: Axes | None = None, rows: Sequence[int] | None = None
) -> Axes:
    """Target beside batch, one pair a lamp and one line a batch, with the difference and the verdict in words.

    Swatches are shown on a neutral grey, adapted from each lamp to the screen. ``rows`` are the batches to show, in
    that order; all of them by default.
    """
    lamps = [lamp.name for lamp in checked.conditions.illuminants]
    shown = range(len(checked.names)) if rows is None else rows
    ax = ax or new_axes(2.2 + 1.6 * len(lamps), 0.6 + 0.24 * len(shown))
    left, right = _codes(target), _codes(batches)
    for at, i in enumerate(shown):
        for j in range(len(lamps)):
            ax.barh(at, 0.34, left=j + 0.02, height=0.8, color=left[0][j])
            ax.barh(at, 0.34, left=j + 0.36, height=0.8, color=right[i][j])
            ax.text(j + 0.73, at, f"{checked.delta_e[i, j]:.2f}", va="center", fontsize=7)
        word = WORDS[checked.worst[i]]
        mark, tint = MARKS[word]
        ax.text(len(lamps) + 0.05, at, f"{mark} {word}", va="center", fontsize=8, color=tint)
    ax.set_xticks(np.arange(len(lamps)) + 0.36, [f"{short(lamp)}\ntarget | batch   ΔE" for lamp in lamps], fontsize=7)
    ax.set_yticks(range(len(shown)), [short(checked.names[i]) for i in shown], fontsize=7)
    ax.set_xlim(0, len(lamps) + 0.75)
    ax.set_ylim(len(shown) - 0.4, -0.6)
    ax.tick_params(length=0, top=True, labeltop=True, bottom=False, labelbottom=False)
    ax.set_facecolor("#d9d9d9")
    for side in ax.spines.values():
        side.set_visible(False)
    return ax


def _codes(colours: Colours) -> list[list[str]]:
    return colours.swatches()[0]


def tint(ax: Axes, low_nm: float, high_nm: float) -> None:
    """A strip of the visible spectrum along the wavelength axis."""
    strip = spectrum_rgb(np.linspace(low_nm, high_nm, 256))[None]
    inset = ax.inset_axes((0, -0.035, 1, 0.03))
    inset.imshow(strip, aspect="auto", extent=(low_nm, high_nm, 0, 1))
    inset.set_axis_off()
    ax.tick_params(axis="x", pad=8)
