"""What to add to each batch that a check did not pass."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from chroma.batches import Checked
from chroma.correction import MOST_WATER, Correction, correct
from chroma.decision import PASS
from chroma.dye.model import Dye
from chroma.dye.shared import shared
from chroma.matching.goal import target_spectrum
from chroma.quantity import fraction
from chroma.resample import on_grid, within
from chroma.spectra import Spectra
from observers.errors import InputError


@dataclass(frozen=True, eq=False)
class BatchCorrection:
    """The correction of one batch by its row in the check; None with the reason where none could be worked out."""

    row: int
    correction: Correction | None
    said: str


def batch_corrections(
    checked: Checked,
    batches: Spectra,
    target: Spectra,
    dyes: Sequence[Dye],
    *,
    path_length_mm: float,
    volume_L: float | None = None,
    most_water: float = MOST_WATER,
) -> list[BatchCorrection]:
    """A correction for each batch that did not pass, from the spectra that the check was made from.

    Raises InputError for reflectance, or dyes that do not cover the range that colour needs.
    """
    if fraction(target).quantity != "transmittance":
        raise InputError("additions to reflectance samples", why="dyes act on the light that passes a solution",
                         do="leave --dye out, or measure transmittance")  # fmt: skip
    cut, stock = shared(fraction(batches), dyes)
    weights = checked.conditions.weights(cut.wavelength_nm)
    wanted = on_grid(within(fraction(target), cut.wavelength_nm[0], cut.wavelength_nm[-1]), cut.wavelength_nm)
    aim = target_spectrum(wanted.values[0], weights)
    guard = checked.tolerance.rule == "guard-band"
    found = []
    for row in (i for i, code in enumerate(checked.worst) if code != PASS):
        expanded = checked.expanded[row] if guard and checked.expanded is not None else None
        try:
            one = correct(
                cut.values[row], aim, stock, path_length_mm=path_length_mm, weights=weights, tolerance=checked.tolerance,
                expanded=expanded, most_water=most_water,
            )  # fmt: skip
        except InputError as error:
            found.append(BatchCorrection(row, None, str(error)))
        else:
            found.append(BatchCorrection(row, one, one.said(volume_L)))
    return found
