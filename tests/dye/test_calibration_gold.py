"""The calibration line against the published examples of tests/gold/calibration_*.csv (sources in their headers)."""

import numpy as np
import pytest
from helpers import read_gold

from chroma.calibration import decision_limit, detection_limit, fit_line, quantification_limit, read_back
from observers.errors import InputError

DATA = read_gold("calibration_data.csv")


def xy(dataset):
    rows = [row for row in DATA if row["dataset"] == dataset]
    return np.array([float(row["x"]) for row in rows]), np.array([float(row["y"]) for row in rows])


def massart_means():
    """As the published recomputation has it: weights are 1 over the squared, rounded standard deviations of the means."""
    x, y = xy("massart_ex3")
    at = np.unique(x)
    means = np.array([y[x == value].mean() for value in at])
    weights = np.round(1 / np.round([y[x == value].std(ddof=1) for value in at], 2) ** 2, 3)
    return fit_line(at, means, weights)


def weighted_miller():
    x, y = xy("miller_weighted")
    s = np.array([0.001, 0.004, 0.010, 0.013, 0.017, 0.022])
    return fit_line(x, y, s**-2 / np.mean(s**-2))


def miller():
    return fit_line(*xy("miller_fluorescein"))


def din():
    return fit_line(*xy("din32645"))


def norris():
    return fit_line(*xy("nist_norris"))


def massart():
    return fit_line(*xy("massart_ex1"))


def addition():
    return read_back(fit_line(*xy("miller_std_addition_Ag")), 0.0, readings=np.inf)


# Each quantity of the file with the call that gives it; those left out belong to no function of ours.
CALLS = {
    ("miller_fluorescein", "slope"): lambda: miller().slope,
    ("miller_fluorescein", "intercept"): lambda: miller().intercept,
    ("miller_fluorescein", "r"): lambda: miller().r,
    ("miller_fluorescein", "s_y/x"): lambda: miller().s,
    ("miller_fluorescein", "s_b"): lambda: miller().s_slope,
    ("miller_fluorescein", "s_a"): lambda: miller().s_intercept,
    ("miller_fluorescein", "x0(2.9)"): lambda: read_back(miller(), 2.9).value,
    ("miller_fluorescein", "s_x0(2.9)"): lambda: read_back(miller(), 2.9).standard_error,
    ("miller_fluorescein", "CI half x0(2.9)"): lambda: read_back(miller(), 2.9).half_width,
    ("miller_fluorescein", "x0(13.5)"): lambda: read_back(miller(), 13.5).value,
    ("miller_fluorescein", "s_x0(13.5)"): lambda: read_back(miller(), 13.5).standard_error,
    ("miller_fluorescein", "CI half x0(13.5)"): lambda: read_back(miller(), 13.5).half_width,
    ("miller_fluorescein", "x0(23.0)"): lambda: read_back(miller(), 23.0).value,
    ("miller_fluorescein", "s_x0(23.0)"): lambda: read_back(miller(), 23.0).standard_error,
    ("miller_fluorescein", "CI half x0(23.0)"): lambda: read_back(miller(), 23.0).half_width,
    ("miller_fluorescein", "s_x0(2.9) m=4"): lambda: read_back(miller(), 2.9, readings=4).standard_error,
    ("miller_fluorescein", "CI half x0(13.5) m=4"): lambda: read_back(miller(), 13.5, readings=4).half_width,
    ("miller_fluorescein", "Fieller x0(13.5) low"): lambda: read_back(miller(), 13.5).low,
    ("miller_fluorescein", "Fieller x0(13.5) high"): lambda: read_back(miller(), 13.5).high,
    ("miller_std_addition_Ag", "x_E"): lambda: -addition().value,
    ("miller_std_addition_Ag", "s_xE"): lambda: addition().standard_error,
    ("miller_std_addition_Ag", "CI half"): lambda: addition().half_width,
    ("miller_weighted", "weighted slope (s_i=.001 .004 .010 .013 .017 .022)"): lambda: weighted_miller().slope,
    ("miller_weighted", "weighted intercept"): lambda: weighted_miller().intercept,
    ("miller_weighted", "unweighted slope"): lambda: fit_line(*xy("miller_weighted")).slope,
    ("miller_weighted", "unweighted intercept"): lambda: fit_line(*xy("miller_weighted")).intercept,
    ("miller_weighted", "x_w(0.100)"): lambda: read_back(weighted_miller(), 0.1).value,
    ("miller_weighted", "x_w(0.600)"): lambda: read_back(weighted_miller(), 0.6).value,
    ("din32645", "inverse prediction y=3500 x"): lambda: read_back(din(), 3500).value,
    ("din32645", "SE"): lambda: read_back(din(), 3500).standard_error,
    ("din32645", "CI half alpha=0.01"): lambda: read_back(din(), 3500, confidence=0.99).half_width,
    ("din32645", "decision limit LC alpha=0.01"): lambda: decision_limit(din(), alpha=0.01),
    ("din32645", "detection limit iterative alpha=beta=0.05"): lambda: detection_limit(din()),
    ("din32645", "quantification limit k=3 alpha=0.01"): lambda: quantification_limit(din(), alpha=0.01),
    ("massart_ex1", "x(15)"): lambda: read_back(massart(), 15).value,
    ("massart_ex1", "SE(15)"): lambda: read_back(massart(), 15).standard_error,
    ("massart_ex1", "CI95 half(15)"): lambda: read_back(massart(), 15).half_width,
    ("massart_ex1", "x(90)"): lambda: read_back(massart(), 90).value,
    ("massart_ex1", "CI95 half(90)"): lambda: read_back(massart(), 90).half_width,
    ("massart_ex1", "CI95 half(90), m=5"): lambda: read_back(massart(), 90, readings=5).half_width,
    ("massart_ex3", "weighted on means x(15), ws=1.67"): lambda: read_back(massart_means(), 15, weight=1.67).value,
    ("massart_ex3", "SE"): lambda: read_back(massart_means(), 15, weight=1.67).standard_error,
    ("massart_ex3", "x(90), ws=0.145"): lambda: read_back(massart_means(), 90, weight=0.145).value,
    ("nist_norris", "B0"): lambda: norris().intercept,
    ("nist_norris", "B1"): lambda: norris().slope,
    ("nist_norris", "SE B0"): lambda: norris().s_intercept,
    ("nist_norris", "SE B1"): lambda: norris().s_slope,
    ("nist_norris", "s"): lambda: norris().s,
    ("nist_norris", "R2"): lambda: norris().r ** 2,
}
ROWS = {(row["dataset"], row["quantity"]): row for row in read_gold("calibration_results.csv")}


