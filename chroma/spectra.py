"""Spectra: N named samples of one quantity on one wavelength grid, with the scatter of their replicates."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any, Literal, get_args

import numpy as np

from observers.arrays import Array, Index, Mask, frozen
from observers.errors import InputError

if TYPE_CHECKING:
    from chroma.frames import Library

Quantity = Literal["transmittance", "reflectance", "absorbance", "counts"]
QUANTITIES: tuple[Quantity, ...] = get_args(Quantity)

# What an instrument cannot have meant, common practice: a clear cell or a bright sample may read a little above 1
# (interfacial gain against the blank), and noise a little below 0.
LARGEST_FRACTION = 1.2
SMALLEST_FRACTION = -0.02
VISIBLE_NM = (380.0, 780.0)
ABSORBANCE_LIMIT = 3.0  # common practice: stray light bends most bench instruments above this


@dataclass(frozen=True)
class Source:
    """A file that a result came from."""

    path: str
    sha256: str


@dataclass(frozen=True, eq=False)
class Scatter:
    """How replicates lie about their mean; kept whole, so that any linear response of it can be had.

    row : (R,) the sample each replicate belongs to. deviation : (R, B), in the unit of the spectra.
    """

    row: Index
    deviation: Array


@dataclass(frozen=True, eq=False)
class Spectra:
    """Named samples on one grid.

    names : N names; a name that comes twice is a replicate, until `averaged`. wavelength_nm : (B,) ascending.
    values : (N, B); transmittance and reflectance are fractions, absorbance is decadic. notes : what was found or
    done on the way, for a person to read.

    Raises InputError when shapes differ, a value is not finite or wavelengths do not ascend.
    """

    names: tuple[str, ...]
    wavelength_nm: Array
    values: Array
    quantity: Quantity
    scatter: Scatter | None = None
    path_length_mm: float | None = None
    sources: tuple[Source, ...] = ()
    notes: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        object.__setattr__(self, "wavelength_nm", frozen(self.wavelength_nm))
        object.__setattr__(self, "values", frozen(self.values))
        if self.quantity not in QUANTITIES:
            raise InputError(f"unknown quantity {self.quantity!r}", why=f"known are {', '.join(QUANTITIES)}")
        _check_shape(self.names, self.wavelength_nm, self.values)
        _check_finite(self.names, self.wavelength_nm, self.values)

    def __len__(self) -> int:
        return len(self.names)

    def row(self, name: str) -> int:
        """The row of a sample by name; raises InputError that lists the names there are."""
        try:
            return self.names.index(name)
        except ValueError:
            some = ", ".join(self.names[:12]) + (", …" if len(self.names) > 12 else "")
            raise InputError(f"no sample is named {name!r}", why=f"there are {some}") from None

    def take(self, rows: Sequence[int]) -> Spectra:
        """The samples of these rows, in this order, with their scatter."""
        index = np.asarray(rows, dtype=np.intp)
        scatter = self.scatter
        if scatter is not None:
            kept = [(new, old) for new, row in enumerate(index) for old in np.flatnonzero(scatter.row == row)]
            new_rows, old_rows = np.array(kept, dtype=np.intp).reshape(-1, 2).T
            scatter = Scatter(new_rows, scatter.deviation[old_rows]) if kept else None
        return replace(self, names=tuple(self.names[i] for i in index), values=self.values[index], scatter=scatter)

    def noted(self, *notes: str) -> Spectra:
        """The same spectra with more notes."""
        return replace(self, notes=self.notes + notes)

    def _repr_html_(self) -> str:
        from chroma.notebook import spectra_html

        return spectra_html(self)

    def to_frame(self, library: Library | None = None) -> Any:
        """A table of pandas or polars: names, and a column for each wavelength."""
        from chroma.frames import frame, spectra_columns

        return frame(spectra_columns(self), library)

    @classmethod
    def from_frame(cls, table: Any, *, quantity: Quantity) -> Spectra:
        """Spectra from a table of pandas or polars, judged as measured ones are; see `frames.table_of_spectra`."""
        from chroma.frames import table_of_spectra

        names, wavelength_nm, values, notes = table_of_spectra(table)
        return measured(names, wavelength_nm, values, quantity, notes=notes)


def measured(
    names: Sequence[str],
    wavelength_nm: Array,
    values: Array,
    quantity: Quantity,
    *,
    sources: tuple[Source, ...] = (),
    notes: tuple[str, ...] = (),
    path_length_mm: float | None = None,
    absorbance_limit: float = ABSORBANCE_LIMIT,
) -> Spectra:
    """Spectra from a measured table (N, B): put in ascending order and judged; replicates stay apart.

    Raises InputError by the rules of `judge`.
    """
    order = np.argsort(wavelength_nm, kind="stable")
    raw = Spectra(
        tuple(names),
        np.asarray(wavelength_nm)[order],
        np.asarray(values, dtype=np.float64)[:, order],
        quantity,
        None,
        path_length_mm,
        sources,
        notes,
    )
    return raw.noted(*judge(raw, absorbance_limit=absorbance_limit))


def judge(spectra: Spectra, *, absorbance_limit: float = ABSORBANCE_LIMIT) -> tuple[str, ...]:
    """Hold values against what the quantity can be; returns notes, raises InputError.

    Refused: a fraction above 1.2 or below -0.02 (for absorbance: the same, as transmittance) within 380–780 nm;
    negative counts. Noted: such fractions outside 380–780 nm, where lamps and solvents often leave an instrument blind;
    fractions a little below 0; absorbance above the limit of the instrument.
    """
    values, quantity = spectra.values, spectra.quantity
    if quantity == "counts":
        _refuse(spectra, values < 0, "counts cannot be negative", "take the dark reading off with --dark instead")
        return ()
    if quantity == "absorbance":
        lowest = -np.log10(LARGEST_FRACTION)
        why = f"an absorbance below {lowest:.2f} means more light behind the sample than behind the blank"
        beyond = _refuse_visible(spectra, values < lowest, why, "check the blank, or give --quantity")
        much = f"above the absorbance of {absorbance_limit:g} that the instrument can tell; kept as measured"
        return beyond + _note_where(spectra, values > absorbance_limit, much)
    why = f"a {quantity} above {LARGEST_FRACTION:g} is not a fraction"
    do = "check the blank or white, or say what the numbers are with --quantity"
    beyond = _refuse_visible(spectra, values > LARGEST_FRACTION, why, do)
    why = f"a {quantity} below {SMALLEST_FRACTION:g} is more than noise about zero"
    beyond += _refuse_visible(spectra, values < SMALLEST_FRACTION, why, "check the dark reading, or give --quantity")
    small = (values < 0) & (values >= SMALLEST_FRACTION)
    return beyond + _note_where(spectra, small, "below zero, taken as noise and kept")


def averaged(spectra: Spectra) -> Spectra:
    """The mean of the rows that bear one name, or ``name#1``, ``name#2``; in order of first appearance.

    They are averaged in the quantity that was measured, and their deviations kept as `Scatter`.
    """
    stems = [stem(name) for name in spectra.names]
    place: dict[str, int] = {}
    row = np.array([place.setdefault(stem, len(place)) for stem in stems], dtype=np.intp)
    if len(place) == len(stems):
        return replace(spectra, names=tuple(stems))
    count = np.bincount(row)
    means = np.zeros((len(place), spectra.values.shape[1]))
    np.add.at(means, row, spectra.values)
    means /= count[:, None]
    repeated = count[row] > 1
    scatter = Scatter(row[repeated], frozen(spectra.values[repeated] - means[row[repeated]]))
    most = f"replicates averaged: {len(stems)} readings of {len(place)} samples"
    return replace(spectra, names=tuple(place), values=means, scatter=scatter).noted(most)


def stem(name: str) -> str:
    """The sample that a reading is of: its name without ``#1``, ``#2``."""
    return re.sub(r"#\d+$", "", name)


