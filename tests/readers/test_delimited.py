"""What delimited text can say, and how it is understood. All data here are invented."""

from __future__ import annotations

import io
import sys

import numpy as np
import pytest

from chroma.readers import read_spectra

ROWS = ((400, 0.5, 0.61), (410, 0.52, 0.63), (420, 0.55, 0.66), (430, 0.59, 0.7))


def columns(*rows, separator=","):
    return "".join(separator.join(map(str, row)) + "\n" for row in rows)


@pytest.mark.parametrize(
    ("content", "quantity", "names"),
    [
        (columns(("nm", "%T"), *((r[0], r[1] * 100) for r in ROWS)), "transmittance", ("made",)),
        (columns(("nm", "A"), *(r[:2] for r in ROWS)), "absorbance", ("made",)),
        (columns(("nm", "Abs"), *(r[:2] for r in ROWS)), "absorbance", ("made",)),
        ("North pool\n" + columns(("nm", "OD"), *(r[:2] for r in ROWS)), "absorbance", ("North pool",)),
        (columns(("nm", "Sample 1 (Abs)", "Sample 2 (Abs)"), *ROWS), "absorbance", ("Sample 1", "Sample 2")),
        (
            columns(("nm", "pool %T", "jet %T"), *((a, b * 100, c * 100) for a, b, c in ROWS)),
            "transmittance",
            ("pool", "jet"),
        ),
        (columns(("nm", "pool_abs", "jet_abs"), *ROWS), "absorbance", ("pool", "jet")),
        (columns(("Wavelength", "Reflectance of pool", "x"), *ROWS), "reflectance", ("of pool", "x")),
        (columns(("wavelength (nm)", "raw counts"), *((r[0], r[1] * 1000) for r in ROWS)), "counts", ("made",)),
        ("Absorbance\n\n" + columns(("nm", "A", "B"), *ROWS), "absorbance", ("A", "B")),
        ("Photometric mode: Absorbance\n" + columns(("nm", "A", "B"), *ROWS), "absorbance", ("A", "B")),
        (columns(("", "pool", "jet"), ("nm", "Abs", "Abs"), *ROWS), "absorbance", ("pool", "jet")),
        (columns(("nm", "Abs", "Abs"), *ROWS), "absorbance", ("made column 2", "made column 3")),
        ("Absorbance\n" + columns(("nm", "pool", "pool"), *ROWS), "absorbance", ("pool", "pool")),
        ("Absorbance\n" + columns(("nm", "0.5", "2"), *ROWS), "absorbance", ("0.5", "2")),
        ("Absorbance\n" + columns(("", "0.5", "2"), *ROWS), "absorbance", ("0.5", "2")),
        ("Absorbance\n" + columns(("nm", "200", "400"), *ROWS), "absorbance", ("200", "400")),
        (columns(("nm", "Transmittance of 5% blue", "x"), *ROWS), "transmittance", ("of 5% blue", "x")),
        ("Absorbance\n" + columns(("nm", "R", "T"), *ROWS), "absorbance", ("R", "T")),
    ],
)
def test_quantity_and_names_in_columns(file, content, quantity, names):
    (found,) = read_spectra(file(content))
    assert found.quantity == quantity
    assert found.names == names
    scale = 1000 if quantity == "counts" else 1
    np.testing.assert_allclose(found.values[0], [r[1] * scale for r in ROWS], atol=1e-12)


