"""What to add to a batch that is off, so that it comes within tolerance under every lamp."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np

from chroma.colour.spaces import Lab_from_XYZ
from chroma.dye.model import ConcentrationUnit
from chroma.dye.solution import Shelf, range_notes
from chroma.dye.unmix import Unmixed, unmix
from chroma.matching.additions import Amounts, smallest, tank
from chroma.matching.goal import Goal, Target, goal, held_absorbance
from chroma.spectra import Spectra
from chroma.strength import Strength, relative_strength
from chroma.tolerance import COMPONENTS, Tolerance
from observers.arrays import Array, frozen
from observers.errors import InputError
from observers.weights import Weights

AIM = 0.5  # share of the limit that is aimed at, so that weighing and mixing leave room
MOST_WATER = 0.25  # share of the batch: a tank has only so much room


@dataclass(frozen=True, eq=False)
class Addition:
    """What is added to a litre of the batch as it stands, and what is expected after.

    dyes: name → amount in the unit of the shelf without its "/L" (g or mol), those that are not zero; water in litres.
    delta_e (L,); Lab (L, 3); transmittance (B,).
    """

    dyes: Mapping[str, float]
    water: float
    delta_e: Array
    Lab: Array
    transmittance: Array
    within: bool

    def __bool__(self) -> bool:
        return bool(self.dyes) or self.water > 0


@dataclass(frozen=True, eq=False)
class Correction:
    """The answer for one batch.

    needed: it is not within tolerance as it is. addition: the smallest that brings it within, or None when none can or
    none is needed. closest: what comes nearest, whether within or not. composition: what is in it, with the residual
    that the dyes do not explain. wanted (D,): what is in the target, and strength against it; both None for a target
    without a spectrum. delta_e (L,) as it stands, and limits (L,) that it was held to. most_water: litres a litre.
    """

    needed: bool
    addition: Addition | None
    closest: Addition
    composition: Unmixed
    wanted: Array | None
    strength: Strength | None
    delta_e: Array
    limits: Array
    most_water: float
    illuminants: tuple[str, ...]
    unit: ConcentrationUnit
    notes: tuple[str, ...]

    def said(self, volume_L: float | None = None) -> str:
        """The answer in one sentence, a litre of the batch or for a volume of it."""
        if not self.needed:
            return "within tolerance as it is, nothing to add"
        if self.addition is not None:
            return f"add {self._amounts(self.addition, volume_L)}; {self._expected(self.addition)} expected"
        water = f" or of up to {_prefixed(self.most_water, 'L')}/L water" if self.most_water else ""
        text = f"no addition of these dyes{water} brings it within tolerance"
        if self.closest:
            text += f": the nearest, {self._amounts(self.closest, volume_L)}, leaves {self._expected(self.closest)}"
        else:
            text += f": none brings it nearer than {self._expected(self.closest)}"
        return "; ".join((text, *self._why()))

    def _why(self) -> list[str]:
        """What is in the batch that cannot be taken out: something foreign, or else dyes beyond their interval.

        Beside something foreign the dyes' own amounts are not to be relied on, and are not spoken of.
        """
        found = self.composition
        if found.foreign[0]:
            return [f"something else than these dyes is in it, most plainly at {found.foreign_nm[0]:g} nm"]
        if self.wanted is None:
            return []
        rows = zip(found.shelf.names, found.value[0], found.low[0], self.wanted, strict=True)
        what = self.unit.removesuffix("/L")
        return [
            f"it holds {_prefixed(value, what)}/L {name} where the target has "
            + (f"{_prefixed(wanted, what)}/L" if wanted > 0.01 * value else "none")
            for name, value, low, wanted in rows
            if low > wanted
        ]

    def _amounts(self, addition: Addition, volume_L: float | None) -> str:
        times, per = (1.0, "/L") if volume_L is None else (volume_L, "")
        what = self.unit.removesuffix("/L")
        parts = [f"{_prefixed(amount * times, what)}{per} {name}" for name, amount in addition.dyes.items()]
        if addition.water:
            parts.append(f"{_prefixed(addition.water * times, 'L')}{per} water")
        *most, last = parts
        return f"{', '.join(most)} and {last}" if most else last

    def _expected(self, addition: Addition) -> str:
        pairs = zip(self.illuminants, addition.delta_e, strict=True)
        return "ΔE " + ", ".join(f"{lamp} {value:.2f}" for lamp, value in pairs)


def correct(
    batch: Array,
    target: Target,
    stock: Shelf,
    *,
    path_length_mm: float,
    weights: Weights,
    tolerance: Tolerance,
    expanded: Array | None = None,
    aim: float = AIM,
    most_components: int = 3,
    most_water: float = MOST_WATER,
) -> Correction:
    """What brings a batch, of transmittance (B,) on the shelf's grid in this path length, within tolerance.

    The expectation starts from the batch as it was measured, with all that the dyes do not explain:
    A = (A_batch + Σ ε m d)/(1 + w), m the amounts of dye and w the litres of water for each litre of batch.

    expanded (L,): uncertainty U of each ΔE that a guard band takes off the limits. aim : share of the limits to aim at.
    most_components : dyes and water that may be added at once. most_water : litres for each litre of batch.

    Raises InputError for shapes or numbers that cannot be, or a lamp without a limit.
    """
    _judge(batch, stock, path_length_mm, weights, aim, most_components, most_water)
    held_to = goal(target, weights, tolerance.formula, _limits(weights, tolerance, expanded), _one_sided(tolerance))
    base = held_absorbance(batch)
    measured = Spectra(("batch",), stock.wavelength_nm, batch[None], "transmittance")
    inside = unmix(measured, stock, path_length_mm=path_length_mm)
    nothing = _expected(held_to, stock, base, path_length_mm, Amounts(np.zeros(len(stock.dyes)), 0.0, 0.0))
    found: Amounts | None = None
    closest = nothing
    if not nothing.within:
        found, near = smallest(
            held_to, tank(base, stock, path_length_mm, most_water), aim=aim, most_components=most_components
        )
        closest = _expected(held_to, stock, base, path_length_mm, near)
    after = range_notes(stock, (inside.value[0] + found.dyes) / (1 + found.water)) if found else ()
    wanted = strength = None
    if target.transmittance is not None:
        meant = Spectra(("target",), stock.wavelength_nm, target.transmittance[None], "transmittance")
        wanted = frozen(unmix(meant, stock, path_length_mm=path_length_mm).value[0])
        strength = relative_strength(target.transmittance, batch, stock.wavelength_nm)
    return Correction(
        not nothing.within, closest if found else None, closest, inside, wanted, strength, nothing.delta_e, held_to.limits,
        most_water, weights.illuminants, stock.unit, (*inside.notes, *after),
    )  # fmt: skip


def _expected(held_to: Goal, stock: Shelf, base: Array, path_length_mm: float, amounts: Amounts) -> Addition:
    added = amounts.dyes @ stock.absorptivity * (path_length_mm / 10)
    T = 10.0 ** -((base + added) / (1 + amounts.water))
    Lab = Lab_from_XYZ(held_to.weights.response(T), held_to.weights.white)
    delta_e = held_to.delta_e(Lab)
    within = (delta_e <= held_to.limits).all() and (held_to.slacks(Lab) >= 0).all()
    dyes = {name: float(m) for name, m in zip(stock.names, amounts.dyes, strict=True) if m > 0}
    return Addition(MappingProxyType(dyes), amounts.water, frozen(delta_e), frozen(Lab), frozen(T), bool(within))


def _limits(weights: Weights, tolerance: Tolerance, expanded: Array | None) -> Array:
    missing = [lamp for lamp in weights.illuminants if lamp not in tolerance.limits]
    if missing:
        raise InputError(f"no limit for {', '.join(missing)}", why="each lamp of the weights needs one")
    limits = np.array([tolerance.limits[lamp] for lamp in weights.illuminants])
    left: Array = limits if expanded is None else limits - expanded
    if (left <= 0).any():
        lamp = int(np.argmin(left))
        raise InputError(
            f"under {weights.illuminants[lamp]} U = {limits[lamp] - left[lamp]:.2g} is not below the limit {limits[lamp]:g}",
            why="no batch could pass for sure",
            do="measure more replicates, or widen the limit",
        )
    return left


def _one_sided(tolerance: Tolerance) -> tuple[tuple[int, float, float], ...]:
    """Signed limits as the goal takes them: part, sign, limit."""
    rows = []
    for key, limit in tolerance.one_sided.items():
        name, end = key.split("_")
        rows.append((COMPONENTS.index(name), 1.0 if end == "max" else -1.0, limit))
    return tuple(rows)


def _prefixed(amount: float, unit: str) -> str:
    """Three figures with the prefix that suits them: 0.00042 g is 0.42 mg, 0.093 L is 93 mL."""
    for prefix, size in (("", 1.0), ("m", 1e-3), ("µ", 1e-6)):
        if amount >= (0.1 if prefix == "m" else 1.0) * size:
            return f"{amount / size:.3g} {prefix}{unit}"
    return f"{amount / 1e-6:.3g} µ{unit}"


def _judge(
    batch: Array, stock: Shelf, path_length_mm: float, weights: Weights, aim: float, components: int, water: float
) -> None:
    if batch.shape != stock.wavelength_nm.shape or weights.wavelength_nm.shape != stock.wavelength_nm.shape:
        raise InputError(
            f"a batch of shape {batch.shape}, weights on {len(weights.wavelength_nm)} bands, dyes on "
            f"{len(stock.wavelength_nm)}",
            why="all must stand on the grid of the shelf",
        )
    if not np.isfinite(batch).all():
        raise InputError("a value of the batch is not a finite number", do="mend or leave out that wavelength")
    if not (np.isfinite(path_length_mm) and path_length_mm > 0):
        raise InputError(f"path length {path_length_mm:g} mm", why="it must be positive")
    if not 0 < aim <= 1 or components < 1 or not 0 <= water < np.inf:
        raise InputError(
            f"aim {aim:g}, {components} components, {water:g} L of water",
            why="aim lies above 0 and up to 1, at least one component is added, and water is not negative",
        )
