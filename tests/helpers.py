"""What several tests need: the published check values, random colours, simulated spectra."""

from __future__ import annotations

import csv
from collections.abc import Sequence
from pathlib import Path

import numpy as np
from hypothesis import strategies as st

from chroma.spectra import Quantity, Spectra, averaged, measured
from observers.arrays import Array

HERE = Path(__file__).parent
ROOT = HERE.parent


def read_gold(name: str) -> list[dict[str, str]]:
    """Rows of a published file, kept verbatim under tests/gold with its source in the header."""
    return _rows(HERE / "gold" / name)


def read_cross(name: str) -> list[dict[str, str]]:
    """Rows of a file under tests/cross, whose numbers were computed by other programs rather than printed."""
    return _rows(HERE / "cross" / name)


def _rows(path: Path) -> list[dict[str, str]]:
    with path.open(encoding="utf-8", newline="") as lines:
        return list(csv.DictReader(line for line in lines if not line.startswith("#")))


def columns(rows: Sequence[dict[str, str]], *names: str) -> Array:
    """(N, K) numbers of the named columns."""
    return np.array([[float(row[name]) for name in names] for row in rows])


def finite(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, allow_nan=False, allow_subnormal=False)


def triples(*ranges: tuple[float, float]) -> st.SearchStrategy[Array]:
    """Arrays (3,) with each value in its own range."""
    return st.tuples(*(finite(*pair) for pair in ranges)).map(np.array)


Labs = triples((0, 100), (-120, 120), (-120, 120))
XYZs = triples((0.01, 110), (0.01, 110), (0.01, 120))
seeds = st.integers(0, 2**32 - 1)


def random_Lab(seed: int, count: int) -> Array:
    """(count, 3) L*a*b* of many kinds: wide, near the greys, dark, and with equal hues."""
    rng = np.random.default_rng(seed)
    Lab = np.column_stack([rng.uniform(0, 100, count), rng.uniform(-110, 110, (count, 2))])
    Lab[::5, 1:] *= 0.02
    Lab[1::7, 0] *= 0.15
    return Lab


def random_XYZ(seed: int, count: int) -> Array:
    """(count, 3) XYZ100, some of them very dark."""
    rng = np.random.default_rng(seed)
    XYZ = rng.uniform(0.05, 100, (count, 1)) * rng.uniform(0.3, 1.2, (count, 3))
    XYZ[::6] *= 0.005
    return XYZ


def smooth_transmittance(
    wavelength_nm: Array, *, seed: int = 1, count: int = 20, narrowest_nm: float = 40.0, widest_nm: float = 160.0
) -> Array:
    """(count, B) simulated solutions: one to three Gaussian absorption bands, widths at half height in nm."""
    rng = np.random.default_rng(seed)
    absorbance = np.zeros((count, len(wavelength_nm)))
    for row in absorbance:
        for _ in range(rng.integers(1, 4)):
            peak_nm, width_nm = rng.uniform(400, 700), rng.uniform(narrowest_nm, widest_nm)
            row += rng.uniform(0.1, 1.5) * np.exp(-4 * np.log(2) * ((wavelength_nm - peak_nm) / width_nm) ** 2)
    return 10.0**-absorbance


VISIBLE_NM = np.arange(380.0, 781.0, 10.0)


def simulated(
    names: Sequence[str], *, seed: int = 1, quantity: Quantity = "transmittance", wavelength_nm: Array = VISIBLE_NM
) -> Spectra:
    """Simulated spectra of these names, each of its own colour."""
    return measured(names, wavelength_nm, smooth_transmittance(wavelength_nm, seed=seed, count=len(names)), quantity)


def replicated(
    name: str, true: Array, wavelength_nm: Array, *, readings: int, noise: float, rng: np.random.Generator
) -> Spectra:
    """One simulated sample read several times, with white noise in every band, averaged."""
    values = true + rng.normal(0, noise, (readings, len(wavelength_nm)))
    return averaged(measured([name] * readings, wavelength_nm, values, "transmittance"))


def one(values: Array, *, wavelength_nm: Array = VISIBLE_NM, name: str = "sample") -> Spectra:
    """A single transmittance spectrum."""
    return Spectra((name,), wavelength_nm, np.asarray(values)[None, :], "transmittance")
