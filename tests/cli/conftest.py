import json
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest

from chroma.cli import main

ROOT = Path(__file__).resolve().parents[2]
DEMO = ROOT / "demo_spectra"


@dataclass
class Ran:
    """What a run of the program left: its exit code and both streams."""

    code: int
    out: str
    err: str

    @property
    def json(self):
        return json.loads(self.out)


@pytest.fixture
def lamplit(capsys) -> Callable[..., Ran]:
    """Run the program in this process, as its own main does."""

    def run(*arguments: object) -> Ran:
        with pytest.raises(SystemExit) as left:
            main([str(argument) for argument in arguments])
        streams = capsys.readouterr()
        return Ran(int(left.value.code or 0), streams.out, streams.err)

    return run


@pytest.fixture(scope="session", autouse=True)
def no_defaults_of_ones_own(tmp_path_factory):
    """Whoever runs the tests may keep a lamplit.toml; it is not meant here."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv("XDG_CONFIG_HOME", str(tmp_path_factory.mktemp("configuration")))
        yield


@pytest.fixture(scope="session")
def dyes(tmp_path_factory) -> Path:
    """A folder with the three invented dyes, fitted from their series."""
    folder = tmp_path_factory.mktemp("dyes")
    for name, series, more in (
        ("heron", "heron_series.txt", ["--blank", "blank", "--stray-light", "fit"]),
        ("broom", "broom_series.jdx", []),
        ("rowan", "rowan_series.csv", []),
    ):
        known = DEMO / f"{name}_concentrations.csv"
        line = ["dye", "fit", DEMO / series, "--concentrations", known, "--path-length", "10mm", *more]
        with pytest.raises(SystemExit) as left:
            main([str(word) for word in [*line, "--out", folder / f"{name}.dye.json"]])
        assert not left.value.code
    return folder
