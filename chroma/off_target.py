"""What is off, in words: lighter or darker, stronger or weaker in chroma, which way in hue."""

from __future__ import annotations

import numpy as np

from chroma.batches import BLOCK, Checked
from chroma.colour.spaces import Lab_from_LCh, LCh_from_Lab
from chroma.difference.formulas import Formula
from observers.arrays import Array

NEUTRAL_CHROMA = 5.0  # below this, hue has little meaning and a* and b* are spoken of instead
WORTH_OF_LIMIT = 0.25  # a part is worth a word from this share of the limit on …
WORTH_OF_LARGEST = 0.4  # … and from this share of the largest part on
# Going up in hue angle one meets red (0°), yellow (90°), green (180°), blue (270°); common practice.
UPWARD = ("yellower", "greener", "bluer", "redder")
DOWNWARD = ("redder", "yellower", "greener", "bluer")


def off_targets(checked: Checked, most: int | None = None) -> list[str]:
    """What is off with each batch (or the first of them), under the lamp where it is worst.

    "On target" where no part is worth a word.
    """
    said: list[str] = []
    count = len(checked.names) if most is None else min(most, len(checked.names))
    for start in range(0, count, BLOCK):
        rows = np.arange(start, min(start + BLOCK, count))
        lamp = np.argmax(checked.delta_e[rows] / checked.limits, axis=1)
        words = off_words(
            checked.tolerance.formula, checked.target_Lab[lamp], checked.Lab[rows, lamp], checked.limits[lamp]
        )
        said += [", ".join(own) or "on target" for own in words]
    return said


def off_words(formula: Formula, target_Lab: Array, Lab: Array, limit: Array) -> list[list[str]]:
    """Words for differences between colours (N, 3) held to limits (N,), in order of size in the formula's own units.

    A size is what the difference would be if only one of lightness, chroma and hue had moved (or L*, a*, b* near grey).
    """
    neutral = np.minimum(np.hypot(*target_Lab.T[1:]), np.hypot(*Lab.T[1:])) < NEUTRAL_CHROMA
    LCh_t, LCh = LCh_from_Lab(target_Lab), LCh_from_Lab(Lab)
    steps = Lab - target_Lab
    turned = LCh - LCh_t
    turned[:, 2] = (turned[:, 2] + 180) % 360 - 180
    sizes = np.stack([
        formula.difference(target_Lab, np.where(neutral[:, None], target_Lab + axis * steps, Lab_from_LCh(LCh_t + axis * turned)))
        for axis in np.eye(3)
    ], axis=-1)  # fmt: skip
    floor = np.maximum(WORTH_OF_LIMIT * limit, WORTH_OF_LARGEST * sizes.max(axis=1))
    quarter = (LCh_t[:, 2] // 90).astype(int) % 4
    ranks = np.argsort(-sizes, axis=1, kind="stable")
    return [
        [
            _neutral_word(axis, steps[i]) if neutral[i] else _chromatic_word(axis, turned[i], quarter[i])
            for axis in ranks[i]
            if sizes[i, axis] >= floor[i]
        ]
        for i in range(len(sizes))
    ]


def _neutral_word(axis: int, step: Array) -> str:
    pairs = (("lighter", "darker"), ("redder", "greener"), ("yellower", "bluer"))
    return pairs[axis][0 if step[axis] > 0 else 1]


def _chromatic_word(axis: int, turned: Array, quarter: int) -> str:
    pairs = (("lighter", "darker"), ("stronger", "weaker"), (UPWARD[quarter], DOWNWARD[quarter]))
    return pairs[axis][0 if turned[axis] > 0 else 1]
