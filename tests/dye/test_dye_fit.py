"""Fitting a dye: coverage on simulated series with known truth, linearity, and the measured series of tests/data."""

import re
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from simulated import BLUE, CONCENTRATIONS, NM, bands, simulated_series

from chroma.dye.build import fit_dye
from chroma.dye.fit import corrected_for_stray, fit
from chroma.dye.linearity import linearity
from chroma.dye.series import read_concentrations, series
from chroma.readers import read_spectra
from chroma.spectra import joined, measured
from observers.errors import InputError

DATA = Path(__file__).resolve().parents[1] / "data"


@pytest.mark.parametrize(
    ("instrument", "options"),
    [
        ({"sd_concentration": 0.0, "sd_offset": 0.0}, {}),
        ({}, {}),
        ({"readings": 3, "sd_concentration": 0.005}, {}),
        ({"intercept": 0.01}, {"intercept": True}),
        ({"stray": 8e-4}, {"stray_light": None}),
    ],
    ids=["noise alone", "pipetting and offsets", "three readings", "intercept", "stray light fitted"],
)
def test_the_truth_lies_in_the_95_percent_interval_in_93_to_97_percent_of_bands(instrument, options):
    rng, inside = np.random.default_rng(11), []
    for _ in range(500):
        dye = fit_dye(simulated_series(rng, **instrument), name="simulated", **options).dye
        inside.append(np.abs(dye.absorptivity - BLUE) <= dye.half_width95)
    assert 0.93 <= np.mean(inside) <= 0.97


def test_errors_are_found_as_large_as_they_were_made():
    rng = np.random.default_rng(3)
    found = [fit(simulated_series(rng, sd_concentration=0.01, sd_offset=5e-4)) for _ in range(100)]
    assert np.sqrt(np.mean([f.sd_concentration**2 for f in found])) == pytest.approx(0.01, rel=0.12)
    assert np.sqrt(np.mean([f.sd_offset**2 for f in found])) == pytest.approx(5e-4, rel=0.12)
    assert np.mean([f.sigma_T for f in found]) == pytest.approx(5e-4, rel=0.06)


def test_stray_light_is_found_with_its_uncertainty():
    rng = np.random.default_rng(5)
    found = [fit(simulated_series(rng, stray=8e-4), stray_light=None) for _ in range(100)]
    s = np.array([f.stray_light for f in found])
    u = np.array([f.u_stray_light for f in found])
    assert s.mean() == pytest.approx(8e-4, abs=3 * s.std() / 10)
    # The offset of a reading is worth some stray light, which its own interval does not know of.
    assert 0.4 < u.mean() / s.std() < 1.3


def test_stray_light_given_is_taken_out():
    A = np.array([[0.5, 1.5, 2.5]])
    seen = -np.log10((10.0**-A + 1e-3) / (1 + 1e-3))
    np.testing.assert_allclose(corrected_for_stray(seen, 1e-3), A, atol=1e-12)


def test_weights_fall_with_absorbance():
    # One wavelength where half the standards are nearly black: they must count for nearly nothing.
    rng = np.random.default_rng(2)
    strong = fit(simulated_series(rng, absorptivity=BLUE * 1.7, sd_concentration=0, sd_offset=0))
    assert strong.independent[np.argmax(BLUE)] < 2 * strong.independent.min() * BLUE.max() / BLUE.min()
    np.testing.assert_allclose(strong.absorptivity, BLUE * 1.7, rtol=0, atol=6 * strong.independent.max())


def test_a_straight_series_is_called_straight_and_a_dimer_is_found():
    rng = np.random.default_rng(7)
    straight = [linearity(d, fit(d)) for d in (simulated_series(rng) for _ in range(100))]
    assert np.mean([j.bend_p < 0.01 for j in straight]) <= 0.05
    assert np.mean([j.associates for j in straight]) <= 0.05
    assert all(j.holds_to == CONCENTRATIONS.max() for j in straight if j.bend_p >= 0.01)
    dimer = bands((40, 560, 1200), floor=0.0)
    bent = []
    for _ in range(50):
        data = simulated_series(rng)
        c = data.concentration[data.standard]
        share = 0.3 * c / c.max()  # of the dye that pairs, 30 % at the strongest
        data = replace(data, absorbance=data.absorbance + (c * share)[:, None] * (dimer / 2 - BLUE))
        bent.append(linearity(data, fit(data)))
    assert np.mean([j.associates for j in bent]) >= 0.95
    assert np.mean([j.bend_p < 0.01 for j in bent]) >= 0.95


def test_beers_law_holds_up_to_where_it_was_made_to_bend():
    rng = np.random.default_rng(9)
    held = []
    for _ in range(50):
        data = simulated_series(rng, sd_concentration=0.001)
        c = data.concentration[data.standard]
        data = replace(data, absorbance=data.absorbance - (c * 0.05 * c / c.max())[:, None] * BLUE)  # 5 % at the top
        held.append(linearity(data, fit(data), fraction=0.02).holds_to)
    assert np.median(held) == pytest.approx(0.02 / 0.05 * CONCENTRATIONS.max(), rel=0.1)


