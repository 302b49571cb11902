"""Pictures of dyes: the dilution series with its fit and residuals, ladders of colour, and paths in a*b* and in x, y."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from chroma.colours import Colours
from chroma.dye.build import DyeFit
from chroma.report.plots import GREY, new_axes, short, tint

if TYPE_CHECKING:
    from matplotlib.axes import Axes

FEW = 4  # names that stand upright under a ladder
LINES, LAMP_SHAPES = ("-", "--", ":", "-."), "osDv^P"  # a lamp is told by both, never by colour


def plot_fit(found: DyeFit) -> Axes:
    """Series with its fit above, residuals below, on one wavelength axis; returns the upper axes."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=(7.0, 6.2), layout="constrained")
    upper, lower = figure.subplots(2, 1, sharex=True, height_ratios=(2, 1))
    plot_series(found, ax=upper)
    plot_residuals(found, ax=lower)
    upper.set_xlabel("")
    result: Axes = upper
    return result


def plot_series(found: DyeFit, *, ax: Axes | None = None) -> Axes:
    """Readings as points (thinned), the fitted absorbance as lines, each marked with its concentration at its peak."""
    ax = ax or new_axes()
    data, dye = found.series, found.dye
    every = max(1, len(data.wavelength_nm) // 70)
    for row, x in enumerate(data.x):
        measured = np.where(data.usable[row], found.fitted.absorbance[row], np.nan)
        ax.plot(data.wavelength_nm[::every], measured[::every], ".", color=GREY, markersize=2.5)
        ax.plot(data.wavelength_nm, x * dye.absorptivity + found.fitted.intercept, color="black", linewidth=0.8)
    for c in data.concentration:
        height = c * data.path_length_mm / 10 * dye.absorptivity[dye.peak]
        if c > 0 and height > 0.04 * found.fitted.absorbance.max():
            ax.annotate(
                f"{c:.3g} {data.unit}", (dye.wavelength_nm[dye.peak], height), fontsize=7, ha="center", va="bottom"
            )
    ax.set_ylabel("absorbance")
    ax.set_title(f"{dye.name}: readings (points) and fit (lines)", fontsize=9)
    _wavelength_axis(ax, found)
    return ax


def plot_residuals(found: DyeFit, *, ax: Axes | None = None) -> Axes:
    """What is left of each reading, darker the stronger the standard, with the noise (one sigma) as a band."""
    ax = ax or new_axes()
    data, fitted = found.series, found.fitted
    top = data.concentration.max()
    for row, j in enumerate(data.standard):
        shade = 0.75 - 0.75 * data.concentration[j] / top
        ax.plot(data.wavelength_nm, fitted.residual[row], color=str(max(shade, 0.0)), linewidth=0.7)
    ax.fill_between(
        data.wavelength_nm, -fitted.sigma_T / np.log(10), fitted.sigma_T / np.log(10), color="#7aa6d6", alpha=0.4
    )
    ax.set_ylabel("residual")
    ax.set_xlabel("wavelength / nm")
    _wavelength_axis(ax, found)
    return ax


def plot_ladder(colours: Colours, *, ax: Axes | None = None) -> Axes:
    """A ladder of swatches: one column a step of a sweep, one row a lamp."""
    lamps = [lamp.name for lamp in colours.conditions.illuminants]
    ax = ax or new_axes(7.0, 0.7 + 0.55 * len(lamps))
    codes, shown = colours.swatches()
    for i, row in enumerate(codes):
        for j, code in enumerate(row):
            ax.barh(j, 1.0, left=i, height=0.9, color=code)
            if not shown[i, j]:
                ax.text(i + 0.5, j, "*", ha="center", va="center", fontsize=8)
    slant: dict[str, Any] = {"rotation": 30, "ha": "right"} if len(colours.names) > FEW else {}
    ax.set_xticks(np.arange(len(colours.names)) + 0.5, list(map(short, colours.names)), fontsize=7, **slant)
    ax.set_yticks(range(len(lamps)), list(map(short, lamps)), fontsize=8)
    ax.set_xlim(0, len(colours.names))
    ax.invert_yaxis()
    ax.tick_params(length=0)
    for side in ax.spines.values():
        side.set_visible(False)
    return ax


def plot_path_ab(colours: Colours, *, ax: Axes | None = None) -> Axes:
    """The path of a sweep in a*, b*, one line a lamp, its steps in their own colours."""
    ax = ax or new_axes(4.4, 4.4)
    _path(ax, colours, colours.Lab[..., 1], colours.Lab[..., 2])
    ax.axhline(0, color=GREY, linewidth=0.5)
    ax.axvline(0, color=GREY, linewidth=0.5)
    ax.set_xlabel("a*")
    ax.set_ylabel("b*")
    ax.set_aspect("equal", adjustable="datalim")
    return ax


def plot_path_xy(colours: Colours, *, ax: Axes | None = None) -> Axes:
    """The path of a sweep in the chromaticity diagram, with locus and whites."""
    from chroma.colour.spaces import xyY_from_XYZ

    ax = ax or new_axes(4.4, 4.4)
    observer = colours.conditions.observer
    keep = (observer.wavelength_nm >= 390) & (observer.wavelength_nm <= 700)
    locus = observer.responsivity[keep] / observer.responsivity[keep].sum(axis=1, keepdims=True)
    ax.plot(*np.vstack([locus, locus[:1]])[:, :2].T, color=GREY, linewidth=0.9)
    _path(ax, colours, colours.xyY[..., 0], colours.xyY[..., 1])
    ax.plot(*xyY_from_XYZ(colours.white100)[:, :2].T, "+", color="black")
    ax.set_xlabel("x")
    ax.set_ylabel("y")
    ax.set_aspect("equal")
    return ax


def plot_sweep(colours: Colours) -> Axes:
    """Ladder above, paths in a*, b* and in x, y below; returns the axes of the ladder."""
    from matplotlib.figure import Figure

    lamps = len(colours.conditions.illuminants)
    figure = Figure(figsize=(8.0, 5.2 + 0.5 * lamps), layout="constrained")
    grid = figure.add_gridspec(2, 2, height_ratios=(0.5 * lamps + 0.5, 4.0))
    ladder = plot_ladder(colours, ax=figure.add_subplot(grid[0, :]))
    plot_path_ab(colours, ax=figure.add_subplot(grid[1, 0]))
    plot_path_xy(colours, ax=figure.add_subplot(grid[1, 1]))
    return ladder


def _path(ax: Axes, colours: Colours, x: np.ndarray, y: np.ndarray) -> None:
    codes, _ = colours.swatches()
    for j, lamp in enumerate(colours.conditions.illuminants):
        style, shape = LINES[j % len(LINES)], LAMP_SHAPES[j % len(LAMP_SHAPES)]
        ax.plot(
            x[:, j], y[:, j], linestyle=style, color="black", linewidth=0.8, label=lamp.name, marker=shape,
            markerfacecolor="none", markersize=6, markeredgewidth=0.5, zorder=2,
        )  # fmt: skip
        tints = [row[j] for row in codes]
        ax.scatter(x[:, j], y[:, j], c=tints, s=42, marker=shape, edgecolors="black", linewidths=0.5, zorder=3)
    if len(colours.conditions.illuminants) > 1:
        ax.legend(frameon=False, fontsize=8)


def _wavelength_axis(ax: Axes, found: DyeFit) -> None:
    low, high = found.series.wavelength_nm[[0, -1]]
    ax.set_xlim(low, high)
    tint(ax, float(low), float(high))
