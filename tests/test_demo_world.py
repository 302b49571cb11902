"""The invented world of the demo: made again byte for byte, labelled as invented, small."""

import runpy
import subprocess
import sys
import tomllib
from pathlib import Path
from types import SimpleNamespace
from xml.etree import ElementTree

import numpy as np
import pytest

FOLDER = Path(__file__).resolve().parents[1] / "demo_spectra"
BY_HAND = {"README.md", "tolerance.toml"}
COMMITTED = sorted(path.name for path in FOLDER.iterdir() if path.is_file())
MADE = [name for name in COMMITTED if name not in BY_HAND | {"make.py"}]


@pytest.fixture(scope="module")
def make() -> SimpleNamespace:
    return SimpleNamespace(**runpy.run_path(str(FOLDER / "make.py")))


@pytest.fixture(scope="module")
def made_again(tmp_path_factory) -> Path:
    folder = tmp_path_factory.mktemp("demo world")
    subprocess.run([sys.executable, FOLDER / "make.py", folder], check=True, timeout=120)
    return folder


def test_the_script_makes_every_committed_file_and_no_other(made_again):
    assert sorted(path.name for path in made_again.iterdir()) == MADE


@pytest.mark.parametrize("name", MADE)
def test_the_script_makes_the_same_bytes(made_again, name):
    assert (made_again / name).read_bytes() == (FOLDER / name).read_bytes()


@pytest.mark.parametrize("name", COMMITTED)
def test_every_file_says_early_that_it_is_invented(name):
    # early: before any number can be taken for a measurement
    assert "invented" in (FOLDER / name).read_text(encoding="utf-8")[:700].lower()


def test_the_set_is_under_one_megabyte():
    assert sum((FOLDER / name).stat().st_size for name in COMMITTED) < 1_000_000


def test_the_readme_names_every_file():
    page = (FOLDER / "README.md").read_text(encoding="utf-8")
    stems = {name.replace("heron_", "").replace("broom_", "").replace("rowan_", "") for name in MADE}
    assert [stem for stem in stems if stem not in page] == []


def test_dyes_peak_where_real_dyes_do(make):
    wavelength_nm = np.arange(380.0, 781.0)
    for dye in make.DYES:
        assert 20 < make.absorptivity(dye, wavelength_nm).max() < 150, dye


def test_absorbance_follows_beers_law_save_for_pairs_of_rowan_red(make):
    wavelength_nm = np.array([530.0, 620.0])
    thin, thick = (
        {dye: make.absorbance(make.Recipe("x", {dye: g}), wavelength_nm, 25.0) for dye in make.SERIES_G_PER_L}
        for g in (0.0002, 0.02)
    )
    for dye in ("Heron blue", "Broom yellow"):
        np.testing.assert_allclose(thick[dye], 100 * thin[dye], rtol=1e-12)
    assert 0.92 < thick["Rowan red"][0] / (100 * thin["Rowan red"][0]) < 0.98


def test_target_reads_as_its_recipe_does(make):
    lines = (FOLDER / "target.csv").read_text(encoding="utf-8").splitlines()
    wavelength_nm, seen = np.loadtxt(lines[3:], delimiter=",").T
    true = 10 ** -make.absorbance(make.TARGET, wavelength_nm)
    # four times noise, baseline and stray light together, the baseline being the greatest
    assert np.abs(seen - true).max() < 4 * (make.NOISE_T + make.STRAY + np.log(10) * make.BASELINE_A)


def test_blocks_of_the_linked_file_are_as_many_as_it_says():
    text = (FOLDER / "broom_series.jdx").read_text(encoding="utf-8")
    assert text.count("##END=") == text.count("##TITLE=") == 9
    assert "##BLOCKS=8" in text
    assert max(map(len, text.splitlines())) <= 80  # the standard's line length


def test_lamp_and_tolerance_parse():
    points = ElementTree.parse(FOLDER / "garden_lamp.spdx").findall(".//{iestm2714}SpectralData")
    assert len(points) == 81
    tolerance = tomllib.loads((FOLDER / "tolerance.toml").read_text(encoding="utf-8"))
    assert tolerance["illuminants"] == {"D65": 1.0, "A": 1.5, "LED-B3": 1.5}


def test_every_kind_of_trouble_is_among_the_batches(make):
    kinds = [batch.wrong.split(":")[0] for batch in make.BATCHES]
    expected = {"": 9, "weak": 2, "strong": 2, "contaminated": 2, "turbid": 2, "metameric": 2, "near limit": 1}
    assert {kind: kinds.count(kind) for kind in kinds} == expected
    assert sum(batch.readings == 3 for batch in make.BATCHES) == 3