@pytest.mark.parametrize(
    ("content", "names"),
    [
        ("sample,400,410,420\npool,.5,.6,.7\njet,.4,.5,.6\n", ("pool", "jet")),
        ("sample,400nm,410nm,420nm\n1,.5,.6,.7\n2,.4,.5,.6\n", ("1", "2")),
        ("id,R400,R410,R420\n1,.5,.6,.7\n2b,.4,.5,.6\n", ("1", "2b")),
        ("400,410,420\n.5,.6,.7\n.4,.5,.6\n", ("row 2", "row 3")),
        (",400,410,420\npool,.5,.6,.7\njet,.4,.5,.6\n", ("pool", "jet")),
        ("date,who,sample,400,410,420\n5/4,JK,pool,.5,.6,.7\n5/4,JK,jet,.4,.5,.6\n", ("pool", "jet")),
        ("date,what,400,410,420\n5/4,pool,.5,.6,.7\n5/4,jet,.4,.5,.6\n", ("pool", "jet")),
        ("sample,400,410,420,remark\npool,.5,.6,.7,clear\njet,.4,.5,.6,\n", ("pool", "jet")),
        ("wavelength (nm),400,410,420\npool,.5,.6,.7\njet,.4,.5,.6\n", ("pool", "jet")),
        ("name,420,410,400\npool,.7,.6,.5\njet,.6,.5,.4\n", ("pool", "jet")),
    ],
)
def test_samples_in_rows(file, content, names):
    (found,) = read_spectra(file(content), quantity="reflectance")
    assert found.names == names
    np.testing.assert_array_equal(found.wavelength_nm, [400, 410, 420])
    np.testing.assert_array_equal(found.values, [[0.5, 0.6, 0.7], [0.4, 0.5, 0.6]])


def test_a_sample_numbered_with_a_letter_at_the_end_is_not_a_footer(file):
    (found,) = read_spectra(file("id,400,410\n1,.5,.6\n2,.4,.5\n3,.4,.5\n3b,.3,.2\n"), quantity="reflectance")
    assert found.names == ("1", "2", "3", "3b")


def test_two_samples_of_which_one_has_a_number_for_a_name(file):
    (found,) = read_spectra(file("name,400,410\nblank,.5,.6\n7,.4,.5\n"), quantity="reflectance")
    assert found.names == ("blank", "7")


def test_samples_named_with_a_hash_are_no_remarks(file):
    text = "# made by the crew\nname,400,410,420\n#1,.5,.6,.7\n# lamp changed, at noon\n#2,.4,.5,.6\n#3,.4,.5,.6\n"
    (found,) = read_spectra(file(text), quantity="reflectance")
    assert found.names == ("#1", "#2", "#3")


def test_decimal_commas_between_commas_when_quoted(file):
    (found,) = read_spectra(file('"nm","Abs"\n"400","0,5"\n"410,5","0,6"\n"420","1"\n'))
    np.testing.assert_array_equal(found.wavelength_nm, [400, 410.5, 420])
    np.testing.assert_array_equal(found.values, [[0.5, 0.6, 1]])


def test_a_sample_named_raw_does_not_make_counts_of_the_others(file):
    (found,) = read_spectra(file("nm,pool,raw\n400,.5,.6\n410,.6,.7\n420,.6,.7\n"), quantity="absorbance")
    assert found.names == ("pool", "raw")


def test_pairs_of_two_quantities_are_chosen_by_the_argument(file):
    path = file("nm,%T,nm,Abs\n400,50,400,.301\n410,40,410,.398\n420,30,420,.523\n")
    assert [part.quantity for part in read_spectra(path)] == ["transmittance", "absorbance"]
    (found,) = read_spectra(path, quantity="absorbance")
    np.testing.assert_array_equal(found.values, [[0.301, 0.398, 0.523]])


def test_pairs_of_columns_on_one_grid(file):
    rows = [(a, b, a, c) for a, b, c in ROWS]
    (found,) = read_spectra(file(columns(("pool", "", "jet", ""), ("nm", "Abs", "nm", "Abs"), *rows)))
    assert found.names == ("pool", "jet")
    np.testing.assert_array_equal(found.values, [[r[1] for r in ROWS], [r[2] for r in ROWS]])
    assert "2 samples in 2 tables" in found.notes[0]


def test_pairs_of_columns_on_two_grids_of_unequal_length(file):
    content = "nm,pool Abs,nm,jet Abs\n400,.5,500,.6\n410,.51,520,.61\n420,.52,540,.62\n430,.53,,\n"
    pool, jet = read_spectra(file(content))
    assert (pool.names, jet.names) == (("pool",), ("jet",))
    np.testing.assert_array_equal(pool.wavelength_nm, [400, 410, 420, 430])
    np.testing.assert_array_equal(jet.wavelength_nm, [500, 520, 540])


