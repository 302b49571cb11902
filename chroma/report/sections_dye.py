"""A dye's fit, and unmixed samples, as pages."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from chroma.dye.build import DyeFit
from chroma.dye.unmix import Unmixed
from chroma.report.dye_plots import LINES, plot_fit
from chroma.report.plots import GREY, new_axes, short, tint
from chroma.report.sections_base import Page, Section, Table, number, table, words
from chroma.report.sections_svg import picture

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MOST_SAMPLES = 30  # in the picture
MOST_NAMES = 9  # beside the residuals
MOST_LINES = 2000
BEYOND = (
    "Outside the fitted concentrations, and where Beer's law was not found to hold, the dye's numbers are not proven."
)
SOUGHT = "Only the dyes named here are sought; one that is not named counts as something else, or is taken for the one most like it."
SHAPES, TINTS = "osD^vP", ("#1f5a8a", "#222222", "#9c2f2c", "#6b5310")  # a dye is told by its shape


def fit_page(found: DyeFit) -> Page:
    """The page of a dye's fit."""
    dye, judged = found.dye, found.linearity
    whole = judged.holds_to >= dye.range_high * (1 - 1e-9)
    held = "over the whole series" if whole else f"only up to {judged.holds_to:.4g} {dye.unit}"
    peak, top = dye.wavelength_nm[dye.peak], dye.absorptivity[dye.peak]
    unit = f"L/({dye.unit[:-2]} cm)"
    answer = (
        f"{dye.name} absorbs most at {peak:g} nm, {top:.5g} ± {dye.half_width95[dye.peak]:.2g} {unit} (95 %); Beer's law holds "
        f"within {100 * judged.fraction:g} % {held}."
    )
    drawn = picture(
        lambda: plot_fit(found),
        f"Dilution series of {dye.name}",
        f"Absorbance over wavelength of {len(found.series.names)} standards with the fitted lines, and below them what is left "
        f"of each reading. {answer}",
        "Above: readings as points, the fit as lines. Below: residuals, darker the stronger the standard; the band is one σ.",
    )
    return Page(
        f"Dye {dye.name}",
        answer,
        (Section("Picture", (drawn,)), Section("Numbers", tables=_fit_tables(found))),
        (
            ("Path length", f"{dye.path_length_mm:g} mm"),
            ("Fitted over", f"{dye.range_low:.4g}–{dye.range_high:.4g} {dye.unit}"),
            ("Wavelengths", f"{dye.wavelength_nm[0]:g}–{dye.wavelength_nm[-1]:g} nm, {len(dye.wavelength_nm)} bands"),
            ("Stray light taken out", f"{100 * dye.stray_light:.3g} %"),
            ("Uncertainty", "95 % intervals from the covariance of the fit"),
        ),
        dye.sources,
        (*dye.notes, BEYOND),
    )


def _fit_tables(found: DyeFit) -> tuple[Table, ...]:
    dye = found.dye
    facts = dye.findings["linearity"]["standards"]
    standards = [
        [
            words(row["name"]),
            number(f"{row['concentration']:.4g}"),
            number("–" if row["deviation"] is None else f"{100 * row['deviation']:+.2f}"),
            number("–" if row["standard_uncertainty"] is None else f"{100 * row['standard_uncertainty']:.2f}"),
        ]
        for row in facts
    ]
    first = table(
        "How far each standard is off the line", ("standard", dye.unit, "off the line / %", "u / %"), standards
    )
    line = dye.findings["calibration"]
    if line is None:
        return (first,)
    keys: tuple[str, ...] = (
        "slope",
        "intercept",
        "residual_standard_deviation",
        "r",
        "decision_limit",
        "detection_limit",
    )
    keys += ("quantification_limit",)
    rows = [[words(key.replace("_", " ")), number("–" if line[key] is None else f"{line[key]:.5g}")] for key in keys]
    return first, table(
        f"Calibration line at {line['wavelength_nm']:g} nm (DIN 32645, ISO 11843)", ("what", "value"), rows
    )


def unmixed_page(found: Unmixed) -> Page:
    """The page of unmixed samples."""
    dyes, foreign = found.shelf.names, int(np.count_nonzero(found.foreign))
    answer = f"{', '.join(dyes)} in {_samples(len(found.names))}: " + _foreign_words(found, foreign)
    shown = min(len(found.names), MOST_SAMPLES)
    caption = f"Bars are {100 * found.confidence:g} % intervals."
    caption += f" The first {shown} of {len(found.names)} samples are drawn." if shown < len(found.names) else ""
    drawn = (
        picture(
            lambda: plot_concentrations(found),
            "Concentrations",
            f"Concentration of {', '.join(dyes)} in each sample with its interval, a mark for each dye; the table holds the numbers.",
            caption,
        ),
        picture(
            lambda: plot_unmix_residuals(found),
            "Residuals",
            f"What each dye leaves unexplained in absorbance, over wavelength; bold where something else is seen. {answer}",
            "Bold lines: samples in which something else is seen.",
        ),
    )
    above = tuple(
        f"{dye.name}: found above the {dye.range_high:g} {dye.unit} that it was fitted over"
        for dye, value in zip(found.shelf.dyes, found.value.T, strict=True)
        if value.max() > dye.range_high * (1 + 1e-9)
    )
    return Page(
        f"Dyes in {_samples(len(found.names))}",
        answer,
        (Section("Picture", drawn), Section("Numbers", tables=(_unmixed_table(found),), paragraphs=_left_out(found))),
        (
            ("Path length", f"{found.path_length_mm:g} mm"),
            ("Baseline", found.baseline_kind),
            ("Uncertainty", f"{100 * found.confidence:g} % intervals from the noise of each spectrum"),
        ),
        tuple(dict.fromkeys((*found.sources, *(dye.sources[0] for dye in found.shelf.dyes if dye.sources)))),
        (*found.notes, *above, SOUGHT),
    )


