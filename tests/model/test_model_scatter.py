"""What replicates say about a colour: propagation against brute force. All data here is simulated."""

import numpy as np
import pytest
from helpers import VISIBLE_NM, random_Lab, replicated, smooth_transmittance

from chroma.batches import check
from chroma.colour.spaces import Lab_from_XYZ
from chroma.colours import predict
from chroma.difference.classic import cie1976, components
from chroma.difference.formulas import FORMULAS, Formula
from chroma.scatter import Spread, carried, of_difference, of_distance, spread
from chroma.spectra import averaged, joined, measured, standard_uncertainty
from chroma.tolerance import Tolerance
from chroma.viewing import conditions

LAMPS = ("D65", "A", "FL11")
VIEW = conditions(LAMPS, "10")
TRUE, OTHER = smooth_transmittance(VISIBLE_NM, seed=21, count=2, narrowest_nm=80)
SAMPLE = TRUE**1.08  # a little stronger
NOISE = 0.002


def Lab_of(T):
    W = VIEW.weights(VISIBLE_NM)
    return Lab_from_XYZ(W.response(T), W.white)


def read(name, true, readings, seed):
    return replicated(name, true, VISIBLE_NM, readings=readings, noise=NOISE, rng=np.random.default_rng(seed))


def brute(true, readings, seed, runs=20_000):
    """(runs, L, 3) L*a*b* of means of so many readings."""
    noise = np.random.default_rng(seed).normal(0, NOISE / np.sqrt(readings), (runs, len(VISIBLE_NM)))
    return Lab_of(true + noise)


def test_uncertainty_of_colours_is_that_of_brute_force():
    colours = predict(read("a", TRUE, 300, 1), VIEW)
    expected = brute(TRUE, 300, 2).std(axis=0)
    np.testing.assert_allclose(colours.u_Lab[0], expected, rtol=0.12)  # 299 degrees of freedom: 4 % each, thrice


@pytest.mark.parametrize("name", FORMULAS)
def test_uncertainty_of_a_difference_is_that_of_brute_force(name):
    readings = 400
    tolerance = Tolerance(dict.fromkeys(LAMPS, 1.0), Formula(name))
    checked = check(read("b", SAMPLE, readings, 3), read("t", TRUE, readings, 4), tolerance, VIEW)
    target, sample = brute(TRUE, readings, 5), brute(SAMPLE, readings, 6)
    # far from the target against its own noise, where a difference is as good as straight
    drawn = tolerance.formula.difference(target, sample)
    assert (drawn.mean(axis=0) > 8 * drawn.std(axis=0)).all()
    k = 2.0034  # Student's t for 798 degrees of freedom, at 95.45 %
    np.testing.assert_allclose(checked.expanded[0] / k, drawn.std(axis=0), rtol=0.07)
    if name == "cie1976":
        np.testing.assert_allclose(checked.expanded_parts[0] / k, components(target, sample).std(axis=0), rtol=0.07)


def test_replicates_of_the_target_count_in_their_own_share():
    sure, unsure = (
        check(
            joined_means([("b", SAMPLE, 50, 7)]),
            read("t", TRUE, readings, 8),
            Tolerance(dict.fromkeys(LAMPS, 1.0)),
            VIEW,
        )
        for readings in (2000, 2)
    )
    # the target's mean of 2 against that of 50: √(1/50 + 1/2) to √(1/50 + 1/2000)
    ratio = np.sqrt((1 / 50 + 1 / 2) / (1 / 50 + 1 / 2000))
    np.testing.assert_allclose(unsure.expanded / sure.expanded, ratio, rtol=0.25)


def joined_means(samples):
    """Means of several simulated samples, each read its own number of times."""
    names, values = [], []
    for name, true, readings, seed in samples:
        names += [name] * readings
        values.append(true + np.random.default_rng(seed).normal(0, NOISE, (readings, len(VISIBLE_NM))))
    return averaged(measured(names, VISIBLE_NM, np.vstack(values), "transmittance"))


def test_pooled_scatter_counts_its_degrees_of_freedom():
    mean = joined_means([("a", TRUE, 3, 1), ("b", OTHER, 1, 2), ("c", SAMPLE, 5, 3)])
    W = VIEW.weights(VISIBLE_NM)
    found = spread(mean, W.response(mean.values), W)
    assert found.freedom == 2 + 4
    np.testing.assert_array_equal(found.readings, [3, 1, 5])
    assert found.covariance.shape == (3, 3, 3)
    np.testing.assert_allclose(found.covariance, np.swapaxes(found.covariance, 1, 2), atol=1e-18)
    assert (np.linalg.eigvalsh(found.covariance) > 0).all()


