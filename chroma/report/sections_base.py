"""What a page is made of: pictures, tables and paragraphs under headings."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

from chroma.batches import Checked
from chroma.colours import Colours
from chroma.report.plots import MARKS
from chroma.spectra import Source
from chroma.viewing import Conditions


@dataclass(frozen=True)
class Cell:
    """A cell of a table: its words, a mark before them that a screen reader skips, and a colour to show."""

    text: str
    mark: str = ""
    colour: str = ""
    number: bool = False


@dataclass(frozen=True)
class Table:
    """A table with its caption; the first cell of each row is the row's heading."""

    caption: str
    header: tuple[str, ...]
    rows: tuple[tuple[Cell, ...], ...]


@dataclass(frozen=True)
class Picture:
    """Inline SVG with the name and the description that it carries, and what is to be said under it."""

    svg: str
    title: str
    caption: str


@dataclass(frozen=True)
class Section:
    """Pictures, tables and paragraphs under one heading, in that order."""

    heading: str
    pictures: tuple[Picture, ...] = ()
    tables: tuple[Table, ...] = ()
    paragraphs: tuple[str, ...] = ()


@dataclass(frozen=True)
class Page:
    """All that a page says: the answer first, then sections, conditions, files and cautions."""

    title: str
    answer: str
    sections: tuple[Section, ...]
    conditions: tuple[tuple[str, str], ...] = ()
    sources: tuple[Source, ...] = ()
    cautions: tuple[str, ...] = field(default_factory=tuple)


def words(text: str) -> Cell:
    """A cell of words."""
    return Cell(text)


def number(text: str) -> Cell:
    """A cell whose digits stand to the right."""
    return Cell(text, number=True)


def verdict(word: str) -> Cell:
    """A verdict, told by its word and its mark."""
    return Cell(word, mark=MARKS[word][0])


def table(caption: str, header: Sequence[str], rows: Sequence[Sequence[Cell]]) -> Table:
    """A table from sequences."""
    return Table(caption, tuple(header), tuple(tuple(row) for row in rows))


def condition_pairs(conditions: Conditions) -> tuple[tuple[str, str], ...]:
    """Illuminants, observer and weights as pairs of a name and words."""
    ends = {"nearest": "the nearest value stands in", "refuse": "refused"}.get(conditions.ends, str(conditions.ends))
    return (
        ("Illuminants", ", ".join(lamp.name for lamp in conditions.illuminants)),
        ("Observer", conditions.observer.name),
        ("Weights", conditions.method.upper() + (", bandpass undone" if conditions.bandpass else "")),
        ("Missing ends of a spectrum", ends),
    )


def uncertainty_words(checked: Checked) -> str:
    """What is known of the uncertainty of a check."""
    if checked.expanded is None:
        return "none known; ΔE is taken as it stands"
    low, high = float(checked.expanded.min()), float(checked.expanded.max())
    span = f"{low:.2f}" if f"{low:.2f}" == f"{high:.2f}" else f"{low:.2f} to {high:.2f}"
    return f"U of ΔE {span} (coverage {checked.tolerance.coverage:g})"


def screen_cautions(colours: Colours) -> tuple[str, ...]:
    """What a screen cannot tell."""
    _, shown = colours.swatches()
    said: tuple[str, ...] = (
        "Swatches are computed for sRGB with the 2° observer; a screen or printer that is not calibrated shows others.",
    )
    if not shown.all():
        said += ("Some colours lie outside sRGB; their swatches are the nearest of the same hue and lightness.",)
    return said
