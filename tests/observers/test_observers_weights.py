"""Weights: a clear cell is white, order and scale never matter, ends and gaps, accuracy on smooth bands."""

import numpy as np
import pytest
from helpers import finite, seeds, smooth_transmittance
from hypothesis import given
from hypothesis import strategies as st

from chroma.colour.spaces import Lab_from_XYZ
from observers.errors import InputError
from observers.human import STANDARD, observer
from observers.illuminants import illuminant, measured_lamp, names
from observers.weights import bandpass_correction, weights

FULL_NM = np.arange(360.0, 831.0)
VISIBLE_NM = np.arange(380.0, 781.0, 10.0)
UNEVEN_NM = np.concatenate([np.arange(380.0, 500, 5), np.arange(500.0, 620, 12), np.arange(620.0, 785, 15)])
GRIDS = {
    "1 nm": FULL_NM,
    "5 nm": np.arange(380.0, 781.0, 5.0),
    "10 nm": VISIBLE_NM,
    "20 nm": np.arange(380.0, 781.0, 20.0),
    "uneven": UNEVEN_NM,
    "0.5 nm": np.arange(380.0, 780.25, 0.5),
    "0.3 nm": 380 + 0.3 * np.arange(1334),
    "10 nm, 400–700": np.arange(400.0, 701.0, 10.0),
    "7 nm from 203 to 1099": np.arange(203.0, 1100.0, 7.0),
}
EVEN_GRIDS = {name: grid for name, grid in GRIDS.items() if name != "uneven"}
LAMPS = ("D65", "A", "FL11", "LED-B3", "HP1")
FIVE = tuple(illuminant(name) for name in LAMPS)
EYES = {key: observer(key) for key in STANDARD}
ALL_LAMPS = [*map(illuminant, names()), *map(illuminant, ("daylight:5600K", "blackbody:2900K", "led:525nm/30nm"))]


def Lab_of_clear(W):
    XYZ100 = W.response(np.ones(len(W.wavelength_nm)))
    return Lab_from_XYZ(XYZ100, W.white)


FINE = ("0.5 nm", "0.3 nm")
CLEAR = [
    pytest.param(grid, key, method, id=f"{name} {key} {method}")
    for name, grid in GRIDS.items()
    for key in EYES
    for method in ("cie", "astm")
    if (name, method) != ("uneven", "astm") and (key == "10" or name not in FINE)
]


@pytest.mark.parametrize(("grid", "key", "method"), CLEAR)
def test_a_clear_cell_is_white_under_every_lamp(grid, key, method):
    W = weights(grid, ALL_LAMPS, EYES[key], method=method)
    expected = np.broadcast_to([100.0, 0.0, 0.0], (len(ALL_LAMPS), 3))
    rounding = 1e-12 if len(grid) < 500 else 1e-11  # of a sum over so many bands
    np.testing.assert_allclose(Lab_of_clear(W), expected, rtol=0, atol=rounding)
    np.testing.assert_allclose(W.white[:, 1], 100, rtol=0, atol=1e-11)


@pytest.mark.parametrize("grid", EVEN_GRIDS.values(), ids=EVEN_GRIDS)
def test_the_white_is_the_same_on_every_grid(grid):
    reference = weights(FULL_NM, FIVE, EYES["10"]).white
    for method in ("cie", "astm"):
        np.testing.assert_allclose(weights(grid, FIVE, EYES["10"], method=method).white, reference, rtol=0, atol=1e-9)


@given(scale=finite(1e-6, 1e9), spec=st.sampled_from(LAMPS))
def test_the_scale_of_a_lamp_changes_nothing(scale, spec):
    lamp = illuminant(spec)
    scaled = measured_lamp("scaled", lamp.wavelength_nm, np.maximum(lamp.power, 0) * scale)
    plain = measured_lamp("plain", lamp.wavelength_nm, np.maximum(lamp.power, 0))
    got, expected = (weights(VISIBLE_NM, [one], EYES["2"]).matrix for one in (scaled, plain))
    np.testing.assert_allclose(got, expected, rtol=0, atol=1e-11)


@given(order=st.permutations(range(5)))
def test_lamps_do_not_touch_each_other(order):
    together = weights(VISIBLE_NM, FIVE, EYES["2"])
    mixed = weights(VISIBLE_NM, [FIVE[i] for i in order], EYES["2"])
    T = smooth_transmittance(VISIBLE_NM)
    np.testing.assert_allclose(mixed.response(T), together.response(T)[:, order], rtol=0, atol=1e-12)
    assert mixed.illuminants == tuple(LAMPS[i] for i in order)


