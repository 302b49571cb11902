"""Colour spaces: inverses, greys, black, and the join near black."""

import numpy as np
import pytest
from helpers import Labs, XYZs, finite
from hypothesis import assume, example, given

from chroma.colour.adaptation import adapted
from chroma.colour.spaces import (
    DELTA,
    Lab_from_LCh,
    Lab_from_XYZ,
    Lab_jacobian,
    LCh_from_Lab,
    Luv_from_XYZ,
    XYZ_from_Lab,
    uv_prime,
    xyY_from_XYZ,
)

WHITE = np.array([95.047, 100.0, 108.883])
OTHER = np.array([109.85, 100.0, 35.585])
BLACK = np.zeros(3)


@given(XYZ=XYZs)
def test_lab_and_back(XYZ):
    np.testing.assert_allclose(XYZ_from_Lab(Lab_from_XYZ(XYZ, WHITE), WHITE), XYZ, rtol=1e-12)


@given(Lab=Labs)
def test_lch_and_back(Lab):
    LCh = LCh_from_Lab(Lab)
    assert 0 <= LCh[2] <= 360  # a hue below zero by less than rounding comes out as 360
    np.testing.assert_allclose(Lab_from_LCh(LCh), Lab, rtol=0, atol=1e-10)


@given(share=finite(0, 1.2))
def test_greys_have_no_chroma_whatever_the_white(share):
    for white in (WHITE, OTHER):
        np.testing.assert_allclose(Lab_from_XYZ(share * white, white)[1:], 0, rtol=0, atol=1e-12)
        np.testing.assert_allclose(Luv_from_XYZ(share * white, white)[1:], 0, rtol=0, atol=1e-11)


def test_the_cube_root_and_the_line_meet_with_one_slope():
    at = DELTA**3 * 100
    around = np.array([at - 1e-7, at, at + 1e-7])
    L = Lab_from_XYZ(np.repeat(around[:, None], 3, axis=1), np.full(3, 100.0))[:, 0]
    assert L[1] == pytest.approx(8.0, abs=1e-12)  # 216/24389 of white, of which L* is 8
    np.testing.assert_allclose(np.diff(L), 9.0329629629 * 1e-7, rtol=1e-5)  # 24389/2700 L* a unit of Y


@given(XYZ=XYZs)
@example(XYZ=np.array([0.65, 0.7, 0.75]))
@example(XYZ=np.array([0.8, 0.87, 0.9]))
@example(XYZ=np.array([0.88, 0.9, 1.0]))
def test_slopes_of_lab_are_those_of_small_steps(XYZ):
    assume(np.abs(XYZ / WHITE - DELTA**3).min() > 1e-4)  # away from the join, on either side of it
    step = 1e-6
    moved = [Lab_from_XYZ(XYZ + axis, WHITE) - Lab_from_XYZ(XYZ - axis, WHITE) for axis in np.eye(3) * step]
    np.testing.assert_allclose(Lab_jacobian(XYZ, WHITE), np.stack(moved, axis=-1) / (2 * step), rtol=1e-5, atol=1e-6)


@pytest.mark.parametrize("Y", [0.0, 1e-9, 0.1, 0.8, 0.88564, 0.88566, 0.9])
def test_dark_colours_come_back(Y):
    XYZ = np.array([Y, Y, Y * 1.1])
    np.testing.assert_allclose(XYZ_from_Lab(Lab_from_XYZ(XYZ, WHITE), WHITE), XYZ, rtol=1e-10, atol=1e-15)


def test_black():
    np.testing.assert_allclose(Lab_from_XYZ(BLACK, WHITE), 0, rtol=0, atol=1e-14)
    np.testing.assert_allclose(Luv_from_XYZ(BLACK, WHITE), 0, rtol=0, atol=1e-14)
    xyY = xyY_from_XYZ(np.array([BLACK, WHITE]))
    assert np.isnan(xyY[0, :2]).all()
    assert xyY[0, 2] == 0
    assert np.isfinite(xyY[1]).all()
    assert np.isnan(uv_prime(BLACK)).all()


def test_hue_angles_of_the_four_axes():
    Lab = np.array([[50.0, 10, 0], [50, 0, 10], [50, -10, 0], [50, 0, -10], [50, 0, 0]])
    np.testing.assert_allclose(LCh_from_Lab(Lab)[:, 2], [0, 90, 180, 270, 0], rtol=0, atol=1e-12)
    np.testing.assert_allclose(LCh_from_Lab(Lab)[:, 1], [10, 10, 10, 10, 0], rtol=0, atol=1e-12)


@given(XYZ=XYZs)
def test_adaptation_and_back_and_to_the_same_white(XYZ):
    there = adapted(XYZ, WHITE, OTHER)
    np.testing.assert_allclose(adapted(there, OTHER, WHITE), XYZ, rtol=0, atol=1e-10)
    np.testing.assert_allclose(adapted(XYZ, WHITE, WHITE), XYZ, rtol=0, atol=1e-10)
    np.testing.assert_allclose(adapted(WHITE * XYZ[1], WHITE, OTHER), OTHER * XYZ[1], rtol=1e-12)


@pytest.mark.parametrize(
    "function",
    [
        lambda XYZ: Lab_from_XYZ(XYZ, WHITE),
        lambda XYZ: XYZ_from_Lab(XYZ, WHITE),
        lambda XYZ: Luv_from_XYZ(XYZ, WHITE),
        lambda XYZ: adapted(XYZ, WHITE, OTHER),
        xyY_from_XYZ,
        LCh_from_Lab,
        Lab_from_LCh,
    ],
    ids=["Lab", "XYZ", "Luv", "adapted", "xyY", "LCh", "Lab of LCh"],
)
def test_shapes_broadcast_and_inputs_stay(function):
    XYZ = np.random.default_rng(1).uniform(1, 90, (2, 4, 3))
    before = XYZ.copy()
    got = function(XYZ)
    assert got.shape == XYZ.shape
    np.testing.assert_array_equal(XYZ, before)
    np.testing.assert_allclose(got[1, 2], function(XYZ[1, 2]), rtol=0, atol=1e-12)


def test_a_white_for_each_lamp_broadcasts():
    XYZ = np.random.default_rng(1).uniform(1, 90, (5, 2, 3))
    both = Lab_from_XYZ(XYZ, np.stack([WHITE, OTHER]))
    np.testing.assert_allclose(both[:, 1], Lab_from_XYZ(XYZ[:, 1], OTHER), rtol=0, atol=1e-12)


def test_a_hue_a_rounding_error_below_zero_is_zero():
    assert LCh_from_Lab(np.array([50.0, 1.0, -1e-17]))[2] == 0.0
