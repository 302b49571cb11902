"""From one quantity to another: round trips, blank and dark, Lambert's law, and scatter carried along."""

import numpy as np
import pytest
from helpers import VISIBLE_NM, finite, seeds, simulated, smooth_transmittance
from hypothesis import given

from chroma.quantity import SMALLEST_TRANSMITTANCE, at_path_length, converted, corrected, fraction
from chroma.spectra import Spectra, averaged, measured, standard_uncertainty
from observers.errors import InputError

GRID = np.array([400.0, 500.0, 600.0])


def table(rows, quantity):
    return measured(list(rows), GRID, np.array(list(rows.values()), float), quantity)


# --- conversion ------------------------------------------------------------------------------------------------------


@given(seed=seeds)
def test_absorbance_and_back(seed):
    T = simulated(["a", "b"], seed=seed)
    A = converted(T, "absorbance")
    assert A.quantity == "absorbance"
    np.testing.assert_allclose(converted(A, "transmittance").values, T.values, rtol=1e-12)
    np.testing.assert_allclose(A.values, -np.log10(T.values), rtol=1e-13)


def test_facts_everybody_knows():
    # an absorbance of 1 leaves a tenth; half the light is an absorbance of 0.30103
    A = table({"a": [1, 2, 0]}, "absorbance")
    np.testing.assert_allclose(fraction(A).values, [[0.1, 0.01, 1]], rtol=1e-14)
    T = table({"a": [0.5, 0.1, 1]}, "transmittance")
    np.testing.assert_allclose(converted(T, "absorbance").values, [[0.3010299956639812, 1, 0]], atol=1e-14)


def test_nothing_below_1e_minus_5_can_be_told_apart():
    T = table({"a": [0.5, 0, -0.01]}, "transmittance")
    A = converted(T, "absorbance")
    np.testing.assert_allclose(A.values[0, 1:], 5, rtol=1e-14)
    assert A.notes[-1] == "2 transmittances at or below 1e-05 held at absorbance 5"
    edge = table({"a": [0.5, SMALLEST_TRANSMITTANCE * 1.01, 1]}, "transmittance")
    assert not any("held" in note for note in converted(edge, "absorbance").notes)


@pytest.mark.parametrize("quantity", ["transmittance", "reflectance"])
def test_fractions_are_taken_as_they_are(quantity):
    spectra = simulated(["a"], quantity=quantity)
    assert fraction(spectra) is spectra
    assert converted(spectra, quantity) is spectra


@pytest.mark.parametrize(
    ("have", "want", "message"),
    [
        ("counts", "transmittance", r"counts cannot become transmittance: there is no blank to divide by.*--blank"),
        ("counts", "absorbance", "counts cannot become absorbance"),
        ("reflectance", "absorbance", "reflectance cannot become absorbance: nothing links the two"),
        ("reflectance", "transmittance", "reflectance cannot become transmittance"),
        ("transmittance", "counts", "transmittance cannot become counts"),
        ("absorbance", "reflectance", "absorbance cannot become reflectance"),
    ],
)
def test_where_there_is_no_road(have, want, message):
    with pytest.raises(InputError, match=message):
        converted(simulated(["a"], quantity=have), want)


def test_colour_of_counts_needs_a_blank():
    with pytest.raises(InputError, match="counts cannot become transmittance"):
        fraction(simulated(["a"], quantity="counts"))


@pytest.mark.parametrize(("have", "want"), [("transmittance", "absorbance"), ("absorbance", "transmittance")])
def test_scatter_is_carried_by_the_slope(have, want):
    # small scatter: converting the mean is the same as averaging what was converted
    rng = np.random.default_rng(1)
    readings = measured(["a"] * 200, GRID, rng.normal([0.5, 0.2, 0.9], 1e-4, (200, 3)), have)
    carried = standard_uncertainty(converted(averaged(readings), want))
    direct = standard_uncertainty(averaged(converted(readings, want)))
    np.testing.assert_allclose(carried, direct, rtol=2e-3)


# --- blank and dark --------------------------------------------------------------------------------------------------


@given(seed=seeds, gain=finite(10, 1e5), dark=finite(0, 500))
def test_counts_against_blank_and_dark_give_the_transmittance(seed, gain, dark):
    T = smooth_transmittance(VISIBLE_NM, seed=seed, count=3)
    lamp = gain * (1 + np.random.default_rng(seed).uniform(0, 1, len(VISIBLE_NM)))
    counts = np.vstack([np.full(len(VISIBLE_NM), dark), dark + lamp, dark + T * lamp])
    spectra = measured(["dark", "water", "a", "b", "c"], VISIBLE_NM, counts, "counts")
    got = corrected(spectra, blank="water", dark="dark")
    assert got.names == ("a", "b", "c")
    assert got.quantity == "transmittance"
    np.testing.assert_allclose(got.values, T, rtol=0, atol=1e-9)
    assert got.notes[-1] == "divided by blank 'water' after dark 'dark' was taken off"


def test_a_blank_divides_fractions_and_is_taken_off_absorbance():
    T = table({"water": [0.9, 0.8, 1.0], "a": [0.45, 0.4, 0.1]}, "transmittance")
    by_T = corrected(T, blank="water")
    np.testing.assert_allclose(by_T.values, [[0.5, 0.5, 0.1]], rtol=1e-14)
    by_A = corrected(converted(T, "absorbance"), blank="water")
    np.testing.assert_allclose(fraction(by_A).values, by_T.values, rtol=1e-13)
    R = corrected(table({"white": [0.9, 0.8, 1.0], "a": [0.45, 0.4, 0.1]}, "reflectance"), blank="white")
    assert R.quantity == "reflectance"


