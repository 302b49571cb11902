"""Pictures of colours: batches about the target with its tolerance ellipse, and the chromaticity diagram."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from chroma.batches import Checked
from chroma.colour.spaces import LCh_from_Lab, xyY_from_XYZ
from chroma.colours import Colours
from chroma.decision import WORDS
from chroma.report.dye_plots import LAMP_SHAPES
from chroma.report.ellipses import Plane, on_plane, tolerance_contour
from chroma.report.plots import GREY, MARKS, new_axes, short
from observers.arrays import Array

if TYPE_CHECKING:
    from matplotlib.axes import Axes

SHAPES = {"pass": "o", "undecided": "^", "fail": "X"}  # what tells a verdict; pass is hollow, fail is filled
NAMED = 6  # batches that carry their name in a picture: the worst, so that names do not lie on each other
ROOM = {"left": 0.075, "right": 0.985, "bottom": 0.12, "top": 0.93, "wspace": 0.2}
LETTER, GAP = 0.022, 0.04  # of a picture's width: a letter, and the space between a mark and its name
LABELLED_NM = (460, 480, 490, 500, 510, 520, 540, 560, 580, 600, 620)


def plot_ab(checked: Checked, lamp: int = 0, *, ax: Axes | None = None) -> Axes:
    """Batches in a*, b* under one lamp, with the tolerance ellipse at the target's place."""
    ax = _plot_plane(checked, lamp, "ab", ax)
    ax.set_xlabel("a*")
    ax.set_ylabel("b*")
    return ax


def plot_LC(checked: Checked, lamp: int = 0, *, ax: Axes | None = None, legend: bool = True) -> Axes:
    """Batches in C*, L* under one lamp, with the tolerance ellipse at the target's place."""
    ax = _plot_plane(checked, lamp, "LC", ax, legend)
    ax.set_xlabel("C*")
    ax.set_ylabel("L*")
    return ax


