"""Simulated batches about a target, for the tests of pictures and pages."""

from __future__ import annotations

import numpy as np

from chroma.batches import Checked, check
from chroma.colours import Colours, predict
from chroma.difference.formulas import Formula
from chroma.spectra import Source, Spectra
from chroma.tolerance import Tolerance
from chroma.viewing import Conditions, conditions

NM = np.arange(400.0, 701.0, 10.0)
FILE = Source("simulated.csv", "0123456789abcdef" * 4)


def transmittance(rows: int, spread: float = 0.05, seed: int = 3) -> np.ndarray:
    """(rows, B) simulated solutions of one blue dye and a little yellow, each of its own strengths."""
    rng = np.random.default_rng(seed)
    blue, yellow = (np.exp(-(((NM - peak) / width) ** 2)) for peak, width in ((620, 55), (430, 40)))
    strength = 1 + rng.normal(0, spread, (rows, 2))
    return 10 ** -(0.6 * strength[:, :1] * blue + 0.3 * strength[:, 1:] * yellow)


def spectra(names: tuple[str, ...], values: np.ndarray) -> Spectra:
    return Spectra(names, NM, values, "transmittance", sources=(FILE,), notes=("simulated data",))


def world(
    names: tuple[str, ...] | int = 12, lamps: tuple[str, ...] = ("D65", "A"), *, limit: float = 1.0,
    uncertainty: float | None = 0.15, formula: str = "ciede2000", spread: float = 0.05,
) -> tuple[Checked, Colours, Colours]:  # fmt: skip
    """A check of simulated batches under a guard band, with the colours of target and batches."""
    called = names if isinstance(names, tuple) else tuple(f"S-{i + 1:03d}" for i in range(names))
    batches = spectra(called, transmittance(len(called), spread))
    target = spectra(("pond",), transmittance(1, 0.0))
    seen: Conditions = conditions(lamps, "10")
    rule = "simple" if uncertainty is None else "guard-band"
    held_to = Tolerance(dict.fromkeys(lamps, limit), Formula(formula), rule=rule, uncertainty=uncertainty)
    return check(batches, target, held_to, seen), predict(target, seen), predict(batches, seen)
