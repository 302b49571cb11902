"""Every file of others: read rightly, or refused with the reason. tests/data/README.md names the sources."""

from __future__ import annotations

import numpy as np
import pytest

from chroma.readers import read_lamp, read_spectra
from chroma.readers.content import contents
from chroma.readers.text import load
from observers.errors import InputError

RHODAMINE = [f"Rhodamine_6G_in_methanol_{level}{n}" for level in "ACDEF" for n in (1, 2, 3)]
FIRST_VALUES = {  # copied from the files' first rows, at 800 nm
    "Rhodamine_6G_in_methanol_A1": -0.003339566989,
    "Rhodamine_6G_in_methanol_C1": -0.0004936753539,
    "Rhodamine_6G_in_methanol_C2": 5.218924707e-05,
    "Rhodamine_6G_in_methanol_F3": 0.002739331918,
    "methanol_baseline": -0.001113996375,
}


@pytest.mark.parametrize("name", [*RHODAMINE, "methanol_baseline"])
def test_rhodamine_tables(data, name):
    (table,) = contents(
        load(str(data / f"rhodamine_6g/{name}.csv")), sheet=None, grid=None, quantity_known=False
    ).tables
    assert table.names[0].startswith(("Rhodamine 6G in methanol", "methanol baseline"))
    assert (table.axis[0], table.axis[-1], table.values.shape) == (800, 200, (1, 601))
    assert table.said[0].quantity == "absorbance"
    if name in FIRST_VALUES:
        assert table.values[0, 0] == FIRST_VALUES[name]


def test_rhodamine_spectra_are_ascending_and_named_by_their_title(data):
    (found,) = read_spectra(str(data / "rhodamine_6g/Rhodamine_6G_in_methanol_A1.csv"))
    assert found.names == ("Rhodamine 6G in methanol1",)
    assert (found.wavelength_nm[0], found.wavelength_nm[-1], found.quantity) == (200, 800, "absorbance")
    assert "wavelengths were descending" in found.notes[0]
    assert found.wavelength_nm[200:][found.values[0, 200:].argmax()] == pytest.approx(527, abs=5)  # the folder's table


def test_rhodamine_concentrations_are_no_spectra(data):
    with pytest.raises(InputError, match="1 rows of 5 numbers and no wavelengths"):
        read_spectra(str(data / "rhodamine_6g/concentrations.csv"), quantity="absorbance")


def test_methylene_blue_standards(data):
    path = str(data / "methylene_blue/standards_tabtext.xls")
    with pytest.raises(InputError, match=r"could be a transmittance of .* or an absorbance"):
        read_spectra(path)
    (found,) = read_spectra(path, quantity="absorbance")
    assert found.names == ("0", "1", "2", "3", "4", "5")
    assert (found.wavelength_nm[0], found.wavelength_nm[-1], len(found.wavelength_nm)) == (190, 820, 316)
    np.testing.assert_array_equal(found.values[:, 0], [-0.0088, 0.0101, 0.0571, 0.1738, 0.1664, 0.302])
    assert "6 columns left out as flags: they repeat all the names and hold 1 throughout" in found.notes[0]
    assert "line 2 read as names: its first cell is no wavelength" in found.notes[0]
    # The slope at 664 nm that the folder's table of sets gives from an independent fit: 0.2083 L/mg.
    peak = found.values[:, found.wavelength_nm == 664][:, 0]
    assert np.polyfit(np.arange(6), peak, 1)[0] == pytest.approx(0.2083, abs=5e-5)


def test_methylene_blue_unknown(data):
    (found,) = read_spectra(str(data / "methylene_blue/unknown_tabtext.xls"), quantity="absorbance")
    assert found.names == ("Unknown Methylene Blue Sample",)
    assert found.values[0, 0] == 0.1285
    assert "a column without a name left out as flags: it holds 1 throughout" in found.notes[0]


def test_indicator_lots_need_their_wavelengths(data):
    path = str(data / "indicator_lots/lots_29.csv")
    with pytest.raises(InputError, match="29 rows of 401 numbers and no wavelengths"):
        read_spectra(path, quantity="absorbance")
    (found,) = read_spectra(path, quantity="absorbance", grid=np.arange(350.0, 751.0))
    assert found.values.shape == (29, 401)
    assert found.names[:4] == ("Dye1", "Dye1", "Dye1", "Dye2")
    assert found.values[0, 0] == 0.022751180967769
    assert found.wavelength_nm[found.values[0].argmax()] == 578  # the peak that the publication's set shows


@pytest.mark.parametrize(
    ("name", "points", "first", "last"),
    [("tm27_sample_26pts", 26, (400, 0.47), (650, 0.21)), ("tm27_irregular_85pts", 85, (400, 0.034), (850.1, 0.030))],
)
def test_lamps(data, name, points, first, last):
    lamp = read_lamp(str(data / f"tm27/{name}.spdx"))
    assert len(lamp.power) == points
    assert (lamp.wavelength_nm[0], lamp.power[0]) == first
    assert (lamp.wavelength_nm[-1], lamp.power[-1]) == last
    with pytest.raises(InputError, match=r"a lamp .* and no sample"):
        read_spectra(str(data / f"tm27/{name}.spdx"))


def test_invalid_lamp(data):
    with pytest.raises(InputError, match="XML with the root <item>"):
        read_lamp(str(data / "tm27/invalid.spdx"))
