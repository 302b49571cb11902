"""Results in a notebook: a small table of HTML with swatches.

This module stands below the results that call it, so it takes them as they are and names no class of theirs (`Any`).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from html import escape
from typing import Any

from chroma.colour.screen import RGB_FROM_XYZ, SRGB_WHITE100, hex_codes, linear_rgb, nearest_linear_rgb
from chroma.colour.spaces import XYZ_from_Lab
from chroma.decision import WORDS
from observers.arrays import Array
from observers.errors import InputError

MOST_ROWS = 20  # a glance; the whole is in to_frame()
BOX = "display:inline-block;width:2.2em;height:1em;border:1px solid #888;vertical-align:middle;background:"


@dataclass(frozen=True)
class Swatch:
    """A cell that shows colours of a screen, ``#rrggbb`` each, side by side."""

    codes: tuple[str, ...]


Cell = str | Swatch


def table_html(
    caption: str, header: Sequence[str], rows: Sequence[Sequence[Cell]], below: Sequence[str] = (), *, total: int
) -> str:
    """A table as HTML with everything escaped, how many of ``total`` rows it leaves out, and what stands below it."""
    head = "".join(f'<th scope="col">{escape(text)}</th>' for text in header)
    body = "".join(f"<tr>{''.join(map(_cell, row))}</tr>" for row in rows)
    more = [f"… {total - len(rows)} more; to_frame() has all"] if total > len(rows) else []
    lines = "".join(f"<div>{escape(text)}</div>" for text in (*more, *below) if text)
    title = f'<caption style="text-align:left">{escape(caption)}</caption>'
    return f"<div><table>{title}<thead><tr>{head}</tr></thead><tbody>{body}</tbody></table>{lines}</div>"


def _cell(cell: Cell) -> str:
    if isinstance(cell, str):
        return f"<td>{escape(cell)}</td>"
    boxes = "".join(f'<span style="{BOX}{escape(code)}"></span>' for code in cell.codes)
    return f"<td>{boxes} {escape(' '.join(cell.codes))}</td>"


def colours_html(colours: Any) -> str:
    """Colours of samples under each lamp, with what a screen can show of them."""
    codes, shown = colours.swatches()
    Lab, LCh = colours.Lab, colours.LCh
    rows: list[list[Cell]] = [
        [name, lamp.name, *_decimals((*Lab[i, j], *LCh[i, j, 1:])), Swatch((codes[i][j],)), "" if shown[i, j] else "outside"]
        for i, name in enumerate(colours.names[:MOST_ROWS])
        for j, lamp in enumerate(colours.conditions.illuminants)
    ][:MOST_ROWS]  # fmt: skip
    header = ["sample", "lamp", "L*", "a*", "b*", "C*", "h", "screen", "of sRGB"]
    total = len(colours.names) * len(colours.conditions.illuminants)
    return table_html(f"Colours: {colours.conditions}", header, rows, total=total)


def checked_html(checked: Any) -> str:
    """Verdicts on batches, with target beside batch under the first lamp."""
    lamps = checked.conditions.illuminants
    counts, observer = checked.counts(), checked.conditions.observer.key
    target = _codes(checked.target_XYZ100[:1], checked.white100[0])[0]
    batches = _codes(checked.XYZ100[:MOST_ROWS, 0], checked.white100[0])
    rows: list[list[Cell]] = [
        [name, WORDS[checked.worst[i]], *_with_U(checked, i), Swatch((target, batches[i]))]
        for i, name in enumerate(checked.names[:MOST_ROWS])
    ]
    header = ["batch", "verdict", *(f"ΔE {lamp.name}" for lamp in lamps), f"target, batch under {lamps[0].name}"]
    said = ", ".join(f"{counts[word]} {word}" for word in ("pass", "fail", "undecided"))
    limits = ", ".join(f"{lamp.name} {limit:g}" for lamp, limit in zip(lamps, checked.limits, strict=True))
    caption = (
        f"{counts['batches']} batches against {checked.target}: {said}; {checked.tolerance.formula}, limits {limits}"
    )
    # The verdicts keep no spectra, so no 2° colour can be had from them.
    other = (
        ""
        if observer == "2"
        else f"Swatches by the check's own observer ({observer}); screens are made for the 2° one."
    )
    return table_html(caption, header, rows, [str(checked.conditions), other], total=len(checked.names))


def spectra_html(spectra: Any) -> str:
    """Spectra by their range, with their colour in daylight where that can be had."""
    values, nm = spectra.values[:MOST_ROWS], spectra.wavelength_nm
    shares = 10.0**-values if spectra.quantity == "absorbance" else values
    codes = _daylight_codes(shares, nm) if spectra.quantity != "counts" else []
    rows: list[list[Cell]] = [
        [name, f"{row.min():.4g}", f"{row.max():.4g}", f"{row.mean():.4g}", *([Swatch((codes[i],))] if codes else [])]
        for i, (name, row) in enumerate(zip(spectra.names[:MOST_ROWS], values, strict=False))
    ]  # fmt: skip
    header = ["sample", "lowest", "highest", "mean", *(["in daylight (D65, 2°)"] if codes else [])]
    caption = f"{len(spectra)} samples, {spectra.quantity}, {nm[0]:g}–{nm[-1]:g} nm, {len(nm)} bands"
    return table_html(caption, header, rows, spectra.notes, total=len(spectra))


