"""Spectra: what is refused at the door, replicates and their scatter, joining."""

import numpy as np
import pytest
from helpers import VISIBLE_NM, seeds, simulated, smooth_transmittance
from hypothesis import given

from chroma.resample import on_grid
from chroma.spectra import (
    Scatter,
    Source,
    Spectra,
    averaged,
    grid_text,
    joined,
    judge,
    measured,
    standard_uncertainty,
)
from observers.errors import InputError

THREE_NM = np.array([400.0, 500.0, 600.0])


def table(values, quantity="transmittance", names=None, wavelength_nm=THREE_NM):
    values = np.atleast_2d(np.asarray(values, float))
    return measured(names or [f"s{i}" for i in range(len(values))], wavelength_nm, values, quantity)


# --- the door --------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("values", "quantity", "message"),
    [
        (
            [0.5, 1.21, 0.5],
            "transmittance",
            r"sample 's0': transmittance of 1.21 at 500 nm: .*above 1.2 is not a fraction",
        ),
        ([0.5, 41.2, 0.5], "reflectance", r"reflectance of 41.2 at 500 nm"),
        ([0.5, 0.5, -0.021], "transmittance", r"transmittance of -0.021 at 600 nm: .*below -0.02 is more than noise"),
        ([0.5, -0.08, 0.5], "absorbance", r"absorbance of -0.08 at 500 nm: an absorbance below -0.08 means more light"),
        ([5.0, -1, 5.0], "counts", r"counts of -1 at 500 nm: counts cannot be negative.*--dark"),
    ],
    ids=["T above", "R in per cent", "T below", "A below", "counts"],
)
def test_what_an_instrument_cannot_have_meant_is_refused(values, quantity, message):
    with pytest.raises(InputError, match=message):
        table(values, quantity)


@pytest.mark.parametrize(
    ("values", "quantity"),
    [
        ([1.19, 0, -0.019], "transmittance"),
        ([-0.079, 0, 2.9], "absorbance"),
        ([0, 1e9, 3], "counts"),
        ([1, 0, 0.5], "reflectance"),
    ],
    ids=["T", "A", "counts", "R"],
)
def test_what_an_instrument_may_read_is_taken_as_it_is(values, quantity):
    np.testing.assert_array_equal(table(values, quantity).values[0], values)


def test_a_little_below_zero_is_noted():
    (note,) = table([[0.5, -0.01, 0.5], [0.5, 0.5, 0.5]]).notes
    assert note == "'s0': transmittance below zero, taken as noise and kept (1 values, 500–500 nm)"


def test_absorbance_above_the_limit_of_the_instrument_is_noted():
    spectra = table(np.full((5, 3), 3.01), "absorbance")
    assert spectra.notes[0].startswith("'s0', 's1', 's2', 's3' and 1 more: absorbance above the absorbance of 3 that")
    assert table([[3.0, 2, 1]], "absorbance").notes == ()
    assert judge(table([[1.6, 2, 1]], "absorbance"), absorbance_limit=1.5)
    assert measured(["a"], THREE_NM, np.full((1, 3), 3.5), "absorbance", absorbance_limit=4.0).notes == ()


def test_what_cannot_be_is_noted_where_no_eye_sees():
    grid = np.array([340.0, 379.0, 500.0, 781.0])
    (note,) = table([[3.0, 0.5, 0.5, 5.0]], wavelength_nm=grid).notes
    assert "outside 380–780 nm; kept as measured" in note
    for band in (380.0, 780.0):
        with pytest.raises(InputError, match=f"transmittance of 3 at {band:g} nm"):
            table([[0.5, 3.0, 0.5]] if band > 400 else [[3.0, 0.5, 0.5]], wavelength_nm=np.sort([band, 450.0, 790.0]))


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (
            (("a",), THREE_NM, np.ones((1, 2)), "transmittance"),
            r"values of shape \(1, 2\): 1 samples on 3 wavelengths need",
        ),
        ((("a", "b"), THREE_NM, np.ones((1, 3)), "transmittance"), r"2 samples on 3 wavelengths need \(2, 3\)"),
        (((), np.array([]), np.ones((0, 0)), "transmittance"), "no wavelengths"),
        ((("a",), np.array([0.0, 1, 2]), np.ones((1, 3)), "transmittance"), "a wavelength is not a positive number"),
        ((("a",), np.array([400, np.nan, 600]), np.ones((1, 3)), "transmittance"), "not a positive number"),
        ((("a",), np.array([400.0, 400, 600]), np.ones((1, 3)), "transmittance"), "wavelength 400 nm comes twice"),
        (
            (("a",), np.array([400.0, 600, 500]), np.ones((1, 3)), "transmittance"),
            "wavelength 500 nm comes twice or out",
        ),
        (
            (("a",), THREE_NM, np.array([[1, np.nan, 1]]), "transmittance"),
            r"sample 'a': nan at 500 nm: every value must",
        ),
        ((("a",), THREE_NM, np.array([[1, 1, np.inf]]), "transmittance"), r"inf at 600 nm"),
        ((("a",), THREE_NM, np.ones((1, 3)), "per cent"), r"unknown quantity 'per cent': known are transmittance"),
    ],
)
def test_what_is_no_table_of_spectra_is_refused(arguments, message):
    with pytest.raises(InputError, match=message):
        Spectra(*arguments)


