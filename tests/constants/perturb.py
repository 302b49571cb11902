"""Change every constant of the colour code by 5 %, and see whether a test notices; print those that no test misses.

    python tests/constants/perturb.py [--sample N] [MODULE …]

A constant shipped wrong for years because no value touched it is an old story of this field: each must be touched.

What is changed: every number written in the modules of SUBSETS, one at a time and by +5 %; by +1 the counts that
functions such as ``eye`` or ``arange`` need as integers, and small whole numbers in comparisons. What is not: 0;
indices and slices; the 2 of a square; what selects an axis or a digit; and the entries of ALLOWED, each with its
reason. The changed module lives in the memory of a forked process only, with the tests of its own folder; the files
stay as they are. Tests that fail beforehand are left out and named.
"""

from __future__ import annotations

import argparse
import ast
import contextlib
import importlib.abc
import importlib.machinery
import importlib.util
import io
import os
import random
import signal
import sys
import time
import warnings
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

TESTS = Path(__file__).resolve().parents[1]
ROOT = TESTS.parent
FACTOR = 1.05
SECONDS = 90  # a change that makes the tests hang counts as noticed
WORKERS = 2

# The tests that belong to each module, the quickest to notice first.
SUBSETS = {
    "chroma/difference/ciede2000.py": (
        "gold/test_gold_differences.py",
        "difference/test_difference_algebra.py",
        "cross/test_cross_differences.py",
    ),
    "chroma/calibration.py": ("dye/test_calibration_gold.py",),
    "chroma/difference/classic.py": (
        "cross/test_cross_files.py",
        "cross/test_cross_differences.py",
        "difference/test_difference_laws.py",
    ),
    "chroma/difference/din99o.py": ("cross/test_cross_files.py", "difference/test_difference_laws.py"),
    "chroma/difference/formulas.py": ("cross/test_cross_files.py", "difference/test_difference_laws.py"),
    "chroma/colour/adaptation.py": ("cross/test_cross_files.py",),
    "chroma/colour/dominant.py": ("cross/test_cross_files.py", "colour/test_colour_dominant.py"),
    "chroma/colour/screen.py": (
        "gold/test_gold_srgb.py",
        "colour/test_colour_screen.py",
        "cross/test_cross_spaces.py",
    ),
    "chroma/colour/spaces.py": (
        "cross/test_cross_files.py",
        "colour/test_colour_spaces.py",
        "cross/test_cross_spaces.py",
    ),
    "observers/grid.py": ("gold/test_gold_observers.py", "observers/test_observers_grid.py"),
    "observers/illuminants.py": (
        "gold/test_gold_observers.py",
        "observers/test_observers_illuminants.py",
        "cross/test_cross_observers.py",
        "cross/test_cross_files.py",
    ),
    "observers/weights.py": ("gold/test_gold_observers.py", "observers/test_observers_weights.py"),
    "chroma/decision.py": ("cross/test_cross_files.py", "model/test_model_decision.py"),
    "chroma/scatter.py": ("model/test_model_scatter.py", "model/test_model_decision.py"),
    "chroma/inconstancy.py": (
        "cross/test_cross_files.py",
        "cross/test_cross_spaces.py",
        "model/test_model_metamerism.py",
    ),
    "chroma/quantity.py": ("model/test_model_quantity.py",),
    "chroma/spectra.py": ("model/test_model_spectra.py",),
    "chroma/off_target.py": ("model/test_model_off_target.py",),
}

# (module, words of the line, number) → why no test need notice. The number None stands for all on that line.
ALLOWED: dict[tuple[str, str, float | None], str] = {
    (
        "chroma/difference/ciede2000.py",
        "TIE = 8.7e-12",
        8.7e-12,
    ): "a tolerance for rounding; that it is there is tested",
    (
        "chroma/difference/ciede2000.py",
        "cos_half > 0.5",
        None,
    ): "where one form gives way to the other; both agree there",
    ("chroma/difference/ciede2000.py", "safe = np.where(known", 1.0): "stands in where it is not used",
    ("chroma/difference/ciede2000.py", "cos_h[grey], sin_h[grey]", 1.0): "the hue of two greys has no weight",
    ("chroma/calibration.py", "high = max(start, 1e-300)", 1e-300): "keeps the search from starting at nothing",
    ("chroma/calibration.py", "for _ in range(60)", 60): "how many doublings before a line is called too poor",
    ("chroma/calibration.py", "xtol=1e-14", None): "how closely a root is found, far below any digit that is read",
    ("chroma/calibration.py", "high *= 2", 2): "how quickly a root is bracketed",
    ("chroma/difference/classic.py", "np.where(near, (product + along) / 2, 1)", 1): "stands in where it is not used",
    ("chroma/colour/screen.py", "LCh[:, 0] = np.clip", 100): "beyond white all is white, here or by the last clip",
    ("chroma/colour/screen.py", "for _ in range(30)", 30): "how many halvings: more change nothing that can be seen",
    ("chroma/colour/screen.py", "peak = np.maximum(", 1e-12): "keeps from dividing by zero",
    ("chroma/colour/screen.py", "strength = np.minimum(", None): "a hint of colour in pictures, no number of a result",
    ("chroma/colour/spaces.py", "np.maximum(ratio, DELTA**3)", None): "the last DELTA**3 keeps from dividing by zero",
    ("chroma/colour/dominant.py", "ON_CORNER = 1e-9", 1e-9): "a tolerance for rounding; that it is there is tested",
    ("chroma/decision.py", "safe_sd, safe = np.where(far", 1.0): "stands in where it is not used",
    ("chroma/decision.py", "FAR = 1e3", 1e3): "where one form gives way to the other; both agree there",
    ("chroma/decision.py", "LARGEST = 1e6", 1e6): "keeps a special function within its range",
    ("chroma/scatter.py", "max(freedom, 1)", 1): "keeps from dividing by zero; the covariance is zero there",
    ("observers/illuminants.py", "if len(own) > 1 and median", 1): "two points or more are asked for before",
    ("observers/weights.py", "first, last = STANDARD_NM[0]", 0.5): "the outer edges, where no observer sees anything",
    (
        "observers/weights.py",
        "median(steps) < 0.75",
        0.75,
    ): "where averaging begins; both sides of it are tested equal",
    ("observers/weights.py", "+ 1e-6) // step", 1e-6): "a tolerance for rounding of wavelengths",
    ("observers/weights.py", "count - 1)] = 1.0", 1.0): "a common factor of all weights, which are then normalised",
}

