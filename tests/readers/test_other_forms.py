"""CGATS.17, TM-27, Parquet, workbooks and lamps as text. All data here are invented."""

from __future__ import annotations

import io
import subprocess
import sys

import numpy as np
import openpyxl
import pyarrow as pa
import pytest
from pyarrow import parquet

from chroma.readers import read_lamp, read_spectra
from observers.errors import InputError

HEAD = 'CGATS.17\nORIGINATOR "crew"\nKEYWORD "POND"\nPOND "north basin"\n'


def cgats(fields, *rows, head=HEAD):
    table = f"NUMBER_OF_FIELDS {len(fields.split())}\nBEGIN_DATA_FORMAT\n{fields}\nEND_DATA_FORMAT\n"
    return head + table + f"NUMBER_OF_SETS {len(rows)}\nBEGIN_DATA\n" + "\n".join(rows) + "\nEND_DATA\n"


@pytest.mark.parametrize(
    ("fields", "rows", "scale"),
    [
        ("SAMPLE_ID SPECTRAL_NM400 SPECTRAL_NM410", ("1 0.5 0.25", "2 0.4 0.3"), 1),
        ("SAMPLE_ID SPECTRAL_400 SPECTRAL_410", ("1 0.5 0.25", "2 0.4 0.3"), 1),
        ("SAMPLE_ID SPECTRAL_PCT400 SPECTRAL_PCT410", ("1 50 25", "2 40 30"), 1),
        ("SAMPLE_ID SPECTRAL_DEC400 SPECTRAL_DEC410", ("1 0.5 0.25", "2 0.4 0.3"), 1),
        ("SAMPLE_ID nm400 nm410", ("1 50 25", "2 40 30"), 1),
        ("SAMPLE_ID SPECTRAL_NM SPECTRAL_PCT SPECTRAL_NM SPECTRAL_PCT", ("1 400 50 410 25", "2 400 40 410 30"), 1),
        ("XYZ_X SAMPLE_ID\nSPECTRAL_NM410 SPECTRAL_NM400", ("9.1 1 0.25 0.5", "8.2\n2 0.3 0.4"), 1),
    ],
)
def test_cgats_fields(file, fields, rows, scale):
    (found,) = read_spectra(file(cgats(fields, *rows), "made.txt"))
    assert (found.names, found.quantity) == (("1", "2"), "reflectance")
    np.testing.assert_array_equal(found.wavelength_nm, [400, 410])
    np.testing.assert_allclose(found.values, [[0.5, 0.25], [0.4, 0.3]], atol=1e-15)


def test_cgats_names_with_blanks_and_transmission(file):
    head = HEAD + 'INSTRUMENTATION "bench"\nMEASUREMENT_GEOMETRY "transmittance"\n'
    text = cgats(
        "SAMPLE_ID SAMPLE_NAME SPECTRAL_NM400 SPECTRAL_NM410", '1 "north pool" .5 .6', '2 "jet 3" .4 .5', head=head
    )
    (found,) = read_spectra(file(text))
    assert (found.names, found.quantity) == (("north pool", "jet 3"), "transmittance")


def test_cgats_several_tables(file):
    text = cgats("SAMPLE_ID XYZ_X XYZ_Y", "1 2 3") + cgats(
        "SAMPLE_ID SPECTRAL_NM400 SPECTRAL_NM410", "1 .5 .6", head=""
    )
    (found,) = read_spectra(file(text))
    assert found.names == ("1",)
    assert "1 tables without spectra left out" in found.notes[0]


@pytest.mark.parametrize(
    ("columns", "metadata", "quantity"),
    [
        ({"name": ["a", "b"], "400": [0.5, 0.4], "410": [0.6, 0.5]}, {"lamplit.quantity": "reflectance"}, None),
        ({"400nm": [0.5, 0.4], "who": ["a", "b"], "410nm": [0.6, 0.5]}, None, "reflectance"),
        ({"id": ["a", "b"], "n": [1, 2], "R410": [0.6, 0.5], "R400": [0.5, 0.4]}, None, None),
        ({"id": ["a", "b"], "%R400": [50, 40], "%R410": [60, 50]}, None, None),
        ({"id": ["a", "b"], "400": pa.array([0.5, 0.4], pa.float32()), "410": [0.6, 0.5]}, None, "reflectance"),
    ],
)
def test_parquet_columns(tmp_path, columns, metadata, quantity):
    path = str(tmp_path / "made.parquet")
    parquet.write_table(pa.table(columns).replace_schema_metadata(metadata), path)
    (found,) = read_spectra(path, quantity=quantity)
    assert (found.names, found.quantity) == (("a", "b"), "reflectance")
    np.testing.assert_array_equal(found.wavelength_nm, [400, 410])
    np.testing.assert_allclose(found.values, [[0.5, 0.6], [0.4, 0.5]], atol=1e-7)  # float32 among them


