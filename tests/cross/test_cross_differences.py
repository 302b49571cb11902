"""Difference formulas against other programs on random pairs; everywhere the first colour is the reference."""

import colour
import numpy as np
import pytest
from coloraide.everything import ColorAll
from helpers import random_Lab, seeds
from hypothesis import given
from skimage.color import deltaE_cie76, deltaE_ciede94, deltaE_ciede2000, deltaE_cmc

from chroma.difference.ciede2000 import ciede2000
from chroma.difference.classic import cie94, cie1976, cmc, components
from chroma.difference.din99o import din99o

PAIRS = 400


def pairs(seed, count=PAIRS):
    """Far apart and near, in turn; no chroma below 1e-6, where hue has no meaning."""
    target, sample = random_Lab(seed, count), random_Lab(seed + 1, count)
    sample[1::2] = target[1::2] + 0.02 * (sample[1::2] - 50)
    return target, sample


def coloraide(target, sample, method, **factors):
    return np.array(
        [
            ColorAll("lab-d65", one.tolist()).delta_e(ColorAll("lab-d65", other.tolist()), method=method, **factors)
            for one, other in zip(target, sample, strict=True)
        ]
    )


@given(seed=seeds)
def test_ciede2000_as_two_other_programs_have_it(seed):
    target, sample = pairs(seed)
    got = ciede2000(target, sample)
    np.testing.assert_allclose(got, colour.difference.delta_E_CIE2000(target, sample), rtol=0, atol=1e-10)
    np.testing.assert_allclose(got, deltaE_ciede2000(target, sample), rtol=0, atol=1e-10)


def test_ciede2000_with_parametric_factors():
    target, sample = pairs(3)
    got = ciede2000(target, sample, kL=2.0, kC=1.3, kH=0.7)
    np.testing.assert_allclose(got, deltaE_ciede2000(target, sample, kL=2.0, kC=1.3, kH=0.7), rtol=0, atol=1e-10)
    textile = colour.difference.delta_E_CIE2000(target, sample, textiles=True)
    np.testing.assert_allclose(ciede2000(target, sample, kL=2.0), textile, rtol=0, atol=1e-10)


@pytest.mark.parametrize("chroma", [0.0, 1e-12, 1e-9, 1e-7])
def test_ciede2000_beside_a_grey(chroma):
    # where hue has no meaning, honest transcriptions differ by about 1e-6
    target, sample = pairs(4)
    target[:, 1:] *= chroma / np.hypot(target[:, 1], target[:, 2])[:, None]
    expected = colour.difference.delta_E_CIE2000(target, sample)
    np.testing.assert_allclose(ciede2000(target, sample), expected, rtol=0, atol=5e-6)
    np.testing.assert_allclose(ciede2000(target, sample), deltaE_ciede2000(target, sample), rtol=0, atol=5e-6)


@given(seed=seeds)
def test_cie94_of_both_kinds(seed):
    target, sample = pairs(seed)
    graphic = colour.difference.delta_E_CIE1994(target, sample)
    np.testing.assert_allclose(cie94(target, sample), graphic, rtol=0, atol=1e-9)
    np.testing.assert_allclose(cie94(target, sample), deltaE_ciede94(target, sample), rtol=0, atol=1e-9)
    textile = colour.difference.delta_E_CIE1994(target, sample, textiles=True)
    np.testing.assert_allclose(cie94(target, sample, kL=2, K1=0.048, K2=0.014), textile, rtol=0, atol=1e-9)


def test_cie94_with_parametric_factors():
    target, sample = pairs(5)
    got = cie94(target, sample, kL=2.0, kC=1.3, kH=0.7)
    np.testing.assert_allclose(got, deltaE_ciede94(target, sample, kL=2.0, kC=1.3, kH=0.7), rtol=0, atol=1e-9)


@given(seed=seeds)
def test_cmc_of_both_ratios(seed):
    target, sample = pairs(seed)
    for l_c in ((2.0, 1.0), (1.0, 1.0), (1.5, 0.8)):
        expected = colour.difference.delta_E_CMC(target, sample, l=l_c[0], c=l_c[1])
        np.testing.assert_allclose(cmc(target, sample, l=l_c[0], c=l_c[1]), expected, rtol=0, atol=1e-9)
        np.testing.assert_allclose(
            cmc(target, sample, l=l_c[0], c=l_c[1]), deltaE_cmc(target, sample, kL=l_c[0], kC=l_c[1]), rtol=0, atol=1e-9
        )


@given(seed=seeds)
def test_cie1976(seed):
    target, sample = pairs(seed)
    got = cie1976(target, sample)
    np.testing.assert_allclose(got, colour.difference.delta_E_CIE1976(target, sample), rtol=0, atol=1e-9)
    np.testing.assert_allclose(got, deltaE_cie76(target, sample), rtol=0, atol=1e-9)


@pytest.mark.parametrize(
    ("ours", "method", "factors"),
    [
        (cie1976, "76", {}),
        (cie94, "94", {}),
        (ciede2000, "2000", {}),
        (cmc, "cmc", {}),
    ],
    ids=["cie1976", "cie94", "ciede2000", "cmc"],
)
def test_every_formula_as_a_third_program_has_it(ours, method, factors):
    target, sample = pairs(6, 150)
    np.testing.assert_allclose(ours(target, sample), coloraide(target, sample, method, **factors), rtol=0, atol=1e-9)


def test_din99o_as_a_third_program_has_it():
    # that program puts 100 / ln 1.39 = 303.671 for the printed 303.67, which only lightness feels
    target, sample = pairs(6, 150)
    np.testing.assert_allclose(din99o(target, sample), coloraide(target, sample, "99o"), rtol=4e-6)
    sample[:, 0] = target[:, 0]
    np.testing.assert_allclose(din99o(target, sample), coloraide(target, sample, "99o"), rtol=0, atol=1e-9)


def test_hue_difference_as_written_with_angles():
    # CIE 15:2018, 8.2.3: dH = 2 sqrt(C1 C2) sin(dh / 2)
    target, sample = pairs(7)
    h1, h2 = (np.arctan2(Lab[:, 2], Lab[:, 1]) for Lab in (target, sample))
    C1, C2 = (np.hypot(Lab[:, 1], Lab[:, 2]) for Lab in (target, sample))
    turn = (h2 - h1 + np.pi) % (2 * np.pi) - np.pi
    np.testing.assert_allclose(components(target, sample)[:, 4], 2 * np.sqrt(C1 * C2) * np.sin(turn / 2), atol=1e-9)
