"""What is written comes back, and nothing is ever half written. All data here are invented."""

from __future__ import annotations

import json
import os
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp

from chroma.readers import read_spectra, write
from chroma.readers.write import atomic_write, write_rows, write_spectra
from chroma.spectra import QUANTITIES, Source, Spectra
from observers.errors import InputError

SUFFIXES = [".csv", ".parquet", ".jdx", ".dx", ".json", ".xlsx"]
TEXT = st.text(st.characters(exclude_categories=("Cc", "Cs", "Cn", "Zl", "Zp", "Co")), min_size=1, max_size=12)
NAME = TEXT.map(lambda t: " ".join(t.split()).replace("$$", "$")).filter(bool)


@st.composite
def spectra(draw):
    bands = draw(st.integers(2, 12))
    if draw(st.booleans()):
        start, step = draw(st.sampled_from([(380.0, 5.0), (400.0, 10.0), (360.0, 0.1)]))
        nm = start + step * np.arange(bands)
    else:
        nm = np.array(sorted(draw(st.sets(st.floats(200, 2500, width=32), min_size=bands, max_size=bands))))
    quantity = draw(st.sampled_from(QUANTITIES))
    high = {"counts": 6e4, "absorbance": 4.0}.get(quantity, 1.2)
    count = draw(st.integers(1, 4))
    values = draw(hnp.arrays(float, (count, bands), elements=st.floats(0, high)))
    path = draw(st.sampled_from([None, 5.0, 10.0, 33.3]))
    names = tuple(draw(st.lists(NAME, min_size=count, max_size=count)))
    return Spectra(names, nm, values, quantity, None, path)


@pytest.mark.parametrize("suffix", SUFFIXES)
@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(made=spectra())
def test_round_trip(tmp_path, suffix, made):
    path = str(tmp_path / f"made{suffix}")
    write_spectra(made, path, force=True)
    (found,) = read_spectra(path, absorbance_limit=5)
    assert found.names == made.names
    assert found.quantity == made.quantity
    np.testing.assert_array_equal(found.wavelength_nm, made.wavelength_nm)
    # A workbook keeps sixteen digits, every other form all of them.
    np.testing.assert_allclose(found.values, made.values, rtol=1e-15 if suffix == ".xlsx" else 0, atol=0)
    assert found.path_length_mm == pytest.approx(made.path_length_mm)


def left_in(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.iterdir())


def one() -> Spectra:
    return Spectra(("pool",), np.array([400.0, 410.0]), np.array([[0.5, 0.6]]), "transmittance")


@pytest.mark.parametrize("suffix", SUFFIXES)
def test_an_existing_file_is_kept_without_force(tmp_path, suffix):
    path = tmp_path / f"made{suffix}"
    path.write_text("mine")
    with pytest.raises(InputError, match=r"exists already.*--force, or another name"):
        write_spectra(one(), str(path))
    assert path.read_text() == "mine"
    write_spectra(one(), str(path), force=True)
    assert read_spectra(str(path))[0].names == ("pool",)
    assert left_in(tmp_path) == [path.name]


@pytest.mark.parametrize("path", ["no/such/folder/made.csv", "made.txt", "made", ".", "x" * 300 + ".csv"])
def test_a_place_that_cannot_be_written(tmp_path, monkeypatch, path):
    monkeypatch.chdir(tmp_path)
    with pytest.raises(InputError, match=r"cannot (be written|write)"):
        write_spectra(one(), path)
    assert left_in(tmp_path) == []


def test_a_pipe_is_not_replaced(tmp_path):
    os.mkfifo(tmp_path / "made.csv")
    with pytest.raises(InputError, match="no ordinary file"):
        write_rows([{"a": 1}], str(tmp_path / "made.csv"), force=True)


