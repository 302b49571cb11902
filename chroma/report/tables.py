"""Results as tables for a person."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from chroma.batches import Checked
from chroma.colours import Colours
from chroma.decision import WORDS
from chroma.inconstancy import inconstancies
from chroma.metamerism import special_indices
from chroma.off_target import off_target
from chroma.reason import signed_reasons
from chroma.report.text import aligned, notes
from chroma.spectra import Source, Spectra, grid_text
from observers.arrays import Array

MOST_ROWS = 200  # what a person reads in a terminal; the rest is in --out or --json


def colours_table(colours: Colours) -> str:
    """Colours as one line a sample and lamp, with what they rest on."""
    codes, shown = colours.swatches()
    Lab, LCh, XYZ = colours.Lab, colours.LCh, colours.XYZ100
    tau = colours.luminous_transmittance
    rows = []
    for i, name in enumerate(colours.names[:MOST_ROWS]):
        for j, lamp in enumerate(colours.conditions.illuminants):
            values = [*XYZ[i, j], *Lab[i, j], *LCh[i, j, 1:], 100 * tau[i, j]]
            wavelength = colours.dominant(i, j).wavelength_nm
            swatch = codes[i][j] + ("" if shown[i, j] else " *")
            rows.append([name, lamp.name, *map(two_places, values), _dominant(wavelength), swatch])
    header = ["sample", "lamp", "X", "Y", "Z", "L*", "a*", "b*", "C*", "h", "tau_v %", "dom. nm", "screen"]
    if np.isfinite(colours.u_Lab).any():
        header += ["u L*", "u a*", "u b*"]
        flat_u = colours.u_Lab.reshape(-1, 3)
        rows = [
            [*row, *("–" if np.isnan(u) else f"{u:.2g}" for u in us)] for row, us in zip(rows, flat_u, strict=False)
        ]
    changes = inconstancies(colours)
    outside = ["* outside sRGB; the code is the nearest of the same hue and lightness"] if not shown.all() else []
    return joined_lines(
        aligned(header, rows),
        _cut(len(colours.names)),
        *outside,
        _inconstancy_line(colours, changes),
        conditions_line(str(colours.conditions)),
        notes(colours.notes),
        sources_line(colours.sources),
    )


def _inconstancy_line(colours: Colours, changes: Array) -> str:
    """How much one sample changes from lamp to lamp; for many, the largest."""
    lamps = [lamp.name for lamp in colours.conditions.illuminants]
    if not changes.size:
        return ""
    which = "" if len(colours.names) == 1 else ", largest of the samples"
    values = ", ".join(f"{lamp} {value:.2f}" for lamp, value in zip(lamps[1:], changes.max(axis=0), strict=True))
    return f"Change of colour against {lamps[0]} (CMCCON02{which}): {values}"


def check_table(checked: Checked) -> str:
    """One line a batch: verdict, ΔE under each lamp, what is off; then the summary and what it rests on."""
    lamps = [lamp.name for lamp in checked.conditions.illuminants]
    header = ["batch", "verdict", *(f"dE {lamp}" for lamp in lamps), "what is off"]
    rows = [
        [name, WORDS[checked.worst[i]], *(_delta(checked, i, j) for j in range(len(lamps))), _remark(checked, i)]
        for i, name in enumerate(checked.names[:MOST_ROWS])
    ]
    limits = ", ".join(f"{lamp} {limit:g}" for lamp, limit in zip(lamps, checked.limits, strict=True))
    signed = "".join(f", {key} {value:g}" for key, value in checked.tolerance.one_sided.items())
    counts = checked.counts()
    summary = (
        f"{counts['batches']} batches: {counts['pass']} pass, {counts['fail']} fail, {counts['undecided']} undecided"
    )
    return joined_lines(
        f"Target {checked.target}; {checked.tolerance.formula}; limits {limits}{signed}; rule {checked.tolerance.rule}",
        aligned(header, rows),
        _cut(len(checked.names)),
        summary,
        conditions_line(str(checked.conditions)),
        notes(checked.notes),
        sources_line(checked.sources),
    )


def spectra_table(spectra: Spectra) -> str:
    """What was read: one line a sample with its range and extreme, then the grid and the notes."""
    high = spectra.quantity in ("absorbance", "counts")
    header = ["sample", "readings", "lowest", "highest", "highest at nm" if high else "lowest at nm", "mean"]
    rows = []
    for i, name in enumerate(spectra.names[:MOST_ROWS]):
        values = spectra.values[i]
        readings = 1 if spectra.scatter is None else max(1, int(np.count_nonzero(spectra.scatter.row == i)))
        at = spectra.wavelength_nm[values.argmax() if high else values.argmin()]
        rows.append(
            [
                name,
                str(readings),
                *(f"{v:.4g}" for v in (values.min(), values.max())),
                f"{at:g}",
                f"{values.mean():.4g}",
            ]
        )
    return joined_lines(
        f"{len(spectra)} samples, {spectra.quantity}, {grid_text(spectra.wavelength_nm)}",
        aligned(header, rows),
        _cut(len(spectra)),
        notes(spectra.notes),
        sources_line(spectra.sources),
    )


def conditions_line(text: str) -> str:
    """The conditions as one line."""
    return f"Conditions: {text}"


def sources_line(sources: Sequence[Source]) -> str:
    """The files and the first digits of their checksums; --json has them whole."""
    return (
        "Files: " + ", ".join(f"{source.path} (SHA-256 {source.sha256[:12]}…)" for source in sources) if sources else ""
    )


def two_places(value: float) -> str:
    """Two decimals, with no minus before a zero."""
    return f"{value + 0.0:.2f}" if round(value, 2) else "0.00"


def _delta(checked: Checked, row: int, lamp: int) -> str:
    text = f"{checked.delta_e[row, lamp]:.2f}"
    if checked.expanded is not None:
        text += f" ± {checked.expanded[row, lamp]:.2f}"
    return text


def _remark(checked: Checked, row: int) -> str:
    """What is off, a signed limit that is not kept, and a warning where the match holds under the first lamp only."""
    words = off_target(checked, row)
    indices = special_indices(checked)[row]
    over = [
        f"{lamp.name} {index:.1f}"
        for lamp, index, limit in zip(checked.conditions.illuminants[1:], indices, checked.limits[1:], strict=True)
        if index > limit
    ]
    signed = [text for lamp in range(len(checked.limits)) for text in signed_reasons(checked, row, lamp)[:1]][:1]
    return "; ".join([words, *signed, *([f"metameric: {', '.join(over)}"] if over else [])])


def _dominant(wavelength_nm: float) -> str:
    if np.isnan(wavelength_nm):
        return "–"
    return f"{wavelength_nm:.1f}" if wavelength_nm > 0 else f"{-wavelength_nm:.1f}c"


def _cut(count: int) -> str:
    return f"… {count - MOST_ROWS} more; see --out or --json" if count > MOST_ROWS else ""


def joined_lines(*parts: str) -> str:
    """The parts that are not empty, a line each."""
    return "\n".join(part for part in parts if part)
