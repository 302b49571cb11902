"""One page of each kind from simulated data, made at a fixed date."""

from __future__ import annotations

import sys
from pathlib import Path
from unittest.mock import patch

import numpy as np
from report_world import spectra, transmittance, world

from chroma.difference.formulas import Formula
from chroma.report import page
from chroma.viewing import conditions

sys.path.append(str(Path(__file__).parents[1] / "dye"))
PAGES = ("check", "many", "colours", "fit", "unmix", "match", "photo")
SEARCHED = (
    "report_checked",
    "report_colours",
    "report_fit",
    "report_unmixed",
    "report_matches",
    "report_photo",
    "report_generic",
)


def made(name: str, folder: Path) -> Path:
    """The page of this name in a folder, which is made."""
    folder.mkdir(parents=True, exist_ok=True)
    path = folder / f"{name}.html"
    with patch.dict("os.environ", {"SOURCE_DATE_EPOCH": "1000000000"}):
        globals()[f"_{name}"](str(path))
    return path


def _check(path: str) -> None:
    page.report_checked(*world(), path)


def _many(path: str) -> None:
    page.report_checked(*world(60, ("D65", "A", "FL11", "FL2")), path)


def _colours(path: str) -> None:
    from chroma.colours import predict

    seen = conditions(("D65", "A"), "10")
    page.report_colours(
        predict(spectra(("one", "two", "three"), transmittance(3)), seen), path, turns=("Said of a turn.",)
    )


def _photo(path: str) -> None:
    from PIL import Image

    from chroma.photo.estimate import Estimate, Part, PhotoEstimate

    overlay = Path(path).with_suffix(".boxes.png")
    Image.new("RGB", (120, 90), (230, 230, 225)).save(overlay)
    estimates = (
        Estimate("north <pond>", (Part(0.5, 0.4, 0.6),), (), 0.9),
        Estimate("south", (Part(1.5, 1.2, 1.9),), ("too dark",), 0.5),
    )
    found = PhotoEstimate(
        ("blue",), "g/L", estimates, ("s1",), (0.01,), {"D65": 1.0}, 0.003, (), ("Said of boxes.",), ()
    )
    page.report_photo(found, [str(overlay)], path)


def _fit(path: str) -> None:
    from simulated import simulated_series

    from chroma.dye.build import fit_dye

    page.report_fit(fit_dye(simulated_series(np.random.default_rng(2)), name="simulated"), path)


def _unmix(path: str) -> None:
    from matching_world import NM as GRID
    from matching_world import dye

    from chroma.dye.solution import shelf
    from chroma.dye.solution import transmittance as through
    from chroma.dye.unmix import unmix
    from chroma.spectra import measured

    stock = shelf([dye("blue"), dye("yellow")])
    T = np.array([through(stock, np.array(c), 10.0) for c in ((0.01, 0.005), (0.008, 0.007), (0.009, 0.002))])
    T[2] *= 10 ** -(0.2 * np.exp(-(((GRID - 530) / 30) ** 2)))  # something else is in the third
    T += np.random.default_rng(3).normal(0, 3e-4, T.shape)
    page.report_unmixed(
        unmix(measured(["one", "two", "odd"], GRID, T, "transmittance"), stock, path_length_mm=10.0), path
    )


def _match(path: str) -> None:
    from matching_world import dye

    from chroma.matching.prepare import aimed_at
    from chroma.matching.recipes import match

    target = spectra(("pond",), transmittance(1, 0.0))
    aim = aimed_at(
        target, None, [dye("blue"), dye("yellow"), dye("red")], conditions(("D65", "A"), "10"), path_length_mm=10.0
    )
    found = match(aim.target, aim.stock, path_length_mm=10.0, weights=aim.weights, formula=Formula())
    page.report_matches(found, aim, path)
