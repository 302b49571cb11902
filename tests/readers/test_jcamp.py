"""JCAMP-DX: files of others in every form, and what the checks of the standard catch."""

from __future__ import annotations

import numpy as np
import pytest

from chroma.readers import asdf, jcamp, read_spectra
from chroma.readers.asdf import Line, Scale
from chroma.readers.text import decode, lines_of, load
from observers.errors import InputError

FREE = Scale(None, None, 1.0)


def first_block(path):
    raw = load(str(path))
    return jcamp.blocks(lines_of(raw, decode(raw)[0]))[0]


@pytest.mark.parametrize("form", ["fix", "packed", "squeezed", "difdup"])
def test_the_four_forms_hold_equal_numbers(data, form):
    x, y = jcamp.ordinates(first_block(data / f"jcamp/b_compression-small_jcamp-{form}.dx"), "made")
    # the shortest of the files, in plain numbers, has eight points; the others go on
    np.testing.assert_array_equal(y[:8], [-10247, 1201, -5196, 7245, -5777, 5015, -8583, -3100])
    np.testing.assert_allclose(x[:2], [5592.84116331095, 5592.84116331095 - 0.341380770512785], rtol=1e-12)
    if form != "fix":
        longest = jcamp.ordinates(first_block(data / "jcamp/b_compression-small_jcamp-squeezed.dx"), "made")[1]
        np.testing.assert_array_equal(y[:30], longest[:30])


@pytest.mark.parametrize(
    "text",
    [
        "10 17 18 18 18 18 16 -3 0",
        "10+17+18+18+18+18+16-3+0",
        "10A7A8A8A8A8A6c@",
        "10A7A8VA6c@",
        "10A7J%%%kj9L",
        "10A7J%Ukj9L",
    ],
    ids=["AFFN", "PAC", "SQZ", "SQZ with DUP", "DIF", "DIF with DUP"],
)
def test_one_line_in_each_form(text):
    found = asdf.decode([Line(1, text)], FREE, "made")
    np.testing.assert_array_equal(found, [17, 18, 18, 18, 18, 16, -3, 0])


def test_e_is_a_digit_in_squeezed_form_and_an_exponent_in_plain():
    np.testing.assert_array_equal(asdf.decode([Line(1, "10E588A1e2")], FREE, "made"), [5588, 11, -52])
    np.testing.assert_array_equal(asdf.decode([Line(1, "10 1.5E3 -2e-1")], FREE, "made"), [1500, -0.2])


def test_a_question_mark_is_a_missing_value():
    assert np.isnan(asdf.decode([Line(1, "10 5 ? 6")], FREE, "made")[1])


@pytest.mark.parametrize(
    ("name", "points", "first_nm", "last_nm", "first_value"),
    [  # first and last by the headers' FIRSTX and LASTX, the value by FIRSTY at the longer wavelength's end
        ("a_dupinc2", 3734, 1e7 / 3999.792, 1e7 / 400.172, 0.4497),
        ("a_fixdec1", 3951, 1e7 / 4400.007, 1e7 / 450, None),
        ("a_fixinc1", 3736, 1e7 / 4001.31938, 1e7 / 399.263973, 1.128905654),
        ("a_fixinc2", 3601, 2500, 25000, 0.3487),
        ("a_jtpolys", 1844, 1e7 / 4002.28378, 1e7 / 447.484259, 0.9816334969),
        ("a_xyinc1", 3601, 2500, 25000, 0.448),
    ],
)
def test_infrared_files_are_read_in_nanometres(data, name, points, first_nm, last_nm, first_value):
    (found,) = read_spectra(str(data / f"jcamp/{name}.jdx"), absorbance_limit=4)
    assert len(found.wavelength_nm) == points
    assert found.wavelength_nm[0] == pytest.approx(first_nm, rel=1e-9)
    assert found.wavelength_nm[-1] == pytest.approx(last_nm, rel=1e-9)
    if first_value is not None:
        assert found.values[0, -1] == pytest.approx(first_value, abs=5e-6)


def test_one_spectrum_in_plain_and_in_difference_form_agrees(data):
    plain = jcamp.ordinates(first_block(data / "jcamp/a_jtpolys.jdx"), "made")[1] / 2.384185791e-09
    difference = jcamp.ordinates(first_block(data / "jcamp/a_jtpolysd.jdx"), "made")[1] / 2.3884185791e-09
    np.testing.assert_allclose(plain, difference, rtol=0, atol=0.6)  # whole numbers, as they stand in the files


