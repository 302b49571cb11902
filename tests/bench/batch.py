"""A batch of spectra under three lamps, CIEDE2000 to one target, verdicts: our time against colour-science's, one run.

colour-science's way is whole arrays: tristimulus by one product with the same weights, L*a*b*, ΔE, per lamp. Both on one
thread. Prints a table and one line of JSON.
"""

from __future__ import annotations

import argparse
import json
import os
import statistics
import time
import warnings

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import numpy as np

from chroma import Tolerance, check, conditions, measured

LAMPS = ("D65", "A", "FL11")


def simulated(rows: int) -> np.ndarray:
    """Simulated transmittances (rows, 31) of smooth bands."""
    rng = np.random.default_rng(5)
    nm = np.arange(400.0, 701.0, 10.0)
    depth, centre, width = (
        rng.uniform(0, 2, (rows, 1)),
        rng.uniform(420, 680, (rows, 1)),
        rng.uniform(30, 90, (rows, 1)),
    )
    return 10 ** -(depth * np.exp(-(((nm - centre) / width) ** 2)))


def theirs(T: np.ndarray, target: np.ndarray, matrix: np.ndarray, white: np.ndarray) -> np.ndarray:
    """ΔE00 (N, L) through colour-science, lamp by lamp."""
    import colour

    result = []
    for i in range(len(LAMPS)):
        W = matrix[:, 3 * i : 3 * i + 3]
        xy = white[i, :2] / white[i].sum()
        Lab, Lab_t = colour.XYZ_to_Lab(T @ W / 100, xy), colour.XYZ_to_Lab(target @ W / 100, xy)
        result.append(colour.delta_E(Lab_t, Lab, method="CIE 2000"))
    return np.stack(result, axis=-1)


def run(rows: int, rounds: int) -> dict[str, float]:
    """Medians of both ways, and how far they are apart."""
    nm, T = np.arange(400.0, 701.0, 10.0), simulated(rows)
    seen = conditions(LAMPS, "10")
    W = seen.weights(nm)
    batches = measured([f"s{i}" for i in range(rows)], nm, T, "transmittance")
    target = measured(["target"], nm, T[:1], "transmittance")
    held_to = Tolerance(dict.fromkeys(LAMPS, 1.0))
    ours_s, theirs_s = [], []
    for _ in range(rounds):
        start = time.perf_counter()
        mine = check(batches, target, held_to, seen).delta_e
        ours_s.append(time.perf_counter() - start)
        start = time.perf_counter()
        other = theirs(T, T[:1], W.matrix, W.white)
        theirs_s.append(time.perf_counter() - start)
    apart = float(np.abs(mine - other).max())
    return {
        "rows": rows,
        "times_colour_science": statistics.median(theirs_s) / statistics.median(ours_s),
        "apart": apart,
    }


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--rows", type=int, default=200_000)
    parser.add_argument("--rounds", type=int, default=5)
    arguments = parser.parse_args()
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        import colour  # noqa: F401 - its import is not part of what is timed
    found = run(arguments.rows, arguments.rounds)
    ratio = f"{found['times_colour_science']:.2f} × colour-science"
    print(f"{found['rows']} spectra, 31 bands, 3 lamps: {ratio}; apart {found['apart']:.1e}")
    print(json.dumps({"batch": found}))
