"""What every answer has in ``--json`` and ``--out``: numbers as JSON knows them, conditions, files."""

from __future__ import annotations

from collections.abc import Sequence
from math import isfinite
from typing import TYPE_CHECKING, Any

from chroma.spectra import Source
from observers.arrays import Array

if TYPE_CHECKING:
    from chroma.viewing import Conditions

Row = dict[str, Any]


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
