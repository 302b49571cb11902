"""The floors of the house: imports point down only, and starting the program pulls in nothing heavy."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest
from helpers import ROOT

HEAVY = ("colour", "scipy", "matplotlib", "pandas", "polars", "pyarrow", "openpyxl", "PIL")
SMALL = "demo_spectra/target.csv"
LINES = ("--help", f"check {SMALL} --target {SMALL} --limit 1", f"predict --spectra {SMALL} -i A -i FL11")
UPPER = ("chroma.readers", "chroma.report", "chroma.cli")


def imports(path: Path) -> set[str]:
    """Dotted names of every module that a file imports, wherever in the file it does."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path.name} imports relatively"
            found |= {node.module, *(f"{node.module}.{alias.name}" for alias in node.names)}
    return found


def needs(path: Path, modules: set[str]) -> set[str]:
    """The modules of the house that a file takes names from; a package counts only for names of its own page."""
    found = imports(path) & modules
    return {
        name for name in found if name not in {other.rpartition(".")[0] for other in found} or _own(path, name, modules)
    }


def _own(path: Path, package: str, modules: set[str]) -> bool:
    nodes = (node for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))) if isinstance(node, ast.ImportFrom))
    return any(
        f"{package}.{alias.name}" not in modules for node in nodes if node.module == package for alias in node.names
    )


def reaches(path: Path, *modules: str) -> list[str]:
    return sorted(name for name in imports(path) for module in modules if f"{name}.".startswith(f"{module}."))


def files(folder: str, *, outside: tuple[str, ...] = ()):
    root = ROOT / folder
    paths = (
        path for path in sorted(root.rglob("*.py")) if not outside or path.relative_to(root).parts[0] not in outside
    )
    return [pytest.param(path, id=path.relative_to(ROOT).as_posix()) for path in paths]


# The package's own page only says where each public name is found, on whatever floor.
MODEL = files("chroma", outside=("readers", "report", "cli", "web", "__init__.py", "__main__.py"))
GROUND = files("observers")


@pytest.mark.parametrize("path", GROUND)
def test_observers_know_nothing_above_them(path):
    assert reaches(path, "chroma", "scipy.stats", "matplotlib", "click", "tests") == []
    if not path.name.startswith("make"):  # the scripts that write the tables, which nothing imports
        assert reaches(path, "colour") == []


@pytest.mark.parametrize("path", MODEL)
def test_model_and_jobs_know_no_files_reports_or_commands(path):
    assert reaches(path, *UPPER, "click") == []


@pytest.mark.parametrize("path", files("chroma/readers"))
def test_readers_know_no_reports_or_commands(path):
    assert reaches(path, "chroma.report", "chroma.cli", "click", "matplotlib", "colour") == []


@pytest.mark.parametrize("path", files("chroma/report"))
def test_reports_know_no_commands(path):
    assert reaches(path, "chroma.cli", "click") == []


@pytest.mark.parametrize("path", files("chroma/colour") + files("chroma/difference"))
def test_colours_and_differences_know_no_jobs(path):
    jobs = (
        "batches",
        "colours",
        "viewing",
        "metamerism",
        "off_target",
        "reason",
        "scatter",
        "tolerance",
        "spectra",
        "quantity",
    )
    assert reaches(path, *(f"chroma.{job}" for job in jobs)) == []


def test_no_circles():
    """Module by module: nothing is imported that leads back."""
    paths = [path for folder in ("chroma", "observers") for path in (ROOT / folder).rglob("*.py")]
    paths.remove(ROOT / "chroma" / "__init__.py")  # which points up, lazily
    names = {".".join(path.relative_to(ROOT).with_suffix("").parts).removesuffix(".__init__"): path for path in paths}
    below = {name: needs(path, set(names)) - {name} for name, path in names.items()}
    done: list[str] = []
    while len(done) < len(below):
        free = [name for name, needs in below.items() if name not in done and needs <= set(done)]
        assert free, f"circle among {sorted(set(below) - set(done))}"
        done += free


@pytest.mark.parametrize(
    "code",
    [
        "import chroma",
        "import chroma.batches, chroma.colours, chroma.metamerism, chroma.off_target",
        "import observers.weights",
        "import chroma.readers",
        *(
            f"import runpy; sys.argv = ['lamplit', *{line.split()!r}]; runpy.run_module('chroma', run_name='__main__')"
            for line in LINES
        ),
    ],
    ids=["import chroma", "import the jobs", "import observers.weights", "import chroma.readers", *LINES],
)
def test_the_start_pulls_in_nothing_heavy(code):
    watch = f"""
import atexit, sys
atexit.register(lambda: print('loaded', *[name for name in {HEAVY!r} if name in sys.modules], file=sys.stderr))
{code}
"""
    done = subprocess.run(
        [sys.executable, "-c", watch], capture_output=True, text=True, check=False, cwd=ROOT, timeout=60
    )
    assert done.returncode == 0, done.stderr
    assert done.stderr.splitlines()[-1].split() == ["loaded"]


def test_importing_the_package_alone_needs_not_even_numpy():
    code = "import sys, chroma; print('numpy' in sys.modules)"
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=ROOT, timeout=60
    )
    assert done.stdout.strip() == "False"
