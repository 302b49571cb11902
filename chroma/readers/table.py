"""A table of spectra as a file has it, whatever its form, before units and quantity are settled."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from chroma.readers.words import Meaning
from observers.arrays import Array

LIKELY_NM = (150.0, 3000.0)  # numbers without a unit that can only be nanometres; see assemble.py


@dataclass(frozen=True, eq=False)
class Table:
    """Spectra as a file has them: any unit, any order, NaN where a cell is empty.

    names : N. axis : (B,) in `unit`, which is None when the file does not say. values : (N, B).
    said : what is said of each sample's quantity. meta : header lines. place(sample, band) : where a value stands.
    """

    names: tuple[str, ...]
    axis: Array
    unit: str | None
    values: Array
    said: tuple[Meaning | None, ...]
    meta: tuple[str, ...]
    notes: tuple[str, ...]
    place: Callable[[int, int], str]

    def noted(self, *notes: str) -> Table:
        """The same table with more notes."""
        return replace(self, notes=self.notes + notes)

    def take(self, rows: Sequence[int]) -> Table:
        """The samples of these rows."""
        kept, place = list(rows), self.place
        return replace(
            self,
            names=tuple(self.names[i] for i in kept),
            values=self.values[kept],
            said=tuple(self.said[i] for i in kept),
            place=lambda sample, band: place(kept[sample], band),
        )
