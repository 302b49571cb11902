"""What a terminal shows beyond plain text: swatches and word of what is done; and silence where it is asked for."""

import io
import os
import re
import subprocess
import sys
import time

import pytest
from helpers import ROOT

from chroma.cli import COMMANDS, main, progress
from chroma.report.text import aligned, display_width, painted

pty = pytest.importorskip("pty", reason="terminals are tested where there are pseudo-terminals")
DEMO = ROOT / "demo_spectra"
PREDICT = ["predict", "--spectra", str(DEMO / "target.csv"), "-i", "D65", "-i", "A"]
PLAIN = {key: value for key, value in os.environ.items() if key not in ("NO_COLOR", "COLORTERM", "TERM")}
COLOUR = PLAIN | {"TERM": "xterm", "COLORTERM": "truecolor"}
SWATCH = re.compile(r"\x1b\[48;2;(\d+);(\d+);(\d+)m +\x1b\[0m (#[0-9a-f]{6})")


def on_a_terminal(*arguments, environment):
    """What the program prints where its stdout is a terminal."""
    outer, inner = pty.openpty()
    with subprocess.Popen(
        [sys.executable, "-m", "chroma", *arguments], stdout=inner, stderr=subprocess.PIPE, cwd=ROOT, env=environment
    ) as running:
        os.close(inner)
        read = b""
        while True:
            try:
                block = os.read(outer, 4096)
            except OSError:  # Linux says so when the other end is closed
                break
            if not block:
                break
            read += block
        os.close(outer)
        running.wait(60)
    return read.decode("utf-8").replace("\r\n", "\n")


def test_each_screen_code_has_a_swatch_of_its_colour():
    text = on_a_terminal(*PREDICT, environment=COLOUR)
    found = SWATCH.findall(text)
    assert [code for *_, code in found] == ["#42bfd0", "#25b3d1"]
    for *rgb, code in found:
        assert "#" + "".join(f"{int(part):02x}" for part in rgb) == code


@pytest.mark.parametrize(
    "change",
    [{"NO_COLOR": "1"}, {"TERM": "dumb"}, {"COLORTERM": ""}, {"COLORTERM": "256"}],
    ids=["NO_COLOR", "a dumb terminal", "nothing said of colour", "few colours"],
)
def test_no_swatch_where_the_terminal_cannot_or_must_not(change):
    assert "\x1b" not in on_a_terminal(*PREDICT, environment=COLOUR | change)


def test_an_empty_no_color_asks_for_nothing():
    assert "\x1b" in on_a_terminal(*PREDICT, environment=COLOUR | {"NO_COLOR": ""})


def test_no_swatch_in_a_pipe_or_in_json():
    piped = subprocess.run(
        [sys.executable, "-m", "chroma", *PREDICT], capture_output=True, cwd=ROOT, env=COLOUR, check=True
    )
    assert b"\x1b" not in piped.stdout
    assert "\x1b" not in on_a_terminal(*PREDICT, "--json", environment=COLOUR)


def test_a_painted_table_stays_aligned():
    header = ["sample", "screen", "u L*"]
    rows = [["Füße", "#42bfd0", "0.1"], ["水", "#008e9c *", "0.25"], ["a", "#ffffff", "–"]]
    text = painted(aligned(header, rows) + "\nno code: #123456 in a note")
    lines = text.split("\n")
    assert len({display_width(line) for line in lines[:5]}) == 1
    assert len(SWATCH.findall(text)) == 3
    assert lines[5] == "no code: #123456 in a note"
    plain = [re.sub(r"\x1b\[[0-9;]*m", "", line) for line in lines[2:5]]
    assert [display_width(line[: line.index("#")]) for line in plain] == [
        display_width(lines[0].split("screen")[0])
    ] * 3


def test_a_sample_named_like_a_code_is_not_painted():
    table = aligned(["sample", "screen"], [["#abcdef", "#42bfd0"]])
    assert [code for *_, code in SWATCH.findall(painted(table))] == ["#42bfd0"]


@pytest.mark.parametrize(("text", "width"), [("\x1b[48;2;1;2;3m  \x1b[0m ab", 5), ("水\x1b[0m", 2), ("e\u0301", 1)])
def test_display_width_passes_over_escape_sequences(text, width):
    assert display_width(text) == width