def standard_uncertainty(spectra: Spectra) -> Array:
    """(N, B) standard uncertainty of each mean from its own replicates; NaN for a sample measured once."""
    result = np.full(spectra.values.shape, np.nan)
    if spectra.scatter is None:
        return result
    for row in np.unique(spectra.scatter.row):
        own = spectra.scatter.deviation[spectra.scatter.row == row]
        result[row] = np.sqrt((own**2).sum(axis=0) / (len(own) - 1) / len(own))
    return result


def joined(parts: Sequence[Spectra]) -> Spectra:
    """Several readings on one grid as one, before they are averaged; see `_told_apart` for their names.

    Raises InputError when there are none, when grids or quantities differ, or when one was averaged already.
    """
    if not parts:
        raise InputError("no spectra were given", do="name at least one file")
    if len(parts) == 1:
        return parts[0]
    if any(part.scatter is not None for part in parts):
        raise InputError("averaged spectra cannot be joined", do="join the readings first, then average them")
    first = parts[0]
    for other in parts[1:]:
        if other.quantity != first.quantity:
            raise InputError(
                f"quantities differ: {first.quantity} and {other.quantity}", do="convert one of them first"
            )
        if other.wavelength_nm.shape != first.wavelength_nm.shape or not np.allclose(
            other.wavelength_nm, first.wavelength_nm, rtol=0, atol=1e-6
        ):
            raise InputError(
                f"wavelength grids differ: {grid_text(first.wavelength_nm)} and {grid_text(other.wavelength_nm)}",
                why="one table stands on one grid",
                do="give the files one at a time, or put them on one with --grid",
            )
    return Spectra(
        _told_apart([part.names for part in parts]),
        first.wavelength_nm,
        np.concatenate([part.values for part in parts]),
        first.quantity,
        None,
        first.path_length_mm,
        tuple(dict.fromkeys(source for part in parts for source in part.sources)),
        tuple(dict.fromkeys(note for part in parts for note in part.notes)),
    )


