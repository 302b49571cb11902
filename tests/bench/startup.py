"""Start-up as a multiple of ``python -c "import numpy, click"``, medians of interleaved runs.

What to reach: --help 0.6; check or predict on one small CSV 1.25. Prints a table and one line of JSON; with --strict it
fails above twice the aim, which no noise explains.
"""

from __future__ import annotations

import json
import os
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
SMALL = "demo_spectra/target.csv"
BASE = ["-c", "import numpy, click"]
RUNS = {
    "lamplit --help": (["-m", "chroma", "--help"], 0.6),
    "lamplit check": (["-m", "chroma", "check", SMALL, "--target", SMALL, "--limit", "1"], 1.25),
    "lamplit predict": (["-m", "chroma", "predict", "--spectra", SMALL], 1.25),
}


def environment(cache: str) -> dict[str, str]:
    """This environment with compiled modules kept in a folder, as an installed program has them."""
    kept = {key: value for key, value in os.environ.items() if key != "PYTHONDONTWRITEBYTECODE"}
    return kept | {"PYTHONPYCACHEPREFIX": cache}


def seconds(arguments: list[str], cache: str) -> float:
    """Wall time of one run of the interpreter."""
    start = time.perf_counter()
    subprocess.run([sys.executable, *arguments], cwd=ROOT, check=True, capture_output=True, env=environment(cache))
    return time.perf_counter() - start


def ratios(rounds: int = 15) -> dict[str, float]:
    """Median time of each run over the median of the base, taken in turns so that noise falls on all alike."""
    times: dict[str, list[float]] = {name: [] for name in ("base", *RUNS)}
    with tempfile.TemporaryDirectory() as cache:
        for _ in range(rounds + 1):  # the first round fills the cache and does not count
            times["base"].append(seconds(BASE, cache))
            for name, (arguments, _) in RUNS.items():
                times[name].append(seconds(arguments, cache))
    times = {name: values[1:] for name, values in times.items()}
    base = statistics.median(times["base"])
    return {name: statistics.median(values) / base for name, values in times.items() if name != "base"}


if __name__ == "__main__":
    found = ratios()
    for name, ratio in found.items():
        print(f"{name:20s} {ratio:5.2f}   to reach {RUNS[name][1]:g}")
    print(json.dumps({"startup": found}))
    if "--strict" in sys.argv:
        sys.exit(any(ratio > 2 * RUNS[name][1] for name, ratio in found.items()))
