import re
import sys

import pytest

sys.path.insert(0, str(__import__("pathlib").Path(__file__).resolve().parents[1]))
import readme


@pytest.mark.parametrize(("command", "printed"), readme.transcripts(), ids=lambda text: text[:60].split("\n")[0])
def test_a_transcript_is_what_the_command_prints(command, printed):
    assert readme.printed_by(command) == printed


def test_the_python_example_runs(monkeypatch, capsys):
    monkeypatch.chdir(readme.ROOT)
    exec(compile(readme.python_example(), "README.md", "exec"), {})
    assert re.search(r"'batches': 20", capsys.readouterr().out)


def test_the_readme_holds_two_set_up_commands():
    lines = re.findall(r"^\s*python3 -m venv.*$", readme.README.read_text(encoding="utf-8"), re.MULTILINE)
    assert len(lines) == 2
