"""Dominant wavelength: what stays the same along a line from the white, and what has none."""

import numpy as np
import pytest
from helpers import finite
from hypothesis import given

from chroma.colour.dominant import dominant
from observers.human import STANDARD, observer

WHITE = np.array([0.3127, 0.3290])
EYE = observer("2")


def locus_xy(eye, wavelength_nm):
    XYZ = eye.responsivity[eye.wavelength_nm == wavelength_nm][0]
    return XYZ[:2] / XYZ.sum()


@pytest.mark.parametrize("key", STANDARD)
@pytest.mark.parametrize("wavelength_nm", [420, 460, 480, 500, 520, 550, 580, 600, 620, 640])
def test_a_colour_of_the_spectrum_is_its_own_dominant(key, wavelength_nm):
    eye = observer(key)
    found = dominant(locus_xy(eye, wavelength_nm), WHITE, eye)
    assert found.wavelength_nm == pytest.approx(wavelength_nm, abs=0.02)
    assert found.excitation_purity == pytest.approx(1, abs=1e-3)
    assert found.colorimetric_purity == pytest.approx(1, abs=1e-3)


@given(share=finite(0.001, 1), wavelength_nm=finite(440, 640))
def test_purity_grows_along_the_line_and_the_wavelength_stays(share, wavelength_nm):
    edge = locus_xy(EYE, round(wavelength_nm))
    full, part = dominant(edge, WHITE, EYE), dominant(WHITE + share * (edge - WHITE), WHITE, EYE)
    assert part.wavelength_nm == pytest.approx(full.wavelength_nm, abs=1e-6)
    assert part.excitation_purity == pytest.approx(share * full.excitation_purity, rel=1e-9)
    y = WHITE[1] + share * (edge[1] - WHITE[1])
    assert part.colorimetric_purity == pytest.approx(part.excitation_purity * edge[1] / y, rel=1e-3)


@pytest.mark.parametrize("key", ["2", "10"])
def test_a_line_through_a_point_of_the_locus_is_met(key):
    # the two sides beside the point must not both miss it by a rounding error
    eye, shares = observer(key), (1, 0.5, 0.3, 0.1, 0.01, -0.2)
    missed = [
        (wavelength_nm, share, white)
        for wavelength_nm in range(440, 641)
        for white in ((0.3127, 0.3290), (0.44757, 0.40745), (1 / 3, 1 / 3))
        for share in shares
        if not _is_met(np.array(white), locus_xy(eye, wavelength_nm), share, eye)
    ]
    assert missed == []


def _is_met(white, edge, share, eye):
    return np.isfinite(dominant(white + share * (edge - white), white, eye).wavelength_nm)


@given(share=finite(0.01, 0.9))
def test_a_purple_has_the_wavelength_of_what_it_neutralises(share):
    green = dominant(WHITE + 0.2 * (locus_xy(EYE, 520) - WHITE), WHITE, EYE)
    purple = dominant(WHITE - share * 0.2 * (locus_xy(EYE, 520) - WHITE), WHITE, EYE)
    assert purple.wavelength_nm == pytest.approx(-green.wavelength_nm, abs=1e-6)
    assert 0 < purple.excitation_purity < 1
    assert np.isnan(purple.colorimetric_purity)


def test_the_purple_line_has_purity_one():
    ends = locus_xy(EYE, 380), locus_xy(EYE, 699)
    found = dominant(0.5 * ends[0] + 0.5 * ends[1], WHITE, EYE)
    assert found.wavelength_nm < 0
    assert found.excitation_purity == pytest.approx(1, abs=1e-9)


def test_a_neutral_has_no_wavelength():
    near, far = np.array([[0.98e-6, 0], [1.02e-6, 0]])
    for xy in (WHITE, WHITE + near, WHITE - near[::-1]):
        found = dominant(xy, WHITE, EYE)
        assert np.isnan(found.wavelength_nm)
        assert (found.excitation_purity, found.colorimetric_purity) == (0, 0)
    assert np.isfinite(dominant(WHITE + far, WHITE, EYE).wavelength_nm)


def test_black_has_no_wavelength():
    found = dominant(np.full(2, np.nan), WHITE, EYE)
    assert np.isnan(found.wavelength_nm)


def test_a_white_outside_the_locus_has_no_meaning():
    found = dominant(np.array([0.85, 0.85]), np.array([0.8, 0.8]), EYE)
    assert np.isnan([found.wavelength_nm, found.excitation_purity, found.colorimetric_purity]).all()


def test_the_red_end_of_the_locus_does_not_run_back():
    # beyond 699 nm the chromaticity of the 1931 observer stands still, and its rounding runs to and fro
    found = dominant(locus_xy(EYE, 690), WHITE, EYE)
    assert 640 < found.wavelength_nm <= 699
