"""Render the demo's photo: a rack of invented Heron blue before a bright panel, with its rack file.

Run as ``python tests/photo/render/demo_photo.py`` in the checkout; writes demo_spectra/photo/rack.jpg and
rack.csv. Camera, lamp, glare and noise are drawn from a seed; the estimator is told the lamp at most.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[3]
sys.path[:0] = [str(ROOT / "tests"), str(ROOT / "demo_spectra")]

from make import absorptivity  # noqa: E402 - found on the path set above
from photo.render.geometry import boxes  # noqa: E402
from photo.render.picture import jpeg, render  # noqa: E402
from photo.render.world import CAMERA_NM, draw_setting  # noqa: E402

SEED, LAMP, WIDTH, HEIGHT, PITCH = 77, "LED-B3", 1200, 900, 110.0
# name, role, g/L; what the unknowns hold stands here alone.
RACK = (
    ("water", "blank", 0.0),
    ("standard 2 mg/L", "standard", 0.002),
    ("standard 5 mg/L", "standard", 0.005),
    ("standard 10 mg/L", "standard", 0.010),
    ("north pond", "unknown", 0.0035),
    ("south pond", "unknown", 0.0062),
    ("header tank", "unknown", 0.0088),
)


def main() -> None:
    """Write both files."""

    setting = draw_setting(SEED, lamp=LAMP)
    c = np.array([concentration for _, _, concentration in RACK])
    made = render(
        setting, 10.0 ** -np.outer(c, absorptivity("Heron blue", CAMERA_NM)), width=WIDTH, height=HEIGHT, pitch=PITCH
    )
    folder = ROOT / "demo_spectra" / "photo"
    (folder / "rack.jpg").write_bytes(jpeg(made.codes, 88, exif=((0x010E, "Invented: rendered for the demo"),)))
    lines = ["name,role,concentration,x,y,width,height,remark"]
    for (name, role, concentration), box in zip(RACK, boxes(made.matrix, len(RACK), PITCH), strict=True):
        known = "" if role == "unknown" else f"{concentration:g}"
        lines.append(f"{name},{role},{known},{box.x:.0f},{box.y:.0f},{box.width:.0f},{box.height:.0f},invented")
    (folder / "rack.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
