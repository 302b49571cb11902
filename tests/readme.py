"""The README's transcripts: run every `$ lamplit …` line and hold what it prints against what stands there.

The lines are run in order in one folder, where those before may have left files for those after.
``python tests/readme.py`` writes the transcripts anew.
"""

from __future__ import annotations

import os
import re
import shlex
import subprocess
import sys
import tempfile
from pathlib import Path

ROOT = Path(__file__).resolve().parents[1]
README = ROOT / "README.md"
BLOCK = re.compile(r"```console\n\$ (?P<command>lamplit (?:[^\n]*\\\n)*[^\n]*)\n(?P<printed>.*?)```", re.DOTALL)
MADE = "1796083200"  # so that what is dated reads the same each time


def transcripts() -> list[tuple[str, str]]:
    """Each command with what the README says that it prints."""
    return [(found["command"], found["printed"]) for found in BLOCK.finditer(README.read_text(encoding="utf-8"))]


def printed_by(commands: list[str]) -> list[str]:
    """What commands print, stdout and stderr together, run in order beside the invented spectra."""
    with tempfile.TemporaryDirectory() as folder:
        for name in ("demo_spectra", "tests"):
            (Path(folder) / name).symlink_to(ROOT / name)
        return [_printed_by(command, folder) for command in commands]


def _printed_by(command: str, folder: str) -> str:
    words = shlex.split(command.replace("\\\n", " "))[1:]
    done = subprocess.run(
        [sys.executable, "-m", "chroma", *words], cwd=folder, stdout=subprocess.PIPE, stderr=subprocess.STDOUT, text=True,
        encoding="utf-8", env=os.environ | {"SOURCE_DATE_EPOCH": MADE, "PYTHONPATH": str(ROOT)},
    )  # fmt: skip
    return done.stdout


def python_example() -> str:
    """The README's Python interface as a script."""
    return README.read_text(encoding="utf-8").split("```python\n")[1].split("```")[0]


if __name__ == "__main__":
    text = README.read_text(encoding="utf-8")
    printed = iter(printed_by([command for command, _ in transcripts()]))
    new = BLOCK.sub(lambda found: f"```console\n$ {found['command']}\n{next(printed)}```", text)
    README.write_text(new, encoding="utf-8")
