"""Screen colours: what cannot be shown moves to the same hue and lightness inside the gamut."""

import numpy as np
import pytest
from helpers import finite, seeds
from hypothesis import given

from chroma.colour.adaptation import adapted
from chroma.colour.screen import (
    RGB_FROM_XYZ,
    SRGB_WHITE100,
    XYZ_FROM_RGB,
    decoded,
    encoded,
    hex_codes,
    in_gamut,
    linear_rgb,
    nearest_linear_rgb,
    spectrum_rgb,
)
from chroma.colour.spaces import Lab_from_XYZ, LCh_from_Lab, XYZ_from_Lab


def LCh_of(linear1):
    return LCh_from_Lab(Lab_from_XYZ(linear1 @ XYZ_FROM_RGB.T * 100, SRGB_WHITE100))


def linear_of_Lab(Lab):
    return XYZ_from_Lab(Lab, SRGB_WHITE100) @ RGB_FROM_XYZ.T / 100


def colours(seed, count=60):
    """Real and unreal colours, most of them beyond a screen."""
    rng = np.random.default_rng(seed)
    return linear_of_Lab(np.column_stack([rng.uniform(3, 97, count), rng.uniform(-120, 120, (count, 2))]))


@given(seed=seeds)
def test_the_nearest_colour_lies_inside_and_keeps_hue_and_lightness(seed):
    linear = colours(seed)
    nearest = nearest_linear_rgb(linear)
    assert in_gamut(nearest).all()
    assert (nearest >= 0).all()
    assert (nearest <= 1).all()
    before, after = LCh_of(linear), LCh_of(nearest)
    np.testing.assert_allclose(after[:, 0], before[:, 0], rtol=0, atol=1e-3)
    chromatic = after[:, 1] > 1
    turn = (after[chromatic, 2] - before[chromatic, 2] + 180) % 360 - 180
    np.testing.assert_allclose(turn, 0, rtol=0, atol=0.1)
    assert (after[:, 1] <= before[:, 1] + 1e-3).all()


@given(seed=seeds)
def test_the_nearest_of_the_nearest_is_itself(seed):
    once = nearest_linear_rgb(colours(seed))
    np.testing.assert_array_equal(nearest_linear_rgb(once), once)


@given(seed=seeds)
def test_colours_inside_come_back_unchanged(seed):
    inside = np.random.default_rng(seed).uniform(0, 1, (20, 3))
    np.testing.assert_array_equal(nearest_linear_rgb(inside), inside)


@given(seed=seeds)
def test_no_larger_chroma_could_be_shown(seed):
    linear = colours(seed)
    outside = ~in_gamut(linear)
    L, C, h = LCh_of(nearest_linear_rgb(linear[outside])).T
    further = np.stack([L, (C + 0.05) * np.cos(np.radians(h)), (C + 0.05) * np.sin(np.radians(h))], axis=-1)
    assert not in_gamut(linear_of_Lab(further))[C > 1].any()


@pytest.mark.parametrize(("L", "code"), [(-5.0, "#000000"), (0.0, "#000000"), (100.0, "#ffffff"), (130.0, "#ffffff")])
def test_lightness_beyond_black_and_white_is_held_there(L, code):
    linear = linear_of_Lab(np.array([[L, 30.0, -20.0]]))
    assert hex_codes(nearest_linear_rgb(linear)) == [code]


def test_shapes_and_inputs_stay():
    linear = colours(3, 24).reshape(2, 4, 3, 3)
    before = linear.copy()
    nearest = nearest_linear_rgb(linear)
    assert nearest.shape == linear.shape
    np.testing.assert_array_equal(linear, before)
    np.testing.assert_allclose(nearest_linear_rgb(linear[1, 2, 0]), nearest[1, 2, 0], rtol=0, atol=1e-12)


@given(code=finite(-1.2, 1.2))
def test_encoding_is_odd_and_undone_by_decoding(code):
    assert encoded(decoded(np.float64(code))) == pytest.approx(code, rel=0, abs=1e-7)
    assert decoded(np.float64(-code)) == -decoded(np.float64(code))
    assert encoded(np.float64(-code)) == -encoded(np.float64(code))


def test_the_two_parts_of_the_transfer_curve_meet():
    # the standard's rounded constants leave a step of 3e-8 in the code and 2.3e-9 in the light, and no more
    eps = 1e-12
    low, high = encoded(np.array([0.0031308 - eps, 0.0031308 + eps]))
    assert abs(high - low) < 1e-7
    low, high = decoded(np.array([0.04045 - eps, 0.04045 + eps]))
    assert abs(high - low) < 1e-8


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        (0.5, True),
        (-0.98e-6, True),
        (-1.02e-6, False),
        (1 + 0.98e-6, True),
        (1 + 1.02e-6, False),
    ],
)
def test_gamut_within_a_millionth(value, expected):
    for channel in range(3):
        linear = np.full(3, 0.5)
        linear[channel] = value
        assert bool(in_gamut(linear)) is expected


@given(seed=seeds)
def test_the_white_of_any_lamp_is_the_white_of_the_screen(seed):
    white = np.random.default_rng(seed).uniform(30, 120, 3)
    np.testing.assert_allclose(linear_rgb(white, white), 1, rtol=0, atol=1e-12)
    np.testing.assert_allclose(adapted(white, white, SRGB_WHITE100), SRGB_WHITE100, rtol=0, atol=1e-10)


def test_hex_codes_are_clipped():
    linear = np.array([[0, 0, 0], [1, 1, 1], [2, -1, 0.5]])
    assert hex_codes(linear) == ["#000000", "#ffffff", "#ff00bc"]


def test_the_spectrum_on_a_screen_runs_from_blue_by_green_to_red():
    codes = spectrum_rgb(np.array([300.0, 450.0, 530.0, 640.0, 900.0]))
    np.testing.assert_array_equal(codes[1:4].argmax(axis=1), [2, 1, 0])
    np.testing.assert_allclose(codes[1:4].max(axis=1), 1, rtol=0, atol=1e-12)
    assert (codes[[0, 4]] == 0).all()
    everywhere = spectrum_rgb(np.arange(350.0, 851.0))
    assert everywhere.min() >= 0
    assert everywhere.max() <= 1 + 1e-12
