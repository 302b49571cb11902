"""Plain text for a terminal: aligned tables and folded notes."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

from chroma.spectra import Source

WIDTH = 110
# Common practice; printed wherever a recipe or an addition is proposed.
CAUTION = "Handle dyes by their safety data sheets; let dyed water out only as local codes allow."
SWATCH = 5  # columns of a block of colour and the space after it
MOST_ROWS = 200  # what a person reads in a terminal; the rest is in --out or --json


def aligned(header: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    """A table with columns as wide as needed: what reads as a number to the right, words to the left."""
    columns = list(zip(header, *rows, strict=True))
    widths = [max(map(display_width, column)) for column in columns]
    right = [all(_is_number(cell) for cell in column[1:]) and len(column) > 1 for column in columns]
    lines = [
        "  ".join(
            _padded(cell, width, to_right) for cell, width, to_right in zip(row, widths, right, strict=True)
        ).rstrip()
        for row in (header, *rows)
    ]
    return "\n".join([lines[0], "  ".join("-" * width for width in widths), *lines[1:]])


def notes(items: Sequence[str]) -> str:
    """Notes as a list, folded to the width of a page."""
    import textwrap

    return "\n".join(textwrap.fill(item, WIDTH, initial_indent="  - ", subsequent_indent="    ") for item in items)


def display_width(text: str) -> int:
    """Columns that a text takes in a terminal: wide characters two, combining ones and escape sequences none."""
    if "\x1b" in text:
        import re

        text = re.sub(r"\x1b\[[0-9;]*m", "", text)
    if text.isascii():
        return len(text)
    import unicodedata

    return sum(0 if unicodedata.combining(c) else 2 if unicodedata.east_asian_width(c) in "WF" else 1 for c in text)


def painted(text: str) -> str:
    """The text with a block of its colour before each screen code of a table; what stands right of it moves along.

    The colours are ANSI sequences of 24 bits (ISO 8613-6). Only codes under a heading ``screen`` are painted.
    """
    lines = text.split("\n")
    for at, (header, rule) in enumerate(pairwise(lines)):
        if "screen" in header.split() and rule and not set(rule) - set("- "):
            _paint_table(lines, at, header.index("screen"))
    return "\n".join(lines)


def _paint_table(lines: list[str], header: int, column: int) -> None:
    """Paint the rows under a header line, in place, from a column on, up to the first line without a code there."""
    row = header + 2
    while row < len(lines) and (code := _code_at(lines[row], column)) is not None:
        before, after = lines[row][:code], lines[row][code:]
        red, green, blue = bytes.fromhex(after[1:7])
        lines[row] = f"{before}\x1b[48;2;{red};{green};{blue}m{' ' * (SWATCH - 1)}\x1b[0m {after}"
        row += 1
    lines[header] = lines[header][:column] + " " * SWATCH + lines[header][column:]
    lines[header + 1] = lines[header + 1][:column] + "-" * SWATCH + lines[header + 1][column:]


def _code_at(line: str, column: int) -> int | None:
    """Where in a line the screen code stands that begins at a column of the terminal."""
    import re

    places = (found.start() for found in re.finditer(r"#[0-9a-f]{6}(?![0-9a-f])", line))
    return next((place for place in places if display_width(line[:place]) == column), None)


def _padded(cell: str, width: int, to_right: bool) -> str:
    space = " " * (width - display_width(cell))
    return space + cell if to_right else cell + space


def _is_number(cell: str) -> bool:
    if cell.strip() in ("", "–"):
        return True
    try:
        float(cell.replace("−", "-"))
    except ValueError:
        return False
    return True


def conditions_line(text: str) -> str:
    """The conditions as one line."""
    return f"Conditions: {text}"


def sources_line(sources: Sequence[Source]) -> str:
    """The files and the first digits of their checksums; --json has them whole."""
    return (
        "Files: " + ", ".join(f"{source.path} (SHA-256 {source.sha256[:12]}…)" for source in sources) if sources else ""
    )


def two_places(value: float) -> str:
    """Two decimals, with no minus before a zero."""
    return f"{value + 0.0:.2f}" if round(value, 2) else "0.00"


def cut_line(count: int) -> str:
    """How many rows were left out of a table, where some were."""
    return f"… {count - MOST_ROWS} more; see --out or --json" if count > MOST_ROWS else ""


def joined_lines(*parts: str) -> str:
    """The parts that are not empty, a line each."""
    return "\n".join(part for part in parts if part)