# Calls whose arguments must be whole, and keywords that select an axis, a diagonal or a digit.
COUNTING = {"arange", "eye", "zeros", "ones", "vander", "reshape", "moveaxis", "roll", "range", "round", "lru_cache"}
SELECTING = {"axis", "k", "ddof", "maxsize", "side"}


@dataclass(frozen=True)
class Change:
    """One number of one module: the how manieth constant in the order of the tree, and what it becomes."""

    module: str
    index: int
    line: int
    text: str
    old: float
    new: float

    def __str__(self) -> str:
        return f"{self.module}:{self.line}: {self.old!r} → {self.new:.6g}  in  {self.text}"


def changes(module: str) -> Iterator[Change]:
    """Every change that the rule makes to a module, those of ALLOWED left out."""
    source = (ROOT / module).read_text(encoding="utf-8")
    lines, tree = source.splitlines(), ast.parse(source)
    parents = {child: node for node in ast.walk(tree) for child in ast.iter_child_nodes(node)}
    for index, node in enumerate(numbers(tree)):
        text = lines[node.lineno - 1].strip()
        if left_out(node, parents) or reason(module, text, node.value):
            continue
        whole = isinstance(node.value, int) and counts(node, parents)
        new = node.value + 1 if whole else node.value * FACTOR
        yield Change(module, index, node.lineno, text, node.value, new)


def numbers(tree: ast.AST) -> list[ast.Constant]:
    """The numeric constants in a fixed order."""
    return [node for node in ast.walk(tree) if isinstance(node, ast.Constant) and type(node.value) in (int, float)]


def left_out(node: ast.Constant, parents: dict[ast.AST, ast.AST]) -> bool:
    if node.value == 0:
        return True
    child: ast.AST = node
    while (parent := parents.get(child)) is not None:
        if isinstance(parent, ast.Subscript) and child is parent.slice:
            return True
        if isinstance(parent, ast.BinOp) and isinstance(parent.op, ast.Pow) and child is parent.right:
            return bool(node.value == 2)
        if isinstance(parent, ast.keyword) and parent.arg in SELECTING:
            return True
        if isinstance(parent, ast.stmt | ast.BinOp):
            return False
        child = parent
    return False


def counts(node: ast.Constant, parents: dict[ast.AST, ast.AST]) -> bool:
    """Whether a whole number counts something: in a call that needs it so, or small in a comparison."""
    parent = parents.get(node)
    if isinstance(parent, ast.Call):
        return getattr(parent.func, "attr", getattr(parent.func, "id", "")) in COUNTING
    while isinstance(parent, ast.BinOp):
        parent = parents.get(parent)
    return isinstance(parent, ast.Compare) and node.value < 20


def reason(module: str, text: str, value: float) -> str:
    for (where, words, number), why in ALLOWED.items():
        if where == module and words in text and number in (None, value):
            return why
    return ""


# --- running ---------------------------------------------------------------------------------------------------------


class Changed(importlib.machinery.SourceFileLoader):
    """Loads a module's source with one number changed."""

    def __init__(self, name: str, change: Change) -> None:
        super().__init__(name, str(ROOT / change.module))
        self.change = change

    def get_code(self, fullname):
        tree = ast.parse(Path(self.path).read_text(encoding="utf-8"))
        numbers(tree)[self.change.index].value = self.change.new
        return compile(tree, self.path, "exec")


class Finder(importlib.abc.MetaPathFinder):
    """Finds the one changed module before anyone else does."""

    def __init__(self, change: Change) -> None:
        self.name, self.change = change.module.removesuffix(".py").replace("/", "."), change

    def find_spec(self, fullname, path=None, target=None):
        if fullname != self.name:
            return None
        return importlib.util.spec_from_loader(fullname, Changed(fullname, self.change))


