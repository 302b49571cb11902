"""``lamplit check``: a verdict on each batch against a target."""

from __future__ import annotations

import os
from dataclasses import dataclass
from typing import TYPE_CHECKING

import click

from chroma.batches import Checked, check
from chroma.cli.common import from_file, set_aside
from chroma.cli.inputs import spectra_from, target_from, with_lamps
from chroma.cli.options import (
    FILE,
    Output,
    Reading,
    Viewing,
    formula_from,
    gathered,
    output_options,
    reading_options,
    refuse_both,
    report_option,
    viewing_options,
)
from chroma.cli.output import emit, noted, say_written
from chroma.decision import RULES, Rule
from chroma.difference.formulas import FORMULAS
from chroma.report.check_report import (
    check_object,
    check_rows,
    check_table,
    correction_rows,
    corrections_lines,
    strength_rows,
)
from chroma.tolerance import Tolerance, read_tolerance
from chroma.viewing import Conditions
from observers.errors import InputError

if TYPE_CHECKING:
    from chroma.batch_corrections import BatchCorrection
    from chroma.colours import Colours
    from chroma.spectra import Spectra
    from chroma.strength import Strength


@dataclass(frozen=True, eq=False)
class Holding:
    """What the batches are held to."""

    limit: float | None
    tolerance: str | None
    rule: Rule | None
    uncertainty: float | None
    coverage: float | None
    formula: str | None
    cmc: str | None
    k: str | None


@dataclass(frozen=True, eq=False)
class Adding:
    """With which dyes a batch that is off may be put right."""

    dye: tuple[str, ...]
    path_length: str | None
    volume: str | None
    most_water: str


holding_options = gathered(
    Holding,
    "holding",
    click.option("--limit", type=float, help="The largest colour difference that passes, under each lamp."),
    click.option("--tolerance", type=FILE, metavar="FILE.toml", help="Limits, lamps, formula and rule from a file."),
    click.option(
        "--rule", type=click.Choice(RULES), help="How a difference near the limit is judged.  [default: simple]"
    ),
    click.option(
        "--uncertainty", type=float, help="Standard uncertainty of a difference, instead of that of replicates."
    ),
    click.option("--coverage", type=float, help="Factor k of the expanded uncertainty.  [default: 2]"),
    click.option("--formula", type=click.Choice(FORMULAS), help="The colour difference.  [default: ciede2000]"),
    click.option("--cmc", metavar="l:c", help="Weights of cmc.  [default: 2:1]"),
    click.option("--k", metavar="kL:kC:kH", help="Parametric factors of ciede2000 or cie94.  [default: 1:1:1]"),
)
adding_options = gathered(
    Adding,
    "adding",
    click.option(
        "--dye",
        multiple=True,
        type=FILE,
        metavar="NAME.dye.json",
        help="A dye that may be added: say what to add to each batch that is off.",
    ),
    click.option("--path-length", metavar="LENGTH", help="Of the batches' cell, with --dye (10mm)."),
    click.option(
        "--volume", metavar="VOLUME", help="Of a batch, with --dye: amounts for it (500L).  [default: a litre]"
    ),
    click.option("--most-water", default="25%", show_default=True, help="Water that may be added, of the batch."),
)


@click.command("check")
@click.argument("batches", type=FILE, metavar="BATCHES")
@click.option("--target", type=FILE, required=True, metavar="FILE[:NAME]", help="What the batches are held to.")
@holding_options
@adding_options
@click.option(
    "--strength",
    is_flag=True,
    help="Relative strength too, at the peak and summed: absorbance, or K/S.",
)
@click.option(
    "--picture", type=FILE, metavar="FILE", help="Draw target beside batch under each lamp (.png, .svg, .pdf)."
)
@click.option("--certificate", metavar="FILE.pdf", help="A page on one batch, to send to a customer.")
@click.option("--batch", metavar="NAME", help="The batch of the certificate, where there are several.")
@report_option
@reading_options
@viewing_options
@output_options
def command(
    batches: str, target: str, holding: Holding, adding: Adding, strength: bool, picture: str | None, certificate: str | None,
    batch: str | None, report: str | None, reading: Reading, viewing: Viewing, output: Output,
) -> int:  # fmt: skip
    r"""Judge each batch against a target: pass, fail or undecided, and what is off.

    \b
    Example: lamplit check demo_spectra/batches.csv --target demo_spectra/target.csv --limit 1.0 -i D65 -i A
    """
    tolerance, conditions = _tolerance(holding, viewing)
    samples, wanted = spectra_from([batches], reading), target_from(target, reading)
    checked = check(samples, wanted, tolerance, conditions)
    corrections = _corrections(checked, samples, wanted, adding)
    strong = _strength(samples, wanted) if strength else None
    shown = Shown(picture, report, certificate, batch)
    _show(
        shown, checked, predict_pair(samples, wanted, checked) if shown.any else None, corrections, strong, output.force
    )
    more = {"corrections": correction_rows(checked, corrections)} if adding.dye else {}
    more |= {"strength": strength_rows(checked, strong)} if strong is not None else {}
    emit(
        output,
        table=lambda: "\n".join((check_table(checked, strong), *corrections_lines(checked, corrections))),
        content=lambda: check_object(checked) | more,
        rows=lambda: check_rows(checked),
    )
    return 0 if checked.counts()["pass"] == len(checked.names) else 1