def fit_html(found: Any) -> str:
    """A fitted dye by its peak and range, with the colour of a solution that has absorbance 1 at the peak."""
    dye = found.dye
    peak = dye.peak
    codes = _daylight_codes(10.0 ** -(dye.absorptivity[None] / dye.absorptivity[peak]), dye.wavelength_nm)
    said = f"{dye.absorptivity[peak]:.5g} ± {dye.half_width95[peak]:.2g}"
    held = f"{found.linearity.holds_to:.4g} {dye.unit}"
    rows: list[list[Cell]] = [
        [f"{dye.wavelength_nm[peak]:g} nm", said, f"{dye.range_low:.4g}–{dye.range_high:.4g} {dye.unit}", held]
    ]
    rows[0] += [Swatch((codes[0],))] if codes else []
    unit = f"L/({dye.unit[:-2]} cm)"
    header = ["peak", f"absorptivity, {unit} (95 %)", "fitted over", "Beer's law holds to"]
    header += ["at absorbance 1 (D65, 2°)"] if codes else []
    return table_html(
        f"{dye.name}: absorptivity from {len(found.series.names)} standards", header, rows, dye.notes, total=1
    )


def unmixed_html(found: Any) -> str:
    """Concentrations with intervals, and the colour of the dyes that were found."""
    stock = found.shelf
    seen = found.value[:MOST_ROWS] @ stock.absorptivity * found.path_length_mm / 10
    codes = _daylight_codes(10.0**-seen, stock.wavelength_nm)
    rows: list[list[Cell]] = [
        [
            name,
            *(f"{v:.4g} ({low:.4g} to {high:.4g})" for v, low, high in zip(found.value[i], found.low[i], found.high[i], strict=True)),
            f"yes, near {found.foreign_nm[i]:g} nm" if found.foreign[i] else "no",
            *([Swatch((codes[i],))] if codes else []),
        ]
        for i, name in enumerate(found.names[:MOST_ROWS])
    ]  # fmt: skip
    header = ["sample", *(f"{name} {stock.unit}" for name in stock.names), "something else?"]
    header += ["the dyes alone (D65, 2°)"] if codes else []
    caption = (
        f"What is in {len(found.names)} samples; {100 * found.confidence:g} % intervals; {found.path_length_mm:g} mm"
    )
    return table_html(caption, header, rows, found.notes, total=len(found.names))


def matches_html(found: Any) -> str:
    """Recipes, best first, with target beside recipe under the first lamp."""
    target = _Lab_codes(found.target.Lab[:1])[0]
    rows: list[list[Cell]] = [
        [
            ", ".join(f"{name} {value:.5g}" for name, value in recipe.concentrations.items()) or "plain solvent",
            *_decimals(recipe.delta_e),
            "within" if recipe.within else "not within",
            Swatch((target, _Lab_codes(recipe.Lab[:1])[0])),
        ]
        for recipe in found.recipes
    ]
    lamps = found.illuminants
    header = [f"recipe, {found.unit}", *(f"ΔE {lamp}" for lamp in lamps), "limits", f"target, recipe under {lamps[0]}"]
    about = f"{found.path_length_mm:g} mm; {found.formula}; observer {found.observer}; swatches from L*a*b* of that observer"
    return table_html(found.said[0].upper() + found.said[1:], header, rows, [about, *found.notes], total=len(rows))


def _decimals(values: Sequence[float] | Array) -> list[Cell]:
    return [f"{value:.2f}" for value in values]


def _with_U(checked: Any, row: int) -> list[Cell]:
    if checked.expanded is None:
        return _decimals(checked.delta_e[row])
    return [f"{d:.2f} ± {U:.2f}" for d, U in zip(checked.delta_e[row], checked.expanded[row], strict=True)]


def _codes(XYZ100: Array, white100: Array) -> list[str]:
    return hex_codes(nearest_linear_rgb(linear_rgb(XYZ100, white100)))


def _Lab_codes(Lab: Array) -> list[str]:
    return hex_codes(nearest_linear_rgb(XYZ_from_Lab(Lab, SRGB_WHITE100) @ RGB_FROM_XYZ.T / 100))


def _daylight_codes(shares: Array, wavelength_nm: Array) -> list[str]:
    """Screen codes of transmittances or reflectances (N, B) under D65; none where the grid does not serve."""
    from chroma.viewing import conditions

    try:
        W = conditions(("D65",), "2").weights(wavelength_nm)
    except InputError:
        return []
    return _codes(W.response(shares)[:, 0], W.white[0])
