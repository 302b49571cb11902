"""``lamplit demo``: the whole job on invented spectra of fountain water."""

from __future__ import annotations

import shutil
from pathlib import Path

import click

from chroma.batches import Checked, check
from chroma.cli.inputs import spectra_from, target_from, with_lamps
from chroma.cli.options import Reading, Viewing
from chroma.colours import Colours, predict
from chroma.report.check_report import check_rows, check_table
from chroma.report.colour_report import colour_rows, colours_table, flat
from chroma.report.spectra_report import spectra_table
from chroma.spectra import ABSORBANCE_LIMIT, Spectra
from chroma.tolerance import Tolerance, read_tolerance
from observers.errors import InputError

PLAIN = Reading(None, None, None, None, None, ABSORBANCE_LIMIT)
COUNTS = Reading(None, "blank", "dark", None, None, ABSORBANCE_LIMIT)
NO_VIEW = Viewing((), None, None, "nearest", False)


def demo_folder() -> Path:
    """Where the invented spectra lie: in the installed package, or beside it in a checkout."""
    package = Path(__file__).resolve().parents[1]
    for folder in (package / "demo_spectra", package.parent / "demo_spectra"):
        if (folder / "target.csv").is_file():
            return folder
    raise InputError("the demo's spectra are missing", do="install the program again")


@click.command("demo")
@click.argument("folder", metavar="[DIR]", default="fountain-demo")
@click.option("--force", is_flag=True, help="Write into a folder that is there.")
def command(folder: str, force: bool) -> None:
    r"""Run the whole job on invented spectra of fountain water, and say what to look at.

    Copies the spectra to DIR (fountain-demo if none is given), so that every command can be tried on them.

    \b
    Example: lamplit demo fountain-demo
    """
    place = Path(folder)
    if place.exists() and not force:
        raise InputError("is there already", where=folder, do="name another folder, or give --force")
    world = place / "demo_spectra"
    shutil.copytree(demo_folder(), world, dirs_exist_ok=True, ignore=shutil.ignore_patterns("__pycache__", "*.py"))

    _say(
        "1. Three samples as raw counts, with their blank and dark reading",
        f"lamplit spectra {world}/counts.csv --blank blank --dark dark",
    )
    counts = spectra_from([str(world / "counts.csv")], COUNTS)
    click.echo(spectra_table(counts))

    _say(
        "2. What the water of the target looks like, by day and under two lamps",
        f"lamplit predict --spectra {world}/target.csv -i D65 -i A -i {world}/garden_lamp.spdx",
    )
    target, batches = target_from(str(world / "target.csv"), PLAIN), spectra_from([str(world / "batches.csv")], PLAIN)
    lamps = dict.fromkeys(("D65", "A", str(world / "garden_lamp.spdx")), 1.0)
    _, seen = with_lamps(Tolerance(lamps), NO_VIEW)
    colours = predict(target, seen)
    click.echo(colours_table(colours))

    _say(
        "3. Twenty batches against the target",
        f"lamplit check {world}/batches.csv --target {world}/target.csv --tolerance {world}/tolerance.toml",
    )
    tolerance, conditions = with_lamps(read_tolerance(str(world / "tolerance.toml")), NO_VIEW)
    checked = check(batches, target, tolerance, conditions)
    click.echo(check_table(checked))

    _write(place, colours, checked, target, batches, force)


def _say(title: str, line: str) -> None:
    click.echo(f"\n{title}\n$ {line}")


def _write(place: Path, colours: Colours, checked: Checked, target: Spectra, batches: Spectra, force: bool) -> None:
    """Write data and pictures, and end with what to look at."""
    from chroma.readers.write import write_rows
    from chroma.report.pictures import save
    from chroma.report.plots import plot_spectra, plot_swatches

    write_rows(flat(colour_rows(colours)), str(place / "colours.csv"), force=force)
    write_rows(check_rows(checked), str(place / "verdicts.csv"), force=force)
    save(
        plot_spectra(target, ax=plot_spectra(batches), emphasise=target.names[0]),
        str(place / "spectra.png"),
        force=force,
    )
    swatches = plot_swatches(checked, predict(target, checked.conditions), predict(batches, checked.conditions))
    save(swatches, str(place / "swatches.png"), force=force)
    click.echo(
        f"\nLook at:\n  {place}/swatches.png   target beside batch under each lamp: HB-08 and HB-17 match by day only\n"
        f"  {place}/spectra.png    why: their curves cross the others\n"
        f"  {place}/verdicts.csv   the same verdicts as data\n"
        f"  {place}/demo_spectra/  the invented files; every command above can be run on them\n"
        "All of it is invented. Dyed water is let out only as local codes allow."
    )
