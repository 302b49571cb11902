"""Write the standard tables of this folder from colour-science; run as ``python -m observers.tables.make``.

The program itself reads only the files, so that its start needs no colour-science. A test holds each file equal to
what this script writes.
"""

from __future__ import annotations

import hashlib
import warnings
from collections.abc import Iterable, Mapping
from pathlib import Path

import numpy as np
import numpy.typing as npt

HERE = Path(__file__).parent

OBSERVERS = {
    "cie_1931_2deg": ("CIE 1931 2 Degree Standard Observer", "CIE 1931 2° colour-matching functions, ISO/CIE 11664-1"),
    "cie_1964_10deg": (
        "CIE 1964 10 Degree Standard Observer",
        "CIE 1964 10° colour-matching functions, ISO/CIE 11664-1",
    ),
    "cie_2015_2deg": ("CIE 2015 2 Degree Standard Observer", "CIE 2015 2° cone-fundamental-based functions, CIE 170-2"),
    "cie_2015_10deg": (
        "CIE 2015 10 Degree Standard Observer",
        "CIE 2015 10° cone-fundamental-based functions, CIE 170-2",
    ),
}
DAYLIGHT = ("C", "D50", "D55", "D65", "D75", "ID50", "ID65")  # tabulated 300–780 nm
LAMPS = (
    *(f"FL{i}" for i in range(1, 13)),
    *(f"FL3.{i}" for i in range(1, 16)),
    *(f"HP{i}" for i in range(1, 6)),
    *(f"LED-{kind}" for kind in ("B1", "B2", "B3", "B4", "B5", "BH1", "RGB1", "V1", "V2")),
)  # tabulated 380–780 nm


def table(title: str, columns: Mapping[str, npt.ArrayLike]) -> str:
    """One CSV file as text: header lines that say what and where from, then the columns at their shortest digits."""
    body = np.column_stack([np.asarray(column, dtype=np.float64) for column in columns.values()])
    rows = "\n".join(",".join(f"{cell:g}" if cell % 1 == 0 else repr(float(cell)) for cell in row) for row in body)
    source = "# Taken from colour-science 0.4.7 (BSD-3-Clause) by observers/tables/make.py; do not edit."
    digest = hashlib.sha256(rows.encode()).hexdigest()
    return f"# {title}\n{source}\n# sha256 of the rows below the names: {digest}\n{','.join(columns)}\n{rows}\n"


def tables() -> dict[str, str]:
    """Every file of this folder by name."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # colour-science names the optional packages it does not find
        import colour
        from colour.colorimetry import SDS_BASIS_FUNCTIONS_CIE_ILLUMINANT_D_SERIES as BASIS
    result = {}
    for name, (key, title) in OBSERVERS.items():
        cmfs = colour.MSDS_CMFS[key]
        result[f"{name}.csv"] = table(
            title, {"wavelength_nm": cmfs.wavelengths, **dict(zip("xyz", cmfs.values.T, strict=True))}
        )
    for name, keys, title in (
        (
            "daylight",
            DAYLIGHT,
            "CIE illuminant C, daylight D and indoor daylight ID, relative spectral power, CIE 15:2018",
        ),
        ("lamps", LAMPS, "CIE illuminants FL, HP and LED, relative spectral power, CIE 15:2018"),
    ):
        result[f"{name}.csv"] = table(title, columns_of(colour.SDS_ILLUMINANTS, keys))
    basis = columns_of(BASIS, ("S0", "S1", "S2"))
    result["daylight_basis.csv"] = table("CIE daylight components S0, S1, S2, CIE 15:2018 (5 nm)", basis)
    return result


def columns_of(distributions: Mapping[str, object], keys: Iterable[str]) -> dict[str, npt.ArrayLike]:
    """Several tabulated distributions on the grid that they share."""
    keys = tuple(keys)
    found = [distributions[key] for key in keys]
    wavelengths = found[0].wavelengths  # type: ignore[attr-defined]  # colour-science publishes no types
    columns = {"wavelength_nm": wavelengths}
    for key, distribution in zip(keys, found, strict=True):
        if not np.array_equal(distribution.wavelengths, wavelengths):  # type: ignore[attr-defined]
            raise ValueError(f"{key} stands on another grid")
        columns[key] = distribution.values  # type: ignore[attr-defined]
    return columns


if __name__ == "__main__":
    for name, text in tables().items():
        (HERE / name).write_text(text, encoding="utf-8")
        print(name, len(text))
