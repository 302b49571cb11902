"""Results as tables of pandas and polars, and spectra from such tables, there and back."""

import importlib

import numpy as np
import pytest

from chroma import InputError, Spectra
from chroma import frames as module
from chroma.report.check_report import check_rows
from chroma.report.colour_report import colour_rows, flat
from chroma.report.dye_rows import unmix_rows
from chroma.report.match_report import match_rows
from chroma.spectra import measured

NM = np.array([380.0, 400.5, 700.0, 780.123456789])
LIBRARIES = module.LIBRARIES


@pytest.fixture(params=LIBRARIES)
def library(request):
    pytest.importorskip(request.param)
    return request.param


def records(table, library):
    return table.to_dict("records") if library == "pandas" else table.to_dicts()


def same(one, other):
    if isinstance(one, float) and np.isnan(one):
        return other is None or np.isnan(other)
    if isinstance(one, float | int | np.number) and not isinstance(one, bool | np.bool_):
        return one == pytest.approx(other, rel=1e-12, abs=1e-12)
    return one == other


ROWS = {
    "colours": (lambda found: flat(colour_rows(found)), set()),
    "checked": (check_rows, {"reason", "off"}),
    "unmixed": (unmix_rows, set()),
    "matches": (match_rows, set()),
}


@pytest.mark.parametrize("kind", ROWS)
def test_a_table_holds_the_rows_that_out_writes(results, library, kind):
    make, missing = ROWS[kind]
    wanted = make(results[kind])
    got = records(results[kind].to_frame(library), library)
    assert len(got) == len(wanted)
    for row, other in zip(got, wanted, strict=True):
        assert set(row) == set(other) - missing
        assert all(same(value, other[key]) for key, value in row.items())


def test_a_table_is_of_the_library_that_was_asked_for(results, library):
    for kind in (*ROWS, "spectra", "fit"):
        assert type(results[kind].to_frame(library)).__module__.split(".")[0] == library


def test_a_dye_is_one_row_a_wavelength(results, library):
    rows = records(results["fit"].to_frame(library), library)
    dye = results["fit"].dye
    assert [row["wavelength_nm"] for row in rows] == dye.wavelength_nm.tolist()
    assert [row["absorptivity"] for row in rows] == dye.absorptivity.tolist()
    assert [row["standard_uncertainty"] for row in rows] == dye.standard_uncertainty.tolist()


def test_spectra_there_and_back(library):
    values = np.random.default_rng(3).uniform(0, 1, (3, len(NM)))
    before = measured(["pond", "basin", "pond#2"], NM, values, "transmittance")
    after = Spectra.from_frame(before.to_frame(library), quantity="transmittance")
    assert after.names == before.names
    np.testing.assert_array_equal(after.wavelength_nm, before.wavelength_nm)
    np.testing.assert_array_equal(after.values, before.values)
    assert after.notes == ()


def made(columns, library):
    return importlib.import_module(library).DataFrame(columns)


def test_columns_in_any_order_and_form(library):
    table = made({"500 nm": [0.5], "pH": [7.1], "400": [0.4], "pond": ["north"], "450.5nm": [1]}, library)
    found = Spectra.from_frame(table, quantity="transmittance")
    assert found.names == ("north",)
    assert found.wavelength_nm.tolist() == [400.0, 450.5, 500.0]
    assert found.values.tolist() == [[0.4, 1.0, 0.5]]
    assert found.notes == ("columns left out: pH",)


def test_pandas_names_in_the_index_and_wavelengths_as_numbers():
    pandas = pytest.importorskip("pandas")
    table = pandas.DataFrame([[0.1, 0.2], [0.3, 0.4]], index=["north", "south"], columns=[400, 500.5])
    found = Spectra.from_frame(table, quantity="reflectance")
    assert found.names == ("north", "south")
    assert found.wavelength_nm.tolist() == [400.0, 500.5]
    assert found.quantity == "reflectance"


def test_polars_rows_without_names_are_numbered():
    pytest.importorskip("polars")
    found = Spectra.from_frame(made({"400": [0.1, 0.2]}, "polars"), quantity="transmittance")
    assert found.names == ("1", "2")


@pytest.mark.parametrize(
    ("columns", "message"),
    [
        ({"name": ["a"], "value": [0.5]}, "no column is named by a wavelength: there are name, value"),
        ({"name": ["a"], "400": ["blue"]}, "column 400: not all are numbers"),
        ({"name": ["a"], "400": [None]}, "must be a finite number"),
        ({"name": ["a"], "400": [0.5], "400.0": [0.5]}, "comes twice"),
        ({"name": ["a"], "400": [50.0]}, "transmittance of 50"),
    ],
    ids=["no wavelength", "text", "a gap", "a wavelength twice", "per cent"],
)
def test_a_table_that_cannot_be_used(library, columns, message):
    with pytest.raises(InputError, match=message):
        Spectra.from_frame(made(columns, library), quantity="transmittance")


def test_the_quantity_must_be_said(library):
    with pytest.raises(TypeError, match="quantity"):
        Spectra.from_frame(made({"400": [0.5]}, library))


def test_either_library_serves_when_none_is_named(monkeypatch, library):
    monkeypatch.setattr(module, "find_spec", lambda name: name == library or None)
    assert type(module.frame({"a": [1]})).__module__.split(".")[0] == library


@pytest.mark.parametrize(
    ("library", "message"),
    [
        (None, "neither pandas nor polars is installed. Run pip install pandas"),
        ("polars", "polars is not installed. Run pip install polars"),
    ],
)
def test_without_the_library_the_refusal_says_how_to_have_it(monkeypatch, results, library, message):
    monkeypatch.setattr(module, "find_spec", lambda name: None)
    with pytest.raises(InputError, match=message):
        results["spectra"].to_frame(library)


def test_an_unknown_library_is_refused(results):
    with pytest.raises(InputError, match="unknown library 'dask': known are pandas, polars"):
        results["spectra"].to_frame("dask")
