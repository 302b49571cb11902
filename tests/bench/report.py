"""A report of many batches against the numbers alone, in one run: the time of the whole program, and the page's size.

Both are programs of their own, from the start of Python on: one reads two files, checks and prints the table; the other
writes the report as well. Simulated spectra. Prints a line and one line of JSON; fails where a page is too large or slow.
"""

from __future__ import annotations

import argparse
import json
import os
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import numpy as np

MOST_TIMES, MOST_BYTES = 10.0, 3_000_000

NUMBERS = """
from chroma.batches import check
from chroma.readers import read_spectra
from chroma.report.check_report import check_table
from chroma.spectra import averaged
from chroma.tolerance import Tolerance
from chroma.viewing import conditions
lamps = ("D65", "A")
samples, target = (averaged(read_spectra(path)[0]) for path in ("batches.csv", "target.csv"))
checked = check(samples, target, Tolerance(dict.fromkeys(lamps, 1.0)), conditions(lamps, "10"))
print(check_table(checked))
"""
REPORT = """
from chroma.colours import predict
from chroma.report.page import report_checked
pair = (predict(one, checked.conditions) for one in (target, samples))
report_checked(checked, *pair, "report.html", force=True)
"""


def write(path: Path, names: list[str], transmittance: np.ndarray, nm: np.ndarray) -> None:
    """Simulated transmittances (N, B) as delimited text, samples in rows."""
    lines = ["# quantity: transmittance", "name," + ",".join(f"{w:g}" for w in nm)]
    lines += [f"{name}," + ",".join(f"{v:.5f}" for v in row) for name, row in zip(names, transmittance, strict=True)]
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")


def seconds(code: str, folder: Path) -> float:
    start = time.perf_counter()
    subprocess.run([sys.executable, "-c", code], cwd=folder, check=True, stdout=subprocess.DEVNULL, env=environment())
    return time.perf_counter() - start


def environment() -> dict[str, str]:
    root = str(Path(__file__).parents[2])
    return {**os.environ, "OPENBLAS_NUM_THREADS": "1", "PYTHONPATH": root}


def run(rows: int, rounds: int) -> dict[str, float]:
    """The ratio of the medians, and the bytes of the page."""
    rng, nm = np.random.default_rng(7), np.arange(400.0, 701.0, 10.0)
    blue, yellow = (np.exp(-(((nm - peak) / width) ** 2)) for peak, width in ((620, 55), (430, 40)))
    strength = 1 + rng.normal(0, 0.05, (rows, 2))
    strength[0] = 1
    T = 10 ** -(0.6 * strength[:, :1] * blue + 0.3 * strength[:, 1:] * yellow)
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        write(folder / "batches.csv", [f"batch {i + 1}" for i in range(rows)], T, nm)
        write(folder / "target.csv", ["target"], T[:1], nm)
        alone, whole = [], []
        for _ in range(rounds):
            alone.append(seconds(NUMBERS, folder))
            whole.append(seconds(NUMBERS + REPORT, folder))
        size = (folder / "report.html").stat().st_size
    return {
        "batches": rows,
        "times_numbers_alone": statistics.median(whole) / statistics.median(alone),
        "bytes": size,
        "numbers_s": statistics.median(alone),
        "report_s": statistics.median(whole),
    }


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--rows", type=int, default=500)
    parser.add_argument("--rounds", type=int, default=3)
    arguments = parser.parse_args()
    found = run(arguments.rows, arguments.rounds)
    print(
        f"report of {found['batches']} batches: {found['times_numbers_alone']:.1f} × the numbers alone, "
        f"{found['bytes'] / 1e6:.2f} MB"
    )
    print(json.dumps({"report": found}))
    sys.exit(0 if found["times_numbers_alone"] <= MOST_TIMES and found["bytes"] < MOST_BYTES else 1)
