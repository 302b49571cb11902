"""Grids: the laws of the matrices that carry a table from one grid to another."""

import numpy as np
import pytest
from helpers import finite, seeds
from hypothesis import given
from hypothesis import strategies as st

from observers.errors import InputError
from observers.grid import held, is_uniform, nanometres, resampling, stated_rule

EVEN = np.arange(400.0, 701.0, 10.0)
# Order of the polynomials that come back unchanged: up to the ends, and so many points away from them. The points that
# CIE 167 puts beyond the ends for Sprague's method continue no more than a straight line.
ORDER = {"linear": 1, "lagrange": 2, "sprague": 1}
ORDER_INSIDE, AWAY = {"linear": 1, "lagrange": 3, "sprague": 4}, {"linear": 0, "lagrange": 1, "sprague": 2}


def uneven(seed, bands=12):
    return 400 + np.cumsum(np.random.default_rng(seed).uniform(4, 18, bands))


@given(seed=seeds, rule=st.sampled_from(sorted(ORDER)), even=st.booleans())
def test_rows_sum_to_one_and_polynomials_come_back(seed, rule, even):
    grid = EVEN if even or rule == "sprague" else uneven(seed)
    rng = np.random.default_rng(seed)
    wanted = rng.uniform(grid[0], grid[-1], 40)
    matrix = resampling(grid, wanted, rule)
    np.testing.assert_allclose(matrix.sum(axis=1), 1, rtol=0, atol=1e-12)
    curve = np.polynomial.Polynomial(rng.uniform(-1, 1, ORDER[rule] + 1), domain=[grid[0], grid[-1]])
    np.testing.assert_allclose(matrix @ curve(grid), curve(wanted), rtol=0, atol=1e-10)


@given(seed=seeds, rule=st.sampled_from(sorted(ORDER)), even=st.booleans())
def test_away_from_the_ends_higher_polynomials_come_back(seed, rule, even):
    grid = EVEN if even or rule == "sprague" else uneven(seed)
    rng = np.random.default_rng(seed)
    wanted = rng.uniform(grid[AWAY[rule]], grid[-1 - AWAY[rule]], 40)
    curve = np.polynomial.Polynomial(rng.uniform(-1, 1, ORDER_INSIDE[rule] + 1), domain=[grid[0], grid[-1]])
    np.testing.assert_allclose(resampling(grid, wanted, rule) @ curve(grid), curve(wanted), rtol=0, atol=1e-10)


@pytest.mark.parametrize("rule", sorted(ORDER))
def test_points_of_the_grid_come_back(rule):
    np.testing.assert_allclose(resampling(EVEN, EVEN, rule), np.eye(len(EVEN)), rtol=0, atol=1e-12)


@given(seed=seeds, rule=st.sampled_from(sorted(ORDER)))
def test_order_of_wanted_wavelengths_never_matters(seed, rule):
    rng = np.random.default_rng(seed)
    wanted = rng.uniform(400, 700, 25)
    order = rng.permutation(25)
    np.testing.assert_allclose(
        resampling(EVEN, wanted[order], rule), resampling(EVEN, wanted, rule)[order], rtol=0, atol=1e-14
    )


@given(shift=finite(-300, 2000), rule=st.sampled_from(sorted(ORDER)))
def test_only_distances_matter(shift, rule):
    wanted = np.array([403.0, 517.5, 691.0])
    np.testing.assert_allclose(
        resampling(EVEN + shift, wanted + shift, rule), resampling(EVEN, wanted, rule), rtol=0, atol=1e-9
    )


@pytest.mark.parametrize("rule", sorted(ORDER))
def test_ends_are_held(rule):
    matrix = held(EVEN, np.array([360.0, 399.999, 550.0, 700.001, 830.0]), rule)
    first, last = np.eye(len(EVEN))[[0, -1]]
    np.testing.assert_array_equal(matrix[[0, 1]], [first, first])
    np.testing.assert_array_equal(matrix[[3, 4]], [last, last])
    np.testing.assert_allclose(matrix[2], np.eye(len(EVEN))[15], rtol=0, atol=1e-12)


