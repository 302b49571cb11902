"""Unmixed samples and recipes as plain rows: what ``--json`` prints and ``--out`` writes."""

from __future__ import annotations

from chroma.dye.unmix import Unmixed
from chroma.report.rows import Row, numbers, source_rows


def unmix_object(found: Unmixed) -> Row:
    """The whole answer of ``unmix`` as one JSON object."""
    unit = found.shelf.unit
    samples = []
    for i, name in enumerate(found.names):
        concentrations = {
            dye: {
                "value": float(found.value[i, j]),
                "low": float(found.low[i, j]),
                "high": float(found.high[i, j]),
                "unit": unit,
            }
            for j, dye in enumerate(found.shelf.names)
        }
        samples.append(
            {
                "name": name,
                "concentrations": concentrations,
                "residual_rms": float(found.rms[i]),
                "foreign": bool(found.foreign[i]),
                "foreign_p": float(found.foreign_p[i]),
                "foreign_nm": float(found.foreign_nm[i]) if found.foreign[i] else None,
                "noise_transmittance": float(found.noise[i]),
                "baseline": numbers(found.baseline[i]),
                "residual": numbers(found.residual[i]),
            }
        )
    return {
        "samples": samples,
        "wavelength_nm": numbers(found.shelf.wavelength_nm),
        "path_length_mm": found.path_length_mm,
        "baseline": found.baseline_kind,
        "confidence": found.confidence,
        "notes": list(found.notes),
        "sources": source_rows(found.sources),
    }


def unmix_rows(found: Unmixed) -> list[Row]:
    """One row a sample and dye."""
    return [
        {
            "name": name,
            "dye": dye,
            "concentration": float(found.value[i, j]),
            "low": float(found.low[i, j]),
            "high": float(found.high[i, j]),
            "unit": found.shelf.unit,
            "residual_rms": float(found.rms[i]),
            "foreign": bool(found.foreign[i]),
        }
        for i, name in enumerate(found.names)
        for j, dye in enumerate(found.shelf.names)
    ]