def plot_concentrations(found: Unmixed, *, ax: Axes | None = None) -> Axes:
    """Concentrations with their intervals, a sample a place, a mark a dye."""
    shown = min(len(found.names), MOST_SAMPLES)
    ax = ax or new_axes(min(9.0, 3.0 + 0.28 * shown), 3.6)
    count = len(found.shelf.names)
    for j, name in enumerate(found.shelf.names):
        at = np.arange(shown) + (j - (count - 1) / 2) * 0.6 / count
        value, low, high = (part[:shown, j] for part in (found.value, found.low, found.high))
        tint_of = TINTS[j % len(TINTS)]
        ax.vlines(at, low, high, color=tint_of, linewidth=1.2)
        ax.plot(at, value, linestyle="none", marker=SHAPES[j % len(SHAPES)], color=tint_of, markersize=4.5, label=name)
    ax.set_xticks(
        range(shown), list(map(short, found.names[:shown])), rotation=60, ha="right", rotation_mode="anchor", fontsize=7
    )
    ax.set_ylabel(found.shelf.unit)
    ax.set_ylim(bottom=0)
    ax.legend(fontsize=7, frameon=False, ncols=4, loc="lower left", bbox_to_anchor=(0, 1.0))
    return ax


def plot_unmix_residuals(found: Unmixed, *, ax: Axes | None = None) -> Axes:
    """What the dyes leave unexplained in absorbance; bold and named where something else is seen."""
    ax = ax or new_axes(7.0, 3.2)
    nm = found.shelf.wavelength_nm
    shown = np.arange(min(len(found.names), MOST_SAMPLES))
    size = np.nanmax(np.abs(found.residual), axis=1)
    for i in shown[~found.foreign[shown]]:
        ax.plot(nm, found.residual[i], color=GREY, linewidth=0.6)
    for place, i in enumerate(sorted(shown[found.foreign[shown]], key=lambda i: -size[i])):
        said = f"{short(found.names[i])}, up to {size[i]:.2g}" if place < MOST_NAMES else None
        ax.plot(nm, found.residual[i], color="black", linewidth=1.6, linestyle=LINES[place % len(LINES)], label=said)
    if found.foreign[shown].any():
        ax.legend(fontsize=7, frameon=False, loc="upper left", bbox_to_anchor=(1.0, 1.0), handlelength=3.2)
    ax.set_xlim(float(nm[0]), float(nm[-1]))
    ax.set_xlabel("wavelength / nm")
    ax.set_ylabel("residual absorbance")
    tint(ax, float(nm[0]), float(nm[-1]))
    return ax


def _foreign_words(found: Unmixed, foreign: int) -> str:
    if not foreign:
        return "nothing else is seen in any of them." if len(found.names) > 1 else "nothing else is seen in it."
    names = [found.names[i] for i in np.flatnonzero(found.foreign)]
    return f"something else is seen in {', '.join(names[:5])}{' …' if foreign > 5 else ''}."


def _unmixed_table(found: Unmixed) -> Table:
    header = ["sample", *(f"{name} {found.shelf.unit}" for name in found.shelf.names), "residual rms", "something else"]
    rows = [
        [
            words(name),
            *(number(f"{v:.4g} ({low:.3g} to {high:.3g})") for v, low, high in _triples(found, i)),
            number(f"{found.rms[i]:.2g}"),
            words(f"yes, near {found.foreign_nm[i]:g} nm" if found.foreign[i] else "no"),
        ]
        for i, name in enumerate(found.names[:MOST_LINES])
    ]
    return table("Concentrations with their intervals", header, rows)


def _triples(found: Unmixed, row: int) -> list[tuple[float, float, float]]:
    return list(zip(found.value[row], found.low[row], found.high[row], strict=True))


def _left_out(found: Unmixed) -> tuple[str, ...]:
    rest = len(found.names) - MOST_LINES
    return (f"The table holds the first {MOST_LINES} samples; --out writes the other {rest} too.",) if rest > 0 else ()


def _samples(count: int) -> str:
    return "1 sample" if count == 1 else f"{count} samples"
