"""Delimited text as instruments export it: which separator, which decimal sign, and its rows of cells."""

from __future__ import annotations

import csv
import re
from collections.abc import Callable, Sequence

import numpy as np

from chroma.readers.sheet import Sheet, no_table, spread, trimmed
from chroma.readers.text import Raw, lines_of
from chroma.readers.words import number
from observers.arrays import Array

BLANKS = " "
_NAMES = {"\t": "tab", ";": "semicolon", ",": "comma", "|": "bar", BLANKS: "blanks"}
# The first of equals wins: a tab also reads as blanks, and a decimal comma needs proof (between commas: quoted cells).
_CANDIDATES = tuple((s, d) for s in ("\t", ";", ",", "|", BLANKS) for d in (".", ","))
_QUOTED = re.compile(r'"([^"]*)"|(\S+)')


def sheet_of(raw: Raw, text: str) -> Sheet:
    """Delimited text as rows of cells; raises InputError when no separator makes a table of it."""
    lines = lines_of(raw, text)
    separator, decimal = _dialect(raw, lines)
    split = _splitter(separator)
    described = f"delimited text, {_NAMES[separator]}" + (", decimal comma" if decimal == "," else "")

    def fast(rows: Sequence[int], first: int, stop: int) -> Array | None:
        return _fast([lines[row] for row in rows], separator, decimal, first, stop)

    def lead(row: int, count: int) -> list[str]:
        line = lines[row]
        if '"' in line:
            return split(line)[:count]
        return [cell.strip() for cell in line.split(None if separator == BLANKS else separator, count)[:count]]

    return Sheet(raw.path, len(lines), lambda i: split(lines[i]), lead, lines.__getitem__, fast, decimal, described)


def _dialect(raw: Raw, lines: list[str]) -> tuple[str, str]:
    """Separator and decimal sign under which most cells are numbers."""
    sample = [lines[i][:4000] for i in spread(len(lines), 40, 60)]
    if not any(re.search(r"\d\D+\d", line[:400]) for line in sample):
        sample = [line[:4000] for line in lines if line.strip()][:400]
    sample = [line for line in sample if line.strip()]
    scores = [_score(sample, separator, decimal) for separator, decimal in _CANDIDATES]
    # Blanks stand inside names ("jet 3") as well, so they must win clearly over a separator that can be seen.
    scores = [score // 2 if s == BLANKS else score for score, (s, _) in zip(scores, _CANDIDATES, strict=True)]
    if not max(scores):
        raise no_table(raw.path)
    return _CANDIDATES[scores.index(max(scores))]


def _score(sample: list[str], separator: str, decimal: str) -> int:
    """How many cells are numbers, in the rows that are mostly numbers."""
    split = _splitter(separator)
    score = 0
    for line in sample:
        if separator != BLANKS and separator not in line:
            continue
        cells = trimmed(split(line))
        count = sum(number(cell, decimal) is not None for cell in cells)
        if count >= 2 and 2 * count >= len(cells):
            score += count
    return score


def _splitter(separator: str) -> Callable[[str], list[str]]:
    if separator == BLANKS:
        return _split_blanks
    return lambda line: _split(line, separator)


def _split(line: str, separator: str) -> list[str]:
    if '"' in line:
        try:
            return [cell.strip() for cell in next(csv.reader([line], delimiter=separator, skipinitialspace=True))]
        except (csv.Error, StopIteration):
            pass  # a stray quotation mark: the cells then stand as they are
    return [cell.strip() for cell in line.split(separator)]


def _split_blanks(line: str) -> list[str]:
    if '"' not in line:
        return line.split()
    return [(quoted or bare).strip() for quoted, bare in _QUOTED.findall(line)]


def _fast(lines: list[str], separator: str, decimal: str, first: int, stop: int) -> Array | None:
    """The numbers by numpy's own reader; None when any cell is not a plain number."""
    if decimal == ",":
        if separator == "," or any("." in line for line in lines):
            return None  # a point could then only part thousands, and must not pass for a decimal sign
        lines = [line.replace(",", ".") for line in lines]
    quoted = any('"' in line for line in lines)
    try:
        found = np.loadtxt(
            lines,
            delimiter=None if separator == BLANKS else separator,
            comments=None,
            quotechar='"' if quoted else None,
            usecols=range(first, stop),
            ndmin=2,
        )
    except (ValueError, OverflowError, IndexError):
        return None
    return found if not np.isnan(found).any() and not _is_wider(lines, separator, stop) else None


def _is_wider(lines: list[str], separator: str, stop: int) -> bool:
    """Whether any line has cells beyond the table's last column, which reading by columns would pass over."""
    if separator == BLANKS:
        return any(len(line.split(None, stop)) > stop for line in lines)
    return any(
        line.count(separator) >= stop and line.rstrip(" \t" + separator).count(separator) >= stop for line in lines
    )
