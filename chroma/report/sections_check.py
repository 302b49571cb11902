"""A check as a page: the answer, target beside batch, where batches lie, how they run, and every verdict."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from chroma.batches import Checked
from chroma.colours import Colours
from chroma.control import LEAST
from chroma.decision import PASS, WORDS
from chroma.report.check_report import check_rows
from chroma.report.colour_plots import plot_tolerance
from chroma.report.control_chart import control_sentence, plot_control
from chroma.report.plots import plot_swatches
from chroma.report.sections_base import (
    Cell,
    Page,
    Picture,
    Section,
    Table,
    condition_pairs,
    number,
    screen_cautions,
    table,
    uncertainty_words,
    verdict,
    words,
)
from chroma.report.sections_svg import picture
from chroma.report.text import CAUTION

if TYPE_CHECKING:
    from chroma.batch_corrections import BatchCorrection
    from chroma.strength import Strength

MOST_SWATCHES = 20  # pairs in the picture; of more batches, the worst
MOST_LAMPS = 3  # with a picture of their own
MOST_LINES = 2000  # of the table
ENOUGH = 8  # batches that make a control chart worth drawing


def check_page(
    checked: Checked,
    target: Colours,
    batches: Colours,
    *,
    corrections: Sequence[BatchCorrection] = (),
    strength: Strength | None = None,
) -> Page:
    """The page of a check; target and batches are the colours of the same samples, for the swatches."""
    sections = [_picture_section(checked, target, batches)]
    if len(checked.names) >= max(ENOUGH, LEAST):
        sections.append(_order_section(checked))
    sections.append(Section("Every batch", tables=(_table(checked, batches, strength),), paragraphs=_left_out(checked)))
    if corrections:
        sections.append(_corrections(checked, corrections))
    cautions = (*checked.notes, *screen_cautions(batches), *([CAUTION] if corrections else []))
    return Page(
        f"Check of {_batches(len(checked.names))} against {checked.target}",
        answer(checked),
        tuple(sections),
        held_to(checked),
        checked.sources,
        tuple(dict.fromkeys(cautions)),
    )


def answer(checked: Checked) -> str:
    """The outcome in one sentence."""
    count = checked.counts()
    lamps = ", ".join(lamp.name for lamp in checked.conditions.illuminants)
    if len(checked.names) == 1:
        return f"{checked.names[0]} against {checked.target} under {lamps}: {WORDS[checked.worst[0]]}."
    found = f"{count['pass']} of {count['batches']} batches pass against {checked.target} under {lamps}; "
    worst = checked.names[worst_first(checked)[0]]
    return f"{found}{count['fail']} fail, {count['undecided']} undecided; the farthest from the target is {worst}."


def worst_first(checked: Checked) -> list[int]:
    """Rows of the batches, those that fail first, then by how much of the limit they take under their worst lamp."""
    share = (checked.delta_e / checked.limits).max(axis=1)
    return [int(i) for i in np.lexsort((-share, -checked.worst))]


def held_to(checked: Checked) -> tuple[tuple[str, str], ...]:
    """Conditions, formula, limits, rule and uncertainty."""
    tolerance = checked.tolerance
    limits = zip(checked.conditions.illuminants, checked.limits, strict=True)
    signed = ", ".join(f"{key} {value:g}" for key, value in tolerance.one_sided.items())
    return (
        *condition_pairs(checked.conditions),
        ("Colour difference", str(tolerance.formula)),
        ("Limits", ", ".join(f"{lamp.name} {limit:g}" for lamp, limit in limits)),
        *((("Signed limits", signed),) if signed else ()),
        ("Rule of decision", tolerance.rule),
        ("Uncertainty", uncertainty_words(checked)),
    )


def _picture_section(checked: Checked, target: Colours, batches: Colours) -> Section:
    rows = worst_first(checked)[:MOST_SWATCHES]
    lamps = checked.conditions.illuminants
    pictures = [_swatches(checked, target, batches, rows)]
    pictures += [_plane(checked, lamp) for lamp in range(min(len(lamps), MOST_LAMPS))]
    said = (f"Pictures of where the batches lie are drawn for the first {MOST_LAMPS} of {len(lamps)} illuminants.",)
    return Section("Picture", tuple(pictures), paragraphs=said if len(lamps) > MOST_LAMPS else ())


def _swatches(checked: Checked, target: Colours, batches: Colours, rows: list[int]) -> Picture:
    rest = len(checked.names) - len(rows)
    count = checked.counts()
    caption = "Target left and batch right in each pair, adapted from its lamp to the screen."
    if rest:
        left = checked.worst[worst_first(checked)[MOST_SWATCHES:]]
        parts = ", ".join(f"{np.count_nonzero(left == code)} {word}" for code, word in enumerate(WORDS))
        caption += f" These are the {len(rows)} farthest off; the other {rest} are not drawn here: {parts}."
    description = (
        f"Swatches of {_batches(len(rows))} beside the target under {len(checked.conditions.illuminants)} illuminants, each with "
        f"its colour difference and its verdict. In all, {count['pass']} pass, {count['fail']} fail and {count['undecided']} are "
        "undecided; the table holds the numbers."
    )
    return picture(
        lambda: plot_swatches(checked, target, batches, rows=rows), "Target beside batch", description, caption
    )


def _plane(checked: Checked, lamp: int) -> Picture:
    name, limit = checked.conditions.illuminants[lamp].name, checked.limits[lamp]
    outside = int(np.count_nonzero(checked.verdicts[:, lamp] != PASS))
    description = (
        f"Two diagrams, a* against b* and C* against L*, under {name}: the target with the contour of {checked.tolerance.formula} "
        f"{limit:g} around it, and the batches, a circle for pass, a triangle for undecided, a cross for fail. "
        f"{_batches(outside)} of {len(checked.names)} not passing under this lamp."
    )
    caption = (
        f"Under {name}. The line is where {checked.tolerance.formula} is {limit:g}: left at the target's lightness, right at its "
        "hue. A batch inside one of the two may lie outside the other."
    )
    return picture(lambda: plot_tolerance(checked, lamp), f"Where the batches lie, {name}", description, caption)


def _order_section(checked: Checked) -> Section:
    lamp = int(np.argmax((checked.delta_e / checked.limits).max(axis=0)))
    said = control_sentence(checked, lamp)
    name = checked.conditions.illuminants[lamp].name
    drawn = picture(
        lambda: plot_control(checked, lamp),
        f"Control chart of ΔE, {name}",
        f"ΔE of each batch in order with the tolerance, the warning and action limits, and the moving average. {said}",
        f"ΔE under {name}, in the order of the file, which is taken as the order of making. Limits for single values from the "
        "moving range (ISO 7870-2) and for the weighted moving average (ISO 7870-6). ΔE is not Gaussian near zero: take a "
        "signal as a question, not as a proof.",
    )
    return Section("In order", (drawn,), paragraphs=(said,))


def _left_out(checked: Checked) -> tuple[str, ...]:
    if len(checked.names) <= MOST_LINES:
        return ()
    return (
        f"The table holds the {MOST_LINES} batches farthest off, of {len(checked.names)}; --out writes all of them.",
    )


def _table(checked: Checked, batches: Colours, strong: Strength | None) -> Table:
    lamps = [lamp.name for lamp in checked.conditions.illuminants]
    header = [
        "batch",
        "verdict",
        *(f"ΔE {lamp}" for lamp in lamps),
        *(f"{part} {lamps[0]}" for part in ("ΔL*", "ΔC*", "ΔH*")),
    ]
    header += [] if strong is None else [f"strength % at {strong.peak_nm:g} nm", "strength % summed"]
    codes, _ = batches.swatches()
    kept = sorted(worst_first(checked)[:MOST_LINES]) if len(checked.names) > MOST_LINES else range(len(checked.names))
    said = check_rows(checked)[:: len(lamps)]
    rows = [
        [
            Cell(checked.names[i]),
            verdict(WORDS[checked.worst[i]]),
            *(_delta(checked, i, j, codes[i][j]) for j in range(len(lamps))),
            *(number(_signed(checked.parts[i, 0, k])) for k in (0, 3, 4)),
            *([] if strong is None else [number(f"{strong.at_peak[i]:.1f}"), number(f"{strong.summed[i]:.1f}")]),
            words(said[i]["off"]),
        ]
        for i in kept
    ]
    return table("Verdict and colour difference of each batch", [*header, "what is off"], rows)


def _delta(checked: Checked, row: int, lamp: int, code: str) -> Cell:
    spread = "" if checked.expanded is None else f" ± {checked.expanded[row, lamp]:.2f}"
    return Cell(f"{checked.delta_e[row, lamp]:.2f}{spread}", colour=code, number=True)


def _signed(value: float) -> str:
    return f"{value:+.2f}" if round(value, 2) else "0.00"


def _corrections(checked: Checked, corrections: Sequence[BatchCorrection]) -> Section:
    rows = [[words(checked.names[one.row]), words(one.said)] for one in corrections]
    caption = "What to add, by Beer's law from the batch as measured; try it on a sample first"
    return Section("What to add", tables=(table(caption, ("batch", "addition"), rows),))


def _batches(count: int) -> str:
    return "1 batch" if count == 1 else f"{count} batches"
