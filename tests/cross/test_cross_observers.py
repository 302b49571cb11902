"""Grids, lamps and weights against colour-science."""

import colour
import numpy as np
import pytest
from colour import MultiSpectralDistributions, SpectralDistribution, SpectralShape
from colour.colorimetry import (
    adjust_tristimulus_weighting_factors_ASTME308,
    bandpass_correction_Stearns1988,
    sd_blackbody,
    sd_CIE_standard_illuminant_A,
    sd_single_led_Ohno2005,
    sd_to_XYZ_ASTME308,
    sd_to_XYZ_integration,
    tristimulus_weighting_factors_ASTME2022,
)
from helpers import seeds, smooth_transmittance
from hypothesis import example, given
from hypothesis import strategies as st

from observers.grid import resampling
from observers.human import observer
from observers.illuminants import blackbody, daylight, illuminant, led, names, power_at
from observers.weights import bandpass_correction, weights

FULL_NM = np.arange(360.0, 831.0)
CMFS = {
    "2": "CIE 1931 2 Degree Standard Observer",
    "10": "CIE 1964 10 Degree Standard Observer",
    "2-2015": "CIE 2015 2 Degree Standard Observer",
    "10-2015": "CIE 2015 10 Degree Standard Observer",
}
LAMPS = ("D65", "A", "FL11", "HP1", "LED-B3")


def theirs(values, wavelength_nm):
    return SpectralDistribution(values, wavelength_nm)


def lamp_of(spec):
    """Our lamp at 1 nm as their object, so that only the road from there on is compared."""
    return theirs(power_at(illuminant(spec), FULL_NM), FULL_NM)


def cmfs_of(key):
    """Their functions on 360–830 nm; those of 2015 begin at 390 nm, and there is nothing below."""
    own = colour.MSDS_CMFS[CMFS[key]]
    values = np.zeros((len(FULL_NM), 3))
    values[np.isin(FULL_NM, own.wavelengths)] = own.values[np.isin(own.wavelengths, FULL_NM)]
    return MultiSpectralDistributions(values, FULL_NM)


# --- lamps -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", [name for name in names() if name not in ("A", "E", "D65")])
def test_tabulated_lamps_between_their_points(name):
    # colour-science takes straight lines for all of them by default; CIE 167 says Sprague
    sd = colour.SDS_ILLUMINANTS[name].copy()
    expected = sd.interpolate(SpectralShape(380, 780, 1), interpolator=colour.SpragueInterpolator)
    got = power_at(illuminant(name), FULL_NM)
    # theirs starts at the table's first point (300 nm for daylight), and so does ours
    np.testing.assert_allclose(got[20:421], expected.values, rtol=0, atol=1e-9)


def test_d65_between_its_points_is_linear():
    expected = colour.SDS_ILLUMINANTS["D65"].copy().interpolate(SpectralShape(360, 780, 1))
    np.testing.assert_allclose(power_at(illuminant("D65"), FULL_NM)[:421], expected.values, rtol=0, atol=1e-9)


def test_illuminants_a_and_e():
    A = sd_CIE_standard_illuminant_A(SpectralShape(360, 830, 1))
    np.testing.assert_allclose(power_at(illuminant("A"), FULL_NM), A.values, rtol=1e-12)
    assert (power_at(illuminant("E"), FULL_NM) == 100).all()


@given(T=st.floats(4000, 25000))
@example(T=4000.0)
@example(T=6999.0)
@example(T=7000.0)
@example(T=7001.0)
@example(T=7340.0)
@example(T=25000.0)
def test_daylight_of_any_temperature(T):
    xy = colour.temperature.CCT_to_xy_CIE_D(T)
    expected = colour.sd_CIE_illuminant_D_series(xy, M1_M2_rounding=True)
    lamp = daylight(T)
    np.testing.assert_array_equal(lamp.wavelength_nm, expected.wavelengths)
    np.testing.assert_allclose(lamp.power, expected.values, rtol=0, atol=1e-9)


