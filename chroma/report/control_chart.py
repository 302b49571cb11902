"""The control chart of ΔE per batch, in order."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from chroma.batches import Checked
from chroma.control import Control, control
from chroma.decision import WORDS
from chroma.report.colour_plots import SHAPES
from chroma.report.plots import GREY, MARKS, new_axes, short

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MOST_NAMES = 30  # on the axis; beyond that batches are numbered
SIGNIFICANT = 2.0  # standard errors of a slope, about 5 % of chance


def plot_control(checked: Checked, lamp: int = 0, *, ax: Axes | None = None) -> Axes:
    """ΔE of each batch in order under one lamp, with limit, centre, warning and action limits, EWMA and trend.

    Raises InputError for fewer than three batches (`chroma.control.control`).
    """
    chart = control(checked.delta_e[:, lamp])
    ax = ax or new_axes(8.0, 3.8)
    order = np.arange(1, len(chart.values) + 1)
    ax.plot(order, chart.values, color=GREY, linewidth=0.6, zorder=1)
    for code, word in enumerate(WORDS):
        own = checked.verdicts[:, lamp] == code
        if own.any():
            tint = MARKS[word][1]
            ax.scatter(
                order[own], chart.values[own], marker=SHAPES[word], s=22, edgecolors=tint, linewidths=0.9, zorder=3,
                facecolors="none" if word == "pass" else tint, label=word,
            )  # fmt: skip
    ax.plot(order, chart.ewma, color="black", linewidth=1.6, label="EWMA, λ = 0.2", zorder=2)
    ax.plot(order, chart.ewma_action, color="black", linewidth=0.7, linestyle=(0, (1, 1.5)), label="its limit, 3σ")
    trend = chart.centre + chart.slope * (order - order.mean())
    ax.plot(order, trend, color=GREY, linewidth=0.9, linestyle=(0, (6, 2, 1, 2)), label="trend")
    _levels(ax, checked, lamp, chart)
    _order_axis(ax, checked)
    ax.set_ylabel(f"ΔE under {short(checked.conditions.illuminants[lamp].name)}")
    ax.legend(fontsize=7, frameon=False, ncols=6, loc="lower left", bbox_to_anchor=(0, 1.0))
    return ax


def control_sentence(checked: Checked, lamp: int = 0) -> str:
    """What the chart says, in words."""
    chart = control(checked.delta_e[:, lamp])
    over = [checked.names[i] for i in np.flatnonzero(chart.beyond_action)]
    named = f" ({', '.join(over[:5])}{' …' if len(over) > 5 else ''})" if over else ""
    shifted = np.flatnonzero(chart.ewma_beyond)
    ewma = (
        f"the EWMA leaves its limit first at {checked.names[shifted[0]]}"
        if len(shifted)
        else "the EWMA stays within its limit"
    )
    strong = np.isfinite(chart.s_slope) and abs(chart.slope) > SIGNIFICANT * chart.s_slope
    trend = f"ΔE changes by {chart.slope:+.3g} a batch (s {chart.s_slope:.2g})" if strong else "no trend beyond chance"
    return (
        f"Mean {chart.centre:.2f}, σ {chart.sigma:.2f} from the moving range; {_batches(len(over))} above the action "
        f"limit {chart.action:.2f}{named}; {ewma}; {trend}."
    )


def _batches(count: int) -> str:
    return {0: "no batch", 1: "1 batch"}.get(count, f"{count} batches")


def _levels(ax: Axes, checked: Checked, lamp: int, chart: Control) -> None:
    """Horizontal lines, each named at the right edge; names that would lie on each other are set apart."""
    levels = [
        (float(checked.limits[lamp]), "tolerance", "-", 1.6, MARKS["fail"][1]),
        (chart.action, "action 3σ", "--", 1.0, "#333333"),
        (chart.warning, "warning 2σ", ":", 1.1, "#333333"),
        (chart.centre, "mean", "-", 0.5, "#333333"),
    ]
    top = 1.08 * max(float(chart.values.max()), *(level[0] for level in levels))
    ax.set_ylim(0, top)
    floor = -1.0
    for value, name, style, width, tint in sorted(levels):
        ax.axhline(value, color=tint, linestyle=style, linewidth=width, zorder=1)
        floor = max(value, floor + 0.05 * top)
        ax.annotate(
            f"{name} {value:.2f}", (1.0, floor), xycoords=("axes fraction", "data"), xytext=(4, 0),
            textcoords="offset points", fontsize=7, va="center", color=tint, annotation_clip=False,
        )  # fmt: skip


def _order_axis(ax: Axes, checked: Checked) -> None:
    count = len(checked.names)
    ax.set_xlim(0.3, count + 0.7)
    if count <= MOST_NAMES:
        ax.set_xticks(
            range(1, count + 1),
            list(map(short, checked.names)),
            rotation=60,
            ha="right",
            rotation_mode="anchor",
            fontsize=7,
        )
        ax.set_xlabel("batches in the order of the file", fontsize=8)
    else:
        ax.set_xlabel("number of the batch in the order of the file", fontsize=8)
