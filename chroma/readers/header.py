"""What stands above the numbers: rows of names, lines of words, a title."""

from __future__ import annotations

from chroma.readers import words
from chroma.readers.sheet import Region, Sheet, is_comment
from chroma.readers.words import Meaning


def _is_dress(cell: str) -> bool:
    """Whether a cell names a quantity or a unit, or nothing, and so no sample."""
    return not cell or words.is_axis_word(cell) or words.meaning(cell)[1] == ""


class Head:
    """What stands above the numbers: rows of names, lines of words, a title."""

    def __init__(self, sheet: Sheet, region: Region, stem: str) -> None:
        self.stem = stem
        self.rows: list[tuple[int, list[str]]] = []
        for row in reversed([i for i in region.header if not is_comment(sheet.line(i))][-3:]):
            cells = sheet.cells(row)
            if not self._names_columns(cells, region):
                break
            self.rows.append((row, cells))
        named = {row for row, _ in self.rows}
        self.meta = tuple(sheet.line(i).strip().lstrip("#").strip(" ,;\t|") for i in region.header if i not in named)

    def _names_columns(self, cells: list[str], region: Region) -> bool:
        filled = [i for i, cell in enumerate(cells) if cell]
        if not filled or filled[-1] >= region.columns:
            return False
        first = cells[0]
        if words.is_axis_word(first) or words.names_samples(first):
            return True
        if self.rows:  # a second row above is one of names only where the row beneath has left them open
            if not all(_is_dress(cell) for cell in self.rows[-1][1]):
                return False
            pairs = region.columns >= 4 and len(filled) in (region.columns, region.columns // 2)
            return not first or (pairs and not any(cell.endswith(":") for cell in cells))
        return len(filled) >= 2 and (region.columns > 2 or not first or words.meaning(cells[1])[0] is not None)

    @property
    def title(self) -> str:
        """The first line of words that is not a setting."""
        for line in self.meta:
            if line and not any(mark in line for mark in ":=\t;") and "," not in line.rstrip(" ,"):
                return line
        return ""

    def cell(self, column: int) -> list[str]:
        """The cells above a column, the nearest first."""
        return [cells[column] for _, cells in self.rows if column < len(cells) and cells[column]]

    def name(self, column: int) -> tuple[str, Meaning | None]:
        """A column's name and what is said of its quantity."""
        name, said = "", None
        for cell in self.cell(column):
            found, rest = words.meaning(cell)
            said = said or found
            if rest and not name and not (found is None and words.unit_of(rest) and words.is_axis_word(rest)):
                name = rest
        return name, said
