"""``lamplit check``: a verdict on each batch against a target."""

from __future__ import annotations

import os
from typing import TYPE_CHECKING

import click

from chroma.batches import Checked, check
from chroma.cli.inputs import spectra_from, target_from, with_lamps
from chroma.cli.options import (
    Output,
    Reading,
    Viewing,
    formula_from,
    formula_options,
    output_options,
    reading_options,
    refuse_both,
    viewing_options,
)
from chroma.cli.output import emit
from chroma.decision import RULES, Rule
from chroma.report.check_report import check_object, check_rows, check_table, correction_rows, corrections_lines
from chroma.tolerance import Tolerance, read_tolerance
from observers.errors import InputError

if TYPE_CHECKING:
    from chroma.batch_corrections import BatchCorrection
    from chroma.spectra import Spectra


@click.command("check")
@click.argument("batches", metavar="BATCHES")
@click.option("--target", required=True, metavar="FILE[:NAME]", help="What the batches are held to.")
@click.option("--limit", type=float, help="The largest colour difference that passes, under each lamp.")
@click.option("--tolerance", "tolerance_file", metavar="FILE.toml", help="Limits, lamps, formula and rule from a file.")
@click.option("--rule", type=click.Choice(RULES), help="How a difference near the limit is judged.  [default: simple]")
@click.option("--uncertainty", type=float, help="Standard uncertainty of a difference, instead of that of replicates.")
@click.option("--coverage", type=float, help="Factor k of the expanded uncertainty.  [default: 2]")
@click.option(
    "--dye",
    "dyes",
    multiple=True,
    metavar="NAME.dye.json",
    help="A dye that may be added: say what to add to each batch that is off.",
)
@click.option("--path-length", metavar="LENGTH", help="Of the batches' cell, with --dye (10mm).")
@click.option("--volume", metavar="VOLUME", help="Of a batch, with --dye: amounts for it (500L).  [default: a litre]")
@click.option("--most-water", default="25%", show_default=True, help="Water that may be added, of the batch.")
@formula_options
@reading_options
@viewing_options
@output_options
def command(
    batches: str,
    target: str,
    limit: float | None,
    tolerance_file: str | None,
    rule: Rule | None,
    uncertainty: float | None,
    coverage: float | None,
    formula: str | None,
    l_c: str | None,
    k: str | None,
    dyes: tuple[str, ...],
    path_length: str | None,
    volume: str | None,
    most_water: str,
    reading: Reading,
    viewing: Viewing,
    output: Output,
) -> int:
    r"""Judge each batch against a target: pass, fail or undecided, and what is off.

    \b
    Example: lamplit check demo_spectra/batches.csv --target demo_spectra/target.csv --limit 1.0 -i D65 -i A
    """
    stated = {
        "--limit": limit,
        "--rule": rule,
        "--uncertainty": uncertainty,
        "--coverage": coverage,
        "--formula": formula,
        "--cmc": l_c,
        "--k": k,
        "--illuminant": viewing.illuminant,
        "--observer": viewing.observer,
        "--weights": viewing.weights,
    }
    if tolerance_file is not None:
        refuse_both(stated, f"--tolerance {tolerance_file}")
        tolerance, conditions = with_lamps(read_tolerance(tolerance_file), viewing, os.path.dirname(tolerance_file))
    elif limit is not None:
        limits = dict.fromkeys(viewing.illuminant or ("D65",), limit)
        plain = Tolerance(
            limits,
            formula_from(formula, k, l_c),
            viewing.observer or "10",
            viewing.weights or "cie",
            rule or "simple",
            2.0 if coverage is None else coverage,
            uncertainty,
        )
        tolerance, conditions = with_lamps(plain, viewing)
    else:
        raise InputError("no limit was given", do="give --limit 1.0, or --tolerance FILE.toml")
    samples, wanted = spectra_from([batches], reading), target_from(target, reading)
    checked = check(samples, wanted, tolerance, conditions)
    corrections = _corrections(checked, samples, wanted, dyes, path_length, volume, most_water)
    emit(
        output,
        table=lambda: "\n".join((check_table(checked), *corrections_lines(checked, corrections))),
        content=lambda: (
            check_object(checked) | ({"corrections": correction_rows(checked, corrections)} if dyes else {})
        ),
        rows=lambda: check_rows(checked),
    )
    return 0 if checked.counts()["pass"] == len(checked.names) else 1


def _corrections(
    checked: Checked, samples: Spectra, target: Spectra, dyes: tuple[str, ...], path_length: str | None, volume: str | None,
    most_water: str,
) -> list[BatchCorrection]:  # fmt: skip
    """What to add to each batch that did not pass; nothing without dyes."""
    if not dyes:
        return []
    from chroma.batch_corrections import batch_corrections
    from chroma.cli.dye_inputs import dyes_from, percent
    from chroma.units import path_length_mm, volume_L

    if path_length is None:
        raise InputError(
            "--dye without --path-length", why="how much to add depends on the cell", do="give --path-length 10mm"
        )
    return batch_corrections(
        checked, samples, target, dyes_from(dyes), path_length_mm=path_length_mm(path_length),
        volume_L=None if volume is None else volume_L(volume), most_water=percent(most_water),
    )  # fmt: skip
