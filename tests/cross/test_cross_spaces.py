"""Colour spaces, adaptation and screen colours against other programs."""

import colour
import numpy as np
from coloraide.everything import ColorAll
from colorspacious import cspace_convert
from helpers import random_XYZ, seeds
from hypothesis import given
from skimage.color import xyz2lab, xyz2rgb

from chroma.colour.adaptation import adapted
from chroma.colour.screen import SRGB_WHITE100, decoded, encoded, linear_rgb
from chroma.colour.spaces import (
    Lab_from_LCh,
    Lab_from_XYZ,
    LCh_from_Lab,
    Luv_from_XYZ,
    XYZ_from_Lab,
    uv_prime,
    xyY_from_XYZ,
)
from chroma.inconstancy import corresponding, degree_of_adaptation, inconstancy

WHITES = np.array([[95.047, 100.0, 108.883], [109.85, 100.0, 35.585], [103.863, 100.0, 65.607]])


@given(seed=seeds)
def test_xyY(seed):
    XYZ = random_XYZ(seed, 200)
    np.testing.assert_allclose(xyY_from_XYZ(XYZ), colour.XYZ_to_xyY(XYZ), rtol=0, atol=1e-9)


@given(seed=seeds)
def test_lab_of_two_programs_and_back(seed):
    XYZ = random_XYZ(seed, 200)
    for white in WHITES:
        Lab = Lab_from_XYZ(XYZ, white)
        xy = colour.XYZ_to_xy(white)
        np.testing.assert_allclose(Lab, colour.XYZ_to_Lab(XYZ / 100, xy), rtol=0, atol=1e-9)
        np.testing.assert_allclose(XYZ_from_Lab(Lab, white), colour.Lab_to_XYZ(Lab, xy) * 100, rtol=0, atol=1e-9)
        space = {"name": "CIELab", "XYZ100_w": white}
        np.testing.assert_allclose(Lab, cspace_convert(XYZ, "XYZ100", space), rtol=0, atol=1e-9)


def test_lab_of_a_third_program_which_rounds_the_constants_of_the_dark_part():
    XYZ = random_XYZ(8, 300)
    expected = xyz2lab(XYZ / 100, illuminant="D65", observer="2")
    white = np.array([95.047, 100.0, 108.883])
    np.testing.assert_allclose(Lab_from_XYZ(XYZ, white), expected, rtol=0, atol=2e-3)


@given(seed=seeds)
def test_lch_and_back(seed):
    Lab = Lab_from_XYZ(random_XYZ(seed, 200), WHITES[0])
    LCh = LCh_from_Lab(Lab)
    np.testing.assert_allclose(LCh, colour.models.Lab_to_LCHab(Lab), rtol=0, atol=1e-9)
    np.testing.assert_allclose(Lab_from_LCh(LCh), colour.models.LCHab_to_Lab(LCh), rtol=0, atol=1e-9)


@given(seed=seeds)
def test_luv(seed):
    XYZ = random_XYZ(seed, 200)
    for white in WHITES:
        expected = colour.XYZ_to_Luv(XYZ / 100, colour.XYZ_to_xy(white))
        np.testing.assert_allclose(Luv_from_XYZ(XYZ, white), expected, rtol=0, atol=1e-9)


def test_uv_prime():
    XYZ = random_XYZ(9, 200)
    np.testing.assert_allclose(np.stack(uv_prime(XYZ), -1), colour.xy_to_Luv_uv(colour.XYZ_to_xy(XYZ)), atol=1e-12)


@given(seed=seeds)
def test_cat16(seed):
    XYZ = random_XYZ(seed, 100)
    for white in WHITES:
        expected = colour.adaptation.chromatic_adaptation_VonKries(XYZ, white, SRGB_WHITE100, transform="CAT16")
        np.testing.assert_allclose(adapted(XYZ, white, SRGB_WHITE100), expected, rtol=0, atol=1e-9)


def test_transfer_curves_on_either_side_of_their_join():
    light, code = np.linspace(0.002, 0.0045, 500), np.linspace(0.03, 0.05, 500)
    expected = colour.models.eotf_inverse_sRGB(light), colour.models.eotf_sRGB(code)
    np.testing.assert_allclose(encoded(light), expected[0], rtol=0, atol=1e-12)
    np.testing.assert_allclose(decoded(code), expected[1], rtol=0, atol=1e-12)


@given(seed=seeds)
def test_cmccat2000_at_any_two_luminances(seed):
    rng = np.random.default_rng(seed)
    XYZ, (LA, other) = random_XYZ(seed, 20), rng.uniform(1, 1000, 2)
    expected = colour.adaptation.chromatic_adaptation_CMCCAT2000(XYZ, WHITES[1], WHITES[0], LA, other)
    got = corresponding(XYZ, WHITES[1], WHITES[0], D=degree_of_adaptation(LA, other))
    np.testing.assert_allclose(got, expected, rtol=0, atol=1e-9)


def test_adaptation_is_never_more_than_complete_or_less_than_none():
    assert degree_of_adaptation(1.0, 1e6) == 1.0
    assert degree_of_adaptation(1e-12, 1e-12) == 0.0


def test_inconstancy_is_cmc_1_1_of_the_corresponding_colour():
    XYZ, other = random_XYZ(13, 50), random_XYZ(14, 50)
    seen = colour.adaptation.chromatic_adaptation_CMCCAT2000(other, WHITES[1], WHITES[0], 1e6, 1e6)
    one, two = (colour.XYZ_to_Lab(at / 100, colour.XYZ_to_xy(WHITES[0])) for at in (XYZ, seen))
    expected = colour.difference.delta_E_CMC(one, two, l=1, c=1)
    np.testing.assert_allclose(inconstancy(XYZ, other, WHITES[0], WHITES[1]), expected, rtol=0, atol=1e-9)


def test_screen_colours_as_the_program_that_derives_its_matrix():
    XYZ = random_XYZ(11, 150)
    expected = [ColorAll("xyz-d65", (one / 100).tolist()).convert("srgb").coords() for one in XYZ]
    np.testing.assert_allclose(encoded(linear_rgb(XYZ, SRGB_WHITE100)), expected, rtol=0, atol=1e-9)


def test_screen_colours_as_programs_that_take_the_printed_matrix():
    XYZ = random_XYZ(12, 300) * 0.7
    got = encoded(np.clip(linear_rgb(XYZ, SRGB_WHITE100), 0, 1))
    # the printed matrix has four decimals, which near black is up to 12.92 times as much in the code
    for expected in (
        colour.XYZ_to_sRGB(XYZ / 100),
        cspace_convert(XYZ, "XYZ100", "sRGB1"),
        xyz2rgb(XYZ / 100),
    ):
        np.testing.assert_allclose(got, np.clip(expected, 0, 1), rtol=0, atol=1.5e-3)
