"""Relative strength, and Kubelka and Munk's K/S, against values worked out by hand."""

import numpy as np
import pytest
from matching_world import NM, at, stock_of

from chroma.dye.solution import transmittance
from chroma.strength import kubelka_munk, relative_strength
from observers.errors import InputError


@pytest.mark.parametrize(
    ("R", "K_over_S"),
    [(1.0, 0.0), (0.5, 0.25), (0.25, 1.125), (0.2, 1.6), (0.1, 4.05), (0.01, 49.005), (1.1, 0.0)],
)
def test_kubelka_munk_by_hand(R, K_over_S):
    # (1 - R)²/(2R): 0.25/1, 0.5625/0.5, 0.64/0.4, 0.81/0.2, 0.9801/0.02; brighter than the white counts as white
    assert kubelka_munk(np.array([R]))[0] == pytest.approx(K_over_S, rel=1e-12, abs=1e-15)


@pytest.mark.parametrize("share", [0.8, 1.0, 1.25])
def test_a_weaker_or_stronger_solution_is_so_by_its_dye(share):
    stock = stock_of(("blue", "yellow"))
    c = at({"blue": 0.006, "yellow": 0.004}, stock)
    target, batch = transmittance(stock, c, 10.0), transmittance(stock, c * share, 10.0)
    found = relative_strength(target, batch, NM)
    assert found.peak_nm == NM[np.argmax(c @ stock.absorptivity)]
    assert found.at_peak == pytest.approx(100 * share)
    assert found.summed == pytest.approx(100 * share)


def test_peak_and_sum_differ_when_the_shade_does():
    stock = stock_of(("blue", "yellow"))
    target = transmittance(stock, at({"blue": 0.006, "yellow": 0.004}, stock), 10.0)
    batch = transmittance(stock, at({"blue": 0.006, "yellow": 0.002}, stock), 10.0)
    found = relative_strength(target, batch, NM)
    assert found.at_peak == pytest.approx(100, abs=0.5)
    assert found.summed < 95


def test_sums_by_hand_for_each_quantity():
    nm = np.array([450.0, 500.0, 600.0])  # uneven: trapezia of 50 and 100 nm
    A, twice = np.array([0.2, 0.6, 0.4]), np.array([0.3, 0.9, 0.2])
    # (0.25·50 → 0.4·50 + 0.5·100 = 70) against (0.6·50 + 0.55·100 = 85)
    for target, batch, quantity in ((A, twice, "absorbance"), (10**-A, 10**-twice, "transmittance")):
        found = relative_strength(target, batch, nm, quantity)
        assert found.at_peak == pytest.approx(150)
        assert found.summed == pytest.approx(100 * 85 / 70)
    # K/S of 0.5, 0.2, 0.5 is 0.25, 1.6, 0.25; of 0.5, 0.1, 0.5 it is 0.25, 4.05, 0.25
    found = relative_strength(np.array([0.5, 0.2, 0.5]), np.array([0.5, 0.1, 0.5]), nm, "reflectance")
    assert found.at_peak == pytest.approx(100 * 4.05 / 1.6)
    assert found.summed == pytest.approx(100 * (2.15 * 50 + 2.15 * 100) / (0.925 * 50 + 0.925 * 100))


def test_only_what_is_seen_is_summed():
    nm = np.arange(350.0, 801.0, 10.0)
    target, batch = np.full_like(nm, 0.5), np.full_like(nm, 0.5)
    batch[(nm < 400) | (nm > 700)] = 2.5
    assert relative_strength(target, batch, nm, "absorbance").summed == pytest.approx(100)


def test_a_pale_target_has_a_strength_too():
    pale = np.full(31, 0.002)
    assert relative_strength(pale, 2 * pale, np.arange(400.0, 701.0, 10.0), "absorbance").at_peak == pytest.approx(200)


def test_many_batches_at_once():
    target = np.full(31, 0.5)
    found = relative_strength(target, np.outer([0.5, 1.0, 2.0], target), np.arange(400.0, 701.0, 10.0), "absorbance")
    np.testing.assert_allclose(found.at_peak, [50, 100, 200])
    np.testing.assert_allclose(found.summed, [50, 100, 200])


HALF = np.full_like(NM, 0.5)


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ((np.ones_like(NM), HALF, NM), "the target has no colour: its largest absorbance is 0"),
        ((np.ones_like(NM), HALF, NM, "reflectance"), "the target has no colour: its largest K/S is 0"),
        ((HALF, 0 * HALF, NM, "reflectance"), "a reflectance of 0 has no K/S: it must be positive"),
        ((HALF, HALF - 0.51, NM, "reflectance"), "a reflectance of -0.01 has no K/S"),
        ((HALF, HALF, NM, "counts"), "counts has no strength"),
        ((HALF, HALF[:-1], NM), r"target \(81,\) and batch \(80,\) on \(81,\) wavelengths"),
        ((HALF[:3], HALF[:3], NM[:3]), "fewer than two bands in 400–700 nm"),
    ],
    ids=["clear", "white", "black", "below black", "counts", "shapes", "no bands"],
)
def test_what_has_no_strength_is_refused(arguments, message):
    with pytest.raises(InputError, match=message):
        relative_strength(*arguments)
