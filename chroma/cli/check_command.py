"""``lamplit check``: a verdict on each batch against a target."""

from __future__ import annotations

import os

import click

from chroma.batches import check
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
from chroma.report.check_report import check_object, check_rows, check_table
from chroma.tolerance import Tolerance, read_tolerance
from observers.errors import InputError


@click.command("check")
@click.argument("batches", metavar="BATCHES")
@click.option("--target", required=True, metavar="FILE[:NAME]", help="What the batches are held to.")
@click.option("--limit", type=float, help="The largest colour difference that passes, under each lamp.")
@click.option("--tolerance", "tolerance_file", metavar="FILE.toml", help="Limits, lamps, formula and rule from a file.")
@click.option("--rule", type=click.Choice(RULES), help="How a difference near the limit is judged.  [default: simple]")
@click.option("--uncertainty", type=float, help="Standard uncertainty of a difference, instead of that of replicates.")
@click.option("--coverage", type=float, help="Factor k of the expanded uncertainty.  [default: 2]")
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
    checked = check(spectra_from([batches], reading), target_from(target, reading), tolerance, conditions)
    emit(
        output,
        table=lambda: check_table(checked),
        content=lambda: check_object(checked),
        rows=lambda: check_rows(checked),
    )
    return 0 if checked.counts()["pass"] == len(checked.names) else 1
