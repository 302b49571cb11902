"""``lamplit demo``: the whole job on invented spectra of fountain water, by the program's own commands."""

from __future__ import annotations

import shlex
import shutil
from pathlib import Path

import click

from chroma.cli.common import QUIET
from chroma.cli.progress import rest
from observers.errors import InputError

# Each step: what it shows, and the command as a person would type it; {demo} is the folder of the invented files.
STEPS = (
    (
        "Three samples as raw counts, with their blank and dark reading",
        "spectra {demo}/counts.csv --blank blank --dark dark",
    ),
    (
        "What the water of the target looks like, by day and under two lamps",
        "predict --spectra {demo}/target.csv -i D65 -i A -i {demo}/garden_lamp.spdx --out {out}/colours.csv",
    ),
    (
        "A blue dye from its dilution series; the blank was read against air",
        "dye fit {demo}/heron_series.txt --concentrations {demo}/heron_concentrations.csv --blank blank --path-length 10mm "
        "--stray-light fit --out {out}/heron.dye.json --picture {out}/heron.png",
    ),
    (
        "A yellow dye",
        "dye fit {demo}/broom_series.jdx --concentrations {demo}/broom_concentrations.csv --path-length 10mm "
        "--out {out}/broom.dye.json --picture {out}/broom.png",
    ),
    (
        "A red dye that pairs at high concentration: Beer's law does not hold to the top",
        "dye fit {demo}/rowan_series.csv --concentrations {demo}/rowan_concentrations.csv --path-length 10mm "
        "--out {out}/rowan.dye.json --picture {out}/rowan.png",
    ),
    (
        "A recipe for the target that holds under two lamps",
        "match --target {demo}/target.csv --dye {out}/heron.dye.json --dye {out}/broom.dye.json --dye {out}/rowan.dye.json "
        "--path-length 10mm -i D65 -i A",
    ),
    (
        "The same water from weak to strong, and where its hue turns",
        "predict --dye {out}/heron.dye.json=6.5mg/L --dye {out}/broom.dye.json=5mg/L --path-length 10mm "
        "--sweep strength=0.1:2:7 --picture {out}/sweep.png",
    ),
    (
        "Twenty batches against the target, and what to add to 500 L of each that is off",
        "check {demo}/batches.csv --target {demo}/target.csv --tolerance {demo}/tolerance.toml --dye {out}/heron.dye.json "
        "--dye {out}/broom.dye.json --path-length 10mm --volume 500L --out {out}/verdicts.csv --picture {out}/swatches.png",
    ),
    (
        "What is in them",
        "unmix {demo}/batches.csv --dye {out}/heron.dye.json --dye {out}/broom.dye.json --dye {out}/rowan.dye.json "
        "--path-length 10mm --out {out}/composition.csv",
    ),
    (
        "How strong three ponds are, from a photo of their cuvettes beside three standards",
        "photo estimate {demo}/photo/rack.jpg --rack {demo}/photo/rack.csv --dye {out}/heron.dye.json --path-length 10mm "
        "-i LED-B3 --overlay {out}/photo.png --out {out}/ponds.csv",
    ),
)
LOOK_AT = """
Look at:
  {out}/swatches.png     target beside batch under each lamp: HB-08 and HB-17 match by day only
  {out}/rowan.png        a series that bends: its residuals show the dye pairing
  {out}/sweep.png        a ladder of strengths, and the path it takes in a*b* and in x, y
  {out}/photo.png        what was measured in the photo; ponds.csv: how strong they are
  {out}/verdicts.csv     the verdicts as data; composition.csv: what is in each batch
  {out}/demo_spectra/    the invented files; every command above can be run on them
All of it is invented. Handle dyes by their safety data sheets; let dyed water out only as local codes allow."""


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
@click.pass_context
def command(ctx: click.Context, folder: str, force: bool) -> None:
    r"""Run the whole job on invented spectra of fountain water, and say what to look at.

    Copies the spectra to DIR (fountain-demo if none is given), so that every command can be tried on them.

    \b
    Example: lamplit demo fountain-demo
    """
    rest()  # each step has a line of its own
    place = Path(folder)
    if place.exists() and not force:
        raise InputError("is there already", where=folder, do="name another folder, or give --force")
    leave_out = shutil.ignore_patterns("__pycache__", "*.py", "pictures")
    shutil.copytree(demo_folder(), place / "demo_spectra", dirs_exist_ok=True, ignore=leave_out)
    assert ctx.parent is not None
    group = ctx.parent.command
    for number, (title, text) in enumerate(STEPS, 1):
        line = text.format(demo=(place / "demo_spectra").as_posix(), out=place.as_posix())
        click.echo(f"\n{number}. {title}\n$ lamplit {line}")
        quiet = ["--quiet"] if ctx.meta.get(QUIET) else []
        # What is invented is told the same way on every machine, whatever its own defaults are.
        arguments = [*shlex.split(line), "--no-defaults", *quiet, *(["--force"] if force else [])]
        group.main(arguments, prog_name="lamplit", standalone_mode=False)
    click.echo(LOOK_AT.format(out=place.as_posix()))
