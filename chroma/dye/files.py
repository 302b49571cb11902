"""``.dye.json``: a dye as a file that a person can read, validated when it is read back."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from pathlib import Path
from types import MappingProxyType
from typing import Any

import numpy as np

from chroma.dye.model import UNITS, Dye
from chroma.spectra import Source
from observers.arrays import Array
from observers.errors import InputError, unreadable

KIND, VERSION = "lamplit dye", 1
SIZE_LIMIT = 50_000_000


def dye_object(dye: Dye) -> dict[str, Any]:
    """The content of a dye's file."""
    return {
        "kind": KIND,
        "version": VERSION,
        "name": dye.name,
        "unit": dye.unit,
        "absorptivity_unit": f"L/({dye.unit[:-2]} cm)",
        "path_length_mm": dye.path_length_mm,
        "molar_mass_g_per_mol": dye.molar_mass,
        "concentration_range": [dye.range_low, _finite(dye.range_high)],
        "linear_to": _finite(dye.linear_to),
        "stray_light": dye.stray_light,
        "peak_nm": float(dye.wavelength_nm[dye.peak]),
        "wavelength_nm": dye.wavelength_nm.tolist(),
        "absorptivity": dye.absorptivity.tolist(),
        "standard_uncertainty": dye.standard_uncertainty.tolist(),
        "independent_uncertainty": dye.independent.tolist(),
        "common_uncertainty": dye.common.tolist(),
        "degrees_of_freedom": _finite(dye.freedom),
        **dye.findings,
        "sources": [{"path": source.path, "sha256": source.sha256} for source in dye.sources],
        "created": dye.created,
        "program": dye.program,
        "notes": list(dye.notes),
    }


def dye_text(dye: Dye) -> str:
    """The file's text: one line a field, so that it can be read and compared."""
    fields = ",\n".join(
        f"  {json.dumps(key)}: {json.dumps(value, ensure_ascii=False, allow_nan=False)}"
        for key, value in dye_object(dye).items()
    )
    return f"{{\n{fields}\n}}\n"


def read_dye(path: str) -> Dye:
    """A dye from its file.

    Raises InputError naming the file when it cannot be read, is no dye, is of a newer version, or does not hold what a
    dye must.
    """
    try:
        data = Path(path).read_bytes()
        if len(data) > SIZE_LIMIT:
            raise InputError(
                "is too large for a dye", where=path, why=f"{len(data)} bytes, at most {SIZE_LIMIT} are read"
            )
        content = json.loads(data.decode("utf-8"))
    except OSError as error:
        raise unreadable(path, error) from None
    except (UnicodeDecodeError, json.JSONDecodeError, RecursionError) as error:
        raise InputError(
            "is no dye file", where=path, why=f"it is not JSON ({error})", do="make one with lamplit dye fit"
        ) from None
    try:
        return dye_from(content, Source(path, hashlib.sha256(data).hexdigest()))
    except InputError as error:
        raise error.at(path) from None


def dye_from(content: Any, source: Source) -> Dye:
    """A dye from the content of its file; its sources begin with the file itself."""
    if not isinstance(content, dict) or content.get("kind") != KIND:
        raise InputError("is no dye file", why=f'it does not say "kind": "{KIND}"', do="make one with lamplit dye fit")
    version = content.get("version")
    if not isinstance(version, int) or isinstance(version, bool) or not 1 <= version <= VERSION:
        raise InputError(
            f"is a dye file of version {version!r}",
            why=f"this program reads version {VERSION}",
            do="use a newer lamplit",
        )
    wavelength_nm = _table(content, "wavelength_nm", 1)
    common = content.get("common_uncertainty", [])
    return Dye(
        _text(content, "name"),
        wavelength_nm,
        _table(content, "absorptivity", 1),
        _one_of(content, "unit", UNITS),
        _table(content, "independent_uncertainty", 1),
        _table(content, "common_uncertainty", 2) if common else np.zeros((0, len(wavelength_nm))),
        _number(content, "degrees_of_freedom"),
        *_range(content),
        _number(content, "linear_to"),
        _number(content, "path_length_mm"),
        None if content.get("molar_mass_g_per_mol") is None else _number(content, "molar_mass_g_per_mol"),
        _number(content, "stray_light"),
        MappingProxyType({key: content[key] for key in ("linearity", "calibration") if key in content}),
        (source, *_sources(content)),
        str(content.get("created", "")),
        str(content.get("program", "")),
        tuple(str(note) for note in content.get("notes", ())),
    )


def _table(content: Mapping[str, Any], key: str, dimensions: int) -> Array:
    try:
        table = np.array(content[key], dtype=np.float64)
    except KeyError:
        raise InputError(f"{key} is missing", why="a dye file needs it") from None
    except (TypeError, ValueError):
        raise InputError(f"{key} is not a table of numbers") from None
    if table.ndim != dimensions or not np.isfinite(table).all():
        raise InputError(f"{key} is not a table of finite numbers", why=f"{dimensions} dimension(s) are wanted")
    return table


def _number(content: Mapping[str, Any], key: str) -> float:
    """A number; null stands for infinity, as JSON has none."""
    value = content.get(key, 0.0)
    if value is None:
        return float("inf")
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise InputError(f"{key} = {value!r}", why="a number is wanted")
    return float(value)


def _range(content: Mapping[str, Any]) -> tuple[float, float]:
    ends = content.get("concentration_range", [0.0, None])
    if not isinstance(ends, list) or len(ends) != 2:
        raise InputError(f"concentration_range = {ends!r}", why="the lowest and the highest concentration are wanted")
    return _number({"low": ends[0]}, "low"), _number({"high": ends[1]}, "high")


def _text(content: Mapping[str, Any], key: str) -> str:
    value = content.get(key)
    if not isinstance(value, str) or not value:
        raise InputError(f"{key} = {value!r}", why="a text is wanted")
    return value


def _one_of(content: Mapping[str, Any], key: str, known: tuple[Any, ...]) -> Any:
    if content.get(key) not in known:
        raise InputError(f"{key} = {content.get(key)!r}", why=f"known are {', '.join(known)}")
    return content[key]


def _sources(content: Mapping[str, Any]) -> tuple[Source, ...]:
    rows = content.get("sources", [])
    if not isinstance(rows, list) or not all(isinstance(row, dict) for row in rows):
        raise InputError("sources is not a list of files")
    return tuple(Source(str(row.get("path", "")), str(row.get("sha256", ""))) for row in rows)


def _finite(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None
