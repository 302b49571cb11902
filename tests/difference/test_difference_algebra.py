"""The algebra of the shipped CIEDE2000 against the plain formula with its angles."""

import sys
from pathlib import Path

import numpy as np
import pytest
from helpers import random_Lab

from chroma.difference.ciede2000 import ciede2000

sys.path.insert(0, str(Path(__file__).parent))
import plain_ciede2000


def test_a_million_random_pairs_agree_with_the_plain_formula():
    target, sample = random_Lab(1, 1_000_000), random_Lab(2, 1_000_000)
    plain, ours = plain_ciede2000.ciede2000(target, sample), ciede2000(target, sample)
    assert np.abs(plain - ours).max() < 1e-9


@pytest.mark.parametrize("chroma", [1e-3, 0.5, 30.0, 120.0])
@pytest.mark.parametrize("angle", [0.0, 1e-7, 17.0, 90.0, 179.999, 180.0, 180.001, 275.0, 359.999])
def test_hue_ties_agree(chroma, angle):
    h = np.radians(angle)
    target = np.array([50.0, chroma * np.cos(h), chroma * np.sin(h)])
    # Scaled by powers of two, so that the opposite is exact.
    for scale in (-1.0, -0.5, -4.0):
        sample = np.array([52.0, scale * target[1], scale * target[2]])
        for first, second in ((target, sample), (sample, target)):
            assert ciede2000(first, second) == pytest.approx(plain_ciede2000.ciede2000(first, second), abs=1e-9)


@pytest.mark.parametrize(
    ("target", "sample"),
    [
        ((50, 0, 0), (60, 0, 0)),
        ((50, 0, 0), (50, 3, -4)),
        ((50, 3, -4), (50, 0, 0)),
        ((0, 0, 0), (0, 0, 0)),
        ((0.01, 1e-9, 0), (0.02, 0, 1e-9)),
        ((50, 0, -20), (50, 0, -25)),
        ((50, 5, 0), (50, -5, 0)),
        ((50, -5, 0), (50, 5, 0)),
    ],
    ids=str,
)
def test_greys_blacks_and_axes_agree(target, sample):
    target, sample = np.array(target, dtype=float), np.array(sample, dtype=float)
    assert ciede2000(target, sample) == pytest.approx(plain_ciede2000.ciede2000(target, sample), abs=1e-9)
