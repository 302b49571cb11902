"""Results as tables of pandas or polars, and spectra from them; neither library is needed until then.

This module stands below the results that call it, so it takes them as they are and names no class of theirs (`Any`).
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from importlib import import_module
from importlib.util import find_spec
from typing import Any, Literal

import numpy as np

from chroma.decision import WORDS
from observers.arrays import Array
from observers.errors import InputError, unknown_name

Library = Literal["pandas", "polars"]
LIBRARIES: tuple[Library, ...] = ("pandas", "polars")
Columns = Mapping[str, Any]  # a column's name → its cells, an array or a list
WAVELENGTH = re.compile(r"\s*(\d+(?:\.\d*)?)\s*(?:nm)?\s*")


def frame(columns: Columns, library: Library | None = None) -> Any:
    """A table of the library that is named, else of pandas or polars, whichever is installed first.

    Raises InputError for another name, or when the library is not installed.
    """
    if library is not None and library not in LIBRARIES:
        raise unknown_name("library", library, LIBRARIES)
    found = next((name for name in ([library] if library else LIBRARIES) if find_spec(name) is not None), None)
    if found is None:
        missing = library or "neither pandas nor polars"
        raise InputError(
            f"{missing} is {'not ' if library else ''}installed", do=f"run pip install {library or 'pandas'}"
        )
    return import_module(found).DataFrame(dict(columns))


def spectra_columns(spectra: Any) -> Columns:
    """One row a sample: its name, and a column for each wavelength, named by it in nm."""
    labels = [np.format_float_positional(nm, trim="-") for nm in spectra.wavelength_nm]
    return {"name": list(spectra.names)} | dict(zip(labels, np.array(spectra.values.T), strict=True))


def colours_columns(colours: Any) -> Columns:
    """One row a sample and lamp."""
    lamps = [lamp.name for lamp in colours.conditions.illuminants]
    codes, shown = colours.swatches()
    found = [colours.dominant(i, j) for i in range(len(colours.names)) for j in range(len(lamps))]
    return {
        **_samples_by_lamps(colours.names, lamps),
        "observer": [colours.conditions.observer.key] * len(found),
        **_parts("XYZ", colours.XYZ100),
        **_parts("xy", colours.xyY),
        **_parts("Lab", colours.Lab),
        **_parts("Ch", colours.LCh[..., 1:]),
        **_parts("uv", colours.Luv[..., 1:]),
        "srgb": [code for row in codes for code in row],
        "in_gamut": shown.ravel(),
        "dominant_wavelength_nm": [one.wavelength_nm for one in found],
        "excitation_purity": [one.excitation_purity for one in found],
        "colorimetric_purity": [one.colorimetric_purity for one in found],
        "luminous_transmittance": colours.luminous_transmittance.ravel(),
        **_parts(("u_L", "u_a", "u_b"), colours.u_Lab),
    }


def checked_columns(checked: Any) -> Columns:
    """One row a batch and lamp."""
    lamps = [lamp.name for lamp in checked.conditions.illuminants]
    shape = checked.delta_e.shape
    words = np.array(WORDS)
    unknown = np.full(shape, np.nan)
    return {
        **_samples_by_lamps(checked.names, lamps),
        "delta_e": checked.delta_e.ravel(),
        **_parts(("dL", "da", "db", "dC", "dH"), checked.parts),
        "verdict": words[checked.verdicts].ravel().tolist(),
        "limit": np.tile(checked.limits, len(checked.names)),
        "U": (unknown if checked.expanded is None else checked.expanded).ravel(),
        "probability_within": (unknown if checked.within is None else checked.within).ravel(),
        "batch_verdict": np.repeat(words[checked.worst], len(lamps)).tolist(),
    }


def fit_columns(found: Any) -> Columns:
    """One row a wavelength: absorptivity and its standard uncertainty."""
    dye = found.dye
    return {
        "wavelength_nm": np.array(dye.wavelength_nm),
        "absorptivity": np.array(dye.absorptivity),
        "standard_uncertainty": np.array(dye.standard_uncertainty),
    }


def unmixed_columns(found: Any) -> Columns:
    """One row a sample and dye."""
    dyes = list(found.shelf.names)
    return {
        "name": [name for name in found.names for _ in dyes],
        "dye": dyes * len(found.names),
        "concentration": found.value.ravel(),
        "low": found.low.ravel(),
        "high": found.high.ravel(),
        "unit": [found.shelf.unit] * found.value.size,
        "residual_rms": np.repeat(found.rms, len(dyes)),
        "foreign": np.repeat(found.foreign, len(dyes)),
    }


def matches_columns(found: Any) -> Columns:
    """One row a recipe, best first; a dye that it does without is 0."""
    names = sorted({name for recipe in found.recipes for name in recipe.concentrations})
    recipes = found.recipes
    return {
        **{f"{name} {found.unit}": [recipe.concentrations.get(name, 0.0) for recipe in recipes] for name in names},
        **{
            f"delta_e {lamp}": [float(recipe.delta_e[j]) for recipe in recipes]
            for j, lamp in enumerate(found.illuminants)
        },
        "metamerism": [recipe.spread for recipe in recipes],
        "cost_per_litre": [recipe.cost for recipe in recipes],
        "within": [recipe.within for recipe in recipes],
    }


def table_of_spectra(table: Any) -> tuple[list[str], Array, Array, tuple[str, ...]]:
    """Names, wavelengths (B,) nm, values (N, B) and notes from a table of pandas or polars.

    Columns named by a wavelength in nm (``400``, ``400.5``, ``400 nm``) hold the values; the names stand in the first
    column of texts, else in the index of a pandas table, else rows are numbered. Raises InputError where no column is
    named by a wavelength or one does not hold numbers.
    """
    labels = list(table.columns)
    bands = {label: float(match[1]) for label in labels if (match := WAVELENGTH.fullmatch(str(label)))}
    if not bands:
        raise InputError(
            "no column is named by a wavelength", why=f"there are {', '.join(map(str, labels[:8]))}", do="name them 400, 410, …"
        )  # fmt: skip
    others = [label for label in labels if label not in bands]
    texts = next((label for label in others if _is_text(table[label])), None)
    if texts is not None:
        names = [str(name) for name in table[texts]]
    else:
        names = [str(name) for name in getattr(table, "index", range(1, len(table) + 1))]
    left = [str(label) for label in others if label != texts]
    notes = (f"columns left out: {', '.join(left)}",) if left else ()
    return (
        names,
        np.array(list(bands.values())),
        np.column_stack([_values(table[label], label) for label in bands]),
        notes,
    )


def _is_text(column: Any) -> bool:
    values = list(column)
    return bool(values) and all(isinstance(value, str) for value in values)


def _values(column: Any, label: object) -> Array:
    try:
        return np.array([float("nan") if value is None else float(value) for value in column])
    except (TypeError, ValueError):
        raise InputError("not all are numbers", where=f"column {label!s}", do="mend or leave out what is not") from None


def _samples_by_lamps(names: Sequence[str], lamps: Sequence[str]) -> Columns:
    return {"name": [name for name in names for _ in lamps], "illuminant": list(lamps) * len(names)}


def _parts(names: Sequence[str], values: Array) -> Columns:
    """The last axis spread over columns; what has no name is left out."""
    return {name: values[..., i].ravel() for i, name in enumerate(names)}
