"""The README's transcripts: run every `$ lamplit …` line and hold what it prints against what stands there.

``python tests/readme.py`` writes the transcripts anew.
"""

from __future__ import annotations

import re
import shlex
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parents[1]
README = ROOT / "README.md"
BLOCK = re.compile(r"```console\n\$ (?P<command>lamplit [^\n]*)\n(?P<printed>.*?)```", re.DOTALL)


def transcripts() -> list[tuple[str, str]]:
    """Each command with what the README says that it prints."""
    return [(found["command"], found["printed"]) for found in BLOCK.finditer(README.read_text(encoding="utf-8"))]


def printed_by(command: str) -> str:
    """What a command prints, stdout and stderr together, run at the top of the checkout."""
    line = [sys.executable, "-m", "chroma", *shlex.split(command)[1:]]
    done = subprocess.run(line, cwd=ROOT, stdout=subprocess.PIPE, stderr=subprocess.STDOUT, text=True, encoding="utf-8")
    return done.stdout


def python_example() -> str:
    """The README's Python interface as a script."""
    return README.read_text(encoding="utf-8").split("```python\n")[1].split("```")[0]


if __name__ == "__main__":
    text = README.read_text(encoding="utf-8")
    new = BLOCK.sub(lambda found: f"```console\n$ {found['command']}\n{printed_by(found['command'])}```", text)
    README.write_text(new, encoding="utf-8")
