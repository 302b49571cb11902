"""The packaged tables are what their script makes from colour-science, byte for byte."""

import hashlib

import colour
import numpy as np
import pytest
from helpers import ROOT

from observers.human import observer
from observers.tables import make, table

FOLDER = ROOT / "observers" / "tables"
COMMITTED = sorted(
    path.name
    for path in FOLDER.glob("*.csv")
    if "by observers/tables/make.py" in path.read_text(encoding="utf-8")[:400]
)


@pytest.fixture(scope="module")
def made():
    return make.tables()


def test_the_script_makes_every_file_and_no_other(made):
    assert sorted(made) == COMMITTED


@pytest.mark.parametrize("name", COMMITTED)
def test_the_script_makes_the_same_bytes(made, name):
    assert made[name].encode() == (FOLDER / name).read_bytes()


@pytest.mark.parametrize("name", COMMITTED)
def test_each_file_names_its_source_and_its_checksum(name):
    text = (FOLDER / name).read_text(encoding="utf-8")
    head = [line for line in text.splitlines() if line.startswith("#")]
    assert "CIE" in head[0]
    assert "colour-science 0.4.7" in head[1]
    rows = text.split("\n", len(head) + 1)[-1].rstrip("\n")
    assert head[2].split()[-1] == hashlib.sha256(rows.encode()).hexdigest()


@pytest.mark.parametrize(
    ("key", "theirs"),
    [
        ("2", "CIE 1931 2 Degree Standard Observer"),
        ("10", "CIE 1964 10 Degree Standard Observer"),
        ("2-2015", "CIE 2015 2 Degree Standard Observer"),
        ("10-2015", "CIE 2015 10 Degree Standard Observer"),
    ],
)
def test_observers_as_read_are_the_published_numbers(key, theirs):
    np.testing.assert_array_equal(observer(key).responsivity, colour.MSDS_CMFS[theirs].values)
    np.testing.assert_array_equal(observer(key).wavelength_nm, colour.MSDS_CMFS[theirs].wavelengths)


@pytest.mark.parametrize("file", ["daylight", "lamps"])
def test_lamps_as_read_are_the_published_numbers(file):
    for name, power in table(file).items():
        if name != "wavelength_nm":
            np.testing.assert_array_equal(power, colour.SDS_ILLUMINANTS[name].values)
