"""A quick sample of constants/perturb.py, and that its rule and its list of exceptions still fit the code."""

import re
import subprocess
import sys
from pathlib import Path

import perturb
import pytest

HERE = Path(__file__).parent


@pytest.mark.parametrize("module", perturb.SUBSETS)
def test_every_module_has_constants_and_its_tests_exist(module):
    assert list(perturb.changes(module))
    assert all((perturb.TESTS / name).is_file() for name in perturb.SUBSETS[module])


@pytest.mark.parametrize("entry", perturb.ALLOWED, ids=lambda entry: f"{entry[0]} {entry[2]}")
def test_every_exception_is_still_in_the_code(entry):
    module, words, number = entry
    lines = [line for line in (perturb.ROOT / module).read_text(encoding="utf-8").splitlines() if words in line]
    assert lines, f"no line of {module} holds {words!r}"
    written = [float(found) for line in lines for found in re.findall(r"\d+\.?\d*(?:e-?\d+)?", line)]
    assert number is None or number in written


def test_every_module_of_colours_and_differences_is_among_them():
    folders = ("chroma/colour", "chroma/difference")
    found = {
        path.relative_to(perturb.ROOT).as_posix() for folder in folders for path in (perturb.ROOT / folder).glob("*.py")
    }
    assert {name for name in found if list(perturb.changes(name))} <= set(perturb.SUBSETS)


def test_a_sample_of_changed_constants_is_noticed():
    # all of them take minutes: python tests/constants/perturb.py
    command = [sys.executable, HERE / "perturb.py", "--sample", "4"]
    done = subprocess.run(command, capture_output=True, text=True, check=False, timeout=300)
    assert done.returncode == 0, done.stdout + done.stderr
    assert "4 changed, 0 survived" in done.stdout
