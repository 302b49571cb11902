"""CIEDE2000 against the 34 published pairs."""

import numpy as np
import pytest
from helpers import columns, read_gold

from chroma.difference.ciede2000 import ciede2000

ROWS = read_gold("ciede2000_sharma.csv")
TARGET, SAMPLE = columns(ROWS, "L1", "a1", "b1"), columns(ROWS, "L2", "a2", "b2")
PUBLISHED = columns(ROWS, "dE00")[:, 0]
HALF_LAST_DIGIT = 5e-5


def test_there_are_34_pairs():
    assert [row["pair"] for row in ROWS] == [str(i) for i in range(1, 35)]


@pytest.mark.parametrize("row", range(34), ids=[f"pair {row['pair']}" for row in ROWS])
def test_each_published_pair_at_half_the_last_digit(row):
    assert ciede2000(TARGET[row], SAMPLE[row]) == pytest.approx(PUBLISHED[row], rel=0, abs=HALF_LAST_DIGIT)


def test_all_pairs_at_once_and_exchanged():
    np.testing.assert_allclose(ciede2000(TARGET, SAMPLE), PUBLISHED, rtol=0, atol=HALF_LAST_DIGIT)
    np.testing.assert_allclose(ciede2000(SAMPLE, TARGET), PUBLISHED, rtol=0, atol=HALF_LAST_DIGIT)


def test_rounding_errors_of_the_input_move_no_pair():
    # the hues of pairs 10 and 14 lie exactly opposite: without a tolerance for the tie most of these runs fail there
    rng = np.random.default_rng(10)
    for _ in range(400):
        ulps = [rng.integers(-2, 3, TARGET.shape) for _ in range(2)]
        moved = [Lab + n * np.spacing(Lab) for Lab, n in zip((TARGET, SAMPLE), ulps, strict=True)]
        np.testing.assert_allclose(ciede2000(*moved), PUBLISHED, rtol=0, atol=HALF_LAST_DIGIT)
