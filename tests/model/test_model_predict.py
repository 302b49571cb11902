"""Predicted colours: what follows from what, and how few words the caller needs. All data here is simulated."""

import numpy as np
import pytest
from helpers import VISIBLE_NM, one, simulated, smooth_transmittance

from chroma.colour.screen import linear_rgb
from chroma.colour.spaces import Lab_from_XYZ, LCh_from_Lab, Luv_from_XYZ, xyY_from_XYZ
from chroma.colours import predict
from chroma.quantity import at_path_length, converted
from chroma.spectra import averaged
from chroma.viewing import conditions
from observers.errors import InputError

VIEW = conditions(("D65", "A", "FL11"), "10")


def test_a_clear_cell_is_white_to_every_reading():
    clear = predict(one(np.ones(len(VISIBLE_NM))), VIEW)
    np.testing.assert_allclose(clear.Lab, np.broadcast_to([100.0, 0, 0], (1, 3, 3)), rtol=0, atol=1e-12)
    np.testing.assert_allclose(clear.Luv, np.broadcast_to([100.0, 0, 0], (1, 3, 3)), rtol=0, atol=1e-11)
    np.testing.assert_allclose(clear.luminous_transmittance, 1, rtol=0, atol=1e-14)
    codes, shown = clear.swatches()
    assert codes == [["#ffffff"] * 3]
    assert shown.all()
    assert np.isnan(clear.dominant(0, 0).wavelength_nm)
    assert clear.dominant(0, 0).excitation_purity == 0


def test_an_opaque_cell_is_black():
    dark = predict(one(np.zeros(len(VISIBLE_NM))), VIEW)
    np.testing.assert_allclose(dark.Lab, 0, rtol=0, atol=1e-12)
    assert dark.swatches()[0] == [["#000000"] * 3]
    assert np.isnan(dark.xyY[..., :2]).all()
    assert np.isnan(dark.dominant(0, 0).wavelength_nm)
    assert (dark.luminous_transmittance == 0).all()


def test_a_neutral_filter_is_grey_of_its_luminous_transmittance():
    grey = predict(one(np.full(len(VISIBLE_NM), 0.184186518)), VIEW)
    np.testing.assert_allclose(grey.Lab, np.broadcast_to([50.0, 0, 0], (1, 3, 3)), rtol=0, atol=1e-6)
    np.testing.assert_allclose(grey.luminous_transmittance, 0.184186518, rtol=1e-12)


def test_all_readings_come_from_one_xyz():
    colours = predict(simulated(["a", "b", "c", "d"]), VIEW)
    np.testing.assert_allclose(colours.Lab, Lab_from_XYZ(colours.XYZ100, colours.white100), rtol=0, atol=1e-12)
    np.testing.assert_allclose(colours.LCh, LCh_from_Lab(colours.Lab), rtol=0, atol=1e-12)
    np.testing.assert_allclose(colours.Luv, Luv_from_XYZ(colours.XYZ100, colours.white100), rtol=0, atol=1e-12)
    np.testing.assert_allclose(colours.xyY, xyY_from_XYZ(colours.XYZ100), rtol=0, atol=1e-12)
    assert np.isnan(colours.u_Lab).all()
    assert colours.XYZ100.shape == (4, 3, 3)


def test_swatches_and_luminous_transmittance_take_the_2_degree_observer():
    spectra = simulated(["a", "b", "c", "d"])
    wide, narrow = predict(spectra, VIEW), predict(spectra, conditions(("D65", "A", "FL11"), "2"))
    assert wide.swatches()[0] == narrow.swatches()[0]
    np.testing.assert_array_equal(wide.luminous_transmittance, narrow.luminous_transmittance)
    np.testing.assert_allclose(narrow.XYZ100_screen, narrow.XYZ100, rtol=0, atol=1e-12)
    assert np.abs(wide.XYZ100 - wide.XYZ100_screen).max() > 0.1


def test_a_swatch_says_when_the_screen_cannot_show_the_colour():
    vivid = predict(one(np.where(np.abs(VISIBLE_NM - 510) < 25, 0.9, 0.0)), VIEW)
    _, shown = vivid.swatches()
    assert not shown.any()
    linear = linear_rgb(vivid.XYZ100_screen[0, 0], vivid.white100_screen[0])
    assert linear.min() < 0


def test_a_longer_path_is_darker():
    colours = [
        predict(at_path_length(simulated(["a", "b", "c"]), 10, length), VIEW).Lab[..., 0] for length in (5, 10, 20, 40)
    ]
    assert (np.diff(colours, axis=0) < 0).all()


def test_absorbance_is_turned_into_transmittance_first():
    spectra = simulated(["a", "b"])
    np.testing.assert_allclose(
        predict(converted(spectra, "absorbance"), VIEW).Lab, predict(spectra, VIEW).Lab, rtol=0, atol=1e-10
    )


def test_counts_are_refused():
    with pytest.raises(InputError, match="counts cannot become transmittance"):
        predict(simulated(["a"], quantity="counts"), VIEW)


def test_replicates_give_an_uncertainty_to_their_sample_alone():
    colours = predict(averaged(simulated(["a", "b", "b"])), VIEW)
    assert np.isnan(colours.u_Lab[0]).all()
    assert (colours.u_Lab[1] > 0).all()


def test_results_carry_notes_of_spectra_and_weights():
    grid = np.arange(400.0, 701.0, 10.0)
    spectra = simulated(["a", "a"], wavelength_nm=grid)
    notes = predict(averaged(spectra), VIEW).notes
    assert notes[0].startswith("replicates averaged")
    assert notes[1].startswith("380–400 nm and 700–780 nm not measured")


def test_a_dye_peaks_opposite_its_dominant_wavelength():
    # a narrow window in a dark filter: the colour is that of the window
    for peak_nm in (450, 500, 560, 600):
        window = np.exp(-(((VISIBLE_NM - peak_nm) / 12) ** 2))
        assert predict(one(window), VIEW).dominant(0, 0).wavelength_nm == pytest.approx(peak_nm, abs=6)


def test_conditions_by_name():
    view = conditions(["d65", "led:525nm/30nm"], "2-2015", method="astm", ends="strict")
    assert str(view) == "D65, led:525nm/30nm; CIE 2015 2° observer; ASTM weights"
    assert view.weights(VISIBLE_NM).method == "astm"
    assert conditions().observer.key == "10"
    with pytest.raises(InputError, match="unknown observer '3'"):
        conditions(["D65"], "3")
    with pytest.raises(InputError, match="--ends strict"):
        view.weights(VISIBLE_NM[1:])
    corrected = conditions(bandpass=True)
    T = smooth_transmittance(VISIBLE_NM, count=1)
    assert not np.allclose(corrected.weights(VISIBLE_NM).response(T), conditions().weights(VISIBLE_NM).response(T))
    assert corrected.screen_weights(VISIBLE_NM).observer == "2"
