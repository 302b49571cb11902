"""From a table as the file has it to judged spectra: nanometres, fractions, one quantity, no gaps."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import cast

import numpy as np

from chroma.readers import words
from chroma.readers.table import LIKELY_NM, Table
from chroma.readers.words import Meaning
from chroma.spectra import LARGEST_FRACTION, Quantity, Source, Spectra, grid_text, measured
from observers.arrays import Array, median
from observers.errors import InputError
from observers.grid import Unit, nanometres

PERCENT_FROM = 3.0  # a largest value above this is no fraction; between LARGEST_FRACTION and this it could be either
VISIBLE_NM = (400.0, 700.0)
Part = tuple[Table, Quantity, tuple[str, ...]]  # a finished table, its quantity, and notes
_UNIT_NAMES = {"nm": "nm", "um": "µm", "cm-1": "cm⁻¹"}


def spectra_of(
    tables: Sequence[Table],
    described: str,
    source: Source,
    *,
    quantity: Quantity | None,
    absorbance_limit: float,
    notes: tuple[str, ...] = (),
) -> tuple[Spectra, ...]:
    """One `Spectra` for each grid among the tables, raw and judged.

    Raises InputError, with the file's name, by the rules of this module and of `chroma.spectra.judge`.
    """
    parts = [_finish(table, quantity, source.path) for table in _asked_for(tables, quantity)]
    groups: dict[tuple[Quantity, bytes], list[Part]] = {}
    for part in parts:
        groups.setdefault((part[1], np.round(part[0].axis, 6).tobytes()), []).append(part)
    try:
        return tuple(_joined(group, described, source, absorbance_limit, notes) for group in groups.values())
    except InputError as error:
        raise error.at(source.path) from None


def _asked_for(tables: Sequence[Table], asked: Quantity | None) -> Sequence[Table]:
    """Of pairs of columns with different quantities, those of the quantity asked for."""
    kept = [table for table in tables if asked in {said.quantity for said in table.said if said is not None}]
    return kept if kept and len(kept) < len(tables) else tables


def _joined(group: Sequence[Part], described: str, source: Source, limit: float, notes: tuple[str, ...]) -> Spectra:
    first = group[0][0]
    # Each table's first note counts its samples; of several tables the count is said once for all.
    count = (f"{sum(len(table.names) for table, _, _ in group)} samples in {len(group)} tables",)
    counted = first.notes[:1] if len(group) == 1 else count
    said = dict.fromkeys([*counted, *(note for table, _, more in group for note in (*table.notes[1:], *more))])
    lengths = {words.path_length_mm(list(table.meta)) for table, _, _ in group}
    return measured(
        [name for table, _, _ in group for name in table.names],
        first.axis,
        first.values if len(group) == 1 else np.concatenate([table.values for table, _, _ in group]),
        group[0][1],
        sources=(source,),
        notes=("; ".join((described, *said)), *notes),
        path_length_mm=lengths.pop() if len(lengths) == 1 else None,
        absorbance_limit=limit,
    )


def on_grid(table: Table, where: str) -> Table:
    """A table in nanometres, ascending or descending, without bands that lack a value outside 400–700 nm.

    Raises InputError for a unit in doubt, wavelengths that come twice or out of order, and gaps in the visible.
    """
    return _without_gaps(_in_nm(table, where))


def _finish(table: Table, asked: Quantity | None, where: str) -> Part:
    table = on_grid(table, where)
    table, meant, note = _quantity(table, asked, where)
    values, scaled = _fractions(table, meant, where)
    return replace(table, values=values), meant.quantity, tuple(n for n in (note, scaled) if n)


def _in_nm(table: Table, where: str) -> Table:
    axis = table.axis
    unit, said = table.unit or _unit_in(table.meta), ""
    if unit is None:
        if not (LIKELY_NM[0] <= axis.min() and axis.max() <= LIKELY_NM[1]):
            raise _unit_doubt(axis, where)
        unit, said = "nm", f"numbers of {axis.min():g} to {axis.max():g} without a unit taken as nm"
    if axis.min() <= 0:
        raise InputError(f"a wavelength of {axis.min():g}", where=where, why="a wavelength is a positive number")
    nm = nanometres(axis, cast(Unit, unit))
    if unit == "um":
        nm = np.round(nm, 9)  # 0.38 µm is 380 nm, not 380.00000000000006
    if nm.min() < 100 or nm.max() > 1e6:
        raise InputError(
            f"wavelengths of {axis.min():g} to {axis.max():g} {_UNIT_NAMES[unit]}",
            where=where,
            why="the header's unit does not fit the numbers",
            do="mend the unit in the header",
        )
    _refuse_disorder(table, nm)
    notes = [said] if said else []
    if unit != "nm":
        notes.append(f"wavelengths in {_UNIT_NAMES[unit]}, turned into nm")
    if len(nm) > 1 and nm[0] > nm[-1]:
        notes.append("wavelengths were descending")
    return replace(table, axis=nm, unit="nm").noted(*notes)


def _unit_in(meta: Sequence[str]) -> str | None:
    """A unit of wavelength named in a line of the header that speaks of wavelengths."""
    found = {words.unit_of(line) for line in meta if words.is_axis_line(line)} - {None}
    return found.pop() if len(found) == 1 else None


def _unit_doubt(axis: Array, where: str) -> InputError:
    low, high = axis.min(), axis.max()
    readings = [f"{low:g} to {high:g} {name}" for name in ("nm", "µm") if low > 0]
    if low > 0:
        readings.append(f"{low:g} to {high:g} cm⁻¹ (that is {1e7 / high:.4g} to {1e7 / low:.4g} nm)")
    return InputError(
        f"wavelengths of {low:g} to {high:g} without a unit",
        where=where,
        why="they could be " + " or ".join(readings) if readings else "a wavelength is a positive number",
        do="write the unit (nm, µm or cm-1) into the header",
    )


def _refuse_disorder(table: Table, nm: Array) -> None:
    order = np.argsort(nm, kind="stable")
    twice = np.flatnonzero(np.diff(nm[order]) == 0)
    if len(twice):
        first, second = sorted((int(order[twice[0]]), int(order[twice[0] + 1])))
        raise InputError(
            f"the wavelength {nm[first]:g} nm comes twice",
            where=f"{_band_place(table, first)} and {_band_place(table, second, short=True)}",
            do="leave one of them out",
        )
    steps = np.diff(nm)
    if len(steps) and not (np.all(steps > 0) or np.all(steps < 0)):
        turn = np.sign(steps) != np.sign(median(np.sign(steps)) or steps[0])
        at = int(np.flatnonzero(turn)[0]) + 1
        raise InputError(
            f"the wavelength {nm[at]:g} nm is out of order",
            where=_band_place(table, at),
            why="wavelengths run one way in a table",
            do="mend it, or sort the table",
        )


def _band_place(table: Table, band: int, *, short: bool = False) -> str:
    place = table.place(-1, band)
    return place[place.rfind(" line ") + 1 :] if short and " line " in place else place


def _without_gaps(table: Table) -> Table:
    gaps = ~np.isfinite(table.values)
    bad = gaps.any(axis=0)
    if not bad.any():
        return table
    inside = bad & (table.axis >= VISIBLE_NM[0]) & (table.axis <= VISIBLE_NM[1])
    if inside.any() or bad.all():
        sample, band = np.argwhere(gaps & (inside if inside.any() else bad))[0]
        raise InputError(
            f"no value at {table.axis[band]:g} nm for {table.names[sample]!r}",
            where=table.place(int(sample), int(band)),
            why="between 400 and 700 nm every band is needed",
            do="measure it again, or leave the sample out",
        )
    out = table.axis[bad]
    some = ", ".join(f"{nm:g}" for nm in np.sort(out)[:6]) + (", …" if len(out) > 6 else "")
    note = f"{len(out)} {'band' if len(out) == 1 else 'bands'} left out where a sample has no value: {some} nm"
    place, kept = table.place, np.flatnonzero(~bad)
    return replace(
        table,
        axis=table.axis[~bad],
        values=table.values[:, ~bad],
        place=lambda sample, band: place(sample, int(kept[band])),
    ).noted(note)


def _quantity(table: Table, asked: Quantity | None, where: str) -> tuple[Table, Meaning, str]:
    """What the file says, then what was asked; refused when they differ, or when neither speaks."""
    columns = [said for said in table.said if said is not None]
    if len({said.quantity for said in columns}) > 1:
        return _one_of_several(table, columns, asked, where)
    said = max(columns, key=lambda s: (s.strong, s.percent), default=None) or words.said_in(list(table.meta))
    percent = any(words.says_percent(line) for line in table.meta)
    if said is None:
        if asked is None:
            raise _quantity_doubt(table, where)
        return table, Meaning(asked, percent), f"{asked}, as asked"
    if asked is not None and asked != said.quantity:
        if not said.strong:
            return table, Meaning(asked, said.percent), f"{asked}, as asked, though the header has {said.word!r}"
        raise InputError(
            f"the file says {said.quantity} ({said.word!r}), and {asked} was asked for",
            where=where,
            why="they contradict each other",
            do=f"leave --quantity out, or mend the header if it is {asked}",
        )
    return table, replace(said, percent=said.percent or percent), f"{said.quantity}, from the header {said.word!r}"


def _one_of_several(
    table: Table, columns: Sequence[Meaning], asked: Quantity | None, where: str
) -> tuple[Table, Meaning, str]:
    kinds = list(dict.fromkeys(said.quantity for said in columns))
    if asked not in kinds:
        raise InputError(
            f"columns of {' and of '.join(kinds)}",
            where=where,
            why="one quantity is read at a time",
            do="say which with --quantity",
        )
    kept = [i for i, said in enumerate(table.said) if said is not None and said.quantity == asked]
    first = table.said[kept[0]]
    assert first is not None
    left = len(table.said) - len(kept)
    return table.take(kept), first, f"{asked}, as asked; {left} columns of other quantities left out"


def _quantity_doubt(table: Table, where: str) -> InputError:
    """The refusal that shows the two readings of one number, taken near the middle of the visible."""
    band = int(np.argmin(np.abs(table.axis - 550)))
    column = table.values[:, band]
    value = float(column[np.argmin(np.abs(column - 0.9))])
    at = f"{value:.3g} at {table.axis[band]:g} nm"
    if table.values.max() > PERCENT_FROM * 2:
        if table.values.max() > 130:
            why = "counts, or a quantity that this program does not know"
        else:
            why = f"a transmittance of {value:.3g} %, a reflectance of {value:.3g} %, or counts"
    else:
        why = f"a transmittance of {value:.3g} or an absorbance of {value:.3g} (transmittance {10**-value:.3f})"
    return InputError(f"{at} could be {why}", where=where, why="the file does not say", do="say which with --quantity")


def _fractions(table: Table, meant: Meaning, where: str) -> tuple[Array, str]:
    """Values as fractions: divided by 100 when the header has a per cent sign, or when they can only be per cent."""
    values = table.values
    if meant.quantity not in ("transmittance", "reflectance") or not values.size:
        return values, ""
    if meant.percent:
        return values / 100, "per cent, divided by 100"
    typical = median(values.max(axis=1))
    if typical <= LARGEST_FRACTION:
        return values, ""
    if typical > PERCENT_FROM:
        return values / 100, f"largest values of about {typical:.3g} can only be per cent, divided by 100"
    raise InputError(
        f"a largest {meant.quantity} of about {typical:.3g} on {grid_text(np.sort(table.axis))}",
        where=where,
        why=f"it could be {typical:.3g}, above what a sample can reach, or {typical:.3g} %",
        do="write % into the header if it is per cent, or check the blank",
    )
