# ruff: noqa: E501 - a table of cases reads by its lines
"""Input that cannot be used: exit code 2, one clear line, no traceback, nothing written. All of it is made up."""

import json
import os

import pytest
from helpers import ROOT

GOOD = "nm,%T a\n" + "".join(f"{nm},{50 + nm % 7}\n" for nm in range(380, 781, 10))
DEMO = ROOT / "demo_spectra"
TARGET = DEMO / "target.csv"


def replaced(old, new, count=1):
    return GOOD.replace(old, new, count)


FILES = [
    ("empty", b"", "empty"),
    ("only blanks", b" \n\n \n", "no table|empty"),
    ("binary", bytes(range(256)) * 40, "text"),
    ("a picture", b"\x89PNG\r\n\x1a\n" + b"\0" * 200, "PNG"),
    ("a PDF", b"%PDF-1.7\n" + b"\x01\x02" * 100, "PDF"),
    ("gzip", b"\x1f\x8b\x08\0" + b"\0" * 50, "unpack|gzip|archive"),
    ("a broken workbook", b"PK\x03\x04" + b"\0" * 100, "workbook|zip|archive"),
    ("a broken Parquet file", b"PAR1" + b"\0" * 100 + b"PAR1", "Parquet|parquet"),
    ("prose", b"The fountain is blue today.\nIt was green before.\n", "no table"),
    ("cut in a row", GOOD[:-4].encode() + b"\n780", "cut|columns|lacks|empty"),
    ("text in a cell", replaced("500,53", "500,blue").encode(), "line 14"),
    ("NaN in a cell", replaced("500,53", "500,NaN").encode(), "line 14|500"),
    ("nothing in a cell", replaced("500,53", "500,").encode(), "line 14|500"),
    ("infinity in a cell", replaced("500,53", "500,inf").encode(), "line 14|500"),
    ("overflow of the instrument", replaced("500,53", "500,#####").encode(), "line 14"),
    ("a wavelength twice", replaced("510,", "500,").encode(), "twice"),
    ("wavelengths out of order", replaced("510,", "905,").encode(), "order|twice"),
    ("a negative wavelength", replaced("380,", "-380,").encode(), "380|wavelength"),
    ("no quantity", GOOD.replace("%T a", "pond").replace(",5", ",0.5").encode(), "--quantity"),
    ("between fraction and per cent", GOOD.replace("%T a", "transmittance").replace(",5", ",1.5").encode(), "1.5"),
    ("too much transmittance", replaced("500,53", "500,153").encode(), "1.53"),
    ("far below zero", replaced("500,53", "500,-30").encode(), "-0.3"),
    ("no unit and no nm", GOOD.replace("nm,", "x,").replace("\n", "\n0.").replace("0.\n", "\n")[:-2].encode(), "nm|µm|unit"),
    ("infrared", ("cm-1,%T\n" + "".join(f"{w},50\n" for w in range(400, 4000, 50))).encode(), "400–700 nm"),
    ("half of the range", ("nm,%T\n" + "".join(f"{w},50\n" for w in range(400, 601, 10))).encode(), "400–700 nm"),
    ("a gap", ("nm,%T\n" + "".join(f"{w},50\n" for w in range(380, 781, 10) if not 500 < w < 560)).encode(), "gap"),
    ("one wavelength", b"nm,%T a,%T b\n550,50,60\n", "400–700|no table|wavelength"),
    ("ten megabytes on one line", b"1," * 5_000_000, "long|line"),
    ("a million empty lines", b"\n" * 1_000_000, "no table|empty"),
    ("columns that come and go", b"nm,%T a,%T b\n400,50,51\n410,50\n420,50,51\n", "line 3"),
    ("two tables", (GOOD + "\n" + GOOD).encode(), "line"),
    ("UTF-16 without its end", GOOD.encode("utf-16")[:-1], ""),
    ("mass spectrum", b"##TITLE=x\n##JCAMP-DX=4.24\n##DATA TYPE=MASS SPECTRUM\n##PEAK TABLE=(XY..XY)\n1,2\n##END=\n", "MASS"),
    ("JCAMP without an end", b"##TITLE=x\n##JCAMP-DX=4.24\n##DATA TYPE=UV/VIS SPECTRUM\n##XUNITS=NANOMETERS\n", ""),
    ("CGATS with too few sets", b"CGATS.17\nBEGIN_DATA_FORMAT\nSAMPLE_ID SPECTRAL_NM400 SPECTRAL_NM700\nEND_DATA_FORMAT\n"
     b"NUMBER_OF_SETS 2\nBEGIN_DATA\n1 0.5 0.5\nEND_DATA\n", ""),
    ("XML with an entity", b'<?xml version="1.0"?><!DOCTYPE a [<!ENTITY b "c">]><a>&b;</a>', "DTD|entit|DOCTYPE"),
    ("other XML", b'<?xml version="1.0"?><item></item>', ""),
    ("JSON of something else", b'{"fountain": "blue"}', ""),
]  # fmt: skip