def grid_text(wavelength_nm: Array) -> str:
    """A grid in words: ``380–780 nm, 41 bands, 10 nm apart``."""
    steps = np.diff(wavelength_nm)
    ends = f"{wavelength_nm[0]:g}–{wavelength_nm[-1]:g} nm, {len(wavelength_nm)} bands"
    if not len(steps):
        return ends
    if np.ptp(steps) < 1e-6 * steps[0]:
        return f"{ends}, {steps[0]:g} nm apart"
    return f"{ends}, {steps.min():.3g} to {steps.max():.3g} nm apart"


def _told_apart(groups: Sequence[tuple[str, ...]]) -> tuple[str, ...]:
    """Names of several files: a name met in an earlier file becomes ``name (2)``; ``name#2`` stays a replicate."""
    met: dict[str, int] = {}
    result: list[str] = []
    for names in groups:
        for name in names:
            result.append(f"{name} ({met[name] + 1})" if name in met and "#" not in name else name)
        for name in dict.fromkeys(names):
            met[name] = met.get(name, 0) + 1
    return tuple(result)


def _check_shape(names: tuple[str, ...], wavelength_nm: Array, values: Array) -> None:
    if values.shape != (len(names), len(wavelength_nm)):
        raise InputError(
            f"values of shape {values.shape}",
            why=f"{len(names)} samples on {len(wavelength_nm)} wavelengths need {(len(names), len(wavelength_nm))}",
        )
    if not len(wavelength_nm):
        raise InputError("no wavelengths", why="a spectrum needs at least one band")
    if not np.isfinite(wavelength_nm).all() or wavelength_nm[0] <= 0:
        raise InputError("a wavelength is not a positive number", do="check the wavelength column")
    falls = np.flatnonzero(np.diff(wavelength_nm) <= 0)
    if len(falls):
        at = wavelength_nm[falls[0] + 1]
        raise InputError(f"wavelength {at:g} nm comes twice or out of order", why="wavelengths ascend and differ")


def _check_finite(names: tuple[str, ...], wavelength_nm: Array, values: Array) -> None:
    bad = ~np.isfinite(values)
    if bad.any():
        row, band = np.argwhere(bad)[0]
        raise InputError(
            f"{values[row, band]} at {wavelength_nm[band]:g} nm",
            where=f"sample {names[row]!r}",
            why="every value must be a finite number",
            do="mend or leave out the sample or the wavelength",
        )


def _refuse(spectra: Spectra, bad: Mask, why: str, do: str) -> None:
    if bad.any():
        row, band = np.argwhere(bad)[0]
        raise InputError(
            f"{spectra.quantity} of {spectra.values[row, band]:.4g} at {spectra.wavelength_nm[band]:g} nm",
            where=f"sample {spectra.names[row]!r}",
            why=why,
            do=do,
        )


def _refuse_visible(spectra: Spectra, bad: Mask, why: str, do: str) -> tuple[str, ...]:
    """Refuse what no instrument can have meant where eyes see; note it elsewhere."""
    if not bad.any():
        return ()
    visible = (spectra.wavelength_nm >= VISIBLE_NM[0]) & (spectra.wavelength_nm <= VISIBLE_NM[1])
    _refuse(spectra, bad & visible, why, do)
    return _note_where(spectra, bad, f"that cannot be, outside 380–780 nm; kept as measured ({why})")


def _note_where(spectra: Spectra, odd: Mask, text: str) -> tuple[str, ...]:
    if not odd.any():
        return ()
    rows, bands = np.flatnonzero(odd.any(axis=1)), np.flatnonzero(odd.any(axis=0))
    who = ", ".join(repr(spectra.names[i]) for i in rows[:4]) + (f" and {len(rows) - 4} more" if len(rows) > 4 else "")
    low, high = spectra.wavelength_nm[bands[[0, -1]]]
    return (f"{who}: {spectra.quantity} {text} ({np.count_nonzero(odd)} values, {low:g}–{high:g} nm)",)
