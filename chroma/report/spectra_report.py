"""Spectra as a JSON object and as a table."""

from __future__ import annotations

import numpy as np

from chroma.report.rows import Row, numbers, source_rows
from chroma.report.text import MOST_ROWS, aligned, cut_line, joined_lines, notes, sources_line
from chroma.spectra import Spectra, grid_text, standard_uncertainty


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
        cut_line(len(spectra)),
        notes(spectra.notes),
        sources_line(spectra.sources),
    )
