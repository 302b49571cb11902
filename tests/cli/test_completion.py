"""The shell completes commands, options, choices and files."""

import os
import shutil
import subprocess
import sys

import pytest
from helpers import ROOT

from chroma.cli.completion_command import SHELLS, VARIABLE

MARKS = {
    "bash": ("complete -o nosort -F _lamplit_completion lamplit", "COMP_WORDS"),
    "zsh": ("#compdef lamplit", "compdef _lamplit_completion lamplit"),
    "fish": ("complete --no-files --command lamplit", "fish_complete"),
}


def completed(line, shell="bash"):
    """What the program offers for the last word of a line, as (kind, value) pairs."""
    words = line.split(" ")
    environment = os.environ | {VARIABLE: f"{shell}_complete", "COMP_WORDS": line, "COMP_CWORD": str(len(words) - 1)}
    done = subprocess.run(
        [sys.executable, "-m", "chroma"], capture_output=True, text=True, cwd=ROOT, env=environment, timeout=60
    )
    assert "Traceback" not in done.stderr
    return [tuple(row.split(",", 1)) for row in done.stdout.splitlines()]


@pytest.mark.parametrize("shell", SHELLS)
def test_the_script_of_a_shell(lamplit, shell):
    done = lamplit("completion", shell)
    assert done.code == 0
    assert all(mark in done.out for mark in (*MARKS[shell], f"{VARIABLE}={shell}_complete"))


@pytest.mark.parametrize("shell", SHELLS)
def test_a_shell_that_is_here_reads_its_script(lamplit, shell, tmp_path):
    if shutil.which(shell) is None:
        pytest.skip(f"{shell} is not installed")
    script = tmp_path / "script"
    script.write_text(lamplit("completion", shell).out, encoding="utf-8")
    done = subprocess.run([shell, "-n", script], capture_output=True, text=True, timeout=60)
    assert (done.returncode, done.stderr) == (0, "")


@pytest.mark.parametrize(
    ("line", "offered"),
    [
        ("lamplit ch", [("plain", "check")]),
        ("lamplit dye s", [("plain", "show")]),
        ("lamplit completion ", [("plain", "bash"), ("plain", "zsh"), ("plain", "fish")]),
        ("lamplit check b.csv --tar", [("plain", "--target")]),
        ("lamplit check b.csv --rule g", [("plain", "guard-band")]),
        ("lamplit check demo_spectra/b", [("file", "demo_spectra/b")]),
        ("lamplit unmix b.csv --dye her", [("file", "her")]),
        ("lamplit predict --no-d", [("plain", "--no-defaults")]),
    ],
    ids=lambda value: value if isinstance(value, str) else "",
)
def test_what_is_offered(line, offered):
    assert completed(line) == offered


def test_every_command_is_offered():
    from chroma.cli import COMMANDS

    assert [value for _, value in completed("lamplit ")] == list(COMMANDS)


def test_another_shell_is_refused(lamplit):
    done = lamplit("completion", "tcsh")
    assert done.code == 2
    assert "bash" in done.err


def test_a_broken_file_of_defaults_does_not_hinder_completion(tmp_path, monkeypatch):
    (tmp_path / "lamplit.toml").write_text("observer = 7\n")
    environment = os.environ | {
        VARIABLE: "bash_complete", "COMP_WORDS": "lamplit check --rule s", "COMP_CWORD": "3", "PYTHONPATH": str(ROOT)
    }  # fmt: skip
    done = subprocess.run(
        [sys.executable, "-m", "chroma"], capture_output=True, text=True, cwd=tmp_path, env=environment, timeout=60
    )
    assert (done.stdout, done.stderr) == ("plain,simple\n", "")
