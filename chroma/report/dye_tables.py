"""Dyes, their fits and unmixed samples as tables for a person."""

from __future__ import annotations

from typing import Any

import numpy as np

from chroma.calibration import ReadBack
from chroma.dye.linearity import RISK
from chroma.dye.model import Dye
from chroma.dye.unmix import Unmixed
from chroma.report.rows import number
from chroma.report.text import aligned, joined_lines, notes, sources_line


def dye_table(dye: Dye) -> str:
    """What a dye's file holds, and where it came from."""
    peak = dye.peak
    lines = [
        f"{dye.name}: absorptivity in L/({dye.unit[:-2]} cm), {dye.wavelength_nm[0]:g}–{dye.wavelength_nm[-1]:g} nm, "
        f"{len(dye.wavelength_nm)} bands",
        f"peak {dye.wavelength_nm[peak]:g} nm: {dye.absorptivity[peak]:.5g} ± {dye.half_width95[peak]:.2g} (95 %)",
        f"fitted over {dye.range_low:.4g}–{dye.range_high:.4g} {dye.unit} in {dye.path_length_mm:g} mm"
        + (f"; stray light {100 * dye.stray_light:.3g} % taken out" if dye.stray_light else ""),
    ]
    if dye.molar_mass is not None:
        lines.append(f"molar mass {dye.molar_mass:g} g/mol")
    linearity = dye.findings.get("linearity")
    calibration = dye.findings.get("calibration")
    made = f"Made {dye.created} by {dye.program}" if dye.created else ""
    return joined_lines(
        *lines,
        _linearity(linearity, dye) if linearity else "",
        _calibration(calibration, dye.unit) if calibration else "",
        notes(dye.notes),
        made,
        sources_line(dye.sources),
    )


def _linearity(found: dict[str, Any], dye: Dye) -> str:
    rows = [
        [
            row["name"],
            f"{row['concentration']:.4g}",
            "–" if row["deviation"] is None else f"{100 * row['deviation']:+.2f}",
            "–" if row["standard_uncertainty"] is None else f"{100 * row['standard_uncertainty']:.2f}",
        ]
        for row in found["standards"]
    ]
    held = found["holds_to"] >= dye.range_high * (1 - 1e-9)
    said = (
        f"Beer's law holds within {100 * found['fraction']:g} % over the whole series"
        if held
        else f"Beer's law holds within {100 * found['fraction']:g} % only up to {found['holds_to']:.4g} {dye.unit}: at the highest "
        f"standard the response is {100 * found['bend_at_highest']:+.1f} % off (p = {found['bend_p']:.2g})"
    )
    shape = (
        f"the spectrum changes its shape with concentration, most near {_shape_at(found)}: association of the dye, or stray "
        "light (fit it with --stray-light fit)"
        if found["associates"]
        else "the shape of the spectrum does not change with concentration"
    )
    return "\n".join(
        [
            aligned(["standard", dye.unit, "off the line %", "u %"], rows),
            said,
            *_bent_windows(found),
            shape,
            f"errors found: {100 * found['concentration_error']:.2g} % of a concentration, {found['offset_error']:.2g} in absorbance "
            f"of a baseline, {found['photometric_noise']:.2g} in transmittance of noise",
        ]
    )


def _bent_windows(found: dict[str, Any]) -> list[str]:
    """Bands of wavelengths whose response bends beyond chance."""
    bent = [row for row in found["windows"] if row["p"] < RISK]
    where = ", ".join(
        f"{row['from_nm']:g}–{row['to_nm']:g} nm by {100 * row['bend_at_highest']:+.1f} %" for row in bent
    )
    return [f"lack of fit at the highest standard: {where}"] if bent else []


def _shape_at(found: dict[str, Any]) -> str:
    return f"{found['shape_nm']:g} nm" if found.get("shape_nm") else "the worst band"


def _calibration(found: dict[str, Any], unit: str) -> str:
    limits = ", ".join(
        f"{name.replace('_', ' ')} {found[name]:.3g} {unit}"
        for name in ("decision_limit", "detection_limit", "quantification_limit")
        if found[name] is not None
    )
    return (
        f"line at {found['wavelength_nm']:g} nm: A = {found['intercept']:.4g} (s {found['s_intercept']:.2g}) + {found['slope']:.5g} "
        f"(s {found['s_slope']:.2g}) × c, s of a point {found['residual_standard_deviation']:.2g}, r {found['r']:.5f}\n"
        f"by that line alone (DIN 32645, ISO 11843): {limits}"
    )


def read_back_line(dye: Dye, absorbance: float, readings: int, back: ReadBack) -> str:
    """A concentration read off the calibration line, with Fieller's limits, in one sentence."""
    found = dye.findings["calibration"]
    outside = "" if dye.range_low <= back.value <= dye.range_high else "; outside the concentrations that were fitted"
    return (
        f"{dye.name}: absorbance {absorbance:g} at {found['wavelength_nm']:g} nm in {dye.path_length_mm:g} mm (mean of "
        f"{readings}) is {back.value:.4g} {dye.unit}, 95 % from {back.low:.4g} to {back.high:.4g} (Fieller){outside}"
    )


def read_back_row(back: ReadBack) -> dict[str, float | None]:
    """The same as a JSON object."""
    return {
        "concentration": number(back.value),
        "standard_error": number(back.standard_error),
        "low": number(back.low),
        "high": number(back.high),
    }


def unmixed_table(found: Unmixed) -> str:
    """Concentrations with intervals, one line a sample, and what the residual says."""
    stock = found.shelf
    header = ["sample", *(f"{name} {stock.unit}" for name in stock.names), "residual rms", "something else?"]
    rows = []
    for i, name in enumerate(found.names):
        cells = [
            f"{found.value[i, j]:.4g} ({found.low[i, j]:.4g} to {found.high[i, j]:.4g})"
            for j in range(len(stock.names))
        ]
        foreign = f"yes, near {found.foreign_nm[i]:g} nm" if found.foreign[i] else "no"
        rows.append([name, *cells, f"{found.rms[i]:.2g}", foreign])
    about = f"{100 * found.confidence:g} % intervals; {found.path_length_mm:g} mm; baseline {found.baseline_kind}"
    above = tuple(
        f"{dye.name}: found above the {dye.range_high:g} {dye.unit} that it was fitted over"
        for dye, value in zip(stock.dyes, np.moveaxis(found.value, -1, 0), strict=True)
        if value.max() > dye.range_high * (1 + 1e-9)
    )
    return joined_lines(aligned(header, rows), about, notes(found.notes + above), sources_line(found.sources))