LINES = [
    ("a folder", lambda d: ["check", d, "--target", TARGET, "--limit", 1], "folder|directory"),
    ("no such file", lambda d: ["check", d / "none.csv", "--target", TARGET, "--limit", 1], "no such file"),
    ("no such target", lambda d: ["check", TARGET, "--target", d / "none.csv", "--limit", 1], "no such file"),
    ("no such sample", lambda d: ["check", TARGET, "--target", f"{DEMO / 'batches.csv'}:HB-99", "--limit", 1], "HB-99"),
    ("several samples for a target", lambda d: ["check", TARGET, "--target", DEMO / "batches.csv", "--limit", 1], "a target is one"),
    ("no limit", lambda d: ["check", TARGET, "--target", TARGET], "--limit 1.0"),
    ("limit 0", lambda d: ["check", TARGET, "--target", TARGET, "--limit", 0], "positive"),
    ("limit in words", lambda d: ["check", TARGET, "--target", TARGET, "--limit", "small"], "not a valid float"),
    ("limit NaN", lambda d: ["check", TARGET, "--target", TARGET, "--limit", "nan"], "positive"),
    ("unknown lamp", lambda d: ["check", TARGET, "--target", TARGET, "--limit", 1, "-i", "D66"], "unknown illuminant 'D66'"),
    ("daylight too warm", lambda d: ["predict", "--spectra", TARGET, "-i", "daylight:3000K"], "4000 K to 25000 K"),
    ("daylight without a unit", lambda d: ["predict", "--spectra", TARGET, "-i", "daylight:5600"], "unit K"),
    ("LED of no width", lambda d: ["predict", "--spectra", TARGET, "-i", "led:525nm/0nm"], "3 nm to 200 nm"),
    ("unknown observer", lambda d: ["predict", "--spectra", TARGET, "--observer", "5"], "--observer"),
    ("unknown formula", lambda d: ["check", TARGET, "--target", TARGET, "--limit", 1, "--formula", "cie1931"], "--formula"),
    ("k for a formula without", lambda d: ["check", TARGET, "--target", TARGET, "--limit", 1, "--formula", "cmc", "--k", "1:1:1"], "does not apply"),
    ("cmc in another form", lambda d: ["check", TARGET, "--target", TARGET, "--limit", 1, "--cmc", "2"], "2:1"),
    ("guard band without uncertainty", lambda d: ["check", TARGET, "--target", TARGET, "--limit", 1, "--rule", "guard-band"], "replicates"),
    ("tolerance and limit", lambda d: ["check", TARGET, "--target", TARGET, "--limit", 1, "--tolerance", DEMO / "tolerance.toml"], "--limit"),
    ("a blank that is not there", lambda d: ["spectra", DEMO / "counts.csv", "--blank", "none"], "no sample is named 'none'"),
    ("dark alone", lambda d: ["spectra", DEMO / "counts.csv", "--dark", "dark"], "--blank"),
    ("colour of counts", lambda d: ["predict", "--spectra", DEMO / "counts.csv"], "--blank"),
    ("a quantity that the file denies", lambda d: ["spectra", TARGET, "--quantity", "absorbance"], "transmittance"),
    ("grid outside", lambda d: ["spectra", TARGET, "--grid", "300:700:10"], "not extrapolated"),
    ("grid in another form", lambda d: ["spectra", TARGET, "--grid", "400-700"], "400:700:10nm"),
    ("path length without a unit", lambda d: ["spectra", TARGET, "--path-length", "10", "--to-path-length", "5mm"], "10mm"),
    ("path length of reflectance", lambda d: ["spectra", DEMO / "basin_reflectance.txt", "--path-length", "10mm", "--to-path-length", "5mm"], "no path length"),
    ("two grids at once", lambda d: ["spectra", TARGET, DEMO / "counts.csv"], "quantities differ|grids differ"),
    ("reflectance against transmittance", lambda d: ["check", DEMO / "basin_reflectance.txt", "--target", TARGET, "--limit", 1], "cannot be compared"),
    ("less than strict wants", lambda d: ["predict", "--spectra", DEMO / "basin_reflectance.txt", "--ends", "strict"], "380–780 nm"),
    ("E308 on an uneven grid", lambda d: ["predict", "--spectra", DEMO / "counts.csv", "--blank", "blank", "--dark", "dark", "--weights", "astm"], "even"),
    ("a suffix that is not written", lambda d: ["predict", "--spectra", TARGET, "--out", d / "x.doc"], "csv"),
    ("a folder that is not there", lambda d: ["predict", "--spectra", TARGET, "--out", d / "none" / "x.csv"], "no such"),
    ("no command", lambda d: ["colour"], "No such command"),
    ("unknown option", lambda d: ["predict", "--spektra", TARGET], "--spektra"),
    ("neither spectra nor dye", lambda d: ["predict"], "--spectra or --dye"),
    ("a dye's file that is none", lambda d: ["predict", "--dye", f"{TARGET}=1g/L", "--path-length", "10mm"], "no dye file"),
    ("a dye without an amount", lambda d: ["predict", "--dye", "heron.dye.json", "--path-length", "10mm"], "NAME.dye.json=0.4g/L"),
    ("concentrations that miss a standard", lambda d: ["dye", "fit", DEMO / "rowan_series.csv", "--concentrations", DEMO / "broom_concentrations.csv", "--path-length", "10mm"], "no concentration for"),
    ("a unit that is none", lambda d: ["dye", "fit", DEMO / "rowan_series.csv", "--concentrations", DEMO / "rowan_concentrations.csv", "--path-length", "10mm", "--unit", "ppm"], "ppm"),
    ("two targets of a match", lambda d: ["match", "--target", TARGET, "--target-lab", "1,2,3", "--dye", "x", "--path-length", "10mm"], "--target-lab"),
    ("L*a*b* in another form", lambda d: ["match", "--target-lab", "1,2", "--dye", "x", "--path-length", "10mm"], "72.8,-31.9,-15.4"),
]  # fmt: skip


