"""What is off, in words: lighter or darker, stronger or weaker in chroma, which way in hue."""

from __future__ import annotations

import numpy as np

from chroma.batches import Checked
from chroma.colour.spaces import Lab_from_LCh, LCh_from_Lab
from chroma.difference.formulas import Formula
from observers.arrays import Array

NEUTRAL_CHROMA = 5.0  # below this, hue has little meaning and a* and b* are spoken of instead
WORTH_OF_LIMIT = 0.25  # a part is worth a word from this share of the limit on …
WORTH_OF_LARGEST = 0.4  # … and from this share of the largest part on
# Going up in hue angle one meets red (0°), yellow (90°), green (180°), blue (270°); common practice.
UPWARD = ("yellower", "greener", "bluer", "redder")
DOWNWARD = ("redder", "yellower", "greener", "bluer")


def off_target(checked: Checked, row: int) -> str:
    """What is off with one batch, under the lamp where it is worst; "on target" where no part is worth a word."""
    lamp = int(np.argmax(checked.delta_e[row] / checked.limits))
    words = off_words(
        checked.tolerance.formula, checked.target_Lab[lamp], checked.Lab[row, lamp], float(checked.limits[lamp])
    )
    return ", ".join(words) or "on target"


def off_words(formula: Formula, target_Lab: Array, Lab: Array, limit: float) -> list[str]:
    """Words for a difference between two colours (3,), in order of size in the formula's own units."""
    neutral = min(np.hypot(*target_Lab[1:]), np.hypot(*Lab[1:])) < NEUTRAL_CHROMA
    parts = _neutral_parts(target_Lab, Lab) if neutral else _chromatic_parts(target_Lab, Lab)
    sizes = [float(formula.difference(target_Lab, moved)) for moved, _ in parts]
    floor = max(WORTH_OF_LIMIT * limit, WORTH_OF_LARGEST * max(sizes))
    ranked = sorted(zip(sizes, parts, strict=True), key=lambda pair: -pair[0])
    return [word for size, (_, word) in ranked if size >= floor]


def _neutral_parts(target: Array, Lab: Array) -> list[tuple[Array, str]]:
    """The target moved along one axis at a time to where the sample is, with the word for that."""
    step = Lab - target
    words = (
        "lighter" if step[0] > 0 else "darker",
        "redder" if step[1] > 0 else "greener",
        "yellower" if step[2] > 0 else "bluer",
    )
    return [(target + axis * step, word) for axis, word in zip(np.eye(3), words, strict=True)]


def _chromatic_parts(target: Array, Lab: Array) -> list[tuple[Array, str]]:
    LCh_t, LCh = LCh_from_Lab(target), LCh_from_Lab(Lab)
    turn = (LCh[2] - LCh_t[2] + 180) % 360 - 180
    quarter = int(LCh_t[2] // 90) % 4
    words = (
        "lighter" if LCh[0] > LCh_t[0] else "darker",
        "stronger" if LCh[1] > LCh_t[1] else "weaker",
        UPWARD[quarter] if turn > 0 else DOWNWARD[quarter],
    )
    steps = (LCh[0] - LCh_t[0], LCh[1] - LCh_t[1], turn)
    return [(Lab_from_LCh(LCh_t + axis * step), word) for axis, step, word in zip(np.eye(3), steps, words, strict=True)]
