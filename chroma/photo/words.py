"""An estimate as rows: what ``--json`` prints, what ``--out`` writes, and the lines of the table. No arithmetic."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from chroma.photo.estimate import CAUTIONS, Estimate, PhotoEstimate


def estimate_object(found: PhotoEstimate) -> dict[str, Any]:
    """The JSON object of ``lamplit photo estimate``."""
    return {
        "unit": found.unit,
        "standards": len(found.standards),
        "standard_names": list(found.standards),
        "samples": [_sample(one, found) for one in found.estimates],
        "dyes": [dye for dye in found.dyes if dye],
        "limit_of_detection": dict(zip(found.dyes, found.detection, strict=True))
        if len(found.dyes) > 1
        else found.detection[0],
        "lamps": dict(found.lamps),
        "unexplained_error": found.unexplained,
        "flags": list(found.flags),
        "notes": list(found.notes),
        "cautions": list(CAUTIONS),
        "boxes": {name: [box.x, box.y, box.width, box.height] for name, box in found.boxes.items()},
        "sources": [{"path": source.path, "sha256": source.sha256} for source in found.sources],
    }


def _sample(one: Estimate, found: PhotoEstimate) -> dict[str, Any]:
    row: dict[str, Any] = {"name": one.name, "concentration": None, "low": None, "high": None, "flags": list(one.flags)}
    if len(one.parts) == 1:
        part = one.parts[0]
        row |= {"concentration": part.middle, "low": part.low, "high": part.high}
    else:
        row["concentrations"] = {
            dye: {"value": part.middle, "low": part.low, "high": part.high, "unit": found.unit}
            for dye, part in zip(found.dyes, one.parts, strict=True)
        }
    row["chance_on_path"] = one.on_path
    return row


def estimate_rows(found: PhotoEstimate) -> list[Mapping[str, Any]]:
    """One row a cuvette and dye, for a table in a file."""
    return [
        {
            "name": one.name,
            "dye": dye,
            "concentration": part.middle,
            "low": part.low,
            "high": part.high,
            "unit": found.unit,
            "flags": "; ".join(one.flags),
        }
        for one in found.estimates
        for dye, part in zip(found.dyes, one.parts, strict=True)
    ]


def header(found: PhotoEstimate) -> list[str]:
    """The columns of the table."""
    dye = ["dye"] if len(found.dyes) > 1 else []
    return ["cuvette", *dye, f"concentration ({found.unit})", "95 % from", "to", "flags"]


def lines(found: PhotoEstimate) -> list[Sequence[str]]:
    """The rows of the table."""
    return [
        [
            one.name,
            *([dye] if len(found.dyes) > 1 else []),
            f"{part.middle:.4g}",
            f"{part.low:.4g}",
            f"{part.high:.4g}",
            "; ".join(one.flags) or "-",
        ]
        for one in found.estimates
        for dye, part in zip(found.dyes, one.parts, strict=True)
    ]


def below(found: PhotoEstimate) -> list[str]:
    """What stands under the table: standards, detection, lamps, error found, flags, cautions."""
    least = ", ".join(
        f"{value:.3g} {found.unit}{f' ({dye})' if len(found.dyes) > 1 else ''}"
        for dye, value in zip(found.dyes, found.detection, strict=True)
    )
    lamps = ", ".join(f"{name} {100 * share:.0f} %" for name, share in found.lamps.items() if share > 0.005)
    said = [
        f"Standards: {', '.join(found.standards) or 'none: the dye file alone says how strong'}",
        f"Limit of detection of this set-up: {least}",
        f"Lamp: {lamps}" if lamps else "",
        f"Error of a reading beyond its noise, found from the photo: {100 * found.unexplained:.1f} %",
        f"Photo: {'; '.join(found.flags)}" if found.flags else "",
        *(f"Caution: {line}" for line in CAUTIONS),
    ]
    return [line for line in said if line]
