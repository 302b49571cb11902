"""From one quantity to another: counts against blank and dark, transmittance, absorbance, path length."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from chroma.spectra import Quantity, Scatter, Spectra, judge, stem
from observers.arrays import Array
from observers.errors import InputError

LN10 = float(np.log(10.0))
SMALLEST_TRANSMITTANCE = 1e-5  # absorbance 5: what is at or below zero cannot be told from it


def fraction(spectra: Spectra) -> Spectra:
    """Transmittance or reflectance of the spectra, which is what colour is computed from.

    Raises InputError for counts, which need a blank first (`corrected`).
    """
    if spectra.quantity in ("transmittance", "reflectance"):
        return spectra
    return converted(spectra, "transmittance")


def comparable(target: Spectra, batches: Spectra) -> tuple[Spectra, Spectra]:
    """Fractions of a target and of what is held to it; raises InputError when one is transmittance, one reflectance."""
    wanted, shares = fraction(target), fraction(batches)
    if wanted.quantity != shares.quantity:
        raise InputError(
            f"the target is {wanted.quantity}, the batches are {shares.quantity}", why="they cannot be compared"
        )
    return wanted, shares


def converted(spectra: Spectra, quantity: Quantity) -> Spectra:
    """The spectra as another quantity; scatter is carried by the derivative.

    Absorbance of a transmittance at or below 1e-5 is held at 5 and noted. Raises InputError where there is no road:
    counts without a blank, reflectance to absorbance.
    """
    if spectra.quantity == quantity:
        return spectra
    road = (spectra.quantity, quantity)
    if road == ("absorbance", "transmittance"):
        values = 10.0**-spectra.values
        return _with(spectra, values, quantity, -LN10 * values)
    if road == ("transmittance", "absorbance"):
        low = spectra.values <= SMALLEST_TRANSMITTANCE
        held = np.where(low, SMALLEST_TRANSMITTANCE, spectra.values)
        result = _with(spectra, -np.log10(held), quantity, -1 / (LN10 * held))
        limit = f"{np.count_nonzero(low)} transmittances at or below {SMALLEST_TRANSMITTANCE:g} held at absorbance 5"
        return result.noted(limit) if low.any() else result
    if spectra.quantity == "counts":
        raise InputError(
            f"counts cannot become {quantity}",
            why="there is no blank to divide by",
            do="name the blank with --blank (and the dark reading with --dark)",
        )
    raise InputError(f"{spectra.quantity} cannot become {quantity}", why="nothing links the two without a model")


def corrected(spectra: Spectra, *, blank: str | None = None, dark: str | None = None) -> Spectra:
    """Samples against blank and dark: (S - D)/(B - D) for counts and fractions, S - B for absorbance.

    The blank and the dark reading, samples of the same table by name, are left out of the result. Counts become
    transmittance. Raises InputError for an unknown name, a dark reading of absorbances, or a blank with no light.
    """
    if blank is None and dark is None:
        return spectra
    if blank is None:
        raise InputError(
            "--dark without --blank",
            why="a dark reading is taken off both sample and blank",
            do="name the blank with --blank",
        )
    stems = [stem(name) for name in spectra.names]
    rows = [i for i, name in enumerate(stems) if name not in (blank, dark)]
    if not rows:
        raise InputError("nothing is left but blank and dark", do="give the samples too")
    B = _mean(spectra, stems, blank)
    D = _mean(spectra, stems, dark) if dark is not None else np.zeros_like(B)
    samples = spectra.take(rows)
    if spectra.quantity == "absorbance":
        if dark is not None:
            raise InputError("--dark with absorbance", why="the instrument took the dark reading off already")
        return _judged(_with(samples, samples.values - B, "absorbance", np.ones_like(B)), f"blank {blank!r} subtracted")
    light = B - D
    if (light <= 0).any():
        at = spectra.wavelength_nm[np.flatnonzero(light <= 0)[0]]
        raise InputError(
            f"blank {blank!r} has no more light than the dark at {at:g} nm",
            why="nothing can be divided by it",
            do="leave that range out, or measure the blank again",
        )
    quantity: Quantity = "transmittance" if spectra.quantity == "counts" else spectra.quantity
    text = f"divided by blank {blank!r}" + (f" after dark {dark!r} was taken off" if dark is not None else "")
    return _judged(_with(samples, (samples.values - D) / light, quantity, 1 / light), text)


def at_path_length(spectra: Spectra, from_mm: float, to_mm: float) -> Spectra:
    """Transmittance or absorbance as another path length would show it, by Lambert's law A ∝ d.

    Holds for what was corrected by a blank in the same cell. Raises InputError for reflectance, counts, or lengths that
    are not positive.
    """
    if not (from_mm > 0 and to_mm > 0):
        raise InputError("a path length must be positive", do="give it with its unit, as in 10mm")
    if spectra.quantity not in ("transmittance", "absorbance"):
        raise InputError(f"{spectra.quantity} has no path length", why="only transmission scales with it")
    ratio = to_mm / from_mm
    if spectra.quantity == "absorbance":
        return replace(_with(spectra, spectra.values * ratio, "absorbance", np.full(1, ratio)), path_length_mm=to_mm)
    base = np.maximum(spectra.values, 0.0)
    slope = ratio * np.maximum(base, SMALLEST_TRANSMITTANCE) ** (ratio - 1)
    return replace(_with(spectra, base**ratio, "transmittance", slope), path_length_mm=to_mm).noted(
        f"path length {from_mm:g} mm rescaled to {to_mm:g} mm"
    )


def _mean(spectra: Spectra, stems: list[str], name: str) -> Array:
    """The mean of all readings of one name."""
    if name not in stems:
        spectra.row(name)  # refuses it, and lists what there is
    result: Array = spectra.values[[i for i, own in enumerate(stems) if own == name]].mean(axis=0)
    return result


def _with(spectra: Spectra, values: Array, quantity: Quantity, slope: Array) -> Spectra:
    """New values, and the scatter multiplied by the slope at each mean."""
    scatter = spectra.scatter
    if scatter is not None:
        per_row = np.broadcast_to(slope, values.shape)[scatter.row]
        scatter = Scatter(scatter.row, scatter.deviation * per_row)
    return replace(spectra, values=values, quantity=quantity, scatter=scatter)


def _judged(spectra: Spectra, note: str) -> Spectra:
    return spectra.noted(note, *judge(spectra))