class Terminal(io.StringIO):
    def isatty(self):
        return True


def at_once(monkeypatch, stream):
    monkeypatch.setattr(progress, "FIRST_S", 0.001)
    monkeypatch.setattr(progress, "EVERY_S", 0.001)
    monkeypatch.setattr(sys, "stderr", stream)
    monkeypatch.setenv("TERM", "xterm")


def test_word_of_what_is_done_is_drawn_and_wiped(monkeypatch):
    stream = Terminal()
    at_once(monkeypatch, stream)
    with progress.Working("reading") as working:
        time.sleep(0.05)
        working.stop()
        drawn = stream.getvalue()
        time.sleep(0.02)
    assert "\r\x1b[Kreading, 0 s\r" in drawn
    assert drawn.endswith("\r\x1b[K")
    assert stream.getvalue() == drawn


@pytest.mark.parametrize("stream", [io.StringIO(), Terminal()], ids=["a pipe", "a quick command"])
def test_no_word_in_a_pipe_or_within_a_second(monkeypatch, stream):
    monkeypatch.setattr(sys, "stderr", stream)
    if not stream.isatty():
        at_once(monkeypatch, stream)
    with progress.Working("reading"):
        time.sleep(0.05)
    assert stream.getvalue() == ""


def test_many_files_are_counted(monkeypatch, capsys, tmp_path):
    copies = [tmp_path / f"{number}.csv" for number in range(40)]
    for copy in copies:
        copy.write_bytes((DEMO / "target.csv").read_bytes())
    stream = Terminal()
    at_once(monkeypatch, stream)
    with pytest.raises(SystemExit):
        main(["spectra", *map(str, copies)])
    assert re.search(r"reading file \d+ of 40 \[#*\.*\], 0 s", stream.getvalue())
    assert stream.getvalue().endswith("\r\x1b[K")
    assert "40 samples" in capsys.readouterr().out


@pytest.fixture
def lines(dyes, tmp_path):
    """A line of each command that says something on stderr."""
    heron = dyes / "heron.dye.json"
    series = ["dye", "fit", DEMO / "heron_series.txt", "--concentrations", DEMO / "heron_concentrations.csv"]
    return {
        "spectra": ["spectra", DEMO / "target.csv", "--out", tmp_path / "a.jdx"],
        "predict": [*PREDICT, "--out", tmp_path / "b.csv"],
        "dye": [*series, "--blank", "blank", "--path-length", "10mm", "--out", tmp_path / "c.dye.json"],
        "match": ["match", "--target", DEMO / "target.csv", "--dye", heron, "--path-length", "10mm", "--out", tmp_path / "d.csv"],
        "unmix": ["unmix", DEMO / "target.csv", "--dye", heron, "--path-length", "10mm", "--out", tmp_path / "e.csv"],
        "check": ["check", DEMO / "target.csv", "--target", DEMO / "target.csv", "--limit", 1, "--out", tmp_path / "f.csv"],
        "demo": ["demo", tmp_path / "demo"],
    }  # fmt: skip


@pytest.mark.parametrize("name", [name for name in COMMANDS if name not in ("completion", "photo")])
def test_quiet_leaves_the_answer_and_no_talk(lamplit, lines, name, monkeypatch):
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1796083200")  # what is dated reads the same each time
    before = lamplit(*lines[name])
    assert "written: " in before.err
    after = lamplit(*lines[name], "--force", "--quiet")
    assert after.err == ""
    assert after.out == before.out
    assert after.code == before.code


def test_quiet_does_not_hide_a_refusal(lamplit):
    done = lamplit("check", "none.csv", "--target", "none.csv", "--limit", 1, "--quiet")
    assert done.code == 2
    assert len(done.err.splitlines()) == 1


def test_every_command_takes_quiet_and_no_defaults(lamplit):
    for name in [*COMMANDS, "dye fit", "dye show"]:
        text = lamplit(*name.split(), "--help").out
        assert ("--quiet" in text and "--no-defaults" in text) or "Commands:" in text, name