def preload() -> None:
    """Import what the tests need from others once, before forking; nothing of our own."""
    sys.path.insert(0, str(ROOT))
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        for name in ("pytest", "hypothesis", "scipy.stats", "scipy.special", "scipy.integrate", "colour"):
            importlib.import_module(name)
        for name in ("coloraide.everything", "colorspacious", "skimage.color", "hypothesis.strategies"):
            importlib.import_module(name)


class Failures:
    """A pytest plugin that keeps the names of the tests that fail."""

    def __init__(self) -> None:
        self.names: list[str] = []

    def pytest_runtest_logreport(self, report) -> None:
        if report.failed:
            self.names.append(report.nodeid)

    def pytest_collectreport(self, report) -> None:
        if report.failed:
            self.names.append(report.nodeid)


def run(module: str, skip: Sequence[str], *, stop: bool) -> list[str]:
    """Run the tests of a module in this process; the names of those that failed."""
    import pytest

    watch = Failures()
    arguments = [str(TESTS / name) for name in SUBSETS[module]]
    arguments += ["-q", "-p", "no:cacheprovider", "--hypothesis-profile", "quick", f"--rootdir={ROOT}", "--tb=no"]
    arguments += ["-W", "ignore::pytest.PytestAssertRewriteWarning"]  # of what was imported before forking
    arguments += ["-x"] if stop else []
    arguments += [part for name in skip for part in ("--deselect", name)]
    with contextlib.redirect_stdout(io.StringIO()), contextlib.redirect_stderr(io.StringIO()):
        code = pytest.main(arguments, plugins=[watch])
    return watch.names or ([f"exit {code}"] if code else [])


def forked(module: str, skip: Sequence[str], change: Change | None) -> tuple[int, int]:
    """Start one run in a child; its process and the end of the pipe that its failures come through."""
    out, into = os.pipe()
    child = os.fork()
    if child:
        os.close(into)
        return child, out
    try:
        signal.alarm(SECONDS)
        if change is not None:
            sys.meta_path.insert(0, Finder(change))
        failed = run(module, skip, stop=change is not None)
    except BaseException as error:  # whatever a changed constant makes of the tests, it was noticed
        failed = [f"{type(error).__name__}: {error}"]
    os.write(into, "\n".join(failed)[:60_000].encode())
    os._exit(0)


def finished(running: dict[int, tuple[int, Change | None]]) -> tuple[Change | None, list[str]]:
    """Wait for the next child: its change, and what failed."""
    child, status = os.wait()
    out, change = running.pop(child)
    with os.fdopen(out, encoding="utf-8") as pipe:
        failed = pipe.read().splitlines()
    return change, failed or (["did not end"] if status else [])


def already_failing(modules: Sequence[str]) -> dict[str, list[str]]:
    """What fails before anything is changed, by module."""
    result = {}
    for module in modules:
        child, out = forked(module, [], None)
        _, result[module] = finished({child: (out, None)})
        if not all("::" in name for name in result[module]):
            raise SystemExit(f"the tests of {module} do not run: {result[module]}")
    return result


def survivors(todo: Sequence[Change], skip: dict[str, list[str]]) -> list[Change]:
    """The changes that no test notices."""
    running: dict[int, tuple[int, Change | None]] = {}
    left: list[Change] = []
    waiting = list(reversed(todo))
    while waiting or running:
        while waiting and len(running) < WORKERS:
            change = waiting.pop()
            child, out = forked(change.module, skip[change.module], change)
            running[child] = out, change
        change, failed = finished(running)
        if change is not None and not failed:
            left.append(change)
    return sorted(left, key=lambda change: (change.module, change.line, change.index))


def main() -> int:
    """Print a table of what was changed and what survived; 1 when something did."""
    parser = argparse.ArgumentParser(description="Change every constant by 5 % and see whether a test notices.")
    parser.add_argument("modules", nargs="*", help="modules of SUBSETS, as chroma/difference/ciede2000.py; default all")
    parser.add_argument("--sample", type=int, default=0, help="only so many changes, drawn with a fixed seed")
    options = parser.parse_args()
    os.environ |= {"OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1"}
    preload()
    modules = options.modules or list(SUBSETS)
    todo = [change for module in modules for change in changes(module)]
    if options.sample:
        todo = random.Random(5).sample(todo, options.sample)
    began, skip = time.monotonic(), already_failing(sorted({change.module for change in todo}))
    left = survivors(todo, skip)
    for module in modules:
        mine = [change for change in todo if change.module == module]
        if mine:
            dead = len(mine) - sum(change.module == module for change in left)
            print(f"{module:36} {len(mine):4} changed {dead:4} noticed")
    for module, names in skip.items():
        print(
            *(f"failed beforehand, left out for {module}: {name}" for name in names),
            sep="\n",
            end="\n" if names else "",
        )
    print(*(f"SURVIVED {change}" for change in left), sep="\n", end="\n" if left else "")
    print(f"{len(todo)} changed, {len(left)} survived, {time.monotonic() - began:.0f} s")
    return 1 if left else 0


if __name__ == "__main__":
    sys.exit(main())