@given(seed=seeds)
def test_the_order_of_wavelengths_never_matters(seed):
    order = np.random.default_rng(seed).permutation(len(VISIBLE_NM))
    T = smooth_transmittance(VISIBLE_NM, count=2)
    spectra = measured(["a", "b"], VISIBLE_NM[order], T[:, order], "transmittance")
    np.testing.assert_array_equal(spectra.wavelength_nm, VISIBLE_NM)
    np.testing.assert_array_equal(spectra.values, T)


def test_arrays_are_read_only_and_the_callers_stay_his():
    grid, T = VISIBLE_NM.copy(), smooth_transmittance(VISIBLE_NM, count=2)
    before = T.copy()
    for spectra in (Spectra(("a", "b"), grid, T, "transmittance"), measured(["a", "b"], grid, T, "transmittance")):
        assert not spectra.values.flags.writeable
        assert not spectra.wavelength_nm.flags.writeable
        T[0, 0] = 0.123
        assert spectra.values[0, 0] == before[0, 0]
        T[:] = before


# --- names -----------------------------------------------------------------------------------------------------------


def test_a_sample_is_found_by_name_or_the_names_are_listed():
    spectra = simulated([f"s{i}" for i in range(13)])
    assert spectra.row("s3") == 3
    with pytest.raises(InputError, match=r"no sample is named 'S3': there are s0, s1, .*s11, …"):
        spectra.row("S3")
    with pytest.raises(InputError, match=r"there are s0, s1, .*s11$"):
        spectra.take(range(12)).row("S3")


def test_samples_are_taken_in_the_order_wanted_with_their_scatter():
    spectra = averaged(simulated(["a", "b", "b", "c", "c", "c"]))
    taken = spectra.take([2, 0, 1])
    assert taken.names == ("c", "a", "b")
    np.testing.assert_array_equal(standard_uncertainty(taken), standard_uncertainty(spectra)[[2, 0, 1]])
    assert spectra.take([0]).scatter is None
    assert len(spectra.take([])) == 0


# --- replicates ------------------------------------------------------------------------------------------------------


def test_replicates_of_one_name_or_numbered_are_averaged_in_order_of_appearance():
    spectra = simulated(["b#1", "a", "b#2", "c", "c", "b#10"])
    mean = averaged(spectra)
    assert mean.names == ("b", "a", "c")
    np.testing.assert_allclose(mean.values[0], spectra.values[[0, 2, 5]].mean(axis=0), rtol=1e-14)
    np.testing.assert_array_equal(mean.values[1], spectra.values[1])
    assert mean.notes[-1] == "replicates averaged: 6 readings of 3 samples"


@given(seed=seeds)
def test_scatter_and_standard_uncertainty_are_those_of_the_mean(seed):
    rng = np.random.default_rng(seed)
    values = np.clip(0.5 + rng.normal(0, 0.02, (7, 3)), 0, 1)
    mean = averaged(table(values, names=["a", "b", "a", "a", "c", "b", "a"]))
    np.testing.assert_allclose(mean.scatter.deviation.sum(axis=0), 0, rtol=0, atol=1e-14)
    u = standard_uncertainty(mean)
    np.testing.assert_allclose(u[0], values[[0, 2, 3, 6]].std(axis=0, ddof=1) / 2, rtol=1e-12)
    np.testing.assert_allclose(u[1], values[[1, 5]].std(axis=0, ddof=1) / np.sqrt(2), rtol=1e-12)
    assert np.isnan(u[2]).all()


def test_the_order_of_readings_never_matters():
    T = smooth_transmittance(VISIBLE_NM, count=6)
    names = ["a", "b", "a", "b", "a", "b"]
    order = [4, 1, 0, 5, 2, 3]
    one = averaged(measured(names, VISIBLE_NM, T, "transmittance"))
    other = averaged(measured([names[i] for i in order], VISIBLE_NM, T[order], "transmittance"))
    np.testing.assert_allclose(other.values, one.values, rtol=1e-14)
    np.testing.assert_allclose(standard_uncertainty(other), standard_uncertainty(one), rtol=1e-12)


