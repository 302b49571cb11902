"""A match of up to three of six dyes under three lamps: its time as a ratio to 1000 plain evaluations, in one run.

A plain evaluation is one recipe through Beer's law, the weights, L*a*b* and CIEDE2000, as a loop would do it. Targets are
simulated: met ones are recipes of three of the dyes, unmet ones are bands that are none of the dyes'. Prints a table and
one line of JSON.
"""

from __future__ import annotations

import argparse
import json
import os
import statistics
import sys
import time
from pathlib import Path

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "dye"))

import numpy as np
from matching_world import SIX, foreign_transmittance, seen, stock_of

from chroma.colour.spaces import Lab_from_XYZ
from chroma.difference.formulas import Formula
from chroma.dye.solution import transmittance
from chroma.matching.goal import Target, target_spectrum
from chroma.matching.recipes import match

STOCK, W, FORMULA = stock_of(), seen(), Formula()


def met(rng: np.random.Generator) -> Target:
    """A simulated target that three of the dyes make, each with an absorbance of 0.1 to 1 at its peak."""
    c = np.zeros(len(SIX))
    which = rng.choice(len(SIX), 3, replace=False)
    c[which] = rng.uniform(0.1, 1.0, 3) / STOCK.absorptivity.max(axis=1)[which]
    return target_spectrum(transmittance(STOCK, c, 10.0), W)


def plainly(target: Target, rng: np.random.Generator, count: int) -> float:
    """Seconds for that many plain evaluations."""
    recipes = rng.uniform(0.0, 0.01, (count, len(SIX)))
    start = time.perf_counter()
    for c in recipes:
        FORMULA.difference(target.Lab, Lab_from_XYZ(W.response(transmittance(STOCK, c, 10.0)), W.white)).max()
    return time.perf_counter() - start


def matched(targets: list[Target]) -> float:
    """Median seconds of a match."""
    seconds = []
    for target in targets:
        start = time.perf_counter()
        match(target, STOCK, path_length_mm=10.0, weights=W, formula=FORMULA)
        seconds.append(time.perf_counter() - start)
    return statistics.median(seconds)


def run(rounds: int) -> dict[str, float]:
    """Medians over the rounds of the ratios for met and unmet targets."""
    rng = np.random.default_rng(7)
    matched([met(rng)])  # scipy's import is not part of what is timed
    ratios: dict[str, list[float]] = {"met": [], "unmet": []}
    for i in range(rounds):
        targets = {"met": [met(rng) for _ in range(5)], "unmet": [foreign_transmittance(5 * i + j) for j in range(5)]}
        plain = plainly(targets["met"][0], rng, 1000)
        ratios["met"].append(matched(targets["met"]) / plain)
        ratios["unmet"].append(matched([target_spectrum(T, W) for T in targets["unmet"]]) / plain)
    return {name: statistics.median(values) for name, values in ratios.items()}


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--rounds", type=int, default=5)
    found = run(parser.parse_args().rounds)
    for name, ratio in found.items():
        print(f"match of up to 3 of 6 dyes, 3 lamps, 81 bands, target {name}: {ratio:.2f} × 1000 plain evaluations")
    print(json.dumps({"match": found}))
