import re
import shlex
from itertools import pairwise

import pytest
import readme

from chroma.defaults import JUDGES

README = readme.README.read_text(encoding="utf-8")
PYTHON = re.findall(r"```python\n(.*?)```", README, re.DOTALL)
TRANSCRIPTS = readme.transcripts()
RECIPES = re.findall(r"^\|[^|]*\|[^|]*\| `(lamplit [^`]*)` \|$", README, re.MULTILINE)


@pytest.fixture(scope="module")
def printed():
    return readme.printed_by([command for command, _ in TRANSCRIPTS])


@pytest.mark.parametrize("number", range(len(TRANSCRIPTS)), ids=lambda i: TRANSCRIPTS[i][0][:50])
def test_a_transcript_is_what_the_command_prints(printed, number):
    assert printed[number] == TRANSCRIPTS[number][1]


def test_every_command_has_a_transcript():
    from chroma.cli import COMMANDS

    shown = {command.split()[1] for command, _ in TRANSCRIPTS}
    assert set(COMMANDS) - {"demo", "completion"} <= shown


@pytest.fixture
def python_names(monkeypatch):
    """What the README's first Python example leaves behind."""
    monkeypatch.chdir(readme.ROOT)
    names = {}
    exec(compile(PYTHON[0], "README.md", "exec"), names)
    return names


def test_the_python_example_runs(capsys, python_names):
    assert re.search(r"'batches': 20", capsys.readouterr().out)


def test_the_example_of_tables_runs(capsys, python_names):
    for library in ("pandas", "polars"):
        pytest.importorskip(library)
    (code,) = PYTHON[1:]
    exec(compile(code, "README.md", "exec"), python_names)
    assert capsys.readouterr().out.endswith("True\n")


@pytest.fixture
def bench(tmp_path, monkeypatch, dyes):
    """A working folder as the walk leaves it: the invented spectra and the dyes."""
    (tmp_path / "demo_spectra").symlink_to(readme.ROOT / "demo_spectra")
    for path in dyes.iterdir():
        (tmp_path / path.name).symlink_to(path)
    monkeypatch.chdir(tmp_path)
    return tmp_path


@pytest.mark.parametrize("line", RECIPES, ids=lambda line: line[8:60])
def test_a_recipe_runs(lamplit, bench, line):
    before = {path.name for path in bench.iterdir()}
    words = shlex.split(line)
    done = lamplit(*words[1:])
    assert done.code in (0, 1), done.err
    assert done.out
    promised = {word for option, word in pairwise(words) if option in ("--out", "--picture")}
    assert {path.name for path in bench.iterdir()} - before == promised


def test_there_is_a_recipe_for_every_kind_of_question():
    assert len(RECIPES) >= 20
    assert len(set(RECIPES)) == len(RECIPES)
    assert {line.split()[1] for line in RECIPES} == {"spectra", "predict", "dye", "match", "unmix", "check"}


def test_the_file_of_defaults_serves(lamplit, bench):
    (text,) = re.findall(r"```toml\n(# lamplit.toml\n.*?)```", README, re.DOTALL)
    (bench / "lamplit.toml").write_text(text, encoding="utf-8")
    for line, keys in (
        ("check demo_spectra/batches.csv --target demo_spectra/target.csv --limit 1.0", set(JUDGES)),
        ("match --target demo_spectra/target.csv", set(JUDGES)),
        ("unmix demo_spectra/batches.csv", {"dyes", "path_length"}),
        ("predict --spectra demo_spectra/target.csv", {"illuminants", "observer", "weights"}),
    ):
        done = lamplit(*line.split(), "--json")
        assert done.code in (0, 1), done.err
        assert set(done.json["defaults"]["values"]) == keys


def test_every_lamplit_line_in_the_text_is_of_a_command():
    from chroma.cli import COMMANDS

    named = set(re.findall(r"`lamplit ([a-z]+)", README))
    assert named <= set(COMMANDS)
    assert set(COMMANDS) <= named


def test_the_readme_holds_two_set_up_commands():
    lines = re.findall(r"^\s*python3 -m venv.*$", README, re.MULTILINE)
    assert len(lines) == 2