def test_single_readings_have_no_scatter_and_lose_their_number():
    mean = averaged(simulated(["a#1", "b"]))
    assert mean.names == ("a", "b")
    assert mean.scatter is None
    assert np.isnan(standard_uncertainty(mean)).all()


# --- joining ---------------------------------------------------------------------------------------------------------


def test_files_are_joined_and_equal_names_told_apart():
    one, two, three = (simulated(["a", "b", "c#1"], seed=seed) for seed in (1, 2, 3))
    both = joined([one, two, three])
    assert both.names == ("a", "b", "c#1", "a (2)", "b (2)", "c#1", "a (3)", "b (3)", "c#1")
    np.testing.assert_array_equal(both.values, np.concatenate([one.values, two.values, three.values]))
    assert joined([one]) is one
    moved = simulated(["d"], wavelength_nm=VISIBLE_NM + 0.98e-6)  # as files print their wavelengths
    assert joined([one, moved]).names[-1] == "d"


def test_sources_and_notes_of_files_are_kept_once():
    source = Source("f.csv", "00")
    parts = [
        measured([name], THREE_NM, np.ones((1, 3)), "transmittance", sources=(source,), notes=("n",)) for name in "ab"
    ]
    both = joined(parts)
    assert both.sources == (source,)
    assert both.notes == ("n",)


@pytest.mark.parametrize(
    ("parts", "message"),
    [
        ([], "no spectra were given"),
        (
            [simulated(["a"]), simulated(["b"], quantity="reflectance")],
            "quantities differ: transmittance and reflectance",
        ),
        (
            [simulated(["a"]), simulated(["b"], wavelength_nm=VISIBLE_NM[1:])],
            r"wavelength grids differ: 380–780 nm, 41 bands, 10 nm apart and 390–780 nm, 40 bands.*--grid",
        ),
        ([simulated(["a"]), simulated(["b"], wavelength_nm=VISIBLE_NM + 1.02e-6)], "wavelength grids differ"),
        ([averaged(simulated(["a", "a"])), simulated(["b"])], "averaged spectra cannot be joined"),
    ],
    ids=["none", "quantity", "range", "grid", "averaged"],
)
def test_what_cannot_be_joined_is_refused(parts, message):
    with pytest.raises(InputError, match=message):
        joined(parts)


@pytest.mark.parametrize(
    ("grid", "text"),
    [
        (VISIBLE_NM, "380–780 nm, 41 bands, 10 nm apart"),
        (np.array([550.0]), "550–550 nm, 1 bands"),
        (np.array([400.0, 410, 425]), "400–425 nm, 3 bands, 10 to 15 nm apart"),
        (np.array([400.0, 410, 420 + 0.98e-5]), "400–420 nm, 3 bands, 10 nm apart"),
        (np.array([400.0, 410, 420 + 1.02e-5]), "400–420 nm, 3 bands, 10 to 10 nm apart"),
    ],
)
def test_a_grid_in_words(grid, text):
    assert grid_text(grid) == text


# --- another grid ----------------------------------------------------------------------------------------------------


def test_on_another_grid_a_smooth_spectrum_is_what_it_would_have_been():
    fine = np.arange(400.0, 701.0, 5.0)
    spectra = measured(["a"], VISIBLE_NM, smooth_transmittance(VISIBLE_NM, count=1, narrowest_nm=80), "transmittance")
    moved = on_grid(spectra, fine)
    np.testing.assert_allclose(moved.values, smooth_transmittance(fine, count=1, narrowest_nm=80), rtol=0, atol=2e-4)
    assert "resampled from 380–780 nm, 41 bands, 10 nm apart to 400–700 nm, 61 bands" in moved.notes[-1]
    with pytest.raises(InputError, match="is wanted from 380–780 nm"):
        on_grid(spectra, np.arange(370.0, 701.0, 5.0))


def test_scatter_moves_to_another_grid_as_its_readings_do():
    fine = np.arange(400.0, 701.0, 5.0)
    readings = simulated(["a", "a", "a"])
    before, after = on_grid(averaged(readings), fine), averaged(on_grid(readings, fine))
    np.testing.assert_allclose(before.values, after.values, rtol=0, atol=1e-12)
    np.testing.assert_allclose(standard_uncertainty(before), standard_uncertainty(after), rtol=1e-9)


def test_scatter_is_kept_whole():
    scatter = averaged(simulated(["a", "a"])).scatter
    assert isinstance(scatter, Scatter)
    assert scatter.deviation.shape == (2, len(VISIBLE_NM))
