"""Metamerism: nothing for equal pairs, the index of a pair that goes apart, and pairs that do not qualify."""

import numpy as np
import pytest
from helpers import VISIBLE_NM, XYZs, one, seeds, simulated, smooth_transmittance
from hypothesis import given

from chroma.batches import check
from chroma.colour.spaces import Lab_from_XYZ
from chroma.colours import predict
from chroma.difference.classic import cie1976
from chroma.difference.metameric_index import special_index
from chroma.inconstancy import inconstancies, inconstancy
from chroma.metamerism import change, special_indices
from chroma.spectra import measured
from chroma.tolerance import Tolerance
from chroma.viewing import conditions

LAMPS = ("D65", "A", "FL11")
VIEW = conditions(LAMPS, "10")
WHITE = np.array([111.144, 100.0, 35.2])
TRUE = smooth_transmittance(VISIBLE_NM, seed=41, count=1, narrowest_nm=80)[0]


def metamer(strength):
    """Another spectrum of the same colour under D65: simulated, by a step that D65 weights do not see."""
    W = VIEW.weights(VISIBLE_NM).matrix[:, :3]
    step = np.sin(VISIBLE_NM / 23) * np.exp(-(((VISIBLE_NM - 560) / 90) ** 2))
    step -= W @ np.linalg.solve(W.T @ W, W.T @ step)
    return TRUE + strength * step / np.abs(step).max()


@given(target=XYZs, sample=XYZs, at=XYZs)
def test_a_pair_that_differs_by_a_factor_alone_is_no_metamer(target, sample, at):
    # the test lamp multiplies both by the same numbers: nothing is left after the correction
    assert special_index(target, target * at / 50, sample, sample * at / 50, WHITE) == pytest.approx(0, abs=1e-9)


@given(seed=seeds)
def test_a_perfect_match_needs_no_correction(seed):
    rng = np.random.default_rng(seed)
    ref, target, sample = rng.uniform(5, 80, (3, 3))
    expected = cie1976(Lab_from_XYZ(target, WHITE), Lab_from_XYZ(sample, WHITE))
    assert special_index(ref, target, ref, sample, WHITE) == pytest.approx(expected, rel=1e-12, abs=1e-12)


def test_metamers_match_under_the_first_lamp_and_part_under_the_others():
    pairs = measured(["same", "metamer"], VISIBLE_NM, np.stack([TRUE, metamer(0.05)]), "transmittance")
    checked = check(pairs, one(TRUE), Tolerance(dict.fromkeys(LAMPS, 1.0)), VIEW)
    assert checked.delta_e[:, 0].max() < 1e-9
    index, apart = special_indices(checked), change(checked)
    assert index.shape == apart.shape == (2, 2)
    np.testing.assert_allclose(index[0], 0, rtol=0, atol=1e-9)
    assert (index[1] > 0.3).all()
    np.testing.assert_allclose(apart, checked.delta_e[:, 1:] - checked.delta_e[:, :1], rtol=0, atol=1e-14)
    direct = cie1976(checked.target_Lab[1:], checked.Lab[1, 1:])
    np.testing.assert_allclose(index[1], direct, rtol=1e-6)


def test_a_pair_that_does_not_match_has_no_index():
    pairs = measured(["near", "far"], VISIBLE_NM, np.stack([TRUE**1.01, TRUE**1.5]), "transmittance")
    checked = check(pairs, one(TRUE), Tolerance(dict.fromkeys(LAMPS, 1.0)), VIEW)
    index = special_indices(checked)
    assert np.isfinite(index[0]).all()
    assert np.isnan(index[1]).all()
    # exactly at the limit still matches
    at = check(pairs, one(TRUE), Tolerance(dict.fromkeys(LAMPS, float(checked.delta_e[1, 0]))), VIEW)
    assert np.isfinite(special_indices(at)).all()


def test_inconstancy_is_told_for_each_further_lamp_against_the_first():
    colours = predict(simulated(["a", "b"]), VIEW)
    found, white = inconstancies(colours), colours.white100
    for lamp in (1, 2):
        expected = inconstancy(colours.XYZ100[:, 0], colours.XYZ100[:, lamp], white[0], white[lamp])
        np.testing.assert_allclose(found[:, lamp - 1], expected, rtol=1e-12)
    assert found.shape == (2, 2)
    assert inconstancies(predict(simulated(["a"]), conditions(("D65",), "10"))).shape == (1, 0)
    grey = predict(one(np.full(len(VISIBLE_NM), 0.3)), VIEW)  # looks the same under every lamp
    np.testing.assert_allclose(inconstancies(grey), 0, rtol=0, atol=1e-10)


def test_one_lamp_alone_has_no_index():
    checked = check(one(TRUE), one(TRUE), Tolerance({"D65": 1.0}), conditions(("D65",), "10"))
    assert special_indices(checked).shape == (1, 0)
    assert change(checked).shape == (1, 0)