def test_nothing_is_left_when_writing_fails(tmp_path, monkeypatch):
    def full(*_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(InputError, match="cannot be written: the disk is full"):
        write_spectra(one(), str(tmp_path / "made.csv"))
    assert left_in(tmp_path) == []


def test_nothing_is_left_when_the_work_inside_fails(tmp_path):
    def half():
        with atomic_write(str(tmp_path / "made.csv")) as beside:
            beside.write_text("half")
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        half()
    assert left_in(tmp_path) == []


def test_a_link_stays_a_link(tmp_path):
    target, link = tmp_path / "real.csv", tmp_path / "link.csv"
    target.write_text("old")
    link.symlink_to(target)
    write_spectra(one(), str(link), force=True)
    assert link.is_symlink()
    assert "lamplit" in target.read_text()


ROWS = [
    {"name": "pool", "delta_e": np.float64(0.5), "count": 3, "ok": True, "Lab": [50.0, 1.0, 2.0]},
    {"name": "=jet", "delta_e": float("nan"), "count": None, "why": "over, the limit"},
]


def test_rows_as_csv(tmp_path):
    path = tmp_path / "made.csv"
    write_rows(ROWS, str(path))
    assert path.read_text().splitlines() == [
        "name,delta_e,count,ok,Lab,why",
        'pool,0.5,3,True,"[50.0, 1.0, 2.0]",',
        '=jet,nan,,,,"over, the limit"',
    ]


def test_rows_as_json(tmp_path):
    path = tmp_path / "made.json"
    write_rows(ROWS, str(path))
    first, second = json.loads(path.read_text())
    assert first == {"name": "pool", "delta_e": 0.5, "count": 3, "ok": True, "Lab": [50.0, 1.0, 2.0]}
    assert second["delta_e"] is None


def test_rows_as_parquet(tmp_path):
    from pyarrow import parquet

    path = tmp_path / "made.parquet"
    write_rows([*ROWS, {"count": 2.5}], str(path))
    table = parquet.read_table(path)
    assert table.column_names == ["name", "delta_e", "count", "ok", "Lab", "why"]
    assert table["count"].to_pylist() == [3.0, None, 2.5]


def test_rows_as_workbook_keep_text_as_text(tmp_path):
    import openpyxl

    path = tmp_path / "made.xlsx"
    write_rows(ROWS, str(path))
    sheet = openpyxl.load_workbook(path).active
    assert [cell.value for cell in sheet[1]] == ["name", "delta_e", "count", "ok", "Lab", "why"]
    assert (sheet["A3"].value, sheet["A3"].data_type) == ("=jet", "s")
    assert sheet["B3"].value is None


def test_no_rows(tmp_path):
    for suffix in (".csv", ".json", ".xlsx", ".parquet"):
        write_rows([], str(tmp_path / f"made{suffix}"))


def test_json_carries_sources_and_notes(tmp_path):
    path = tmp_path / "made.json"
    made = Spectra(
        ("a",), np.array([400.0, 410.0]), np.ones((1, 2)), "counts", sources=(Source("x.csv", "00"),), notes=("n",)
    )
    write_spectra(made, str(path))
    found = json.loads(path.read_text())
    assert found["sources"] == [{"path": "x.csv", "sha256": "00"}]
    assert found["notes"] == ["n"]


def test_jcamp_keeps_to_eighty_characters(tmp_path):
    nm = np.arange(380.0, 781.0)
    path = tmp_path / "made.jdx"
    write_spectra(Spectra(("a", "b"), nm, np.random.default_rng(1).random((2, 401)), "transmittance"), str(path))
    text = path.read_text()
    assert max(map(len, text.splitlines())) <= 80
    assert "##XYDATA= (X++(Y..Y))" in text
    assert "##BLOCKS= 2" in text


@pytest.mark.parametrize(("library", "suffix"), [("pyarrow", ".parquet"), ("openpyxl", ".xlsx")])
def test_a_missing_extra_is_named(monkeypatch, tmp_path, library, suffix):
    import sys

    monkeypatch.setitem(sys.modules, library, None)
    with pytest.raises(InputError, match=f"needs {library}"):
        write_spectra(one(), str(tmp_path / f"made{suffix}"))
    assert list(Path(tmp_path).iterdir()) == []


def test_the_module_offers_what_it_says():
    assert {"write_spectra", "write_rows", "atomic_write"} <= set(dir(write))