def test_nothing_inside_is_all_held():
    assert (held(EVEN, np.array([300.0, 350.0]), "sprague")[:, 0] == 1).all()


@pytest.mark.parametrize("rule", sorted(ORDER))
@pytest.mark.parametrize("wanted", [(399.9, 500.0), (500.0, 700.1)], ids=["below", "above"])
def test_nothing_is_extrapolated(rule, wanted):
    with pytest.raises(InputError, match=r"is wanted from 400–700 nm: a table is not extrapolated in silence"):
        resampling(EVEN, np.array(wanted), rule)


def test_rounding_at_the_ends_is_forgiven():
    matrix = resampling(EVEN, np.array([400 - 0.98e-6, 700 + 0.98e-6]), "linear")
    np.testing.assert_allclose(matrix[[0, 1], [0, -1]], 1, rtol=0, atol=1e-6)
    for wanted in (400 - 1.02e-6, 700 + 1.02e-6):
        with pytest.raises(InputError, match="not extrapolated"):
            resampling(EVEN, np.array([wanted]), "linear")


@pytest.mark.parametrize(
    ("grid", "rule", "message"),
    [
        (np.arange(5.0), "sprague", "needs six or more evenly spaced bands"),
        (np.array([0.0, 1, 2, 3, 4, 5.1]), "sprague", "needs six or more evenly spaced bands"),
        (np.arange(2.0), "lagrange", "needs three or more bands"),
        (np.arange(9.0), "cubic", "unknown interpolation 'cubic'"),
    ],
    ids=["sprague on five", "sprague on uneven", "lagrange on two", "unknown"],
)
def test_a_rule_that_does_not_apply_is_refused(grid, rule, message):
    with pytest.raises(InputError, match=message):
        resampling(grid, grid[:1], rule)


def test_the_smallest_grids_that_each_rule_takes():
    assert resampling(np.arange(6.0), np.array([2.5]), "sprague").shape == (1, 6)
    assert resampling(np.arange(3.0), np.array([0.5]), "lagrange").shape == (1, 3)
    np.testing.assert_array_equal(resampling(np.arange(1.0), np.array([0.0]), "linear"), [[1.0]])


@pytest.mark.parametrize(
    ("grid", "rule"),
    [
        (np.arange(6.0), "sprague"),
        (np.arange(5.0), "lagrange"),
        (np.arange(4.0), "lagrange"),
        (np.arange(3.0), "linear"),
        (np.arange(1.0), "linear"),
        (np.array([0.0, 1, 2, 3, 4, 5, 6.5]), "lagrange"),
    ],
    ids=["six even", "five even", "four even", "three", "one", "uneven"],
)
def test_stated_rule(grid, rule):
    assert stated_rule(grid) == rule


@pytest.mark.parametrize(("jitter", "even"), [(0.97e-3, True), (1.03e-3, False)])
def test_even_means_to_a_thousandth_of_a_step(jitter, even):
    # one step too long and one too short leave the mean as it was
    steps = np.full(30, 10.0)
    steps[4], steps[20] = 10 * (1 + jitter), 10 * (1 - jitter)
    assert is_uniform(400 + np.cumsum(steps)) is even


def test_one_band_has_no_spacing():
    assert not is_uniform(np.array([500.0]))


def test_wavelength_units():
    nm = np.array([400.0, 550.0, 700.0])
    np.testing.assert_allclose(nanometres(nm / 1000, "um"), nm, rtol=1e-15)
    np.testing.assert_allclose(nanometres(np.array([25000.0, 20000.0]), "cm-1"), [400.0, 500.0], rtol=1e-15)
    assert nanometres(nm, "nm") is nm


@given(seed=seeds, rule=st.sampled_from(sorted(ORDER)))
def test_inputs_are_not_touched(seed, rule):
    grid, wanted = EVEN.copy(), np.random.default_rng(seed).uniform(380, 720, 9)
    before = wanted.copy()
    held(grid, wanted, rule)
    np.testing.assert_array_equal(grid, EVEN)
    np.testing.assert_array_equal(wanted, before)
