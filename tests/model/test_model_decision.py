"""Decisions: the table of the rules, probabilities, and the factor for few readings."""

import numpy as np
import pytest
from helpers import finite
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from chroma.decision import (
    FAIL,
    PASS,
    UNDECIDED,
    conformance_probability,
    decide,
    guard_banded_limit,
    probability_within,
)
from chroma.scatter import coverage_factor


@pytest.mark.parametrize(
    ("value", "expanded", "code"),
    [
        (0.9, 0.0, PASS),
        (1.0, 0.0, PASS),
        (np.nextafter(1.0, 2), 0.0, FAIL),
        (1.1, 0.0, FAIL),
        (0.5, 0.25, PASS),
        (0.75, 0.25, PASS),
        (0.76, 0.25, UNDECIDED),
        (1.0, 0.25, UNDECIDED),
        (1.25, 0.25, UNDECIDED),
        (1.26, 0.25, FAIL),
        (-3.0, 0.25, PASS),
    ],
)
def test_table_of_the_rules_at_a_limit_of_1(value, expanded, code):
    assert decide(np.float64(value), 1.0, expanded) == code


def test_the_worst_of_several_is_their_maximum():
    assert PASS < UNDECIDED < FAIL


@given(value=finite(0, 3), expanded=finite(0, 1))
def test_a_wider_guard_never_passes_or_fails_more(value, expanded):
    narrow, wide = (decide(np.float64(value), 1.0, U) for U in (expanded, expanded + 0.2))
    assert wide in (narrow, UNDECIDED)


@given(value=finite(0, 3), expanded=finite(0, 1))
def test_pass_is_within_the_guard_banded_limit(value, expanded):
    passed = value <= guard_banded_limit(1.0, expanded)
    assert (decide(np.float64(value), 1.0, expanded) == PASS) == passed or abs(value + expanded - 1) < 1e-12


@given(value=finite(-3, 3), u=finite(0.01, 2))
def test_probabilities_of_within_and_without_make_one(value, u):
    v, s = np.float64(value), np.float64(u)
    inside = conformance_probability(v, s, lower=-1, upper=1)
    outside = conformance_probability(v, s, upper=-1) + conformance_probability(v, s, lower=1)
    assert inside + outside == pytest.approx(1, abs=1e-12)


@given(difference=finite(0, 5), sd=finite(0.05, 1), limit=finite(0.1, 5))
def test_probability_of_a_difference_is_noncentral_chi_square(difference, sd, limit):
    got = probability_within(np.float64(difference), np.float64(sd), np.float64(limit))
    assert got == pytest.approx(stats.ncx2.cdf((limit / sd) ** 2, 3, (difference / sd) ** 2), rel=1e-6, abs=1e-9)


def test_probability_of_a_difference_as_drawn():
    # simulated: the true difference (0.6, 0.5, 0.3), each axis read with sd 0.2
    rng = np.random.default_rng(1)
    true = np.array([0.6, 0.5, 0.3])
    read = np.linalg.norm(true + rng.normal(0, 0.2, (200_000, 3)), axis=1)
    got = probability_within(np.linalg.norm(true), np.float64(0.2), np.float64(1.0))
    assert got == pytest.approx((read <= 1.0).mean(), abs=0.004)


def test_probability_falls_with_the_difference_and_grows_with_the_limit():
    far = np.linspace(0, 3, 50)
    falling = probability_within(far, np.full(50, 0.3), np.full(50, 1.0))
    assert (np.diff(falling) < 0).all()
    assert falling[0] > 0.98
    assert falling[-1] < 1e-6


@pytest.mark.parametrize("sd", [1e-9, 1e-6, 1e-4, 1e-2])
@pytest.mark.parametrize("share", [0.5, 1 - 1e-9, 1.0, 1 + 1e-9, 2.0])
def test_probability_of_a_difference_that_is_almost_sure(share, sd):
    # a difference far above its own uncertainty is as good as Gaussian
    got = probability_within(np.float64(share), np.float64(sd), np.float64(1.0))
    assert got == pytest.approx(stats.norm.cdf((1 - share) / sd), abs=0.005)


@given(k=finite(0.5, 4), freedom=st.integers(1, 200))
def test_coverage_factor_is_students(k, freedom):
    assert coverage_factor(k, freedom) == pytest.approx(stats.t.ppf(stats.norm.cdf(k), freedom), rel=1e-9)


def test_coverage_factor_of_many_readings_is_that_of_a_gaussian():
    assert coverage_factor(2.0, 10**7) == pytest.approx(2.0, abs=1e-5)
    assert coverage_factor(2.0, 2) == pytest.approx(4.5266, abs=1e-4)  # JCGM 100, table G.2, at 95.45 %: 4.53