@given(seed=seeds)
def test_order_of_samples_never_matters(seed):
    W = weights(VISIBLE_NM, FIVE, EYES["10"])
    T = smooth_transmittance(VISIBLE_NM, seed=seed)
    order = np.random.default_rng(seed).permutation(len(T))
    np.testing.assert_allclose(W.response(T[order]), W.response(T)[order], rtol=0, atol=1e-12)
    np.testing.assert_allclose(W.response(T[3]), W.response(T)[3], rtol=0, atol=1e-12)
    assert W.response(T.reshape(4, 5, -1)).shape == (4, 5, 5, 3)


@given(seed=seeds)
def test_responses_are_linear(seed):
    W = weights(VISIBLE_NM, FIVE, EYES["10"])
    one, other = smooth_transmittance(VISIBLE_NM, seed=seed, count=2)
    mixed = W.response(0.3 * one + 0.7 * other)
    np.testing.assert_allclose(mixed, 0.3 * W.response(one) + 0.7 * W.response(other), rtol=0, atol=1e-11)


def test_single_precision_spectra_agree():
    W = weights(VISIBLE_NM, FIVE, EYES["10"])
    T = smooth_transmittance(VISIBLE_NM, count=200)
    np.testing.assert_allclose(W.response(T.astype(np.float32)), W.response(T), rtol=0, atol=1e-4)


def test_weights_are_folded_once_and_read_only():
    W = weights(VISIBLE_NM, FIVE, EYES["10"])
    assert weights(VISIBLE_NM.astype(np.float32), FIVE, EYES["10"]) is W
    assert not W.matrix.flags.writeable
    assert not W.white.flags.writeable
    assert not W.wavelength_nm.flags.writeable
    assert weights(VISIBLE_NM, FIVE, EYES["10"], method="astm") is not W
    assert weights(VISIBLE_NM, FIVE, EYES["2"]) is not W


def test_the_grid_that_was_given_is_not_touched():
    grid = VISIBLE_NM.copy()
    weights(grid, FIVE, EYES["10"], bandpass=True)
    np.testing.assert_array_equal(grid, VISIBLE_NM)
    grid[0] = 370.0  # the caller's array stays the caller's, and the cache is not poisoned
    assert weights(VISIBLE_NM, FIVE, EYES["10"]).wavelength_nm[0] == 380


# --- accuracy --------------------------------------------------------------------------------------------------------

# Bounds in XYZ100 for simulated solutions of one to three Gaussian absorption bands, no narrower at half height than
# stated and up to 160 nm wide, measured over the whole of 360–830 nm. From this program's own runs: silver, not gold.
BOUNDS = [
    (10.0, "cie", 60.0, 0.006),
    (10.0, "astm", 80.0, 0.025),
    (5.0, "cie", 60.0, 1e-4),
    (5.0, "astm", 80.0, 1.4e-3),
]


@pytest.mark.parametrize(
    ("step", "method", "narrowest_nm", "bound"), BOUNDS, ids=[f"{step:g} nm {method}" for step, method, *_ in BOUNDS]
)
@pytest.mark.parametrize("key", ["2", "10"])
def test_smooth_bands_are_near_the_exact_integral_even_under_lines(step, method, narrowest_nm, bound, key):
    smooth = {"seed": 2026, "count": 200, "narrowest_nm": narrowest_nm}
    exact = weights(FULL_NM, FIVE, EYES[key]).response(smooth_transmittance(FULL_NM, **smooth))
    grid = np.arange(360.0, 831.0, step)
    got = weights(grid, FIVE, EYES[key], method=method).response(smooth_transmittance(grid, **smooth))
    off = np.abs(got - exact).max()
    assert 0.5 * bound < off < bound  # a bound that says something


@pytest.mark.parametrize("step", [0.1, 0.2, 0.25, 0.4, 0.5, 0.7, 0.74, 0.76, 0.8])
def test_a_grid_finer_than_1_nm_gives_what_1_nm_gives(step):
    smooth = {"seed": 7, "count": 40, "narrowest_nm": 70.0}
    exact = weights(FULL_NM, FIVE, EYES["10"]).response(smooth_transmittance(FULL_NM, **smooth))
    grid = 360 + step * np.arange(round(470 / step + 0.5))
    got = weights(grid, FIVE, EYES["10"]).response(smooth_transmittance(grid, **smooth))
    np.testing.assert_allclose(got, exact, rtol=0, atol=0.005)


@pytest.mark.parametrize("step", [0.1, 0.25, 0.5])
def test_the_mean_over_each_nanometre_shifts_no_wavelength(step):
    slope = (FULL_NM - 360) / 470
    grid = np.arange(360.0, 830 + step / 2, step)
    got = weights(grid, FIVE, EYES["10"]).response((grid - 360) / 470)
    np.testing.assert_allclose(got, weights(FULL_NM, FIVE, EYES["10"]).response(slope), rtol=0, atol=1e-4)


