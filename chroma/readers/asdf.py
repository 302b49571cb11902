"""The number forms of JCAMP-DX: AFFN, PAC, SQZ, DIF and DUP, decoded with all the checks that the standard offers.

McDonald and Wilks (1988), JCAMP-DX: a standard form for exchange of infrared spectra in computer readable form,
Applied Spectroscopy 42, 151-162.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from observers.arrays import Array
from observers.errors import InputError

MOST_POINTS = 2_000_000  # a repeat count is one number in a file and could ask for any memory
_FIRST_DIGIT = {c: str(i) for i, c in enumerate("@ABCDEFGHI")}
_FIRST_DIGIT |= {c: f"-{i}" for i, c in enumerate("abcdefghi", 1)}
_DIF_DIGIT = {c: str(i) for i, c in enumerate("%JKLMNOPQR")} | {c: f"-{i}" for i, c in enumerate("jklmnopqr", 1)}
_DUP_DIGIT = {c: str(i) for i, c in enumerate("STUVWXYZs", 1)}

_AFFN = r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)"
# In the compressed forms E and e are digits (5 and -5), so only a signed exponent can be one there.
_PLAIN = re.compile(rf"(?P<affn>{_AFFN}(?:[Ee][+-]?[0-9]+)?)|(?P<missing>\?)|(?P<gap>[\s,;]+)")
_PACKED = re.compile(
    rf"(?P<affn>{_AFFN}(?:[Ee][+-][0-9]+)?)|(?P<sqz>[@A-Ia-i][0-9]*(?:\.[0-9]*)?)|(?P<dif>[%J-Rj-r][0-9]*(?:\.[0-9]*)?)"
    r"|(?P<dup>[S-Zs][0-9]*)|(?P<missing>\?)|(?P<gap>[\s,;]+)"
)
_COMPRESSED = re.compile(r"[@A-DF-Ia-df-i%J-Zj-s]")


@dataclass(frozen=True)
class Line:
    """A line of data and its number in the file."""

    number: int
    text: str


@dataclass(frozen=True)
class Scale:
    """What the header says of the abscissa, in its own unit: first and step (None when unknown), and the factor."""

    first: float | None
    step: float | None
    factor: float


def decode(lines: Sequence[Line], scale: Scale, where: str) -> Array:
    """The ordinates (N,) of an ``(X++(Y..Y))`` table, not yet scaled; NaN for a missing value.

    Raises InputError when a character has no meaning, or when the abscissa of a line (X-check) or the repeated
    ordinate after a difference (Y-check) is not what the lines before it lead to.
    """
    packed = any(_COMPRESSED.search(line.text) for line in lines)
    found: list[float] = []
    in_difference = False
    for line in lines:
        x, values, in_next = _line(line, packed, where)
        start = len(found) - 1 if in_difference else len(found)
        _check_x(x, start, line, scale, where)
        if in_difference:
            _check_y(found[-1], values[:1], line, where)
            del values[:1]
        found += values
        in_difference = in_next
        if len(found) > MOST_POINTS:
            raise InputError(f"more than {MOST_POINTS} points", where=_at(where, line), why="no spectrum has so many")
    return np.array(found)


def pairs(lines: Sequence[Line], where: str) -> Array:
    """The points (N, 2) of an ``(XY..XY)`` table, not yet scaled; raises InputError for an odd one or a stray sign."""
    found: list[float] = []
    for line in lines:
        for kind, text in _tokens(line, _PLAIN, where):
            found.append(np.nan if kind == "missing" else float(text))
    if len(found) % 2:
        raise InputError(f"{len(found)} numbers do not make pairs", where=_at(where, lines[-1]), why="the data are cut")
    return np.array(found).reshape(-1, 2)


def _line(line: Line, packed: bool, where: str) -> tuple[str, list[float], bool]:
    """The abscissa as written, the ordinates, and whether the last one was a difference."""
    tokens = _tokens(line, _PACKED if packed else _PLAIN, where)
    if not tokens or tokens[0][0] != "affn":
        raise InputError("a line without its abscissa", where=_at(where, line), why="each begins with its X")
    values: list[float] = []
    step, in_difference = 0.0, False
    for kind, text in tokens[1:]:
        if kind == "dup":
            _repeat(values, text, step, in_difference, line, where)
        elif kind == "dif":
            if not values:
                raise InputError("a difference from nothing", where=_at(where, line), why="a line begins with a value")
            step, in_difference = float(_DIF_DIGIT[text[0]] + text[1:]), True
            values.append(values[-1] + step)
        else:
            step, in_difference = 0.0, False
            values.append(_value(kind, text))
    if not values:
        raise InputError("a line without ordinates", where=_at(where, line), why="the data are cut")
    return tokens[0][1], values, in_difference


def _value(kind: str, text: str) -> float:
    if kind == "missing":
        return float("nan")
    return float(_FIRST_DIGIT[text[0]] + text[1:] if kind == "sqz" else text)


def _repeat(values: list[float], text: str, step: float, in_difference: bool, line: Line, where: str) -> None:
    digits = _DUP_DIGIT[text[0]] + text[1:]
    if not values or len(digits) > 7 or len(values) + int(digits) > MOST_POINTS:
        raise InputError(f"a repeat count of {digits[:12]}", where=_at(where, line), why="the data are damaged")
    for _ in range(int(digits) - 1):
        values.append(values[-1] + step if in_difference else values[-1])


def _tokens(line: Line, pattern: re.Pattern[str], where: str) -> list[tuple[str, str]]:
    found, position = [], 0
    for match in pattern.finditer(line.text):
        if match.start() != position:
            break
        position = match.end()
        if match.lastgroup and match.lastgroup != "gap":
            found.append((match.lastgroup, match.group()))
    if position != len(line.text):
        raise InputError(
            f"the character {line.text[position]!r} in the numbers",
            where=f"{_at(where, line)} column {position + 1}",
            why="it has no meaning in a JCAMP-DX table",
            do="export the file again",
        )
    return found


def _check_x(text: str, start: int, line: Line, scale: Scale, where: str) -> None:
    """A line's abscissa is printed short, so it may be off by its last digit and half a step, not by a step more."""
    if scale.first is None or scale.step is None:
        return
    mantissa, _, power = text.lower().partition("e")
    unit = 10.0 ** (int(power or 0) - len(mantissa.partition(".")[2])) if len(power) < 5 else 0.0
    expected, got = scale.first + start * scale.step, float(text) * scale.factor
    if not abs(got - expected) <= 0.5 * abs(scale.step) + unit * abs(scale.factor):
        raise InputError(
            f"the line begins at {got:.6g} and should at {expected:.6g}",
            where=_at(where, line),
            why="the X-check fails: points are missing or doubled before it",
            do="export the file again",
        )


def _check_y(before: float, values: Sequence[float], line: Line, where: str) -> None:
    if not values or abs(values[0] - before) > 1e-9 * max(abs(before), 1.0):
        raise InputError(
            f"the line repeats {values[0] if values else 'nothing'} where the one before ended in {before:g}",
            where=_at(where, line),
            why="the Y-check fails: a difference is damaged",
            do="export the file again",
        )


def _at(where: str, line: Line) -> str:
    return f"{where} line {line.number}"
