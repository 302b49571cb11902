"""lamplit.toml: what a bench sets once; the command line goes before it, and every result says what came from it."""

import json
import subprocess
import sys

import pytest
from helpers import ROOT

from chroma.cli import common

DEMO = ROOT / "demo_spectra"
BATCHES, TARGET = DEMO / "batches.csv", DEMO / "target.csv"
CHECK = ["check", BATCHES, "--target", TARGET, "--limit", 1]
PREDICT = ["predict", "--spectra", TARGET]


@pytest.fixture
def bench(tmp_path, monkeypatch, dyes):
    """A working folder, and a way to write its file of defaults."""
    monkeypatch.chdir(tmp_path)
    for path in dyes.iterdir():
        (tmp_path / path.name).symlink_to(path)

    def write(text, folder=tmp_path):
        folder.mkdir(parents=True, exist_ok=True)
        path = folder / "lamplit.toml"
        path.write_text(text, encoding="utf-8")
        return path

    return write


def test_each_key_is_used_and_said(lamplit, bench):
    bench('illuminants = ["A", "D65"]\nobserver = 2\nformula = "cie1976"\nweights = "astm"\n')
    done = lamplit(*CHECK, "--json").json
    assert done["conditions"]["illuminants"] == ["A", "D65"]
    assert (done["conditions"]["observer"], done["conditions"]["weights"], done["formula"]) == ("2", "astm", "cie1976")
    assert done["defaults"] == {
        "file": "lamplit.toml",
        "values": {"illuminants": ["A", "D65"], "observer": "2", "formula": "cie1976", "weights": "astm"},
    }
    text = lamplit(*CHECK).out
    (line,) = (line for line in text.splitlines() if line.startswith("Defaults from lamplit.toml: "))
    assert all(part in line for part in ("illuminants A, D65", "observer 2", "formula cie1976", "weights astm"))


def test_the_command_line_goes_before_the_file(lamplit, bench):
    bench('illuminants = ["A"]\nobserver = "2"\n')
    done = lamplit(*PREDICT, "-i", "FL11", "--json").json
    assert done["conditions"]["illuminants"] == ["FL11"]
    assert done["conditions"]["observer"] == "2"
    assert done["defaults"]["values"] == {"observer": "2"}


def test_no_defaults_leaves_the_file_unread(lamplit, bench):
    plain = lamplit(*PREDICT, "--json").json
    bench("observer = 2\n")
    assert lamplit(*PREDICT, "--no-defaults", "--json").json == plain
    bench("not toml")
    assert lamplit(*PREDICT, "--no-defaults", "--json").json == plain


def test_without_a_file_nothing_is_said(lamplit, bench):
    assert "defaults" not in lamplit(*PREDICT, "--json").json
    assert "Defaults" not in lamplit(*PREDICT).out


def test_path_length_and_dyes(lamplit, bench):
    bench('path_length = "10mm"\ndyes = ["heron.dye.json", "broom.dye.json"]\n')
    done = lamplit("unmix", BATCHES, "--json")
    assert done.code == 0
    assert set(done.json["samples"][0]["concentrations"]) == {"heron", "broom"}
    said = {"file": "lamplit.toml", "values": {"path_length": "10mm", "dyes": ["heron.dye.json", "broom.dye.json"]}}
    assert done.json["defaults"] == said
    assert lamplit("match", "--target", TARGET, "--json").json["defaults"] == said
    assert lamplit(*CHECK, "--json").json["corrections"]
    made = lamplit("predict", "--dye", "heron.dye.json=5mg/L", "--json").json
    assert made["defaults"]["values"] == {"path_length": "10mm"}
    one = lamplit("unmix", BATCHES, "--dye", "heron.dye.json", "--json").json
    assert set(one["samples"][0]["concentrations"]) == {"heron"}


def test_a_fit_takes_the_path_length(lamplit, bench):
    bench('path_length = "10mm"\n')
    line = ["dye", "fit", DEMO / "rowan_series.csv", "--concentrations", DEMO / "rowan_concentrations.csv"]
    done = lamplit(*line, "--json")
    assert done.json["path_length_mm"] == 10
    assert done.json["defaults"]["values"] == {"path_length": "10mm"}


def test_what_has_nothing_to_act_on_is_not_said_to_be_used(lamplit, bench):
    bench('path_length = "10mm"\ndyes = ["heron.dye.json"]\n')
    assert "defaults" not in lamplit(*PREDICT, "--json").json
    assert "defaults" not in lamplit("spectra", TARGET, "--json").json
    bench('dyes = ["heron.dye.json"]\n')
    done = lamplit(*CHECK, "--json").json
    assert "defaults" not in done
    assert "corrections" not in done


def test_a_default_shelf_does_not_stop_a_check_of_tiles(lamplit, bench):
    bench('path_length = "10mm"\ndyes = ["heron.dye.json"]\n')
    tiles = DEMO / "basin_reflectance.txt"
    name = lamplit("spectra", tiles, "--json").json["samples"][0]["name"]
    line = ["check", tiles, "--target", f"{tiles}:{name}", "--limit", 1]
    done = lamplit(*line, "--json")
    assert done.code == 1
    assert "defaults" not in done.json
    assert "reflectance" in lamplit(*line, "--dye", "heron.dye.json").err


