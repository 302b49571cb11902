"""The statistics of a control chart."""

import numpy as np
import pytest

from chroma.control import control
from observers.errors import InputError

# Made by hand: moving ranges 2, 1, 3, 2 have the mean 2; the values the mean 3.
BY_HAND = np.array([2.0, 4.0, 3.0, 6.0, 4.0]) - 0.8


def test_limits_by_hand():
    chart = control(BY_HAND)
    sigma = 2.0 / 1.128379167
    assert chart.centre == pytest.approx(3.0)
    assert chart.sigma == pytest.approx(sigma, rel=1e-9)
    assert chart.warning == pytest.approx(3 + 2 * sigma)
    # ISO 7870-2 gives the action limit of individuals as the mean and 2.66 mean moving ranges (3/d2, two decimals).
    assert chart.action == pytest.approx(3 + 2.66 * 2.0, abs=0.005 * 2.0)


def test_ewma_by_hand():
    chart = control(BY_HAND)
    first = 0.2 * 1.2 + 0.8 * 3.0
    assert chart.ewma[:2] == pytest.approx([first, 0.2 * 3.2 + 0.8 * first])
    # its spread: λ²σ² after one value, and λ/(2 - λ) of σ² in the end
    assert chart.ewma_action[0] == pytest.approx(3 + 3 * 0.2 * chart.sigma)
    long = control(np.tile(BY_HAND, 40))
    assert long.ewma_action[-1] == pytest.approx(long.centre + 3 * long.sigma * np.sqrt(0.2 / 1.8), rel=1e-9)


def test_weight_one_is_the_values_themselves():
    chart = control(BY_HAND, weight=1.0)
    assert chart.ewma == pytest.approx(BY_HAND)
    assert chart.ewma_action == pytest.approx(np.full(5, chart.action))


def test_trend_is_that_of_least_squares():
    y = np.random.default_rng(4).uniform(0, 2, 30)
    slope, covariance = np.polyfit(np.arange(30), y, 1, cov=True)
    assert control(y).slope == pytest.approx(slope[0])
    assert control(y).s_slope == pytest.approx(np.sqrt(covariance[0, 0]))
    assert np.isnan(control(y[:3]).s_slope)


def test_a_steady_process_seldom_signals_and_a_shift_does():
    rng = np.random.default_rng(9)
    steady = [control(rng.normal(10, 1, 200)) for _ in range(100)]
    assert np.mean([chart.beyond_action.mean() for chart in steady]) < 0.004  # 0.00135 above 3σ for a Gaussian
    assert 0.015 < np.mean([chart.beyond_warning.mean() for chart in steady]) < 0.032  # 0.0228 above 2σ
    shifted = np.concatenate([rng.normal(10, 1, 100), rng.normal(12, 1, 30)])
    found = np.flatnonzero(control(shifted).ewma_beyond)
    assert len(found)
    assert 100 <= found[0] < 110


@pytest.mark.parametrize(
    ("values", "weight", "said"),
    [
        ([1.0, 2.0], 0.2, "at least 3"),
        ([1.0, np.nan, 2.0], 0.2, "not a finite number"),
        ([1.0, 2.0, 3.0], 0.0, "weight of 0"),
        ([1.0, 2.0, 3.0], 1.5, "weight of 1.5"),
        ([[1.0, 2.0, 3.0]], 0.2, "at least 3"),
    ],
)
def test_what_is_no_chart_is_refused(values, weight, said):
    with pytest.raises(InputError, match=said):
        control(np.array(values), weight=weight)
