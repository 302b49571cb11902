"""Unmixing simulated cells with known truth."""

import numpy as np
import pytest
from simulated import BLUE, NM, RED, YELLOW, bands, exact_dye, simulated_series

from chroma.dye.build import fit_dye
from chroma.dye.solution import absorbance, shelf
from chroma.dye.unmix import unmix, unmix_spectra
from chroma.resample import on_grid
from chroma.spectra import measured
from observers.errors import InputError

EXACT = shelf([exact_dye("blue", BLUE), exact_dye("yellow", YELLOW), exact_dye("red", RED)])


def cells(rng, A, sigma_T=5e-4):
    T = 10.0**-A + sigma_T * rng.standard_normal(A.shape)
    return measured([f"cell {i}" for i in range(len(A))], NM, T, "transmittance")


def mixtures(rng, count):
    return rng.uniform(0.001, 0.01, (count, 3))


@pytest.mark.parametrize("baseline", ["none", "constant", "linear", "scatter"])
def test_intervals_cover_93_to_97_percent(baseline):
    rng = np.random.default_rng(21)
    c = mixtures(rng, 700)
    A = absorbance(EXACT, c, 10.0)
    if baseline != "none":
        A = A + rng.normal(0, 1e-3, (len(c), 1))
    found = unmix(cells(rng, A), EXACT, path_length_mm=10.0, baseline=baseline)
    inside = (found.low <= c) & (c <= found.high)
    assert 0.93 <= inside.mean() <= 0.97
    np.testing.assert_allclose(found.noise.mean(), 5e-4, rtol=0.05)


def test_intervals_cover_with_dyes_that_were_fitted():
    rng, inside = np.random.default_rng(22), []
    for _ in range(60):
        fitted = shelf([
            fit_dye(simulated_series(rng, absorptivity=table, sd_concentration=0.01), name=name).dye
            for name, table in (("blue", BLUE), ("yellow", YELLOW), ("red", RED))
        ])  # fmt: skip
        c = mixtures(rng, 12)
        found = unmix(cells(rng, absorbance(EXACT, c, 10.0)), fitted, path_length_mm=10.0)
        inside.append((found.low <= c) & (c <= found.high))
    assert 0.93 <= np.mean(inside) <= 0.97


def test_something_else_in_the_cell_is_seen_and_a_clean_cell_is_not_accused():
    rng = np.random.default_rng(23)
    A = absorbance(EXACT, mixtures(rng, 500), 10.0)
    clean = unmix(cells(rng, A), EXACT, path_length_mm=10.0)
    assert clean.foreign.mean() <= 0.05
    peaks = rng.uniform(440, 680, len(A))
    foreign = np.stack([bands((1, peak, rng.uniform(700, 1500)), floor=0) for peak in peaks])
    foreign *= 0.05 * A.max(axis=1, keepdims=True) / foreign.max(axis=1, keepdims=True)
    dirty = unmix(cells(rng, A + foreign), EXACT, path_length_mm=10.0)
    assert dirty.foreign.mean() >= 0.95
    assert np.median(np.abs(dirty.foreign_nm - peaks)) < 60


def test_a_recipe_comes_back():
    c = np.array([[0.004, 0.0, 0.008], [0.0, 0.002, 0.0]])
    T = 10.0 ** -absorbance(EXACT, c, 50.0)
    found = unmix(measured(["a", "b"], NM, T, "transmittance"), EXACT, path_length_mm=50.0)
    np.testing.assert_allclose(found.value, c, atol=1e-9)
    assert found.rms.max() < 1e-9
    assert (found.value >= 0).all()


def test_haze_is_taken_by_a_scattering_baseline():
    rng = np.random.default_rng(24)
    c = mixtures(rng, 40)
    A = absorbance(EXACT, c, 10.0) + 0.05 * (NM / NM.mean()) ** -2.0
    without = unmix(cells(rng, A), EXACT, path_length_mm=10.0, baseline="none")
    taken = unmix(cells(rng, A), EXACT, path_length_mm=10.0, baseline="scatter")
    assert np.abs(taken.value - c).max() < 0.1 * np.abs(without.value - c).max()
    np.testing.assert_allclose(taken.baseline[:, 1], 0.05, atol=0.005)


def test_dyes_that_are_alike_are_said_to_be():
    twins = shelf([exact_dye("blue", BLUE), exact_dye("bluish", 1.1 * BLUE + 0.1)])
    found = unmix(
        cells(np.random.default_rng(1), absorbance(twins, np.array([[0.005, 0.0]]), 10.0)), twins, path_length_mm=10.0
    )
    assert any("bluish and blue can hardly be told apart" in note for note in found.notes)
    assert found.high[0, 0] - found.low[0, 0] > 0.001


def test_spectra_on_another_grid_are_cut_to_what_the_dyes_cover():
    wide = np.arange(350.0, 901.0, 10.0)
    A = np.interp(wide, NM, absorbance(EXACT, np.array([0.005, 0.004, 0.003]), 10.0))
    spectra = measured(["wide"], wide, 10.0 ** -A[None], "transmittance")
    found = unmix_spectra(spectra, EXACT.dyes, path_length_mm=10.0)
    assert found.shelf.wavelength_nm[0] == 380
    np.testing.assert_allclose(found.value[0], [0.005, 0.004, 0.003], rtol=0.01)
    part = unmix_spectra(spectra, EXACT.dyes, path_length_mm=10.0, span_nm=(450, 650))
    assert (part.shelf.wavelength_nm[0], part.shelf.wavelength_nm[-1]) == (450, 650)


def test_refusals():
    one = cells(np.random.default_rng(1), absorbance(EXACT, np.full((1, 3), 0.005), 10.0))
    with pytest.raises(InputError, match="unknown baseline"):
        unmix(one, EXACT, path_length_mm=10.0, baseline="wavy")
    with pytest.raises(InputError, match="different grids"):
        unmix(on_grid(one, NM[::2]), EXACT, path_length_mm=10.0)
    with pytest.raises(InputError, match="no dye was given"):
        unmix_spectra(one, [], path_length_mm=10.0)
    with pytest.raises(InputError, match="no bands between"):
        unmix_spectra(one, EXACT.dyes, path_length_mm=10.0, span_nm=(390.5, 391))
    black = measured(["black"], NM, np.full((1, len(NM)), 1e-5), "transmittance")
    with pytest.raises(InputError, match="usable bands for"):
        unmix(black, EXACT, path_length_mm=10.0)
