import re

import pytest
import readme

TRANSCRIPTS = readme.transcripts()


@pytest.fixture(scope="module")
def printed():
    return readme.printed_by([command for command, _ in TRANSCRIPTS])


@pytest.mark.parametrize("number", range(len(TRANSCRIPTS)), ids=lambda i: TRANSCRIPTS[i][0][:50])
def test_a_transcript_is_what_the_command_prints(printed, number):
    assert printed[number] == TRANSCRIPTS[number][1]


def test_every_command_has_a_transcript():
    from chroma.cli import COMMANDS

    shown = {command.split()[1] for command, _ in TRANSCRIPTS}
    assert set(COMMANDS) - {"demo"} <= shown


def test_the_python_example_runs(monkeypatch, capsys):
    monkeypatch.chdir(readme.ROOT)
    exec(compile(readme.python_example(), "README.md", "exec"), {})
    assert re.search(r"'batches': 20", capsys.readouterr().out)


def test_the_readme_holds_two_set_up_commands():
    lines = re.findall(r"^\s*python3 -m venv.*$", readme.README.read_text(encoding="utf-8"), re.MULTILINE)
    assert len(lines) == 2