def test_daylight_between_its_points_is_linear():
    lamp = daylight(6000)
    at = power_at(lamp, FULL_NM)
    np.testing.assert_allclose(at, np.interp(FULL_NM, lamp.wavelength_nm, lamp.power), rtol=1e-12)


@given(T=st.floats(1000, 20000))
def test_blackbody_of_any_temperature(T):
    expected = sd_blackbody(T, SpectralShape(360, 830, 1), c2=1.4388e-2).values
    np.testing.assert_allclose(blackbody(T).power, 100 * expected / expected[200], rtol=1e-9)


@given(peak_nm=st.floats(380, 780), width_nm=st.floats(3, 200))
def test_led_of_any_width(peak_nm, width_nm):
    shape = SpectralShape(360, 830, 1)
    # their width is that of the Gaussian; ours is measured at half height, which is 0.92182 of it
    expected = sd_single_led_Ohno2005(peak_nm, width_nm / 0.9218231197, shape).values
    np.testing.assert_allclose(led(peak_nm, width_nm).power, 100 * expected, rtol=0, atol=1e-9)


# --- grids -----------------------------------------------------------------------------------------------------------


@given(seed=seeds, bands=st.integers(6, 40), step=st.sampled_from([1.0, 3.0, 5.0, 10.0, 20.0]))
def test_sprague_matrix(seed, bands, step):
    rng = np.random.default_rng(seed)
    grid = 400 + step * np.arange(bands)
    values, wanted = rng.uniform(0, 1, bands), np.sort(rng.uniform(grid[0], grid[-1], 30))
    expected = colour.SpragueInterpolator(grid, values)(wanted)
    np.testing.assert_allclose(resampling(grid, wanted, "sprague") @ values, expected, rtol=0, atol=1e-9)


def test_bandpass_correction_where_theirs_does_not_feed_on_itself():
    # colour-science 0.4.7 corrects in place, so that each band meets its left neighbour already corrected; the paper
    # takes what was measured. Where the first two bands are equal the first needs no correction, and both agree.
    grid = np.arange(400.0, 701.0, 10.0)
    values = np.random.default_rng(1).uniform(0, 1, len(grid))
    values[1] = values[0]
    ours = bandpass_correction(grid) @ values
    expected = bandpass_correction_Stearns1988(theirs(values.copy(), grid)).values
    np.testing.assert_allclose(ours[[0, 1, -1]], expected[[0, 1, -1]], rtol=0, atol=1e-12)
    # and every inner band is corrected as that one is
    matrix = bandpass_correction(grid)
    for band in range(2, len(grid) - 1):
        np.testing.assert_array_equal(matrix[band], np.roll(matrix[1], band - 1))


# --- weights ---------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("key", CMFS)
@pytest.mark.parametrize("spec", [*LAMPS, "daylight:5200K", "blackbody:3100K", "led:525nm/30nm"])
def test_responses_at_1_nm(key, spec):
    T = smooth_transmittance(FULL_NM, seed=3, count=3)
    W = weights(FULL_NM, [illuminant(spec)], observer(key))
    astm = weights(FULL_NM, [illuminant(spec)], observer(key), method="astm")
    np.testing.assert_allclose(astm.matrix, W.matrix, rtol=0, atol=1e-12)
    cmfs, lamp = cmfs_of(key), lamp_of(spec)
    for one, XYZ in zip(T, W.response(T)[:, 0], strict=True):
        np.testing.assert_allclose(XYZ, sd_to_XYZ_integration(theirs(one, FULL_NM), cmfs, lamp), rtol=0, atol=1e-9)


@pytest.mark.parametrize("name", names())
def test_every_named_illuminant_by_summation_at_1_nm(name):
    W = weights(FULL_NM, [illuminant(name)], observer("2"))
    expected = sd_to_XYZ_integration(theirs(np.ones(471), FULL_NM), cmfs_of("2"), lamp_of(name))
    np.testing.assert_allclose(W.white[0], expected, rtol=0, atol=1e-9)


