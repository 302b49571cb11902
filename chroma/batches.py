"""Is this batch right: the verdict on each batch against a target."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from chroma.colour.spaces import Lab_from_XYZ
from chroma.decision import WORDS, decide, probability_within
from chroma.difference.classic import components
from chroma.difference.formulas import Formula
from chroma.quantity import comparable
from chroma.spectra import Source, Spectra
from chroma.tolerance import COMPONENTS, Tolerance
from chroma.viewing import Conditions
from observers.arrays import Array, Codes
from observers.errors import InputError
from observers.weights import Weights

if TYPE_CHECKING:
    from chroma.frames import Library

BLOCK = 4096  # batches at a time, so that the intermediate arrays stay in the processor's cache


@dataclass(frozen=True, eq=False)
class Checked:
    """Verdicts on N batches under L lamps.

    delta_e (N, L). parts (N, L, 5): dL, da, db, dC, dH. expanded (N, L) and expanded_parts (N, L, 5): U of
    ΔE and of its parts, or None where none is known.
    within (N, L): probability that the difference lies within the limit, or None. verdicts (N, L): codes of
    `chroma.decision`. Lab and XYZ100 of target (L, 3) and samples (N, L, 3); white100 (L, 3).
    """

    target: str
    names: tuple[str, ...]
    tolerance: Tolerance
    conditions: Conditions
    delta_e: Array
    parts: Array
    expanded: Array | None
    expanded_parts: Array | None
    within: Array | None
    verdicts: Codes
    target_XYZ100: Array
    target_Lab: Array
    XYZ100: Array
    Lab: Array
    white100: Array
    sources: tuple[Source, ...]
    notes: tuple[str, ...]

    @property
    def limits(self) -> Array:
        """(L,) the limit under each lamp."""
        return np.array([self.tolerance.limits[lamp.name] for lamp in self.conditions.illuminants])

    @property
    def worst(self) -> Codes:
        """(N,) the verdict on each batch, the worst over its lamps."""
        result: Codes = self.verdicts.max(axis=1)
        return result

    def counts(self) -> dict[str, int]:
        """How many batches there are, and how many of each verdict."""
        worst = self.worst
        return {"batches": len(self.names)} | {
            word: int(np.count_nonzero(worst == code)) for code, word in enumerate(WORDS)
        }

    def _repr_html_(self) -> str:
        from chroma.notebook import checked_html

        return checked_html(self)

    def to_frame(self, library: Library | None = None) -> Any:
        """A table of pandas or polars, one row a batch and lamp."""
        from chroma.frames import checked_columns, frame

        return frame(checked_columns(self), library)


def check(batches: Spectra, target: Spectra, tolerance: Tolerance, conditions: Conditions) -> Checked:
    """Verdicts on batches against a target of one sample, each on its own grid, under the lamps of the conditions.

    Raises InputError when the target is not one sample, when one is transmittance and the other reflectance, when a
    guard band is wanted and no uncertainty is known, or when a grid does not serve.
    """
    if len(target) != 1:
        raise InputError(f"{len(target)} samples in the target", why="a batch is held to one", do="name it: FILE:NAME")
    if not len(batches):
        raise InputError("no batches to check", do="give a file with at least one sample")
    wanted, shares = comparable(target, batches)
    W_target, W = conditions.weights(wanted.wavelength_nm), conditions.weights(shares.wavelength_nm)
    target_XYZ100, XYZ100 = W_target.response(wanted.values), W.response(shares.values)
    target_Lab, Lab = Lab_from_XYZ(target_XYZ100[0], W_target.white), Lab_from_XYZ(XYZ100, W.white)
    delta_e, parts = differences(tolerance.formula, target_Lab, Lab)

    limits = np.array([tolerance.limits[lamp.name] for lamp in conditions.illuminants])
    seen = Seen(target_Lab, Lab, (wanted, target_XYZ100, W_target), (shares, XYZ100, W))
    u, u_parts, factor, note = _uncertainties(tolerance, seen)
    guard = tolerance.rule == "guard-band"
    verdicts = decide(delta_e, limits, factor * u if guard else 0.0)
    for codes in signed_codes(tolerance, parts, factor * u_parts if guard else None).values():
        verdicts = np.maximum(verdicts, codes)
    known = factor > 0
    return Checked(
        target.names[0],
        shares.names,
        tolerance,
        conditions,
        delta_e,
        parts,
        factor * u if known else None,
        factor * u_parts if known else None,
        probability_within(delta_e, np.maximum(u, 1e-9), limits) if known else None,
        verdicts,
        target_XYZ100[0],
        target_Lab,
        XYZ100,
        Lab,
        W.white,
        tuple(dict.fromkeys(wanted.sources + shares.sources)),
        tuple(dict.fromkeys((*wanted.notes, *shares.notes, *W_target.notes, *W.notes, *note))),
    )


def differences(formula: Formula, target_Lab: Array, Lab: Array) -> tuple[Array, Array]:
    """ΔE (N, L) and its parts (N, L, 5) of samples (N, L, 3) against the target (L, 3), block by block."""
    delta_e, parts = np.empty(Lab.shape[:2]), np.empty((*Lab.shape[:2], 5))
    for start in range(0, len(Lab), BLOCK):
        rows = slice(start, start + BLOCK)
        # Each of L*, a*, b* on its own in memory: the formulas then read whole lines of the cache.
        block = np.moveaxis(np.ascontiguousarray(np.moveaxis(Lab[rows], -1, 0)), 0, -1)
        delta_e[rows] = formula.difference(target_Lab, block)
        parts[rows] = components(target_Lab, block)
    return delta_e, parts


@dataclass(frozen=True, eq=False)
class Seen:
    """Colours of target and samples, with the spectra, tristimulus values and weights behind each."""

    target_Lab: Array
    Lab: Array
    target: tuple[Spectra, Array, Weights]
    samples: tuple[Spectra, Array, Weights]


def _uncertainties(tolerance: Tolerance, seen: Seen) -> tuple[Array, Array, float, tuple[str, ...]]:
    """Standard uncertainty of ΔE (N, L) and of its parts (N, L, 5), the factor k of U = k·u, and what was done.

    k is 0 where no uncertainty is known. A stated uncertainty goes before what replicates say.
    """
    shape, k = seen.Lab.shape[:2], tolerance.coverage
    if tolerance.uncertainty is not None:
        u = tolerance.uncertainty
        note = f"U = {k:g} × {u:g}, stated for ΔE and each of its parts"
        return np.full(shape, u), np.full((*shape, 5), u), k, (note,)
    if seen.target[0].scatter is None and seen.samples[0].scatter is None:
        if tolerance.rule == "guard-band":
            raise InputError(
                "a guard band without an uncertainty",
                why="neither replicates nor a stated uncertainty are there",
                do="measure replicates (NAME#1, NAME#2), give --uncertainty, or take the rule simple",
            )
        return np.zeros(shape), np.zeros((*shape, 5)), 0.0, ()
    return _from_replicates(tolerance, seen)


def _from_replicates(tolerance: Tolerance, seen: Seen) -> tuple[Array, Array, float, tuple[str, ...]]:
    from chroma.scatter import carried, coverage_factor, of_difference, of_distance, spread

    covariance, freedom = of_difference(spread(*seen.target), spread(*seen.samples))
    target_Lab, formula = seen.target_Lab, tolerance.formula
    u = of_distance(lambda Lab: formula.difference(target_Lab, Lab), seen.Lab, covariance, target_Lab)
    u_parts = carried(lambda Lab: components(target_Lab, Lab), seen.Lab, covariance)
    factor = coverage_factor(tolerance.coverage, freedom)
    note = (
        f"U = {factor:.3g} × u, u from replicates pooled over all samples ({freedom} degrees of freedom, "
        f"coverage {tolerance.coverage:g} of a Gaussian)"
    )
    return u, u_parts, factor, (note,)


def signed_codes(tolerance: Tolerance, parts: Array, expanded: Array | None) -> dict[str, Codes]:
    """Codes (N, L) of each signed limit by its key; expanded (N, L, 5) is the guard band, None for none."""
    codes = {}
    for key, limit in tolerance.one_sided.items():
        name, end = key.split("_")
        sign, which = 1.0 if end == "max" else -1.0, COMPONENTS.index(name)
        band = 0.0 if expanded is None else expanded[..., which]
        codes[key] = decide(sign * parts[..., which], sign * limit, band)
    return codes
