"""Verdicts as rows and as a table. Field names here are relied on by others."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from chroma.batches import Checked
from chroma.decision import WORDS
from chroma.metamerism import change, special_indices
from chroma.off_target import off_targets
from chroma.reason import Grounds, grounds, reason, signed_reasons
from chroma.report.rows import Row, condition_row, number, source_rows
from chroma.report.text import CAUTION, MOST_ROWS, aligned, conditions_line, cut_line, joined_lines, notes, sources_line
from chroma.tolerance import COMPONENTS
from observers.arrays import Array

if TYPE_CHECKING:
    from chroma.batch_corrections import BatchCorrection
    from chroma.strength import Strength


def check_rows(checked: Checked) -> list[Row]:
    """One row a batch and lamp, with the fields that design.md names and more."""
    expanded, within, verdicts = checked.expanded, checked.within, checked.worst
    rows, known, limits = [], grounds(checked), checked.limits
    for i, (name, off) in enumerate(zip(checked.names, off_targets(checked), strict=True)):
        worst = WORDS[verdicts[i]]
        for j, lamp in enumerate(checked.conditions.illuminants):
            row: Row = {"name": name, "illuminant": lamp.name, "delta_e": float(checked.delta_e[i, j])}
            row |= {key: float(value) for key, value in zip(COMPONENTS, checked.parts[i, j], strict=True)}
            row |= {"verdict": WORDS[checked.verdicts[i, j]], "limit": float(limits[j])}
            row |= {"reason": reason(known, i, j)}
            row |= {"U": None if expanded is None else float(expanded[i, j])}
            row |= {"probability_within": None if within is None else float(within[i, j])}
            rows.append(row | {"batch_verdict": worst, "off": off})
    return rows


def check_object(checked: Checked) -> Row:
    """The whole answer of ``check`` as one JSON object."""
    limits = {
        lamp.name: float(limit) for lamp, limit in zip(checked.conditions.illuminants, checked.limits, strict=True)
    }
    values = set(limits.values())
    tolerance = checked.tolerance
    return {
        "target": checked.target,
        "formula": str(tolerance.formula),
        "limit": values.pop() if len(values) == 1 else None,
        "limits": limits,
        "rule": tolerance.rule,
        "one_sided": dict(tolerance.one_sided),
        "results": check_rows(checked),
        "metamerism": _metamerism_rows(checked),
        "summary": checked.counts(),
        "conditions": condition_row(checked.conditions),
        "notes": list(checked.notes),
        "sources": source_rows(checked.sources),
    }


def _metamerism_rows(checked: Checked) -> list[Row]:
    first, *others = (lamp.name for lamp in checked.conditions.illuminants)
    changes, indices = change(checked), special_indices(checked)
    return [
        {
            "name": name,
            "reference": first,
            "test": other,
            "change": float(changes[i, j]),
            "special_index": number(indices[i, j]),
        }
        for i, name in enumerate(checked.names)
        for j, other in enumerate(others)
    ]


def check_table(checked: Checked, strong: Strength | None = None) -> str:
    """One line a batch: verdict, ΔE under each lamp, what is off; then the summary and what it rests on."""
    lamps = [lamp.name for lamp in checked.conditions.illuminants]
    header = ["batch", "verdict", *(f"dE {lamp}" for lamp in lamps), "what is off"]
    peak = [] if strong is None else [f"strength % at {strong.peak_nm:g} nm", "summed"]
    known, indices = grounds(checked), special_indices(checked)
    rows = [
        [
            *(name, WORDS[checked.worst[i]]),
            *(_delta(checked, i, j) for j in range(len(lamps))),
            *([] if strong is None else [f"{strong.at_peak[i]:.1f}", f"{strong.summed[i]:.1f}"]),
            _remark(known, i, words, indices[i]),
        ]
        for i, (name, words) in enumerate(zip(checked.names, off_targets(checked, MOST_ROWS), strict=False))
    ]
    limits = ", ".join(f"{lamp} {limit:g}" for lamp, limit in zip(lamps, checked.limits, strict=True))
    signed = "".join(f", {key} {value:g}" for key, value in checked.tolerance.one_sided.items())
    counts = checked.counts()
    summary = (
        f"{counts['batches']} batches: {counts['pass']} pass, {counts['fail']} fail, {counts['undecided']} undecided"
    )
    return joined_lines(
        f"Target {checked.target}; {checked.tolerance.formula}; limits {limits}{signed}; rule {checked.tolerance.rule}",
        aligned([*header[:-1], *peak, header[-1]], rows),
        cut_line(len(checked.names)),
        summary,
        conditions_line(str(checked.conditions)),
        notes(checked.notes),
        sources_line(checked.sources),
    )


def _delta(checked: Checked, row: int, lamp: int) -> str:
    text = f"{checked.delta_e[row, lamp]:.2f}"
    if checked.expanded is not None:
        text += f" ± {checked.expanded[row, lamp]:.2f}"
    return text


def _remark(known: Grounds, row: int, words: str, indices: Array) -> str:
    """What is off, a signed limit that is not kept, and a warning where the match holds under the first lamp only."""
    checked = known.checked
    over = [
        f"{lamp.name} {index:.1f}"
        for lamp, index, limit in zip(checked.conditions.illuminants[1:], indices, checked.limits[1:], strict=True)
        if index > limit
    ]
    signed = [text for lamp in range(len(checked.limits)) for text in signed_reasons(known, row, lamp)[:1]][:1]
    return "; ".join([words, *signed, *([f"metameric: {', '.join(over)}"] if over else [])])


def corrections_lines(checked: Checked, corrections: Sequence[BatchCorrection]) -> list[str]:
    """What to add to each batch that is off, with its strength, one line each."""
    if not corrections:
        return []
    lines = ["", "What to add, by Beer's law from the batch as measured (try it on a sample first):"]
    for one in corrections:
        found = one.correction
        strength = found.strength if found is not None else None
        said = (
            ""
            if strength is None
            else (
                f"strength {float(strength.at_peak):.1f} % at {strength.peak_nm:g} nm, {float(strength.summed):.1f} % summed; "
            )
        )
        lines.append(notes([f"{checked.names[one.row]}: {said}{one.said}"]))
    return [*lines, CAUTION]


def strength_rows(checked: Checked, strong: Strength) -> list[Row]:
    """Relative strength of each batch in per cent."""
    return [
        {
            "name": name,
            "at_peak_percent": float(strong.at_peak[i]),
            "summed_percent": float(strong.summed[i]),
            "peak_nm": strong.peak_nm,
        }
        for i, name in enumerate(checked.names)
    ]


def correction_rows(checked: Checked, corrections: Sequence[BatchCorrection]) -> list[Row]:
    """One row a batch that did not pass."""
    return [_correction_row(checked.names[one.row], one) for one in corrections]


def _correction_row(name: str, one: BatchCorrection) -> Row:
    found = one.correction
    if found is None:
        return {"name": name, "said": one.said, "addition": None}
    lamps = found.illuminants
    added = found.addition or found.closest
    return {
        "name": name,
        "said": one.said,
        "reaches": found.addition is not None,
        "addition_per_litre": dict(added.dyes),
        "unit": found.unit,
        "water_per_litre": added.water,
        "delta_e_expected": dict(zip(lamps, map(float, added.delta_e), strict=True)),
        "strength_at_peak_percent": None if found.strength is None else float(found.strength.at_peak),
        "strength_summed_percent": None if found.strength is None else float(found.strength.summed),
        "composition": dict(zip(found.composition.shelf.names, map(float, found.composition.value[0]), strict=True)),
        "foreign": bool(found.composition.foreign[0]),
    }