def judged(done, message, folder, before):
    import re

    assert done.code == 2
    assert done.out == ""
    assert "Traceback" not in done.err
    assert len(done.err.strip().splitlines()) == 1, done.err
    assert done.err.startswith("lamplit: ")
    assert re.search(message, done.err), done.err
    assert "this should not happen" not in done.err
    assert sorted(path.name for path in folder.iterdir()) == before


@pytest.mark.parametrize(("content", "message"), [row[1:] for row in FILES], ids=[row[0] for row in FILES])
def test_a_file_that_cannot_be_used(lamplit, tmp_path, content, message):
    path = tmp_path / "odd.csv"
    path.write_bytes(content)
    judged(lamplit("predict", "--spectra", path, "--out", tmp_path / "out.csv"), message, tmp_path, ["odd.csv"])


@pytest.mark.parametrize(("line", "message"), [row[1:] for row in LINES], ids=[row[0] for row in LINES])
def test_a_command_that_cannot_be_done(lamplit, tmp_path, line, message):
    judged(lamplit(*line(tmp_path)), message, tmp_path, [])


def test_there_are_more_than_forty():
    assert len(FILES) + len(LINES) > 40


@pytest.mark.skipif(os.geteuid() == 0, reason="root may read everything")
def test_a_file_without_permission(lamplit, tmp_path):
    path = tmp_path / "closed.csv"
    path.write_text(GOOD)
    path.chmod(0)
    judged(lamplit("predict", "--spectra", path), "permission|Permission", tmp_path, ["closed.csv"])


def test_a_refusal_in_json(lamplit):
    done = lamplit("check", TARGET, "--target", TARGET, "--limit", 1, "-i", "D66", "--json")
    assert done.code == 2
    assert done.err == ""
    assert set(json.loads(done.out)["error"]) == {"what", "where", "why", "do"}


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("limit = ", "no valid TOML"),
        ("limit = 'one'", "a number is wanted"),
        ("limits = 1.0", "unknown key 'limits'"),
        ("[illuminants]\nD65 = true", "no limit for D65"),
        ("limit = 1\nformula = 'cie1931'", "unknown formula"),
        ("limit = 1\nrule = 'kind'", "unknown rule"),
        ("limit = 1\nilluminants = 3", "a table of names and numbers"),
        ("limit = 1\n[one_sided]\ndX_min = 1", "unknown one-sided limit"),
        ("limit = nan", "a number is wanted"),
        ("limit = -1", "positive"),
        ("limit = 1\nobserver = '7'", "unknown observer"),
        ("\xff", "TOML|text"),
    ],
)
def test_a_tolerance_file_that_is_wrong(lamplit, tmp_path, text, message):
    path = tmp_path / "tolerance.toml"
    path.write_bytes(text.encode("latin-1"))
    judged(lamplit("check", TARGET, "--target", TARGET, "--tolerance", path), message, tmp_path, ["tolerance.toml"])