def test_without_blank_and_dark_nothing_happens():
    spectra = simulated(["a"], quantity="counts")
    assert corrected(spectra) is spectra


@pytest.mark.parametrize(
    ("quantity", "names", "message"),
    [
        ("counts", {"dark": "dark"}, r"--dark without --blank.*Name the blank with --blank"),
        ("counts", {"blank": "Water"}, r"no sample is named 'Water': there are dark, water, a"),
        ("counts", {"blank": "water", "dark": "night"}, "no sample is named 'night'"),
        ("absorbance", {"blank": "water", "dark": "dark"}, "--dark with absorbance: the instrument took"),
        ("counts", {"blank": "dark", "dark": "water"}, "blank 'dark' has no more light than the dark at 400 nm"),
    ],
)
def test_what_cannot_be_corrected_is_refused(quantity, names, message):
    spectra = table({"dark": [0.01, 0, 0], "water": [1.0, 0.9, 0.9], "a": [0.5, 0.5, 0.5]}, quantity)
    with pytest.raises(InputError, match=message):
        corrected(spectra, **names)


def test_nothing_left_but_the_blank_is_refused():
    with pytest.raises(InputError, match="nothing is left but blank and dark"):
        corrected(table({"water": [1, 1, 1]}, "counts"), blank="water")


def test_a_wrong_blank_shows_as_more_light_than_can_be():
    with pytest.raises(InputError, match=r"sample 'a': transmittance of 2 at 400 nm.*Check the blank"):
        corrected(table({"water": [500, 500, 500], "a": [1000, 400, 400]}, "counts"), blank="water")


@pytest.mark.parametrize("quantity", ["counts", "transmittance", "absorbance"])
def test_scatter_of_samples_goes_through_the_correction(quantity):
    rng = np.random.default_rng(2)
    blank = {"counts": 1000.0, "transmittance": 0.9, "absorbance": 0.05}[quantity]
    values = np.vstack([np.full(3, blank), blank * (0.5 + rng.normal(0, 1e-3, (50, 3)))])
    readings = measured(["water"] + ["a"] * 50, GRID, values, quantity)
    before = standard_uncertainty(corrected(averaged(readings), blank="water"))
    expected = values[1:].std(axis=0, ddof=1) / np.sqrt(50) / (1 if quantity == "absorbance" else blank)
    np.testing.assert_allclose(before[0], expected, rtol=1e-9)


# --- path length -----------------------------------------------------------------------------------------------------


@given(seed=seeds, factor=finite(0.1, 10))
def test_absorbance_grows_with_the_path_and_transmittance_is_raised_to_it(seed, factor):
    T = simulated(["a", "b"], seed=seed)
    A = converted(T, "absorbance")
    longer = at_path_length(A, 10, 10 * factor)
    np.testing.assert_allclose(longer.values, A.values * factor, rtol=1e-12)
    assert longer.path_length_mm == 10 * factor
    np.testing.assert_allclose(at_path_length(T, 10, 10 * factor).values, T.values**factor, rtol=1e-10)
    np.testing.assert_allclose(fraction(longer).values, T.values**factor, rtol=1e-10)


def test_twice_the_path():
    T = table({"a": [0.5, 0.1, 1.0]}, "transmittance")
    np.testing.assert_allclose(at_path_length(T, 10, 20).values, [[0.25, 0.01, 1.0]], rtol=1e-14)
    np.testing.assert_allclose(at_path_length(at_path_length(T, 10, 20), 20, 10).values, T.values, rtol=1e-14)
    assert at_path_length(T, 10, 20).notes[-1] == "path length 10 mm rescaled to 20 mm"


def test_noise_below_zero_stays_dark_at_another_path():
    T = table({"a": [0.5, -0.01, 0.0]}, "transmittance")
    np.testing.assert_array_equal(at_path_length(T, 10, 25).values[0, 1:], 0)


@pytest.mark.parametrize("quantity", ["transmittance", "absorbance"])
def test_scatter_goes_to_another_path_by_the_slope(quantity):
    rng = np.random.default_rng(3)
    readings = measured(["a"] * 200, GRID, rng.normal([0.5, 0.2, 0.9], 1e-4, (200, 3)), quantity)
    carried = standard_uncertainty(at_path_length(averaged(readings), 10, 25))
    direct = standard_uncertainty(averaged(at_path_length(readings, 10, 25)))
    np.testing.assert_allclose(carried, direct, rtol=5e-3)


@pytest.mark.parametrize(
    ("quantity", "lengths", "message"),
    [
        ("reflectance", (10, 20), "reflectance has no path length: only transmission scales with it"),
        ("counts", (10, 20), "counts has no path length"),
        ("absorbance", (0, 20), "a path length must be positive"),
        ("absorbance", (10, -1), "a path length must be positive"),
        ("absorbance", (10, float("nan")), "a path length must be positive"),
    ],
)
def test_what_has_no_path_length_is_refused(quantity, lengths, message):
    with pytest.raises(InputError, match=message):
        at_path_length(simulated(["a"], quantity=quantity), *lengths)


@pytest.mark.parametrize(
    "road",
    [
        lambda spectra: converted(spectra, "absorbance"),
        lambda spectra: at_path_length(spectra, 10, 30),
        lambda spectra: corrected(spectra, blank="a"),
        averaged,
    ],
    ids=["converted", "path length", "corrected", "averaged"],
)
def test_spectra_are_not_touched(road):
    values = 0.9 * smooth_transmittance(VISIBLE_NM, count=3)
    values[0] = 0.95
    spectra = measured(["a", "b", "b"], VISIBLE_NM, values, "transmittance")
    before = spectra.values.copy()
    assert isinstance(road(spectra), Spectra)
    np.testing.assert_array_equal(spectra.values, before)
