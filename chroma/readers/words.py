"""The words of headers: which quantity, which unit of wavelength, which cells hold numbers."""

from __future__ import annotations

import re
from dataclasses import dataclass

from chroma.spectra import Quantity

MISSING = frozenset({"", "nan", "n/a", "na", "-", "--", "null", "none", "#n/a"})
OVERFLOW = re.compile(
    r"(?:#{2,}|\*{2,}|[<>]\s*[\d.,]+|[+-]?inf(?:inity)?|over(?:flow|range|load)?|ovr|ovl|sat(?:urated)?|#[a-z/0]+[!?]?)",
    re.IGNORECASE | re.ASCII,
)
_POINT = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eEdD][+-]?[0-9]+)?")
_COMMA = re.compile(r"[+-]?(?:[0-9]+(?:,[0-9]+)?|,[0-9]+)(?:[eEdD][+-]?[0-9]+)?")


@dataclass(frozen=True)
class Meaning:
    """What a word says the numbers are; a single letter is weak: it may be a sample's name as well."""

    quantity: Quantity
    percent: bool = False
    strong: bool = True
    word: str = ""


def number(cell: str, decimal: str = ".") -> float | None:
    """The number in a cell, or None; never raises."""
    if len(cell) > 64:
        return None
    if cell.isascii() and cell.isdigit():  # most cells of a table are plain: these two tests spare them the patterns
        return float(cell)
    if decimal == "." and cell.isascii() and cell.replace(".", "", 1).isdigit():
        return float(cell)
    if decimal == ",":
        if not _COMMA.fullmatch(cell):
            return None
        cell = cell.replace(",", ".")
    elif not _POINT.fullmatch(cell):
        return None
    return float(cell.replace("d", "e").replace("D", "e"))


def is_missing(cell: str) -> bool:
    """Whether a cell says that there is no value."""
    return len(cell) < 6 and cell.lower() in MISSING


# Strong wherever they stand: nobody names a sample so. Short words count when they stand alone, in brackets or last.
_LONG: tuple[tuple[Quantity, re.Pattern[str]], ...] = (
    ("transmittance", re.compile(r"\b(?:transmittance|transmission|transmissivity)\b|%\s?tr?\b|\btr?\s?\(?%", re.I)),
    ("reflectance", re.compile(r"\b(?:reflectance|reflection|reflectivity|remission)\b|%\s?r\b|\br\s?\(?%", re.I)),
    ("absorbance", re.compile(r"\babsorbances?\b|\boptical density\b", re.I)),
)
_SHORT: dict[str, Quantity] = {
    "abs": "absorbance",
    "abs.": "absorbance",
    "absorb": "absorbance",
    "od": "absorbance",
    "o.d.": "absorbance",
    "au": "absorbance",
    "counts": "counts",
    "count": "counts",
    "intensity": "counts",
    "raw": "counts",
    "raw counts": "counts",
    "signal": "counts",
    "cps": "counts",
    "trans": "transmittance",
    "trans.": "transmittance",
    "refl": "reflectance",
    "refl.": "reflectance",
}
_LETTER: dict[str, Quantity] = {"a": "absorbance", "t": "transmittance", "r": "reflectance"}
_BRACKETED = re.compile(r"[(\[]\s*([^()\[\]]{1,30})\s*[)\]]")
_DRESS = re.compile(r"[\s()\[\]{}:;,=%/.\-]+|\b(?:value|values|data|fraction|units?|nm|y|axis|measured)\b", re.I)
# A number before the sign makes it a strength ("transmittance of the 5 % dye").
_PERCENT = re.compile(r"(?<![0-9])(?<![0-9]\s)%|\bper\s?cent\b|\bpercent\b|\bpct\b", re.I)


def meaning(cell: str) -> tuple[Meaning | None, str]:
    """What a header cell says of the quantity, and what is left of it as a sample's name."""
    text = _plain(cell)
    percent = bool(_PERCENT.search(text))
    found = [(quantity, m) for quantity, pattern in _LONG if (m := pattern.search(text))]
    if len(found) == 1:
        quantity, match = found[0]
        return Meaning(quantity, percent, True, cell.strip()), _rest(cell, text, match.start(), match.end())
    if found:
        return None, cell.strip()
    return _short(cell, text, percent)


def _short(cell: str, text: str, percent: bool) -> tuple[Meaning | None, str]:
    bare = text.strip().lower()
    if bare in _SHORT:
        return Meaning(_SHORT[bare], percent, True, cell.strip()), ""
    if bare in _LETTER:
        return Meaning(_LETTER[bare], percent, False, cell.strip()), ""
    for match in _BRACKETED.finditer(text):
        inner = match.group(1).strip().lower()
        if inner in _SHORT or inner in _LETTER:
            quantity = _SHORT.get(inner) or _LETTER[inner]
            return Meaning(quantity, percent, inner in _SHORT, cell.strip()), _rest(cell, text, *match.span())
    words = re.split(r"[\s(\[]+", bare)
    if words[0] in _SHORT and not re.sub(
        r"\b(?:units?|a\.?u\.?|arb\.?|mau|1|counts|data|values?)\b|\W", "", bare[len(words[0]) :]
    ):
        return Meaning(_SHORT[words[0]], percent, True, cell.strip()), ""
    last = re.search(r"[\s\-:]+(abs\.?|od|counts|intensity)\s*$", text, re.I)
    if last and last.start() > 0:
        return Meaning(_SHORT[last.group(1).lower()], percent, True, cell.strip()), _rest(cell, text, *last.span())
    return None, cell.strip()