def test_columns_of_two_quantities_are_chosen_by_the_argument(file):
    path = file("nm,%T,Abs\n400,50,.301\n410,40,.398\n420,30,.523\n")
    (found,) = read_spectra(path, quantity="absorbance")
    np.testing.assert_array_equal(found.values, [[0.301, 0.398, 0.523]])
    assert "1 columns of other quantities left out" in found.notes[0]
    np.testing.assert_allclose(read_spectra(path, quantity="transmittance")[0].values, [[0.5, 0.4, 0.3]])


def test_a_single_letter_yields_to_the_argument(file):
    (found,) = read_spectra(file("nm,A\n400,.5\n410,.6\n420,.7\n"), quantity="transmittance")
    assert found.quantity == "transmittance"
    assert "though the header has 'A'" in found.notes[0]


def test_bands_outside_the_visible_that_lack_a_value_are_left_out(file):
    (found,) = read_spectra(file("nm,a Abs,b Abs\n380,,.4\n400,.5,.4\n700,.5,.4\n710,nan,.4\n"))
    np.testing.assert_array_equal(found.wavelength_nm, [400, 700])
    assert "2 bands left out where a sample has no value: 380, 710 nm" in found.notes[0]


def test_blank_lines_remarks_and_a_footer(file):
    content = "# made\nnm;Abs\n\n400;0,5\n\n# lamp changed\n410;0,6\n\n420;0,7\n\nSlit;2,0\nOperator;JK\n"
    (found,) = read_spectra(file(content))
    np.testing.assert_array_equal(found.values, [[0.5, 0.6, 0.7]])
    assert "2 lines after the table left out, from line 11: 'Slit;2,0'" in found.notes[0]


def test_notes_say_what_was_read_and_decided(file):
    (found,) = read_spectra(file("nm;pool %T;jet %T\n420;50,5;60\n410;40;50\n400;30;40\n"))
    assert found.notes[0] == (
        "delimited text, semicolon, decimal comma; 2 samples in columns; wavelengths were descending; "
        "transmittance, from the header 'pool %T'; per cent, divided by 100"
    )


def test_per_cent_without_a_sign_is_found_and_said(file):
    (found,) = read_spectra(file("nm,Transmittance\n400,50\n410,40\n420,30\n"))
    np.testing.assert_array_equal(found.values, [[0.5, 0.4, 0.3]])
    assert "can only be per cent, divided by 100" in found.notes[0]


def test_western_letters_are_noted(file):
    (found,) = read_spectra(file("nm;Fontäne Abs\n400;0,5\n410;0,6\n".encode("cp1252")))
    assert found.names == ("Fontäne",)
    assert "Windows-1252" in found.notes[-1]


def test_a_path_length_in_the_header_is_kept(file):
    assert read_spectra(file("Path length: 5 mm\nnm,Abs\n400,.5\n410,.6\n"))[0].path_length_mm == 5
    assert read_spectra(file("Path length (cm),1\nnm,Abs\n400,.5\n410,.6\n"))[0].path_length_mm == 10


def test_wavelengths_of_the_caller_for_a_file_without(file):
    path = file("a,.5,.6,.7\nb,.4,.5,.6\n")
    (found,) = read_spectra(path, quantity="absorbance", grid=np.array([400.0, 410.0, 420.0]))
    assert found.names == ("a", "b")
    np.testing.assert_array_equal(found.wavelength_nm, [400, 410, 420])


def test_standard_input(monkeypatch):
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(b"nm,Abs\n400,.5\n410,.6\n")))
    (found,) = read_spectra("-")
    assert found.sources[0].path == "-"
    assert found.names == ("stdin",)


def test_the_source_is_named_with_its_sha256(file):
    (found,) = read_spectra(file(b"nm,Abs\n400,.5\n410,.6\n"))
    # sha256 of these 24 bytes, from the coreutils program sha256sum
    assert len(found.sources) == 1
    assert found.sources[0].path.endswith("made.csv")
    assert len(found.sources[0].sha256) == 64