@pytest.mark.parametrize("step", [0.25, 0.5, 2.0, 10.0])
def test_what_lies_beyond_360_to_830_nm_counts_for_nothing(step):
    wide = np.arange(300.0, 900.0 + step / 2, step)
    inside = (wide >= 360) & (wide <= 830)
    # nonsense out there, save next to the ends, where interpolation reaches a few points over them
    T = np.where((wide > 310) & (wide < 880), 0.5 + 0.3 * np.sin(wide / 40), 7.0)
    got, expected = weights(wide, FIVE, EYES["2"]), weights(wide[inside], FIVE, EYES["2"])
    np.testing.assert_allclose(got.response(T), expected.response(T[inside]), rtol=0, atol=5e-4)


def test_noise_of_a_fine_grid_is_averaged_not_thrown_away():
    # five readings a nanometre: the noise of XYZ is that of one reading over the root of five
    rng = np.random.default_rng(11)
    fine, coarse = np.arange(360.0, 830.1, 0.2), FULL_NM
    spread = [
        weights(grid, FIVE, EYES["10"]).response(0.5 + rng.normal(0, 0.01, (800, len(grid)))).std(axis=0)
        for grid in (fine, coarse)
    ]
    # under lamps with lines fewer bands count, for both grids alike
    np.testing.assert_allclose(spread[0] / spread[1], 1 / np.sqrt(5), rtol=0.12)


# --- ends, gaps, bandpass --------------------------------------------------------------------------------------------


def test_missing_ends_are_added_to_the_nearest_band_and_noted():
    W = weights(np.arange(400.0, 701.0, 10.0), FIVE, EYES["2"])
    full = weights(VISIBLE_NM, FIVE, EYES["2"])
    np.testing.assert_allclose(W.white, full.white, rtol=0, atol=1e-9)
    (note,) = W.notes
    assert note == "380–400 nm and 700–780 nm not measured: their weights added to the nearest band (ASTM E308 7.3.2.2)"
    assert full.notes == ()
    (low,) = weights(np.arange(390.0, 781.0, 10.0), FIVE, EYES["2"]).notes
    assert low.startswith("380–390 nm not measured")
    (high,) = weights(np.arange(380.0, 771.0, 10.0), FIVE, EYES["2"]).notes
    assert high.startswith("770–780 nm not measured")


def test_a_held_end_is_the_same_as_measuring_it_constant():
    short, T = np.arange(400.0, 701.0, 10.0), smooth_transmittance(np.arange(400.0, 701.0, 10.0))
    long_nm = np.arange(360.0, 831.0, 10.0)
    held = np.concatenate([np.repeat(T[:, :1], 4, axis=1), T, np.repeat(T[:, -1:], 13, axis=1)], axis=1)
    got = weights(short, FIVE, EYES["2"], method="astm").response(T)
    expected = weights(long_nm, FIVE, EYES["2"], method="astm").response(held)
    np.testing.assert_allclose(got, expected, rtol=0, atol=1e-10)


@pytest.mark.parametrize(
    ("grid", "ends", "message"),
    [
        (np.arange(410.0, 701, 10), "nearest", r"spectra over 410–700 nm: colour needs 400–700 nm.*--ends insist"),
        (np.arange(400.0, 691, 10), "nearest", r"spectra over 400–690 nm: colour needs 400–700 nm"),
        (np.arange(400.0, 701, 10), "strict", r"400–700 nm: --ends strict wants 380–780 nm"),
        (np.arange(390.0, 781, 10), "strict", r"390–780 nm: --ends strict"),
        (np.arange(380.0, 771, 10), "strict", r"380–770 nm: --ends strict"),
        (np.where(VISIBLE_NM == 540, 540.5, VISIBLE_NM)[::2], "nearest", r"a gap of 20.5 nm after 520 nm"),
        (np.arange(400.0, 701, 25), "nearest", r"a gap of 25 nm after 400 nm: colour needs a step of 20 nm"),
        (np.delete(VISIBLE_NM, [20, 21]), "nearest", r"a gap of 30 nm after 570 nm"),
        (np.delete(VISIBLE_NM, [20, 21]), "strict", r"a gap of 30 nm after 570 nm"),
        (np.array([380.0, 405, *np.arange(420.0, 781, 20)]), "nearest", r"a gap of 25 nm after 380 nm"),
        (np.array([*np.arange(380.0, 701, 20), 721]), "nearest", None),
        (np.array([379.0, *np.arange(400.0, 701, 20), 760]), "nearest", None),
        (np.array([550.0]), "insist", None),
        (np.arange(380.0, 781, 20), "strict", None),
        (np.array([379.9999999, *np.arange(390.0, 771, 10), 780.0000001]), "strict", None),
    ],
)
def test_what_must_have_been_measured(grid, ends, message):
    if message is None:
        weights(grid, FIVE, EYES["2"], ends=ends)
        return
    with pytest.raises(InputError, match=message):
        weights(grid, FIVE, EYES["2"], ends=ends)
    if ends == "nearest":
        np.testing.assert_allclose(weights(grid, FIVE, EYES["2"], ends="insist").white[:, 1], 100, rtol=0, atol=1e-10)