@given(seed=seeds, step=st.sampled_from([2.0, 5.0, 10.0, 20.0]), spec=st.sampled_from(LAMPS))
def test_cie_weights_are_sprague_then_summation(seed, step, spec):
    grid = np.arange(360.0, 830.5, step)  # at 20 nm the last ten nanometres are held, as their extrapolation does
    sample = np.random.default_rng(seed).uniform(0, 1, len(grid))
    at_1_nm = theirs(sample, grid).align(SpectralShape(360, 830, 1), interpolator=colour.SpragueInterpolator)
    expected = sd_to_XYZ_integration(at_1_nm, cmfs_of("10"), lamp_of(spec))
    W = weights(grid, [illuminant(spec)], observer("10"))
    np.testing.assert_allclose(W.response(sample)[0], expected, rtol=0, atol=1e-9)


@pytest.mark.parametrize("key", ["2", "10"])
@pytest.mark.parametrize("spec", LAMPS)
@pytest.mark.parametrize("step", [5.0, 10.0, 20.0])
def test_astm_weights_over_the_full_table(key, spec, step):
    last = 820 if step == 20 else 830
    grid = np.arange(360.0, last + 1, step)
    expected = tristimulus_weighting_factors_ASTME2022(cmfs_of(key), lamp_of(spec), SpectralShape(360, last, step))
    W = weights(grid, [illuminant(spec)], observer(key), method="astm")
    if step == 20:
        # E2022's table ends at 820; what lies between there and 830 is held at the last band here and left out there
        np.testing.assert_allclose(W.matrix[:-1], expected[:-1], rtol=0, atol=1e-6)
        np.testing.assert_allclose(W.matrix[-1], expected[-1], rtol=0, atol=1e-4)
    else:
        np.testing.assert_allclose(W.matrix, expected, rtol=0, atol=1e-9)


@pytest.mark.parametrize("step", [5.0, 10.0, 20.0])
@pytest.mark.parametrize(("low", "high"), [(400.0, 700.0), (380.0, 780.0), (380.0, 740.0)])
def test_astm_weights_of_missing_ends(step, low, high):
    last = 820 if step == 20 else 830
    shape = SpectralShape(360, last, step)
    full = tristimulus_weighting_factors_ASTME2022(cmfs_of("2"), lamp_of("D65"), shape)
    expected = adjust_tristimulus_weighting_factors_ASTME308(full, shape, SpectralShape(low, high, step))
    got = weights(np.arange(low, high + 1, step), [illuminant("D65")], observer("2"), method="astm").matrix
    np.testing.assert_allclose(got, expected, rtol=0, atol=1e-6 if step == 20 else 1e-9)


@given(seed=seeds, spec=st.sampled_from(LAMPS))
def test_astm_responses_of_random_spectra_at_10_nm(seed, spec):
    grid = np.arange(360.0, 831.0, 10.0)
    sample = np.random.default_rng(seed).uniform(0, 1, len(grid))
    # the practice range 360-780 of E308 leaves the weights of 790-830 out; without it the definitions are equal
    expected = sd_to_XYZ_ASTME308(theirs(sample, grid), cmfs_of("2"), lamp_of(spec), use_practice_range=False)
    W = weights(grid, [illuminant(spec)], observer("2"), method="astm")
    np.testing.assert_allclose(W.response(sample)[0], expected, rtol=0, atol=1e-9)


def test_astm_responses_of_random_spectra_at_5_nm():
    # colour-science by default drops every second 5 nm band and takes the 10 nm weights; told not to, it agrees
    grid = np.arange(360.0, 831.0, 5.0)
    for sample in np.random.default_rng(5).uniform(0, 1, (5, len(grid))):
        expected = sd_to_XYZ_ASTME308(
            theirs(sample, grid), cmfs_of("2"), lamp_of("D65"), use_practice_range=False, mi_5nm_omission_method=False
        )
        got = weights(grid, [illuminant("D65")], observer("2"), method="astm").response(sample)[0]
        np.testing.assert_allclose(got, expected, rtol=0, atol=1e-9)
