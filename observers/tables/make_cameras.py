"""Write the table of measured cameras; run as ``python -m observers.tables.make_cameras``.

The sources are the published file kept in ``tests/data/cameras`` (Apache-2.0, licence beside the table as
``cameras.LICENSE``) and the two cameras of colour-science (BSD-3-Clause). Cameras are numbered; makes are left out.
"""

from __future__ import annotations

import csv
import hashlib
import warnings
from collections.abc import Mapping
from pathlib import Path

import numpy as np
import numpy.typing as npt

HERE = Path(__file__).parent
SOURCE = HERE.parents[1] / "tests" / "data" / "cameras" / "sensitivities.csv"
GRID_NM = np.arange(380.0, 781.0, 5.0)
HEADER = """\
# Relative spectral sensitivities of measured cameras, 380–780 nm at 5 nm; three columns a camera, numbered
# camera-01 to camera-52: AcademySoftwareFoundation/rawtoaces-data, data/camera (Apache-2.0, see cameras.LICENSE)
# of these only the layout is changed
# the rest: colour-science 0.4.7 (BSD-3-Clause), straight lines to 5 nm where coarser, zero outside what was measured
# written by observers/tables/make_cameras.py; do not edit
"""


def cameras_text(source: Path = SOURCE) -> str:
    """The file's text: header, names, rows at their shortest digits."""
    columns: dict[str, npt.NDArray[np.float64]] = {"wavelength_nm": GRID_NM}
    for name, curves in {**published(source), **from_library()}.items():
        columns |= {f"{name}-{channel}": curve for channel, curve in zip(("r", "g", "b"), curves.T, strict=True)}
    rows = "\n".join(",".join(f"{cell:.6g}" for cell in row) for row in np.column_stack(list(columns.values())))
    digest = hashlib.sha256(rows.encode()).hexdigest()
    return f"{HEADER}# sha256 of the rows below the names: {digest}\n{','.join(columns)}\n{rows}\n"


def published(source: Path) -> dict[str, npt.NDArray[np.float64]]:
    """The cameras of the published file, (81, 3) each."""
    found: dict[str, list[list[float]]] = {}
    with source.open(encoding="utf-8", newline="") as lines:
        for row in csv.DictReader(line for line in lines if not line.startswith("#")):
            found.setdefault(row["camera"], []).append([float(row[key]) for key in ("red", "green", "blue")])
    return {name: np.array(rows) for name, rows in found.items()}


def from_library() -> Mapping[str, npt.NDArray[np.float64]]:
    """The cameras of colour-science, numbered on from the published ones."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # colour-science names the optional packages it does not find
        import colour
    result = {}
    for number, table in enumerate(colour.MSDS_CAMERA_SENSITIVITIES.values(), start=53):
        curves = [np.interp(GRID_NM, table.wavelengths, column, left=0.0, right=0.0) for column in table.values.T]
        result[f"camera-{number}"] = np.column_stack(curves)
    return result


if __name__ == "__main__":
    text = cameras_text()
    (HERE / "cameras.csv").write_text(text, encoding="utf-8")
    print("cameras.csv", len(text))