@pytest.mark.parametrize("key", CALLS, ids="-".join)
def test_a_published_calibration(key):
    row = ROWS[key]
    # The certified values are given to more digits than a double keeps through the sums: the file says relative 1e-9.
    tolerance = 1e-9 * abs(float(row["value"])) if key[0] == "nist_norris" else float(row["tol"])
    assert CALLS[key]() == pytest.approx(float(row["value"]), abs=tolerance)


def test_the_half_widths_of_the_weighted_example():
    # Two rows of massart_ex3 bear the same name, so they are not in the table above.
    halves = [float(row["value"]) for row in read_gold("calibration_results.csv") if row["quantity"] == "CI95 half"]
    assert read_back(massart_means(), 15, weight=1.67).half_width == pytest.approx(halves[0], abs=2e-6)
    assert read_back(massart_means(), 90, weight=0.145).half_width == pytest.approx(halves[1], abs=2e-6)


def test_interval_of_the_slope():
    line, row = miller(), ROWS["miller_fluorescein", "CI95 half-width slope (t=2.57)"]
    from chroma.calibration import quantile

    assert quantile(0.975, line.freedom) * line.s_slope == pytest.approx(float(row["value"]), abs=float(row["tol"]))


def test_limits_for_a_known_blank_are_those_of_currie():
    # Currie 1995: with a known standard deviation s0 of the blank, L_C = 1.645 s0 and L_D = 3.29 s0. A line through very
    # many points, almost all of them far from where it is read, comes to that.
    rng = np.random.default_rng(1)
    x = np.concatenate([np.zeros(100_000), np.full(100_000, 1000.0)])
    noise = rng.standard_normal(200_000)
    line = fit_line(x, x + (noise - noise.mean()) / noise.std())
    assert decision_limit(line) == pytest.approx(
        float(ROWS["definitions", "Currie/IUPAC L_C = 1.645 s0"]["value"]), rel=1e-4
    )
    assert detection_limit(line) == pytest.approx(float(ROWS["definitions", "L_D = 3.29 s0"]["value"]), rel=1e-4)


def test_fieller_is_unbounded_for_a_slope_that_may_be_zero():
    line = fit_line(np.array([0.0, 1, 2, 3]), np.array([1.0, -1, 1, -0.5]))
    assert read_back(line, 0.2).low == -np.inf
    assert detection_limit(fit_line(np.array([0.0, 1, 2, 3]), np.array([0.0, 3, -2, 1]))) == np.inf


def test_three_points_make_a_line():
    assert fit_line(np.array([0.0, 1, 2]), np.array([0.0, 1.1, 1.9])).freedom == 1


def test_fieller_is_unbounded_from_where_the_slope_could_be_zero():
    # The interval of the slope reaches zero when t·s_slope = slope: g = 1.
    x, noise = np.arange(6.0), np.array([1.0, -1, 0, 0, 1, -1])
    for slope, bounded in ((2.0, True), (0.65, False)):
        line = fit_line(x, slope * x + noise)
        assert (2 > (2.776445 * line.s_slope / line.slope) ** 2 > 1) is not bounded
        assert np.isfinite(read_back(line, 1.0).high) == bounded


def test_the_quantification_limit_takes_5_percent_unless_told_otherwise():
    assert quantification_limit(din()) == pytest.approx(quantification_limit(din(), alpha=0.05), rel=1e-12)
    assert quantification_limit(din()) < quantification_limit(din(), alpha=0.01)


@pytest.mark.parametrize("x", [[1.0, 2.0], [1.0, 1.0, 1.0]], ids=["two points", "one concentration"])
def test_no_line_through_too_little(x):
    with pytest.raises(InputError, match="three or more points at two or more"):
        fit_line(np.array(x), np.array(x))
