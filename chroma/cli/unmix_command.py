"""``lamplit unmix``: what is in a solution that was measured."""

from __future__ import annotations

import click

from chroma.cli.dye_inputs import dyes_from, percent
from chroma.cli.inputs import spectra_from
from chroma.cli.options import FILE, Output, Reading, dyes_option, output_options, reading_options, report_option
from chroma.cli.output import emit, noted, say_written
from chroma.dye.unmix import BASELINES, Baseline, unmix_spectra
from chroma.units import path_length_mm, wavelength_range_nm


@click.command("unmix")
@click.argument("spectra", type=FILE, nargs=-1, required=True, metavar="SPECTRA…")
@dyes_option("A dye that may be in the cell; may be repeated.")
@click.option("--path-length", required=True, metavar="LENGTH", help="The cell's path length (10mm).")
@click.option(
    "--baseline",
    type=click.Choice(BASELINES),
    default="constant",
    show_default=True,
    help="What lies under the dyes: an offset, a slope too, or scattering.",
)
@click.option(
    "--scatter-power", type=float, default=2.0, show_default=True, help="Scattering falls as λ to the minus this."
)
@click.option("--noise", type=float, help="Standard deviation of a transmittance.  [default: from neighbouring bands]")
@click.option("--confidence", default="95%", show_default=True, help="Of the intervals.")
@click.option("--range", "span", metavar="LOW:HIGH", help="Use these wavelengths only (420:700nm).")
@report_option
@reading_options
@output_options
def command(
    spectra: tuple[str, ...], dyes: tuple[str, ...], path_length: str, baseline: Baseline, scatter_power: float, noise: float | None,
    confidence: str, span: str | None, report: str | None, reading: Reading, output: Output,
) -> None:  # fmt: skip
    r"""Find the concentrations of dyes in measured spectra, and whether something else is in the cell.

    \b
    Example: lamplit unmix demo_spectra/batches.csv --dye heron.dye.json --dye broom.dye.json --path-length 10mm
    """
    from chroma.report.dye_rows import unmix_object, unmix_rows
    from chroma.report.dye_tables import unmixed_table

    found = unmix_spectra(
        spectra_from(spectra, reading), dyes_from(dyes), path_length_mm=path_length_mm(path_length), baseline=baseline,
        scatter_power=scatter_power, noise_T=noise, confidence=percent(confidence), absorbance_limit=reading.absorbance_limit,
        span_nm=None if span is None else wavelength_range_nm(span),
    )  # fmt: skip
    if report is not None:
        from chroma.report.page import report_unmixed

        report_unmixed(noted(found), report, force=output.force)
        say_written(report)
    emit(
        output, table=lambda: unmixed_table(found), content=lambda: unmix_object(found), rows=lambda: unmix_rows(found)
    )