def test_methylene_blue_in_water():
    # tests/data/methylene_blue (MIT licence); an independent plain fit of the same file: slope 0.2083 L/mg, R² 0.9994.
    readings = read_spectra(str(DATA / "methylene_blue/standards_tabtext.xls"), quantity="absorbance")[0]
    known = {name: float(name) / 1000 for name in readings.names}
    found = fit_dye(series(readings, known, unit="g/L", path_length_mm=10.0), name="methylene blue")
    assert found.dye.wavelength_nm[found.dye.peak] == pytest.approx(664, abs=2)
    assert found.line.slope == pytest.approx(208.3, abs=0.05)
    assert found.line.r**2 == pytest.approx(0.9994, abs=5e-5)
    # What its linearity looks like: standards off the line by 8 % down to 2 %, a bend of which chance is not excluded.
    judged = found.dye.findings["linearity"]
    assert max(abs(row["deviation"] or 0) for row in judged["standards"]) == pytest.approx(0.084, abs=0.005)
    assert judged["bend_at_highest"] == pytest.approx(0.19, abs=0.02)
    assert judged["holds_to"] == 0.005
    assert (
        judged["shape_over_noise"] > 5
    )  # the shape does change, as a dye that pairs would; five standards cannot tell why


def rhodamine(levels):
    parts = []
    for path in sorted((DATA / "rhodamine_6g").glob("Rhodamine*.csv")):
        level, number = re.search(r"_([A-F])(\d)\.csv", path.name).groups()
        if level in levels:
            parts.append(replace(read_spectra(str(path))[0], names=(f"{level}#{number}",)))
    return joined(parts)


def test_rhodamine_6g_in_methanol():
    # tests/data/rhodamine_6g (CC BY 4.0). Independent plain fit at 527 nm: R² 0.986 over four levels; better without the top.
    known = {"A": 0.055e-3, "D": 0.03e-3, "E": 0.01e-3, "F": 0.1e-3}
    data = series(rhodamine("ADEF"), known, unit="mol/L", path_length_mm=10.0)
    found = fit_dye(data, name="rhodamine 6G", intercept=True)
    assert found.dye.wavelength_nm[found.dye.peak] == pytest.approx(527, abs=1)
    assert found.line.r**2 == pytest.approx(0.986, abs=0.001)
    # What its linearity looks like: the standards lie up to a fifth off one line, and the shape changes between them.
    judged = found.dye.findings["linearity"]
    assert judged["concentration_error"] == pytest.approx(0.195, abs=0.02)
    assert judged["associates"]
    without = series(rhodamine("ADEF"), known, unit="mol/L", path_length_mm=10.0, up_to=0.06e-3)
    assert "left out, above 6e-05 mol/L: F" in without.notes
    assert fit_dye(without, name="rhodamine 6G").line.r ** 2 == pytest.approx(0.997, abs=0.001)


def readings(A):
    return measured([f"s{i}" for i in range(len(A))], NM[:4], np.asarray(A), "absorbance")


def table(*values):
    return {f"s{i}": value for i, value in enumerate(values)}


@pytest.mark.parametrize(
    ("rows", "known", "message"),
    [
        ([[0.1] * 4, [0.2] * 4], table(1.0), "no concentration for s1"),
        ([[0.1] * 4], table(1.0, 2.0), "no reading of s1"),
        ([[0.1] * 4], table(1.0), "a line needs two or more that differ"),
        ([[0.1] * 4, [0.1] * 4], table(1.0, 1.0), "a line needs two or more that differ"),
        ([[0.0] * 4, [0.0] * 4], table(0.0, 0.0), "a line needs two or more that differ"),
    ],
    ids=["concentration missing", "reading missing", "one point", "one concentration", "blanks only"],
)
def test_a_series_that_cannot_be_fitted_is_refused(rows, known, message):
    with pytest.raises(InputError, match=message):
        series(readings(rows), known, unit="g/L", path_length_mm=10.0)


def test_a_negative_absorptivity_is_refused():
    data = series(readings([[0.5, 0.4, -0.05, 0.3], [1.0, 0.8, -0.07, 0.6], [0.25, 0.2, -0.03, 0.15]]), table(1.0, 2.0, 0.5),
                  unit="g/L", path_length_mm=10.0)  # fmt: skip
    with pytest.raises(InputError, match="comes out negative"):
        fit_dye(data, name="impossible")


def test_points_beyond_the_photometric_range_are_left_out_and_named():
    rows = [[0.5, 0.4, 0.3, 0.2], [1.0, 0.8, 0.6, 0.4], [4.0, 3.2, 2.4, 1.6]]
    data = series(readings(rows), table(1.0, 2.0, 8.0), unit="g/L", path_length_mm=10.0)
    assert any("left out, above absorbance 3: 2 points of s2 within 380–385 nm" in note for note in data.notes)
    np.testing.assert_allclose(fit(data).absorptivity, [0.5, 0.4, 0.3, 0.2], rtol=1e-9)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "is empty"),
        ("name,amount\na,1\n", "name and concentration are wanted"),
        ("name,concentration\na,x\n", "line 2: concentration 'x'"),
        ("name,concentration\na,-1\n", "must be finite and not negative"),
        ("name,concentration,unit\na,1,ppm\n", "unit 'ppm' of concentration"),
        ("name,concentration,unit\na,1,mmol/L\n", "the molar mass is not known"),
        ("name,concentration\na,1\na,2\n", "line 3: 'a' has two concentrations"),
    ],
    ids=["empty", "no column", "text", "negative", "unknown unit", "other kind of unit", "twice"],
)
def test_a_file_of_concentrations_that_is_wrong_is_refused(tmp_path, text, message):
    path = tmp_path / "known.csv"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(InputError, match=message):
        read_concentrations(str(path), "g/L", "g/L")


def test_concentrations_are_read_with_their_units(tmp_path):
    path = tmp_path / "known.csv"
    path.write_text("# simulated\nname;concentration;unit\na;1,5;mg/L\nb;2 mmol/L;\nc;3;\n", encoding="utf-8")
    known, source = read_concentrations(str(path), "g/L", "g/L", 100.0)
    assert known == pytest.approx({"a": 0.0015, "b": 0.2, "c": 3.0})
    assert len(source.sha256) == 64
