"""Spectra as JSON, in the shape that `chroma.readers.write` gives them."""

from __future__ import annotations

import json
from typing import Any

import numpy as np

from chroma.readers import words
from chroma.readers.table import Table
from observers.errors import InputError

SHAPE = '{"quantity": …, "wavelength_nm": […], "samples": [{"name": …, "values": […]}, …]}'


def tables_of(text: str, where: str) -> list[Table]:
    """The spectra of a JSON file; raises InputError when it is not JSON, or not of the shape above."""
    try:
        found = json.loads(text)
    except (ValueError, RecursionError) as error:
        line = f" line {error.lineno} column {error.colno}" if isinstance(error, json.JSONDecodeError) else ""
        raise InputError("not well-formed JSON", where=where + line, why=str(error)[:100]) from None
    if not isinstance(found, dict) or not {"wavelength_nm", "samples"} <= found.keys():
        raise InputError("JSON that holds no spectra", where=where, why=f"the shape is {SHAPE}")
    axis = _numbers(found["wavelength_nm"], "wavelength_nm", where)
    samples = found["samples"]
    if not isinstance(samples, list) or not samples or not all(isinstance(s, dict) for s in samples):
        raise InputError("no list of samples", where=where, why=f"the shape is {SHAPE}")
    rows = [_numbers(s.get("values"), f"values of sample {i + 1}", where, len(axis)) for i, s in enumerate(samples)]
    names = tuple(str(s.get("name", f"sample {i + 1}")) for i, s in enumerate(samples))
    said = words.meaning(str(found.get("quantity", "")))[0]
    path = found.get("path_length_mm")
    meta = (f"path length: {path!r} mm",) if isinstance(path, float | int) else ()

    def place(sample: int, band: int) -> str:
        return f"{where} sample {sample + 1} band {band + 1}" if sample >= 0 else f"{where} band {band + 1}"

    return [Table(names, axis, "nm", np.array(rows), (said,) * len(names), meta, ("samples in a list",), place)]


def _numbers(values: Any, what: str, where: str, count: int | None = None) -> Any:
    good = isinstance(values, list) and all(
        v is None or (isinstance(v, float | int) and not isinstance(v, bool)) for v in values
    )
    if not good or len(values) < 2 or (count is not None and len(values) != count):
        want = f"a list of {count} numbers" if count else "a list of numbers"
        raise InputError(f"{what} is not {want}", where=where, why=f"the shape is {SHAPE}")
    try:
        return np.array([np.nan if v is None else v for v in values], dtype=float)
    except OverflowError:
        raise InputError(f"{what} holds a number too large", where=where) from None
