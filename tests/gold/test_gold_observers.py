"""White points, E308 weights, interpolation coefficients and the colour chart against published tables."""

import numpy as np
import pytest
from helpers import columns, read_gold

from chroma.colour.spaces import Lab_from_XYZ, XYZ_from_Lab, xyY_from_XYZ
from chroma.difference.ciede2000 import ciede2000
from observers.grid import SPRAGUE_AFTER, SPRAGUE_BEFORE, resampling
from observers.human import observer
from observers.illuminants import illuminant
from observers.weights import weights

FULL_NM = np.arange(360.0, 831.0)
WHITES = read_gold("white_points.csv")
PUBLISHED = [row for row in WHITES if not row["seen"].startswith("computed")]
COMPUTED = [row for row in WHITES if row["seen"].startswith("computed")]


def white_of(row):
    W = weights(FULL_NM, [illuminant(row["illuminant"])], observer(row["observer_deg"]))
    return W.white[0]


def named(rows):
    return [pytest.param(row, id=f"{row['illuminant']} {row['observer_deg']}°") for row in rows]


@pytest.mark.parametrize("row", named(PUBLISHED))
def test_white_point_as_published(row):
    expected = [float(row[f"ref_{axis}"]) for axis in "XYZ"]
    np.testing.assert_allclose(white_of(row), expected, rtol=0, atol=float(row["tolerance"]))


@pytest.mark.parametrize("row", named(COMPUTED))
def test_white_point_of_an_led_as_computed_by_others(row):  # a cross-check that lives in a gold file
    expected = [float(row[f"ref_{axis}"]) for axis in "XYZ"]
    np.testing.assert_allclose(white_of(row), expected, rtol=0, atol=float(row["tolerance"]))


@pytest.mark.parametrize("row", named(WHITES))
def test_white_point_as_integrated_by_others(row):
    # the file's own integration: an LED's was summed at 5 nm, and keeps the wider tolerance
    tolerance = 1e-4 if row in PUBLISHED else float(row["tolerance"])
    expected = [float(row[f"calc_{axis}"]) for axis in "XYZ"]
    np.testing.assert_allclose(white_of(row), expected, rtol=0, atol=tolerance)


@pytest.mark.parametrize("row", named(PUBLISHED))
def test_chromaticity_of_white_as_published(row):
    # the published chromaticities of the D illuminants are rounded from other steps of summation: one unit of the last
    np.testing.assert_allclose(xyY_from_XYZ(white_of(row))[:2], [float(row["x"]), float(row["y"])], rtol=0, atol=1.5e-5)


E308 = read_gold("astm_e308_weights.csv")
SETS = tuple(dict.fromkeys(row["set"] for row in E308))


@pytest.mark.parametrize("name", SETS)
def test_e308_table_5_at_its_printed_digits(name):
    rows = [row for row in E308 if row["set"] == name]
    lamp, degrees = name.split("_")[:2]
    W = weights(
        columns(rows, "wavelength_nm")[:, 0],
        [illuminant(lamp)],
        observer(degrees.removesuffix("deg")),
        method="astm",
    )
    # the file states 0.001: printed to three decimals, of weights that were rounded on the way
    np.testing.assert_allclose(W.matrix, columns(rows, "WX", "WY", "WZ"), rtol=0, atol=0.001)


@pytest.mark.parametrize("kind", ["inner", "boundary"])
@pytest.mark.parametrize("wide", [1.0, 5.0, 10.0, 20.0])
def test_e2022_tables_1_and_2(kind, wide):
    rows = [row for row in read_gold("astm_e2022_lagrange.csv") if row["kind"] == kind]
    names = ("c0", "c1", "c2", "c3") if kind == "inner" else ("c0", "c1", "c2")
    fraction, expected = columns(rows, "fraction")[:, 0], columns(rows, *names)
    grid = 400.0 + wide * np.arange(8)
    interval = 3 if kind == "inner" else 0
    matrix = resampling(grid, grid[interval] + fraction * wide, "lagrange")
    first = interval - 1 if kind == "inner" else 0
    np.testing.assert_allclose(matrix[:, first : first + len(names)], expected, rtol=0, atol=1e-10)
    assert np.count_nonzero(matrix) == expected.size
    if kind == "boundary":  # the last interval is the first one seen in a mirror
        last = resampling(grid, grid[-1] - fraction * wide, "lagrange")
        np.testing.assert_allclose(last[:, ::-1], matrix, rtol=0, atol=1e-10)


def test_sprague_boundary_coefficients_of_cie_167():
    published = columns(read_gold("sprague_boundary.csv"), *(f"c{i}" for i in range(1, 7)))
    np.testing.assert_array_equal(np.vstack([SPRAGUE_BEFORE, SPRAGUE_AFTER]), published)


CHART = read_gold("colour_chart_d50.csv")
CHART_NM = np.arange(380.0, 731.0, 10.0)


@pytest.fixture(scope="module")
def chart_XYZ100():
    spectra = read_gold("colour_chart_spectra.csv")
    assert [row["name"] for row in spectra] == [row["name"] for row in CHART]
    reflectance = columns(spectra, *(f"{band:g}" for band in CHART_NM))
    return weights(CHART_NM, [illuminant("D50")], observer("2")).response(reflectance)[:, 0]


def test_colour_chart_under_d50(chart_XYZ100):
    white = np.array([96.422, 100.0, 82.521])  # stated in the file's header
    np.testing.assert_allclose(Lab_from_XYZ(chart_XYZ100, white), columns(CHART, "L", "a", "b"), rtol=0, atol=0.02)
    np.testing.assert_allclose(chart_XYZ100, columns(CHART, "X", "Y", "Z"), rtol=0, atol=0.01)


def test_colour_chart_lab_and_back(chart_XYZ100):
    white = np.array([96.422, 100.0, 82.521])
    Lab = columns(CHART, "L", "a", "b")
    np.testing.assert_allclose(XYZ_from_Lab(Lab, white), columns(CHART, "X", "Y", "Z"), rtol=0, atol=2e-3)


def test_colour_chart_is_as_far_from_its_published_colours_as_is_known(chart_XYZ100):
    white = np.array([96.422, 100.0, 82.521])
    far = ciede2000(columns(CHART, "pub_L", "pub_a", "pub_b"), Lab_from_XYZ(chart_XYZ100, white))
    # the published colours have two decimals: half a last digit in each axis
    np.testing.assert_allclose(far, columns(CHART, "dE00_vs_pub")[:, 0], rtol=0, atol=0.01)