@pytest.mark.parametrize(("slack", "taken"), [(0.98e-6, True), (1.02e-6, False)])
def test_ends_are_held_to_a_millionth_of_a_nanometre(slack, taken):
    grid = np.arange(400.0, 701, 10)
    for at, sign in ((0, 1), (-1, -1)):
        moved = grid.copy()
        moved[at] += sign * slack
        if taken:
            weights(moved, FIVE, EYES["2"])
        else:
            with pytest.raises(InputError, match="colour needs 400–700 nm"):
                weights(moved, FIVE, EYES["2"])


@pytest.mark.parametrize(
    ("keywords", "message"),
    [
        ({"method": "iso"}, r"unknown weights 'iso'"),
        ({"ends": "guess"}, r"ends 'guess'.*nearest"),
    ],
)
def test_unknown_methods_are_refused(keywords, message):
    with pytest.raises(InputError, match=message):
        weights(VISIBLE_NM, FIVE, EYES["2"], **keywords)


def test_no_lamp_is_refused():
    with pytest.raises(InputError, match="no illuminant was given"):
        weights(VISIBLE_NM, [], EYES["2"])


def test_astm_weights_of_an_uneven_grid_are_refused():
    with pytest.raises(InputError, match=r"ASTM E308 weights need evenly spaced bands.*--weights cie"):
        weights(UNEVEN_NM, FIVE, EYES["2"], method="astm")


@pytest.mark.parametrize("step", [5.0, 10.0, 20.0])
def test_bandpass_correction_undoes_a_triangle_as_wide_as_the_step(step):
    # a triangle turns a parabola f into f + step²/12 f''; 0.083 of Stearns and Stearns is 1/12, to four thousandths
    grid = np.arange(400.0, 701.0, step)
    true = 0.2 + ((grid - 550) / 200) ** 2
    blurred = true + step**2 / 12 * 2 / 200**2
    undone = bandpass_correction(grid) @ blurred
    left_over = (undone - true)[1:-1] / (blurred - true)[1:-1]
    np.testing.assert_allclose(left_over, 1 - 12 * 0.083, rtol=0, atol=1e-6)
    np.testing.assert_allclose(left_over, 0, rtol=0, atol=0.005)


def test_bandpass_correction_leaves_a_flat_spectrum_alone_and_says_that_it_was_done():
    W = weights(VISIBLE_NM, FIVE, EYES["2"], bandpass=True)
    np.testing.assert_allclose(bandpass_correction(VISIBLE_NM).sum(axis=1), 1, rtol=0, atol=1e-14)
    np.testing.assert_allclose(W.white, weights(VISIBLE_NM, FIVE, EYES["2"]).white, rtol=0, atol=1e-9)
    assert W.notes == ("bandpass of 10 nm undone (Stearns and Stearns 1988)",)
    T = smooth_transmittance(VISIBLE_NM)
    expected = weights(VISIBLE_NM, FIVE, EYES["2"]).response(T @ bandpass_correction(VISIBLE_NM).T)
    np.testing.assert_allclose(W.response(T), expected, rtol=0, atol=1e-9)


def test_three_bands_are_enough_for_a_bandpass_correction():
    np.testing.assert_allclose(
        bandpass_correction(np.array([500.0, 510.0, 520.0])),
        [[1.083, -0.083, 0], [-0.083, 1.166, -0.083], [0, -0.083, 1.083]],
        rtol=0,
        atol=1e-12,
    )


@pytest.mark.parametrize("grid", [UNEVEN_NM, np.array([500.0, 510.0])], ids=["uneven", "two bands"])
def test_bandpass_correction_of_other_grids_is_refused(grid):
    with pytest.raises(InputError, match="no bandpass correction: it is defined for three or more evenly spaced bands"):
        bandpass_correction(grid)


def test_notes_of_a_lamp_travel_with_its_weights():
    lamp = measured_lamp("bench", np.arange(420.0, 681.0, 10.0), np.ones(27))
    (note,) = weights(VISIBLE_NM, [lamp], EYES["2"]).notes
    assert note.startswith("lamp bench is measured over 420–680 nm only")
