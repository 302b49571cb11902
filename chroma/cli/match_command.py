"""``lamplit match``: recipes that meet a target."""

from __future__ import annotations

from collections.abc import Sequence

import click
import numpy as np

from chroma.cli.dye_inputs import dyes_from
from chroma.cli.inputs import conditions_from, target_from
from chroma.cli.options import (
    FILE,
    Output,
    Reading,
    Viewing,
    dyes_option,
    formula_from,
    formula_options,
    output_options,
    reading_options,
    report_option,
    viewing_options,
)
from chroma.cli.output import emit, noted, say_written
from chroma.units import NUMBER, concentration, path_length_mm
from observers.arrays import Array
from observers.errors import InputError


@click.command("match")
@click.option("--target", type=FILE, metavar="FILE[:NAME]", help="The spectrum to be met.")
@click.option(
    "--target-lab",
    "target_Lab",
    multiple=True,
    metavar="L,a,b",
    help="The colour to be met, one for each lamp in turn.",
)
@dyes_option("A dye on the shelf; may be repeated.")
@click.option("--path-length", required=True, metavar="LENGTH", help="Of the recipe (25mm).")
@click.option(
    "--target-path-length",
    metavar="LENGTH",
    help="The target is a solution measured in this cell: rescale it to --path-length.  [default: meet it as measured]",
)
@click.option("--limit", type=float, default=1.0, show_default=True, help="Within which a lamp counts as met.")
@click.option(
    "--most-dyes", type=click.IntRange(1, 6), default=3, show_default=True, help="Dyes in a recipe, besides fixed ones."
)
@click.option(
    "--bounds",
    multiple=True,
    metavar="NAME=LOW:HIGH",
    help="Of a dye (heron=0g/L:0.1g/L).  [default: its fitted range]",
)
@click.option("--fixed", multiple=True, metavar="NAME=CONC", help="A dye that is there already.")
@click.option("--step", metavar="CONC", help="The smallest step of concentration that can be weighed (0.1mg/L).")
@click.option("--price", multiple=True, metavar="NAME=PRICE", help="Of a gram of each dye.")
@click.option("--keep", type=click.IntRange(1, 100), default=5, show_default=True, help="How many recipes are shown.")
@report_option
@formula_options
@reading_options
@viewing_options
@output_options
def command(
    target: str | None, target_Lab: tuple[str, ...], dyes: tuple[str, ...], path_length: str, target_path_length: str | None,
    limit: float, most_dyes: int, bounds: tuple[str, ...], fixed: tuple[str, ...], step: str | None, price: tuple[str, ...],
    keep: int, report: str | None,
    formula: str | None, l_c: str | None, k: str | None, reading: Reading, viewing: Viewing, output: Output,
) -> int:  # fmt: skip
    r"""Find the recipes of dyes on the shelf that come closest to a target under all the lamps.

    \b
    Example: lamplit match --target demo_spectra/target.csv --dye heron.dye.json --dye broom.dye.json
    --path-length 10mm -i D65 -i A
    """
    from chroma.matching.prepare import aimed_at
    from chroma.matching.recipes import match
    from chroma.report.match_report import match_object, match_rows, match_table

    if (target is None) == (not target_Lab):
        raise InputError(
            "match needs --target or --target-lab", why="one of the two says what is to be met", do="give one of them"
        )
    length_mm = path_length_mm(path_length)
    aim = aimed_at(
        None if target is None else target_from(target, reading), _colours(target_Lab), dyes_from(dyes), conditions_from(viewing),
        path_length_mm=length_mm, target_path_length_mm=None if target_path_length is None else path_length_mm(target_path_length),
    )  # fmt: skip
    found = match(
        aim.target, aim.stock, path_length_mm=length_mm, weights=aim.weights, formula=formula_from(formula, k, l_c), limits=limit,
        most_dyes=most_dyes, bounds={name: _ends(text, aim.stock.unit) for name, text in _pairs(bounds)},
        fixed={name: concentration(text, aim.stock.unit) for name, text in _pairs(fixed)},
        step=None if step is None else concentration(step, aim.stock.unit),
        price={name: _number(text) for name, text in _pairs(price)} or None, keep=keep,
    )  # fmt: skip
    if report is not None:
        from chroma.report.page import report_matches

        report_matches(found, noted(aim), report, force=output.force)
        say_written(report)
    emit(
        output,
        table=lambda: match_table(found, aim),
        content=lambda: match_object(found, aim),
        rows=lambda: match_rows(found),
    )
    return 0 if found.reached else 1


def _colours(texts: Sequence[str]) -> Array | None:
    """(L, 3) of ``72.8,-31.9,-15.4`` texts."""
    if not texts:
        return None
    rows = [text.split(",") for text in texts]
    if any(len(row) != 3 for row in rows):
        raise InputError(f"--target-lab {texts[0]!r}", why="L*, a* and b* are wanted", do="write 72.8,-31.9,-15.4")
    return np.array([[_number(part) for part in row] for row in rows])


def _pairs(texts: Sequence[str]) -> list[tuple[str, str]]:
    pairs = [text.rpartition("=")[::2] for text in texts]
    for (name, value), text in zip(pairs, texts, strict=True):
        if not name or not value:
            raise InputError(f"{text!r}", why="a dye's name and a value are wanted", do="write NAME=VALUE")
    return pairs


def _ends(text: str, unit: str) -> tuple[float, float]:
    low, _, high = text.partition(":")
    return concentration(low, unit), concentration(high, unit)


def _number(text: str) -> float:
    import re

    if not re.fullmatch(rf"\s*{NUMBER}\s*", text):
        raise InputError(f"{text!r}", why="a number is wanted")
    return float(text)