@pytest.mark.parametrize(
    ("columns", "sentence"),
    [
        ({"name": ["a"], "x": [1.0]}, "no columns named by wavelengths.*name, x"),
        ({"name": ["a"], "400": [0.5], "410": [0.5]}, "could be a transmittance of 0.5 or"),
        ({"name": ["a"], "400": ["x"], "410": ["y"]}, "the column '400' holds string"),
        ({"name": ["a"], "400": [0.5], "R410": [None]}, "could be|no value at|holds null"),
        (
            {"name": pa.array([], pa.string()), "400": pa.array([], pa.float64()), "410": pa.array([], pa.float64())},
            "rows",
        ),
    ],
)
def test_parquet_that_is_refused(tmp_path, columns, sentence):
    path = str(tmp_path / "made.parquet")
    parquet.write_table(pa.table(columns), path)
    with pytest.raises(InputError, match=sentence):
        read_spectra(path)


def workbook(sheets):
    book, stream = openpyxl.Workbook(), io.BytesIO()
    book.remove(book.active)
    for title, rows in sheets.items():
        sheet = book.create_sheet(title)
        for row in rows:
            sheet.append(row)
    book.save(stream)
    return stream.getvalue()


ROWS = [["North pool"], [None], ["nm", "%T"], [420, 70], [410, "60,5"], [400, 50.5]]


def test_workbook_takes_the_first_sheet_with_a_table(file):
    path = file(workbook({"cover": [["made by the crew"]], "run": ROWS, "again": ROWS}), "made.xlsx")
    (found,) = read_spectra(path)
    assert found.names == ("North pool",)
    np.testing.assert_allclose(found.values, [[0.505, 0.605, 0.7]], atol=1e-15)
    assert "sheet 'run' read; not read: cover, again" in found.notes


def test_workbook_sheet_by_name(file):
    path = file(workbook({"one": ROWS, "two": [["nm", "Abs"], [400, 0.5], [410, 0.6]]}), "made.xlsx")
    assert read_spectra(path, sheet="two")[0].quantity == "absorbance"
    with pytest.raises(InputError, match="no sheet is named 'three': there are one, two"):
        read_spectra(path, sheet="three")


def test_workbook_error_names_the_sheet_and_the_cell(file):
    path = file(workbook({"run": [["nm", "%T"], [400, 50], [410, "OVER"], [420, 60]]}), "made.xlsx")
    with pytest.raises(InputError, match=r"made.xlsx sheet 'run' line 3 column 2: 'OVER'"):
        read_spectra(path)


def test_lamp_from_text(file):
    lamp = read_lamp(file("Bulb over the jet\nWavelength (nm);Power\n420;-0,001\n410;0,6\n400;0,5\n"))
    np.testing.assert_array_equal(lamp.wavelength_nm, [400, 410, 420])
    np.testing.assert_array_equal(lamp.power, [0.5, 0.6, 0])
    assert "1 values a little below zero set to zero" in lamp.notes
    assert not lamp.power.flags.writeable


def test_transmittance_in_the_xml_of_lamps_is_a_sample(file):
    points = "".join(f'<SpectralData wavelength="{nm}">0.{nm}</SpectralData>' for nm in (400, 410, 420))
    head = "<Header><Description>filter</Description></Header><SpectralQuantity>transmittance</SpectralQuantity>"
    (found,) = read_spectra(file(f"<IESTM2714 xmlns='iestm2714'>{head}{points}</IESTM2714>", "made.spdx"))
    assert (found.names, found.quantity) == (("filter",), "transmittance")
    np.testing.assert_array_equal(found.values, [[0.4, 0.41, 0.42]])


@pytest.mark.parametrize(("library", "name"), [("pyarrow", "made.parquet"), ("openpyxl", "made.xlsx")])
def test_a_missing_extra_is_named(monkeypatch, tmp_path, library, name):
    path = tmp_path / name
    if library == "pyarrow":
        parquet.write_table(pa.table({"400": [0.5], "410": [0.5]}), path)
    else:
        path.write_bytes(workbook({"run": ROWS}))
    monkeypatch.setitem(sys.modules, library, None)
    with pytest.raises(InputError, match=rf"needs {library}. Pip install 'lamplit\[|needs {library}.*lamplit\["):
        read_spectra(str(path))


def test_the_package_imports_only_numpy():
    code = "import chroma.readers, chroma.readers.write, sys; print(*sorted({m.split('.')[0] for m in sys.modules}))"
    loaded = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout.split()
    heavy = {"scipy", "matplotlib", "colour", "pyarrow", "openpyxl", "PIL", "click", "polars", "pandas", "jcamp", "xml"}
    assert heavy.isdisjoint(loaded)