def plot_tolerance(checked: Checked, lamp: int = 0) -> Axes:
    """a*, b* and C*, L* side by side under one lamp; returns the axes of the first."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=(8.4, 4.1))  # its room is known beforehand: finding it out takes a quarter of the time
    left, right = figure.subplots(1, 2, gridspec_kw=ROOM)
    plot_ab(checked, lamp, ax=left)
    plot_LC(checked, lamp, ax=right, legend=False)
    result: Axes = left
    return result


def _plot_plane(checked: Checked, lamp: int, plane: Plane, ax: Axes | None, legend: bool = True) -> Axes:
    ax = ax or new_axes(4.6, 4.4)
    target, Lab = checked.target_Lab[lamp], checked.Lab[:, lamp]
    contour = tolerance_contour(checked.tolerance.formula, target, float(checked.limits[lamp]), plane)
    ax.plot(
        *on_plane(contour, target, plane),
        color="black",
        linewidth=1.1,
        label=f"ΔE = {checked.limits[lamp]:g}",
        zorder=2,
    )
    x, y = _place(Lab, plane)
    for code, word in enumerate(WORDS):
        own = checked.verdicts[:, lamp] == code
        if own.any():
            _scatter(ax, x[own], y[own], word)
    at = _place(target[None], plane)
    ax.plot(*at, "+", color="black", markersize=11, markeredgewidth=1.6, label="target", zorder=4)
    _name_worst(ax, checked, lamp, np.column_stack([x, y]), np.concatenate(at))
    ax.set_aspect("equal", adjustable="datalim")
    ax.margins(0.12)
    ax.set_title(f"{short(checked.conditions.illuminants[lamp].name)}, {checked.tolerance.formula}", fontsize=9)
    if legend:
        ax.legend(fontsize=7, frameon=False, loc="best")
    return ax


def _place(Lab: Array, plane: Plane) -> tuple[Array, Array]:
    if plane == "ab":
        return Lab[:, 1], Lab[:, 2]
    LCh = LCh_from_Lab(Lab)
    return LCh[:, 1], LCh[:, 0]


def _scatter(ax: Axes, x: Array, y: Array, word: str) -> None:
    tint = MARKS[word][1]
    face = "none" if word == "pass" else tint
    ax.scatter(x, y, marker=SHAPES[word], s=30, facecolors=face, edgecolors=tint, linewidths=1.0, label=word, zorder=3)


def _name_worst(ax: Axes, checked: Checked, lamp: int, at: Array, centre: Array) -> None:
    """Names beside the worst batches that are not within tolerance, where they cover no mark and no other name."""
    own = checked.delta_e[:, lamp]
    worst = [i for i in np.argsort(-own, kind="stable") if checked.verdicts[i, lamp] > 0][:NAMED]
    reach = np.ptp(np.vstack([at, centre[None]]), axis=0).max() or 1.0
    taken = np.vstack([at, centre[None]]) / reach  # in units of the picture's width
    for i in worst:
        width = LETTER * len(short(checked.names[i]))
        inward = 1 if at[i, 0] < centre[0] else -1  # where there is room
        for right, up in ((inward, 1), (inward, -1), (-inward, 1), (-inward, -1)):
            box = at[i] / reach + np.array([right, up]) * (GAP + width / 2, GAP)
            if not (np.abs(taken - box) < (width / 2 + GAP / 2, GAP * 0.9)).all(axis=1).any():
                break
        else:
            continue
        places = box + np.linspace(-width / 2, width / 2, 5)[:, None] * (1, 0)
        taken = np.vstack([taken, places])
        ax.annotate(
            short(checked.names[i]), at[i], xytext=(6 * right, 5 * up), textcoords="offset points", fontsize=7,
            ha="left" if right > 0 else "right", va="bottom" if up > 0 else "top",
        )  # fmt: skip


def plot_chromaticity(colours: Colours, *, ax: Axes | None = None, names: Sequence[str] | None = None) -> Axes:
    """Samples in the chromaticity diagram of their observer, with the locus, its wavelengths, and each lamp's white.

    Samples stand in their own colours; a shape a lamp.
    """
    ax = ax or new_axes(4.8, 4.8)
    _locus(ax, colours)
    codes, _ = colours.swatches()
    white, xy = xyY_from_XYZ(colours.white100), colours.xyY
    for j, lamp in enumerate(colours.conditions.illuminants):
        shape = LAMP_SHAPES[j % len(LAMP_SHAPES)]
        ax.plot(*white[j, :2], "+", color="black", markersize=9, zorder=2)
        ax.scatter(
            xy[:, j, 0], xy[:, j, 1], c=[row[j] for row in codes], marker=shape, s=34, edgecolors="black",
            linewidths=0.6, label=lamp.name, zorder=3,
        )  # fmt: skip
    ax.plot([], [], "+", color="black", label="white of the lamp", linestyle="none")
    for i, name in enumerate(names or ()):
        ax.annotate(short(name), (xy[i, 0, 0], xy[i, 0, 1]), xytext=(6, 3), textcoords="offset points", fontsize=7)
    ax.legend(fontsize=7, frameon=False, loc="upper right")
    ax.set_xlabel("x")
    ax.set_ylabel("y")
    ax.set_title(f"{colours.conditions.observer.name} observer", fontsize=9)
    return ax


def _locus(ax: Axes, colours: Colours) -> None:
    """The spectrum locus of the observer, closed by the purple line, with ticks of wavelength outside it."""
    looker = colours.conditions.observer
    keep = (looker.wavelength_nm >= 390) & (looker.wavelength_nm <= 700)
    nm, curve = looker.wavelength_nm[keep], looker.responsivity[keep]
    xy = (curve / curve.sum(axis=1, keepdims=True))[:, :2]
    ax.plot(*np.vstack([xy, xy[:1]]).T, color=GREY, linewidth=1.0, zorder=1)
    for wanted in LABELLED_NM:
        at = xy[int(np.argmin(np.abs(nm - wanted)))]
        out = (at - (1 / 3, 1 / 3)) / np.hypot(*(at - (1 / 3, 1 / 3)))
        ax.plot(*at, ".", color=GREY, markersize=3)
        ax.annotate(
            str(wanted), at, xytext=tuple(11 * out), textcoords="offset points", fontsize=6, color="#555555",
            ha="center", va="center",
        )  # fmt: skip
    ax.set_xlim(-0.08, 0.82)
    ax.set_ylim(-0.05, 0.92)
    ax.set_aspect("equal")
