"""``lamplit dye fit`` and ``lamplit dye show``: what a dye absorbs, from a dilution series."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from chroma.cli.dye_inputs import percent
from chroma.cli.inputs import read_one
from chroma.cli.options import FILE, Output, Reading, output_options, reading_options, report_option
from chroma.cli.output import answer, noted, say_written
from chroma.cli.progress import counted
from chroma.units import base_unit, concentration, molar_mass, path_length_mm
from chroma.version import PROGRAM
from observers.errors import InputError

if TYPE_CHECKING:
    from chroma.calibration import ReadBack
    from chroma.dye.model import Dye
    from chroma.dye.series import Series
    from chroma.spectra import Source


@click.group("dye")
def command() -> None:
    """Fit the absorptivity of a dye from a dilution series, and show what a dye's file holds."""


@command.command("fit")
@click.argument("series", type=FILE, nargs=-1, required=True, metavar="SERIES…")
@click.option(
    "--concentrations",
    type=FILE,
    required=True,
    metavar="FILE",
    help="CSV with the columns name, concentration and unit.",
)
@click.option("--path-length", required=True, metavar="LENGTH", help="The cell's path length (10mm).")
@click.option(
    "--unit",
    default="g/L",
    show_default=True,
    help="Unit of concentrations that bear none; the dye is kept per g/L or mol/L.",
)
@click.option("--name", metavar="TEXT", help="The dye's name.  [default: that of the file written, or of the series]")
@click.option("--molar-mass", "mass", metavar="MASS", help="For going between g/L and mol/L (319.85g/mol).")
@click.option("--intercept", is_flag=True, help="Fit an intercept too: the blank was not clean.")
@click.option(
    "--stray-light",
    default="0",
    show_default=True,
    metavar="FRACTION|fit",
    help="Stray fraction to take out, or fit it over the series.",
)
@click.option("--up-to", metavar="CONC", help="Leave out standards above this concentration (20mg/L).")
@click.option(
    "--within", "departure", default="2%", show_default=True, help="The departure from Beer's law that is allowed."
)
@click.option("--picture", type=FILE, metavar="FILE", help="Draw series, fit and residuals (.png, .svg, .pdf).")
@report_option
@reading_options
@output_options
def fit(
    series: tuple[str, ...], concentrations: str, path_length: str, unit: str, name: str | None, mass: str | None,
    intercept: bool, stray_light: str, up_to: str | None, departure: str, picture: str | None, report: str | None,
    reading: Reading, output: Output,
) -> None:  # fmt: skip
    r"""Fit a dye's absorptivity at every wavelength, judge its linearity, and write its file.

    \b
    Example: lamplit dye fit demo_spectra/rowan_series.csv --concentrations demo_spectra/rowan_concentrations.csv
    --path-length 10mm --out rowan.dye.json
    """
    from chroma.dye.build import fit_dye
    from chroma.dye.files import dye_object
    from chroma.report.dye_tables import dye_table

    data, sources = _series(series, concentrations, path_length, unit, mass, up_to, reading)
    found = fit_dye(
        data, name=name or _stem(output.out or series[0]), intercept=intercept, stray_light=_stray(stray_light),
        fraction=percent(departure), molar_mass=None if mass is None else molar_mass(mass), sources=sources, **_stamp(),
    )  # fmt: skip
    if output.out is not None:
        _write(found.dye, output)
    if report is not None:
        from dataclasses import replace

        from chroma.report.page import report_fit

        report_fit(replace(found, dye=noted(found.dye)), report, force=output.force)
        say_written(report)
    if picture is not None:
        from chroma.report.dye_plots import plot_fit
        from chroma.report.pictures import save

        save(plot_fit(found), picture, force=output.force)
    answer(output.json, table=lambda: dye_table(found.dye), content=lambda: dye_object(found.dye))


@command.command("show")
@click.argument("file", type=FILE, metavar="NAME.dye.json")
@click.option("--absorbance", type=float, help="Read the concentration of this absorbance off the line at the peak.")
@click.option(
    "--readings", type=click.IntRange(1), default=1, show_default=True, help="Readings behind that absorbance."
)
@click.option("--json", "wants_json", is_flag=True, help="Print one JSON object instead of the table.")
def show(file: str, absorbance: float | None, readings: int, wants_json: bool) -> None:
    r"""Show what a dye's file holds, and where it came from; read a concentration off its calibration line.

    \b
    Example: lamplit dye show rowan.dye.json --absorbance 0.35
    """
    from chroma.dye.files import dye_object, read_dye
    from chroma.report.dye_tables import dye_table, read_back_line, read_back_row

    dye = read_dye(file)
    back = None if absorbance is None else _read_back(dye, absorbance, readings)
    answer(
        wants_json,
        table=lambda: dye_table(dye) if back is None else read_back_line(dye, absorbance or 0.0, readings, back),
        content=lambda: dye_object(dye) | ({} if back is None else {"read_back": read_back_row(back)}),
    )


def _read_back(dye: Dye, absorbance: float, readings: int) -> ReadBack:
    from chroma.calibration import read_back
    from chroma.dye.build import line_from

    return read_back(line_from(dye.findings.get("calibration") or {}), absorbance, readings=readings)


def _series(
    files: tuple[str, ...], concentrations: str, path_length: str, unit: str, mass: str | None, up_to: str | None,
    reading: Reading,
) -> tuple[Series, tuple[Source, ...]]:  # fmt: skip
    """The series of the options, and the file of concentrations as a source."""
    from chroma.dye.series import read_concentrations, series
    from chroma.quantity import corrected
    from chroma.spectra import joined

    base, weight = base_unit(unit), None if mass is None else molar_mass(mass)
    parts = [part for file in counted(files, "reading file") for part in read_one(file, reading)]
    readings = corrected(joined(parts), blank=reading.blank, dark=reading.dark)
    known, source = read_concentrations(concentrations, unit, base, weight)
    known = {name: value for name, value in known.items() if name not in (reading.blank, reading.dark)}
    highest = float("inf") if up_to is None else concentration(up_to, base, weight)
    data = series(
        readings, known, unit=base, path_length_mm=path_length_mm(path_length), absorbance_limit=reading.absorbance_limit,
        up_to=highest,
    )  # fmt: skip
    return data, (source,)


def _stray(text: str) -> float | None:
    if text == "fit":
        return None
    try:
        return float(text)
    except ValueError:
        raise InputError(
            f"--stray-light {text!r}", why="a fraction, or the word fit, is wanted", do="write 0.0005 or fit"
        ) from None


def _stem(path: str) -> str:
    return Path(path).name.split(".")[0]


def _stamp() -> dict[str, str]:
    """When and by which program a file was made."""
    import os
    from datetime import UTC, datetime

    # Set where output is to be the same each time, as reproducible-builds.org has it.
    epoch = os.environ.get("SOURCE_DATE_EPOCH", "")
    now = datetime.fromtimestamp(int(epoch), UTC) if epoch.isdecimal() else datetime.now(UTC)
    return {"created": now.isoformat(timespec="seconds"), "program": PROGRAM}


def _write(dye: Dye, output: Output) -> None:
    from chroma.dye.files import dye_text
    from chroma.readers.write import atomic_write

    assert output.out is not None
    if not output.out.endswith(".json"):
        raise InputError(f"a dye's file named {output.out!r}", why="it is JSON", do="name it NAME.dye.json")
    with atomic_write(output.out, output.force) as beside:
        beside.write_text(dye_text(dye), encoding="utf-8")
    say_written(output.out)
