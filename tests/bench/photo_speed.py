"""A 12-megapixel JPEG with ten cuvettes and a blank: the whole estimate as a multiple of a plain decode, and its memory.

What to reach: reading boxes 1.15, whole estimate 2.5, memory 6 times the decoded picture. Medians of interleaved runs
after a first one, so that imports are not counted. Prints a table and one line of JSON; with --strict it fails above
twice the aim, which no noise explains.
"""

# ruff: noqa: E402  (the folders that are imported from must be on the path first)
from __future__ import annotations

import argparse
import json
import pickle
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np

sys.path[:0] = [str(Path(__file__).resolve().parents[1]), str(Path(__file__).resolve().parents[2])]

from photo.render.scenes import Scene, scene
from PIL import Image

from chroma.dye.files import dye_text, read_dye
from chroma.photo.estimate import estimate, read_photo
from chroma.photo.rack import Cuvette
from chroma.photo.reading import read_picture
from observers.illuminants import illuminant

AIMS = {"reading boxes": 1.15, "whole estimate": 2.5, "memory": 6.0}
SIZE, SMALL = (4000, 3000), (800, 600)


def prepared(folder: Path, size: tuple[int, int] = SIZE) -> tuple[str, tuple[Cuvette, ...], Scene]:
    """A simulated photo of full size as a file, its rack, and the scene."""
    made = scene(2, width=size[0], height=size[1], quality=97)
    path = folder / f"{size[0]}.jpg"
    path.write_bytes(made.jpeg)
    known = made.known(3)[:, 0]
    roles = ["blank"] + ["unknown" if np.isnan(c) else "standard" for c in known[1:]]
    rack = tuple(
        Cuvette(f"c{i}", role, () if role == "unknown" else (float(known[i]),), made.boxes[i])  # type: ignore[arg-type]
        for i, role in enumerate(roles)
    )
    return str(path), rack, made


def decode(path: str) -> None:
    """What the imaging library alone takes."""
    with Image.open(path) as picture:
        picture.load()


def measure(runs: dict[str, Callable[[], object]], rounds: int) -> dict[str, float]:
    """Median seconds of each, taken in turns."""
    times: dict[str, list[float]] = {name: [] for name in runs}
    for number in range(rounds + 1):
        for name, run in runs.items():
            start = time.perf_counter()
            run()
            if number:
                times[name].append(time.perf_counter() - start)
    return {name: statistics.median(values) for name, values in times.items()}


def peak_bytes(folder: Path, what: str) -> int:
    """High-water mark of a process that imports everything and reads a small photo, and then the large one or not."""
    code = f"import sys; sys.argv = ['x']; import runpy; m = runpy.run_path({__file__!r}); m['in_process']({str(folder)!r}, {what!r})"
    done = subprocess.run([sys.executable, "-c", code], check=True, capture_output=True, text=True)
    return int(done.stdout.split()[-1])


def in_process(folder: str, what: str) -> None:
    """Estimate the small photo, and the large one where it is asked for; print the process's high-water mark."""
    jobs = pickle.loads((Path(folder) / "jobs.pickle").read_bytes())
    dye = read_dye(str(Path(folder) / "own.dye.json"))
    for path, rack, lamp in jobs if what == "large" else jobs[:1]:
        picture = read_picture(path)
        estimate(picture, read_photo(picture, rack), [dye], 10.0, lamps=[illuminant(lamp)])
    # getrusage would count the parent's memory at the fork.
    status = Path("/proc/self/status").read_text(encoding="utf-8")
    print(1024 * int(next(line for line in status.splitlines() if line.startswith("VmHWM")).split()[1]))


def main() -> int:
    """Print the ratios and the JSON line."""
    options = argparse.ArgumentParser()
    options.add_argument("--rounds", type=int, default=7)
    options.add_argument("--strict", action="store_true")
    chosen = options.parse_args()
    with tempfile.TemporaryDirectory() as place:
        folder = Path(place)
        path, rack, made = prepared(folder)
        lamps = [illuminant(made.setting.lamp)]
        dyes = [made.dye]
        small = prepared(folder, SMALL)[:2]
        jobs = [(*small, made.setting.lamp), (path, rack, made.setting.lamp)]
        (folder / "jobs.pickle").write_bytes(pickle.dumps(jobs))
        (folder / "own.dye.json").write_text(dye_text(made.dye), encoding="utf-8")

        def whole() -> object:
            picture = read_picture(path)
            return estimate(picture, read_photo(picture, rack), dyes, 10.0, lamps=lamps)

        times = measure(
            {
                "decode": lambda: decode(path),
                "reading boxes": lambda: read_photo(read_picture(path), rack),
                "whole estimate": whole,
            },
            chosen.rounds,
        )
        memory = peak_bytes(folder, "large") - peak_bytes(folder, "small")
    decoded = SIZE[0] * SIZE[1] * 3
    found = {name: times[name] / times["decode"] for name in ("reading boxes", "whole estimate")}
    found["memory"] = memory / decoded
    for name, ratio in found.items():
        print(f"{name:16s} {ratio:5.2f}   to reach {AIMS[name]:g}")
    print(json.dumps({"photo_speed": found, "decode_s": times["decode"]}))
    return int(chosen.strict and any(ratio > 2 * AIMS[name] for name, ratio in found.items()))


if __name__ == "__main__":
    sys.exit(main())
