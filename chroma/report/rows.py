"""Results as plain rows: what ``--json`` prints and ``--out`` writes. Field names here are relied on by others."""

from __future__ import annotations

from collections.abc import Sequence
from math import isfinite
from typing import Any

from chroma.batches import Checked
from chroma.colours import Colours
from chroma.decision import WORDS
from chroma.inconstancy import inconstancies
from chroma.metamerism import change, special_indices
from chroma.off_target import off_target
from chroma.reason import reason
from chroma.spectra import Source, Spectra, standard_uncertainty
from chroma.tolerance import COMPONENTS
from chroma.viewing import Conditions
from observers.arrays import Array

Row = dict[str, Any]


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


# The lists of a colour row as columns of a table; what stands in two of them is written once.
COLUMNS = {
    "XYZ": ("X", "Y", "Z"),
    "xyY": ("x", "y", None),
    "Lab": ("L", "a", "b"),
    "LCh": (None, "C", "h"),
    "Luv": (None, "u", "v"),
    "u_Lab": ("u_L", "u_a", "u_b"),
}


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


def check_rows(checked: Checked) -> list[Row]:
    """One row a batch and lamp, with the fields that design.md names and more."""
    expanded, within = checked.expanded, checked.within
    rows = []
    for i, name in enumerate(checked.names):
        off, worst = off_target(checked, i), WORDS[checked.worst[i]]
        for j, lamp in enumerate(checked.conditions.illuminants):
            row: Row = {"name": name, "illuminant": lamp.name, "delta_e": float(checked.delta_e[i, j])}
            row |= {key: float(value) for key, value in zip(COMPONENTS, checked.parts[i, j], strict=True)}
            row |= {"verdict": WORDS[checked.verdicts[i, j]], "limit": float(checked.limits[j])}
            row |= {"reason": reason(checked, i, j)}
            row |= {"U": None if expanded is None else float(expanded[i, j])}
            row |= {"probability_within": None if within is None else float(within[i, j])}
            rows.append(row | {"batch_verdict": worst, "off": off})
    return rows


def check_object(checked: Checked) -> Row:
    """The whole answer of ``check`` as one JSON object."""
    limits = {
        lamp.name: float(limit) for lamp, limit in zip(checked.conditions.illuminants, checked.limits, strict=True)
    }
    values = set(limits.values())
    tolerance = checked.tolerance
    return {
        "target": checked.target,
        "formula": str(tolerance.formula),
        "limit": values.pop() if len(values) == 1 else None,
        "limits": limits,
        "rule": tolerance.rule,
        "one_sided": dict(tolerance.one_sided),
        "results": check_rows(checked),
        "metamerism": _metamerism_rows(checked),
        "summary": checked.counts(),
        "conditions": condition_row(checked.conditions),
        "notes": list(checked.notes),
        "sources": source_rows(checked.sources),
    }


def _metamerism_rows(checked: Checked) -> list[Row]:
    first, *others = (lamp.name for lamp in checked.conditions.illuminants)
    changes, indices = change(checked), special_indices(checked)
    return [
        {
            "name": name,
            "reference": first,
            "test": other,
            "change": float(changes[i, j]),
            "special_index": number(indices[i, j]),
        }
        for i, name in enumerate(checked.names)
        for j, other in enumerate(others)
    ]


def spectra_object(spectra: Spectra) -> Row:
    """Spectra as one JSON object: the grid once, then the samples."""
    u = standard_uncertainty(spectra)
    return {
        "quantity": spectra.quantity,
        "wavelength_nm": numbers(spectra.wavelength_nm),
        "path_length_mm": spectra.path_length_mm,
        "samples": [
            {"name": name, "values": numbers(spectra.values[i]), "standard_uncertainty": numbers(u[i])}
            for i, name in enumerate(spectra.names)
        ],
        "notes": list(spectra.notes),
        "sources": source_rows(spectra.sources),
    }


def condition_row(conditions: Conditions) -> Row:
    """The conditions of a result."""
    return {
        "illuminants": [lamp.name for lamp in conditions.illuminants],
        "observer": conditions.observer.key,
        "weights": conditions.method,
        "ends": conditions.ends,
        "bandpass_corrected": conditions.bandpass,
    }


def source_rows(sources: Sequence[Source]) -> list[Row]:
    """The files that a result came from."""
    return [{"path": source.path, "sha256": source.sha256} for source in sources]


def number(value: float) -> float | None:
    """A float as JSON has it: what is not finite is null."""
    return float(value) if isfinite(value) else None


def numbers(values: Array) -> list[float | None] | None:
    """A list of floats; null when none of them is finite."""
    result = [number(value) for value in values]
    return result if any(value is not None for value in result) else None
