"""``lamplit predict``: the colour of spectra, or of a solution that nobody has mixed yet, under each lamp."""

from __future__ import annotations

from dataclasses import dataclass

import click

from chroma.cli.inputs import conditions_from, spectra_from
from chroma.cli.options import (
    FILE,
    Output,
    Reading,
    Viewing,
    output_options,
    reading_options,
    report_option,
    viewing_options,
)
from chroma.cli.output import emit, noted, say_written
from chroma.colours import Colours, predict
from chroma.report.colour_report import colour_rows, colours_table, flat, inconstancy_rows
from chroma.report.rows import condition_row, source_rows
from observers.errors import InputError


@click.command("predict")
@click.option("--spectra", "files", type=FILE, multiple=True, metavar="FILE", help="Measured spectra; may be repeated.")
@click.option(
    "--dye",
    "dyes",
    type=FILE,
    multiple=True,
    metavar="NAME.dye.json=CONC",
    help="A dye at a concentration (heron.dye.json=6.5mg/L); may be repeated.",
)
@click.option("--path-length", metavar="LENGTH", help="The path length that is looked through (25mm).")
@click.option(
    "--concentration-uncertainty",
    "share",
    default="0%",
    show_default=True,
    help="Relative standard uncertainty of each concentration.",
)
@click.option(
    "--sweep", metavar="SWEEP", help="strength=0.1:4:9, path-length=1mm:100mm:9, NAME=0g/L:0.4g/L:9 or NAME/NAME=9."
)
@click.option(
    "--hue-turn",
    "turn_deg",
    type=float,
    default=10.0,
    show_default=True,
    help="Say where along a sweep the hue turns by more than these degrees.",
)
@click.option("--through-cell", is_flag=True, help="Leave in what walls and solvent take; do not divide by a blank.")
@click.option(
    "--wall",
    default="glass",
    show_default=True,
    help="Refractive index of the walls, or glass, quartz, acrylic, polystyrene.",
)
@click.option("--liquid", default="water", show_default=True, help="Refractive index of the liquid, or its name.")
@click.option(
    "--solvent", type=FILE, metavar="FILE", help="Absorbance of the solvent, one sample, with --solvent-path-length."
)
@click.option(
    "--solvent-path-length",
    metavar="LENGTH",
    default="10mm",
    show_default=True,
    help="Of the cell the solvent was measured in.",
)
@click.option(
    "--picture", type=FILE, metavar="FILE", help="Draw the colours, or ladder and path of a sweep (.png, .svg, .pdf)."
)
@report_option
@reading_options
@viewing_options
@output_options
def command(
    files: tuple[str, ...], dyes: tuple[str, ...], path_length: str | None, share: str, sweep: str | None, turn_deg: float,
    through_cell: bool, wall: str, liquid: str, solvent: str | None, solvent_path_length: str, picture: str | None,
    report: str | None,
    reading: Reading, viewing: Viewing, output: Output,
) -> None:  # fmt: skip
    r"""Compute the colour of measured spectra, or of a solution of dyes, under each lamp.

    \b
    Example: lamplit predict --spectra demo_spectra/target.csv -i D65 -i A
    """
    if bool(files) == bool(dyes):
        raise InputError(
            "predict needs --spectra or --dye", why="one of the two says what is looked at", do="give one of them"
        )
    turns: tuple[str, ...] = ()
    if files:
        colours = predict(spectra_from(files, reading), conditions_from(viewing))
    else:
        cell = _Cell(through_cell, wall, liquid, solvent, solvent_path_length)
        colours, turns = _solutions(dyes, path_length, share, sweep, turn_deg, cell, reading, viewing)
    if picture is not None:
        from chroma.report.dye_plots import plot_ladder, plot_sweep
        from chroma.report.pictures import save

        save(plot_sweep(colours) if sweep else plot_ladder(colours), picture, force=output.force)
    if report is not None:
        from chroma.report.page import report_colours

        report_colours(noted(colours), report, turns=turns, force=output.force)
        say_written(report)
    emit(
        output,
        table=lambda: "\n".join((colours_table(colours), *turns)),
        content=lambda: {
            "colours": colour_rows(colours),
            "inconstancy": inconstancy_rows(colours),
            "hue_turns": list(turns),
            "conditions": condition_row(colours.conditions),
            "notes": list(colours.notes),
            "sources": source_rows(colours.sources),
        },
        rows=lambda: flat(colour_rows(colours)),
    )


@dataclass(frozen=True)
class _Cell:
    """The options about walls and solvent."""

    through: bool
    wall: str
    liquid: str
    solvent: str | None
    solvent_path_length: str


def _solutions(
    dyes: tuple[str, ...], path_length: str | None, share: str, sweep_text: str | None, turn_deg: float, options: _Cell,
    reading: Reading, viewing: Viewing,
) -> tuple[Colours, tuple[str, ...]]:  # fmt: skip
    from chroma.cli.dye_inputs import percent, recipe_from, solvent_from
    from chroma.dye.appearance import predict_solutions
    from chroma.dye.solution import Cell, refractive_index
    from chroma.dye.sweep import one_solution, sweep, turn_sentences
    from chroma.units import path_length_mm

    if path_length is None:
        raise InputError(
            "--dye without --path-length",
            why="a colour depends on what is looked through",
            do="give --path-length 25mm",
        )
    stock, amounts = recipe_from(dyes)
    length_mm = path_length_mm(path_length)
    steps = (
        one_solution(stock, amounts, length_mm) if sweep_text is None else sweep(sweep_text, stock, amounts, length_mm)
    )
    cell = (
        Cell(length_mm, refractive_index(options.wall), refractive_index(options.liquid)) if options.through else None
    )
    colours = predict_solutions(
        steps.names, stock, steps.concentrations, steps.path_length_mm, conditions_from(viewing), relative_u=percent(share),
        cell=cell, solvent_absorptivity_per_cm=solvent_from(options.solvent, options.solvent_path_length, reading, stock, cell),
    )  # fmt: skip
    return colours, turn_sentences(steps, colours, turn_deg) if sweep_text is not None else ()