def _tolerance(holding: Holding, viewing: Viewing) -> tuple[Tolerance, Conditions]:
    """From the file, or from the options; never from both."""
    if holding.tolerance is not None:
        stated = {f"--{name}": value for name, value in vars(holding).items() if name != "tolerance"}
        stated |= {"--illuminant": viewing.illuminant, "--observer": viewing.observer, "--weights": viewing.weights}
        refuse_both(stated, f"--tolerance {holding.tolerance}")
        return with_lamps(read_tolerance(holding.tolerance), viewing, os.path.dirname(holding.tolerance))
    if holding.limit is None:
        raise InputError("no limit was given", do="give --limit 1.0, or --tolerance FILE.toml")
    plain = Tolerance(
        dict.fromkeys(viewing.illuminant or ("D65",), holding.limit),
        formula_from(holding.formula, holding.k, holding.cmc),
        viewing.observer or "10",
        viewing.weights or "cie",
        holding.rule or "simple",
        2.0 if holding.coverage is None else holding.coverage,
        holding.uncertainty,
    )
    return with_lamps(plain, viewing)


def _corrections(checked: Checked, samples: Spectra, target: Spectra, adding: Adding) -> list[BatchCorrection]:
    """What to add to each batch that did not pass; nothing without dyes."""
    if not adding.dye:
        return []
    if target.quantity == "reflectance" and from_file("dye"):
        set_aside("dye", "path_length")  # a default shelf is for solutions; asked for by name it is refused below
        return []
    from chroma.batch_corrections import batch_corrections
    from chroma.cli.dye_inputs import dyes_from, percent
    from chroma.units import path_length_mm, volume_L

    if adding.path_length is None:
        raise InputError(
            "--dye without --path-length", why="how much to add depends on the cell", do="give --path-length 10mm"
        )
    return batch_corrections(
        checked, samples, target, dyes_from(adding.dye), path_length_mm=path_length_mm(adding.path_length),
        volume_L=None if adding.volume is None else volume_L(adding.volume), most_water=percent(adding.most_water),
    )  # fmt: skip


def _strength(samples: Spectra, target: Spectra) -> Strength:
    from chroma.batch_strength import batch_strength

    return batch_strength(target, samples)


@dataclass(frozen=True)
class Shown:
    """Pictures, pages and certificates that were asked for."""

    picture: str | None
    report: str | None
    certificate: str | None
    batch: str | None

    @property
    def any(self) -> bool:
        """Whether anything is to be shown, so that colours for swatches are needed."""
        if self.batch is not None and self.certificate is None:
            raise InputError("--batch without --certificate", why="it names the batch of a certificate", do="give both")
        return any((self.picture, self.report, self.certificate))


def predict_pair(samples: Spectra, target: Spectra, checked: Checked) -> tuple[Colours, Colours]:
    """The colours of target and batches, for swatches."""
    from chroma.colours import predict

    return predict(target, checked.conditions), predict(samples, checked.conditions)


def _show(
    shown: Shown, checked: Checked, pair: tuple[Colours, Colours] | None, corrections: list[BatchCorrection], strong: Strength | None,
    force: bool,
) -> None:  # fmt: skip
    """Write what was asked for; pair is None where nothing was."""
    if pair is None:
        return
    if shown.picture is not None:
        from chroma.report.pictures import save
        from chroma.report.plots import plot_swatches

        save(plot_swatches(checked, *pair), shown.picture, force=force)
    if shown.report is not None:
        from chroma.report.page import report_checked

        report_checked(noted(checked), *pair, shown.report, corrections=corrections, strength=strong, force=force)
        say_written(shown.report)
    if shown.certificate is not None:
        from chroma.report.certificate import certificate

        certificate(checked, _row(checked, shown.batch), *pair, shown.certificate, force=force)
        say_written(shown.certificate)


def _row(checked: Checked, batch: str | None) -> int:
    """The batch that a certificate is for."""
    if batch is None:
        if len(checked.names) > 1:
            raise InputError(
                f"a certificate for {len(checked.names)} batches", why="it is for one", do="name it with --batch"
            )
        return 0
    if batch not in checked.names:
        raise InputError(f"no batch is named {batch!r}", why=f"there are {', '.join(checked.names[:12])}")
    return checked.names.index(batch)