@pytest.mark.parametrize("key", ['formula = "cmc"', "observer = 2", 'illuminants = ["A"]', 'weights = "astm"'])
def test_a_tolerance_file_goes_before_defaults(lamplit, bench, key):
    line = ["check", BATCHES, "--target", TARGET, "--tolerance", DEMO / "tolerance.toml", "--json"]
    plain = lamplit(*line).json
    bench(key)
    assert lamplit(*line).json == plain


def test_factors_of_cmc_go_before_a_default_formula(lamplit, bench):
    bench('formula = "cie94"\n')
    assert lamplit(*CHECK, "--cmc", "2:1", "--json").json["formula"].startswith("cmc")


def test_the_working_folder_goes_before_the_users_folder(lamplit, bench, tmp_path, monkeypatch):
    home = tmp_path / "home"
    monkeypatch.setattr(common.click, "get_app_dir", lambda name: str(home / name))
    path = bench("observer = 2\n", home / "lamplit")
    assert lamplit(*PREDICT, "--json").json["defaults"] == {"file": str(path), "values": {"observer": "2"}}
    bench("observer = 10\n")
    assert lamplit(*PREDICT, "--json").json["defaults"] == {"file": "lamplit.toml", "values": {"observer": "10"}}


def test_files_are_sought_beside_the_file_that_names_them(lamplit, bench, tmp_path, monkeypatch, dyes):
    home = tmp_path / "home"
    monkeypatch.setattr(common.click, "get_app_dir", lambda name: str(home / name))
    bench('illuminants = ["pond.spdx"]\ndyes = ["own.dye.json"]\npath_length = "10mm"\n', home / "lamplit")
    (home / "lamplit" / "pond.spdx").write_bytes((DEMO / "garden_lamp.spdx").read_bytes())
    (home / "lamplit" / "own.dye.json").write_bytes((dyes / "heron.dye.json").read_bytes())
    assert lamplit(*PREDICT, "--json").json["conditions"]["illuminants"] == ["pond"]
    assert lamplit("unmix", BATCHES, "--json").code == 0


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("observer = 7", "lamplit.toml, observer: unknown observer '7': known are 2, 10"),
        ("observer = 2.5", "lamplit.toml, observer: 2.5: a text is wanted"),
        ("observer = true", "lamplit.toml, observer: True"),
        ("formula = 'cie1931'", "lamplit.toml, formula: unknown formula 'cie1931'"),
        ("weights = 'even'", "lamplit.toml, weights: unknown weights 'even'"),
        ("path_length = 10", "lamplit.toml, path_length: 10: a text is wanted"),
        ("path_length = '10'", "lamplit.toml, path_length: path length '10'"),
        ("illuminants = 'D65'", "lamplit.toml, illuminants: 'D65': a list of texts is wanted"),
        ("illuminants = []", "lamplit.toml, illuminants: []"),
        ("illuminants = ['D66']", "lamplit.toml, illuminants: unknown illuminant 'D66'"),
        ("illuminants = [65]", "lamplit.toml, illuminants: 65: a text is wanted"),
        ("dyes = ['none.dye.json']", "lamplit.toml, dyes: no such file"),
        ("limit = 1.0", "lamplit.toml: unknown key 'limit': known are illuminants, observer"),
        ("observer =", "lamplit.toml: is no valid TOML"),
        ("# \udcff", "lamplit.toml: is not text"),
    ],
)
def test_a_wrong_file_is_refused_with_its_key(lamplit, tmp_path, monkeypatch, text, message):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "lamplit.toml").write_bytes(text.encode("utf-8", "surrogateescape"))
    done = lamplit(*PREDICT)
    assert done.code == 2
    assert done.out == ""
    assert done.err.startswith(f"lamplit: {message}")
    assert len(done.err.splitlines()) == 1


def test_help_is_there_though_the_file_is_wrong(lamplit, bench):
    bench("observer = 7")
    assert lamplit("check", "--help").code == 0


def test_the_demo_is_the_same_whatever_the_defaults(lamplit, bench, monkeypatch):
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1796083200")
    plain = lamplit("demo")
    bench('observer = 2\npath_length = "1mm"\n')
    assert lamplit("demo", "--force").out == plain.out


def test_a_start_without_a_file_does_not_import_what_reads_one(tmp_path):
    code = (
        f"import sys; sys.path.insert(0, {str(ROOT)!r})\n"
        "from chroma.cli import main\n"
        "try: main()\n"
        "finally: print([name in sys.modules for name in ('tomllib', 'chroma.defaults')])"
    )
    for text, loaded in ((None, [False, False]), ("observer = 2", [True, True])):
        if text is not None:
            (tmp_path / "lamplit.toml").write_text(text)
        done = subprocess.run(
            [sys.executable, "-c", code, *map(str, PREDICT)], capture_output=True, text=True, cwd=tmp_path, timeout=60
        )
        assert json.loads(done.stdout.splitlines()[-1].lower()) == loaded
