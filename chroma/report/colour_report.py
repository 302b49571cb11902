"""Colours as rows and as a table. Field names here are relied on by others."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from chroma.colours import Colours
from chroma.inconstancy import inconstancies
from chroma.report.rows import Row, number, numbers
from chroma.report.text import (
    MOST_ROWS,
    aligned,
    conditions_line,
    cut_line,
    joined_lines,
    notes,
    sources_line,
    two_places,
)
from observers.arrays import Array

# The lists of a colour row as columns of a table; what stands in two of them is written once.
COLUMNS = {
    "XYZ": ("X", "Y", "Z"),
    "xyY": ("x", "y", None),
    "Lab": ("L", "a", "b"),
    "LCh": (None, "C", "h"),
    "Luv": (None, "u", "v"),
    "u_Lab": ("u_L", "u_a", "u_b"),
}


def colour_rows(colours: Colours) -> list[Row]:
    """One row a sample and lamp, with the fields that design.md names and more."""
    codes, shown = colours.swatches()
    tau, Lab, LCh, Luv, xyY = colours.luminous_transmittance, colours.Lab, colours.LCh, colours.Luv, colours.xyY
    rows = []
    for i, name in enumerate(colours.names):
        for j, lamp in enumerate(colours.conditions.illuminants):
            dominant = colours.dominant(i, j)
            rows.append(
                {
                    "name": name,
                    "illuminant": lamp.name,
                    "observer": colours.conditions.observer.key,
                    "XYZ": numbers(colours.XYZ100[i, j]),
                    "xyY": numbers(xyY[i, j]),
                    "Lab": numbers(Lab[i, j]),
                    "LCh": numbers(LCh[i, j]),
                    "Luv": numbers(Luv[i, j]),
                    "srgb": codes[i][j],
                    "in_gamut": bool(shown[i, j]),
                    "dominant_wavelength_nm": number(dominant.wavelength_nm),
                    "excitation_purity": number(dominant.excitation_purity),
                    "colorimetric_purity": number(dominant.colorimetric_purity),
                    "luminous_transmittance": number(tau[i, j]),
                    "u_Lab": numbers(colours.u_Lab[i, j]),
                }
            )
    return rows


def flat(rows: Sequence[Row]) -> list[Row]:
    """Colour rows for a table: the lists spread over columns with names of their own."""
    return [_flat(row) for row in rows]


def _flat(row: Row) -> Row:
    result: Row = {}
    for key, value in row.items():
        if key in COLUMNS:
            cells = value if value is not None else (None,) * 3
            result |= {name: cell for name, cell in zip(COLUMNS[key], cells, strict=True) if name}
        else:
            result[key] = value
    return result


def inconstancy_rows(colours: Colours) -> list[Row]:
    """How much each sample seems to change from the first lamp to each other (CMCCON02, ISO 105-J05)."""
    lamps = [lamp.name for lamp in colours.conditions.illuminants]
    values = inconstancies(colours)
    return [
        {"name": name, "reference": lamps[0], "test": lamp, "cmccon02": float(values[i, j])}
        for i, name in enumerate(colours.names)
        for j, lamp in enumerate(lamps[1:])
    ]


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
        cut_line(len(colours.names)),
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


def _dominant(wavelength_nm: float) -> str:
    if np.isnan(wavelength_nm):
        return "–"
    return f"{wavelength_nm:.1f}" if wavelength_nm > 0 else f"{-wavelength_nm:.1f}c"
