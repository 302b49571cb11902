"""The demo's rendered photo: what the unknowns were made with lies in the intervals."""

import json
from pathlib import Path

import pytest
from photo.render.demo_photo import RACK
from PIL import Image

from chroma.cli import main

ROOT = Path(__file__).resolve().parents[2]
DEMO = ROOT / "demo_spectra"


def test_the_ponds_of_the_demo(tmp_path, capsys):
    dye = tmp_path / "heron.dye.json"
    lines = (
        ["dye", "fit", DEMO / "heron_series.txt", "--concentrations", DEMO / "heron_concentrations.csv", "--blank", "blank",
         "--path-length", "10mm", "--stray-light", "fit", "--out", dye],
        ["photo", "estimate", DEMO / "photo/rack.jpg", "--rack", DEMO / "photo/rack.csv", "--dye", dye, "--path-length",
         "10mm", "-i", "LED-B3", "--json"],
    )  # fmt: skip
    for line in lines:
        capsys.readouterr()
        with pytest.raises(SystemExit) as left:
            main([str(word) for word in line])
        assert not left.value.code
    found = {row["name"]: row for row in json.loads(capsys.readouterr().out)["samples"]}
    for name, role, concentration in RACK:
        if role == "unknown":
            assert found[name]["low"] <= concentration <= found[name]["high"]
            assert found[name]["concentration"] == pytest.approx(concentration, rel=0.03)


def test_the_photo_says_that_it_is_invented():
    with Image.open(DEMO / "photo/rack.jpg") as picture:
        assert "Invented" in picture.getexif()[0x010E]
    assert "invented" in (DEMO / "photo/rack.csv").read_text(encoding="utf-8")