def _rest(cell: str, text: str, start: int, stop: int) -> str:
    """A cell without the word that names the quantity; empty when only dress is left."""
    left = cell[:start] + " " + cell[stop:]
    left = re.sub(r"[(\[]\s*%?\s*[)\]]", " ", left)
    if not _DRESS.sub("", left.replace("_", " ")):
        return ""
    return " ".join(left.split()).strip(" -_:;,%()[]")


def said_in(lines: list[str]) -> Meaning | None:
    """What lines of a header say of the quantity; None when they say nothing, or two things."""
    found: dict[tuple[str, bool], Meaning] = {}
    for line in lines:
        said, _ = meaning(line)
        if said is None:
            value = re.split(r"[:=;,\t|]", line)
            tail = [piece.strip().strip('"') for piece in value if piece.strip()]
            said = meaning(tail[-1])[0] if len(tail) == 2 else None
        if said is not None and said.strong:
            found[said.quantity, said.percent] = said
    if len({quantity for quantity, _ in found}) != 1:
        return None
    return max(found.values(), key=lambda said: said.percent)


_UNITS = (
    (
        "cm-1",
        re.compile(r"cm\s?(?:\^?\s?\(?[-−]\s?1\)?|⁻¹|\*\*-1)|\b1\s?/\s?cm|\bwave\s?numbers?\b|\breciprocal cm", re.I),
    ),
    ("um", re.compile(r"(?<![a-z])[uµμ]m\b|\bmicrons?\b|\bmicromet(?:re|er)s?\b", re.I)),
    ("nm", re.compile(r"(?<![a-z])nm\b|\bnanomet(?:re|er)s?\b", re.I)),
)
_AXIS = re.compile(
    r"\bwave\s?lengths?\b|\bwave\s?numbers?\b|\blambda\b|λ|\bwl\b|\bx[\s-]?(?:axis|units?|label)\b|\babscissa\b|"
    r"(?<![a-z])(?:[uµμ]m|nm)\b|\bnanomet|\bmicron|cm\s?\^?\(?[-−]1|cm⁻¹|1/cm",
    re.I,
)


def unit_of(text: str) -> str | None:
    """``nm``, ``um`` or ``cm-1`` when exactly one of them is named."""
    plain = _plain(text)
    found = [name for name, pattern in _UNITS if pattern.search(plain)]
    return found[0] if len(found) == 1 else None


def is_axis_word(text: str) -> bool:
    """Whether a header cell names the wavelengths (and is not the name of a sample measured at one)."""
    plain = _plain(text)
    if len(plain) >= 60 or re.search(r"[0-9]\s?(?:nm|[uµμ]m)\b", plain, re.IGNORECASE):
        return False
    return bool(_AXIS.search(plain)) and meaning(text)[0] is None


def names_samples(text: str) -> bool:
    """Whether a header cell stands over the names of samples."""
    words = r"(?:samples?|names?|labels?|ids?|specimens?|batch(?:es)?|sample\s?(?:name|id|no\.?))"
    return bool(re.fullmatch(words, _plain(text).strip(" #.:"), re.I))


# A wavelength as a column's name: 400, 400nm, R400, %T 400, X400 (a name that a number was not allowed to be).
_BAND = re.compile(
    r"(?P<word>(?:spectral|%?\s?[rta]|[rta]\s?%|abs(?:orbance)?|transmittance|reflectance|counts|nm|wl|lambda|λ|x|w)?[\s_(\[@-]*)"
    r"(?P<number>[0-9]+(?:[.,][0-9]+)?)\s?(?P<unit>nm|[uµμ]m|cm-1|cm\^-1|cm⁻¹)?[)\]]?",
    re.I,
)


def band(cell: str, decimal: str = ".") -> tuple[float, str, str] | None:
    """A column's name as a wavelength: its number, the word before it and the unit after it; None when it is none."""
    if len(cell) > 40 or not (match := _BAND.fullmatch(cell.strip())):
        return None
    text = match["number"]
    if decimal == "." and "," in text:
        return None
    unit = match["unit"] or ("nm" if match["word"].strip(" _").lower() == "nm" else "")
    return float(text.replace(",", ".")), match["word"].strip(" _([@-"), unit_of(unit) or ""


def path_length_mm(lines: list[str]) -> float | None:
    """A path length that a header states with its unit; None when it states none, or two."""
    pattern = re.compile(
        r"\bpath\s?length\W{0,6}(?:\b(mm|cm)\b\W{0,5})?([0-9]+(?:[.,][0-9]+)?)\s?(mm|cm)?(?![a-z])", re.I
    )
    found = set()
    for line in lines:
        for match in pattern.finditer(_plain(line[:500])):
            unit = (match[1] or match[3] or "").lower()
            if unit and float(match[2].replace(",", ".")) > 0:
                found.add(float(match[2].replace(",", ".")) * (10.0 if unit == "cm" else 1.0))
    return found.pop() if len(found) == 1 else None


def _plain(text: str) -> str:
    return text.replace("_", " ")


def is_axis_line(line: str) -> bool:
    """Whether a header line speaks of the wavelengths' unit, and not of a slit or a scan speed."""
    plain = _plain(line[:300])
    return bool(
        re.search(r"\bwave\s?(?:length|number)s?\b|\bx[\s-]?(?:axis|units?|label)\b|\babscissa\b", plain, re.I)
    ) and (not re.search(r"\b(?:slit|band\s?width|speed|interval|accuracy|blaze|steps?)\b", plain, re.I))


def says_percent(line: str) -> bool:
    """Whether a header line gives the unit of the values as per cent."""
    return bool(
        re.search(
            r"\b(?:y[\s-]?(?:axis|units?|label)|units?|ordinate|mode)\b[^,;]{0,20}[:=,;\t ]\s*(?:%|per\s?cent)",
            _plain(line[:300]),
            re.I,
        )
    )
