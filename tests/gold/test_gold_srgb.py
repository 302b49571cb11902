"""sRGB against the values of IEC 61966-2-1."""

import numpy as np
import pytest
from helpers import read_gold

from chroma.colour.screen import (
    RGB_FROM_XYZ,
    SRGB_WHITE100,
    XYZ_FROM_RGB,
    decoded,
    encoded,
    hex_codes,
    in_gamut,
    linear_rgb,
)

ROWS = read_gold("srgb.csv")
DECODE = [row for row in ROWS if row["what"] == "decode8"]
ENCODE = [row for row in ROWS if row["what"] == "encode"]
CODES = np.arange(256)


@pytest.mark.parametrize("row", DECODE, ids=[f"code {row['input']}" for row in DECODE])
def test_decoding_of_codes(row):
    assert decoded(np.float64(row["input"]) / 255) == pytest.approx(float(row["value"]), rel=0, abs=float(row["tol"]))


@pytest.mark.parametrize("row", ENCODE, ids=[row["input"] for row in ENCODE])
def test_encoding_of_light(row):
    assert encoded(np.float64(row["input"])) == pytest.approx(float(row["value"]), rel=0, abs=float(row["tol"]))


def test_grey_card_as_a_code():
    (row,) = (row for row in ROWS if row["what"] == "encode18_as_8bit")
    assert 255 * encoded(np.float64(row["input"])) == pytest.approx(float(row["value"]), abs=float(row["tol"]))


@pytest.mark.parametrize("axis", [0, 1, 2], ids="XYZ")
def test_matrix_derived_from_the_primaries(axis):
    (row,) = (row for row in ROWS if row["what"].startswith(f"RGB->XYZ row {axis + 1}"))
    expected = [float(part) for part in row["value"].split(";")]
    # printed at seven decimals, with a tolerance of 1e-6
    np.testing.assert_allclose(XYZ_FROM_RGB[axis], expected, rtol=0, atol=float(row["tol"]))


def test_matrix_printed_in_the_standard():
    (row,) = (row for row in ROWS if "printed 4-decimal" in row["what"])
    printed = [[float(cell) for cell in line.split()] for line in row["value"].split(";")]
    np.testing.assert_allclose(XYZ_FROM_RGB, printed, rtol=0, atol=5e-5)


def test_all_256_codes_come_back():
    linear = decoded(CODES / 255)
    assert (np.rint(encoded(linear) * 255) == CODES).all()
    np.testing.assert_allclose(encoded(linear), CODES / 255, rtol=0, atol=1e-7)
    assert (np.diff(linear) > 0).all()


def test_all_256_codes_as_hex_through_xyz():
    grey = np.repeat(decoded(CODES / 255)[:, None], 3, axis=1)
    XYZ100 = grey @ XYZ_FROM_RGB.T * 100
    back = linear_rgb(XYZ100, SRGB_WHITE100)
    assert hex_codes(back) == [f"#{code:02x}{code:02x}{code:02x}" for code in CODES]
    assert in_gamut(back).all()


def test_the_two_matrices_are_inverse():
    np.testing.assert_allclose(RGB_FROM_XYZ @ XYZ_FROM_RGB, np.eye(3), rtol=0, atol=1e-14)
