"""The colour of liquids, from spectrum to decision.

The names below are the public interface; each is imported from its module when it is first used, so that
``import chroma`` stays quick.
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

_PLACES = {
    "Checked": "chroma.batches",
    "Colours": "chroma.colours",
    "Conditions": "chroma.viewing",
    "Formula": "chroma.difference.formulas",
    "InputError": "observers.errors",
    "Spectra": "chroma.spectra",
    "Tolerance": "chroma.tolerance",
    "at_path_length": "chroma.quantity",
    "averaged": "chroma.spectra",
    "check": "chroma.batches",
    "conditions": "chroma.viewing",
    "converted": "chroma.quantity",
    "corrected": "chroma.quantity",
    "joined": "chroma.spectra",
    "measured": "chroma.spectra",
    "on_grid": "chroma.resample",
    "predict": "chroma.colours",
    "read_lamp": "chroma.readers",
    "read_spectra": "chroma.readers",
    "read_tolerance": "chroma.tolerance",
}
__all__ = sorted(_PLACES)


def __getattr__(name: str) -> Any:
    if name not in _PLACES:
        raise AttributeError(f"module 'chroma' has no attribute {name!r}")
    return getattr(import_module(_PLACES[name]), name)