def test_a_mistyped_factor_is_noted(data):
    # YFACTOR of this file has one digit too many (2.3884… for 2.3842e-9); only FIRSTY tells.
    (found,) = read_spectra(str(data / "jcamp/a_jtpolysd.jdx"))
    assert "FIRSTY says 0.981633 and the data begin with 0.983376" in found.notes[0]


@pytest.mark.parametrize(
    ("name", "sentence"),
    [
        ("a_blckpkt1", "line 7: MASS SPECTRUM '1-Propanol"),
        ("a_fixdec3", "SIMPLE GRAPH"),
        ("a_fixinc3", "SIMPLE GRAPH"),
        ("a_fixinc4", "Simulation"),
        ("a_fixinc5", "pH TITRATION"),
        ("a_mactab1", "MASS SPECTRUM 'Aflatoxin"),
        ("a_mactab2", "MASS SPECTRUM 'cholesterol"),
        ("a_coffhd", "GAS CHROMATOGRAPH"),
        ("a_pktab1", "MASS SPECTRUM 'Cholesterol"),
        ("a_pktab2", "MASS SPECTRUM 'eugenol"),
        ("a_xyinc2", "EPR SPECTRUM"),
        ("a_toluene", "line 17: YUNITS 'Logarithm epsilon'"),
        ("a_sqzdupd1", "could be 1.51, above what a sample can reach, or 1.51 %"),
    ],
)
def test_what_is_no_spectrum_of_light_is_refused_by_its_kind(data, name, sentence):
    with pytest.raises(InputError, match=sentence):
        read_spectra(str(data / f"jcamp/{name}.jdx"))


@pytest.mark.parametrize("form", ["fix", "packed", "squeezed", "difdup"])
def test_a_file_without_units_is_refused_with_what_is_missing(data, form):
    with pytest.raises(InputError, match="XUNITS, YUNITS, DATATYPE missing"):
        read_spectra(str(data / f"jcamp/b_compression-small_jcamp-{form}.dx"), quantity="absorbance")


def test_squeezed_values_with_repeats_are_decoded_whole(data):
    x, y = jcamp.ordinates(first_block(data / "jcamp/a_sqzdupd1.jdx"), "made")
    assert (len(x), len(y)) == (18669, 18669)  # NPOINTS of the file
    assert y[0] == pytest.approx(0.98288858, rel=1e-4)  # its FIRSTY
    assert y.max() == pytest.approx(1.50501, rel=1e-5)  # its MAXY
    assert y.min() == pytest.approx(1e-5, abs=5e-5)  # its MINY, to half a YFACTOR


def damaged(data, wound):
    return wound((data / "jcamp/a_dupinc2.jdx").read_text(encoding="ascii", errors="replace"))


@pytest.mark.parametrize(
    ("wound", "sentence"),
    [
        (lambda t: t.replace("R1O8M7J1", "R1O7M7J1"), "Y-check fails"),
        (lambda t: "".join(t.splitlines(True)[:40] + t.splitlines(True)[41:]), "(X|Y)-check fails"),
        (lambda t: "".join(t.splitlines(True)[:60]), "849 points where NPOINTS says 3734"),
        (lambda t: t.replace("R1O8M7J1", "R1&8M7J1"), "the character '&' in the numbers"),
        (lambda t: t.replace("= 3734", "= 3735"), "points where NPOINTS says 3735|X-check"),
        (lambda t: t.replace("443.564F457", "453.564F457"), "X-check fails"),
    ],
    ids=["difference", "line lost", "cut", "sign", "count", "abscissa"],
)
def test_the_checks_of_the_standard_catch_damage(data, file, wound, sentence):
    with pytest.raises(InputError, match=sentence):
        read_spectra(file(damaged(data, wound), "made.jdx"))


def test_labels_are_normalised_and_blocks_linked(file):
    block = (
        "##title= {0} $$ a remark\r##jcamp-dx= 4.24\r##Data_Type= UV/VIS SPECTRUM\r##X UNITS= Nanometers\r"
        "##y-units= % TRANSMITTANCE\r##npoints= 3\r##firstx= 420\r##lastx= 400\r##path length= 1\r"
        "##xydata= (X++(Y..Y))\r420 50 60 70\r##end=\r"
    )
    content = "##TITLE= two\r##DATA TYPE= LINK\r##BLOCKS= 2\r" + block.format("pool") + block.format("jet") + "##END=\r"
    (found,) = read_spectra(file(content))  # invented
    assert found.names == ("pool", "jet")
    assert found.path_length_mm == 10
    np.testing.assert_array_equal(found.wavelength_nm, [400, 410, 420])
    np.testing.assert_array_equal(found.values, [[0.7, 0.6, 0.5]] * 2)