def test_pooled_covariance_is_the_noise_carried_through_the_weights():
    # 4000 readings of one sample: the covariance in L*a*b* is J W' W J' of white noise
    mean = read("a", TRUE, 4000, 9)
    W = VIEW.weights(VISIBLE_NM)
    found = spread(mean, W.response(mean.values), W).covariance
    drawn = Lab_of(TRUE + np.random.default_rng(10).normal(0, NOISE, (20_000, len(VISIBLE_NM))))
    expected = np.stack([np.cov(drawn[:, lamp].T) for lamp in range(3)])
    scale = np.sqrt(np.einsum("lii,ljj->lij", expected, expected))
    np.testing.assert_allclose(found / scale, expected / scale, rtol=0, atol=0.06)


def test_without_replicates_there_is_no_freedom():
    W = VIEW.weights(VISIBLE_NM)
    single = measured(["a", "b"], VISIBLE_NM, np.stack([TRUE, OTHER]), "transmittance")
    found = spread(single, W.response(single.values), W)
    assert found.freedom == 0
    assert (found.covariance == 0).all()
    np.testing.assert_array_equal(found.readings, 1)


def test_scatter_of_both_tables_is_pooled_by_their_freedom():
    one = Spread(np.full((1, 3, 3), 4.0), 6, np.array([2.0, 4.0]))
    target = Spread(np.full((1, 3, 3), 1.0), 3, np.array([4.0]))
    covariance, freedom = of_difference(target, one)
    assert freedom == 9
    pooled = (6 * 4.0 + 3 * 1.0) / 9
    np.testing.assert_allclose(covariance[:, 0, 0, 0], [pooled * (1 / 2 + 1 / 4), pooled * (1 / 4 + 1 / 4)])
    nothing = Spread(np.zeros((1, 3, 3)), 0, np.ones(1))
    assert of_difference(nothing, nothing)[1] == 0


def test_uncertainty_is_carried_by_the_slopes_of_any_function():
    Lab = random_Lab(1, 10)
    root = np.random.default_rng(2).normal(size=(10, 3, 3))
    covariance = root @ np.swapaxes(root, 1, 2)
    slopes = np.array([2.0, -1.0, 0.5])
    expected = np.sqrt(np.einsum("i,nij,j->n", slopes, covariance, slopes))
    np.testing.assert_allclose(carried(lambda at: at @ slopes, Lab, covariance), expected, rtol=1e-6)
    both = carried(lambda at: np.stack([at @ slopes, at[..., 0]], axis=-1), Lab, covariance)
    np.testing.assert_allclose(both, np.stack([expected, np.sqrt(covariance[:, 0, 0])], axis=-1), rtol=1e-6)


def test_uncertainty_of_a_curved_function_takes_the_slope_in_the_middle():
    Lab = np.array([30.0, 5.0, 2.0])
    got = carried(lambda at: at[..., 0] ** 2, Lab, np.eye(3) * 0.01)
    assert got == pytest.approx(2 * 30 * 0.1, rel=1e-9)


def test_at_the_target_itself_a_distance_grows_with_each_axis():
    # there it has no slope, and a plain difference quotient would say nothing at all
    target = np.array([50.0, 20.0, 10.0])
    covariance = np.diag([0.01, 0.04, 0.09])
    assert carried(lambda Lab: cie1976(target, Lab), target, covariance) == pytest.approx(0, abs=1e-9)
    at_target = of_distance(lambda Lab: cie1976(target, Lab), target, covariance, target)
    assert at_target == pytest.approx(np.sqrt(0.01 + 0.04 + 0.09), rel=1e-6)


@pytest.mark.parametrize(("far", "expected"), [(0.98e-3, np.sqrt(0.14)), (1.02e-3, 0.1)])
def test_a_difference_below_a_thousandth_counts_as_at_the_target(far, expected):
    target = np.array([50.0, 20.0, 10.0])
    covariance = np.diag([0.01, 0.04, 0.09])
    got = of_distance(lambda Lab: cie1976(target, Lab), target + far * np.eye(3)[0], covariance, target)
    assert got == pytest.approx(expected, rel=0.01)


def test_scatter_measured_as_absorbance_gives_the_same_colour_uncertainty():
    rng = np.random.default_rng(12)
    T = TRUE + rng.normal(0, 2e-4, (100, len(VISIBLE_NM)))
    as_T = averaged(measured(["a"] * 100, VISIBLE_NM, T, "transmittance"))
    as_A = averaged(measured(["a"] * 100, VISIBLE_NM, -np.log10(T), "absorbance"))
    np.testing.assert_allclose(predict(as_A, VIEW).u_Lab, predict(as_T, VIEW).u_Lab, rtol=0.02)
    assert not np.allclose(standard_uncertainty(as_A), standard_uncertainty(as_T))


def test_joined_readings_are_pooled_like_those_of_one_file():
    T = TRUE + np.random.default_rng(13).normal(0, NOISE, (4, len(VISIBLE_NM)))
    parts = [measured([f"a#{i}"], VISIBLE_NM, T[i : i + 1], "transmittance") for i in range(4)]
    whole = measured(["a"] * 4, VISIBLE_NM, T, "transmittance")
    one, other = predict(averaged(joined(parts)), VIEW), predict(averaged(whole), VIEW)
    np.testing.assert_allclose(one.u_Lab, other.u_Lab, rtol=1e-12)
