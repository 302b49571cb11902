"""Every example of every --help is run, beside the invented spectra, in the order of the work."""

import re
import shlex
import subprocess
import sys

import click
import pytest
import readme

from chroma.cli import COMMANDS, program


def commands():
    """Every command that does something, with its words."""
    ctx = click.Context(program)
    for name in COMMANDS:
        command = program.get_command(ctx, name)
        inner = command.commands if isinstance(command, click.Group) else {}
        yield from ((f"{name} {sub}", one) for sub, one in inner.items())
        if not inner:
            yield name, command


def examples(text):
    """The command lines after ``Example:``, each put together from its lines."""
    return [" ".join(found.split()) for found in re.findall(r"Example: (lamplit .*?)(?:\n\s*\n|\Z)", text, re.DOTALL)]


EXAMPLES = [(name, examples(command.help)) for name, command in commands()]
LINES = [line for _, lines in EXAMPLES for line in lines]
# The dyes that examples take as given, made as the README makes them.
FITS = [
    command for command, _ in readme.transcripts() if command.startswith("lamplit dye fit") and "rowan" not in command
]


@pytest.fixture(scope="module")
def codes(tmp_path_factory):
    folder = tmp_path_factory.mktemp("examples")
    (folder / "demo_spectra").symlink_to(readme.ROOT / "demo_spectra")
    return {line: run(line, folder) for line in [*FITS, *LINES]}


def run(line, folder):
    words = shlex.split(line.replace("\\\n", " "))
    assert words[0] == "lamplit"
    done = subprocess.run(
        [sys.executable, "-c", f"import sys; sys.path.insert(0, {str(readme.ROOT)!r}); from chroma.cli import main; main()",
         *words[1:]],
        cwd=folder, capture_output=True, text=True, timeout=300,
    )  # fmt: skip
    return done.returncode, done.stderr


@pytest.mark.parametrize(("name", "lines"), EXAMPLES, ids=[name for name, _ in EXAMPLES])
def test_each_command_has_one_example_and_it_is_of_that_command(name, lines):
    assert len(lines) == 1
    assert lines[0].startswith(f"lamplit {name}")


@pytest.mark.parametrize("line", LINES, ids=[name for name, lines in EXAMPLES for _ in lines])
def test_an_example_runs(codes, line):
    code, said = codes[line]
    assert code in (0, 1), said


def test_the_dyes_that_examples_take_are_made(codes):
    assert len(FITS) == 2
    assert all(codes[line][0] == 0 for line in FITS)
