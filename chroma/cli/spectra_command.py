"""``lamplit spectra``: what is in a file of spectra; convert and correct it."""

from __future__ import annotations

import click

from chroma.cli.inputs import spectra_from
from chroma.cli.options import FILE, Output, Reading, output_options, reading_options
from chroma.cli.output import answer, say_written
from chroma.quantity import at_path_length, converted
from chroma.report.spectra_report import spectra_object, spectra_table
from chroma.spectra import QUANTITIES, Quantity
from chroma.units import path_length_mm
from observers.errors import InputError


@click.command("spectra")
@click.argument("files", type=FILE, nargs=-1, required=True, metavar="FILE…")
@reading_options
@click.option("--to", "wanted", type=click.Choice(QUANTITIES), help="Convert to this quantity.")
@click.option("--grid", metavar="FIRST:LAST:STEP", help="Resample to this grid (400:700:10nm).")
@click.option("--path-length", metavar="LENGTH", help="The cell's path length (10mm).")
@click.option("--to-path-length", metavar="LENGTH", help="Rescale to this path length.")
@output_options
def command(
    files: tuple[str, ...],
    reading: Reading,
    wanted: Quantity | None,
    grid: str | None,
    path_length: str | None,
    to_path_length: str | None,
    output: Output,
) -> None:
    r"""Say what was read from files of spectra; convert, blank-correct, resample and write it.

    \b
    Example: lamplit spectra demo_spectra/counts.csv --blank blank --dark dark
    """
    spectra = spectra_from(files, reading, grid=grid)
    if to_path_length is not None:
        if path_length is None:
            raise InputError("--to-path-length without --path-length", do="say which cell it was measured in")
        spectra = at_path_length(spectra, path_length_mm(path_length), path_length_mm(to_path_length))
    if wanted is not None:
        spectra = converted(spectra, wanted)
    if output.out is not None:
        from chroma.readers.write import write_spectra

        write_spectra(spectra, output.out, force=output.force)
        say_written(output.out)
    answer(output.json, table=lambda: spectra_table(spectra), content=lambda: spectra_object(spectra))
