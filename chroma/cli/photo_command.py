"""``lamplit photo``: concentration from a photo of cuvettes."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from chroma.cli.inputs import lamp_from
from chroma.cli.options import Output, output_options, report_option
from chroma.cli.output import as_json, emit, noted, say_written
from chroma.units import path_length_mm
from observers.errors import InputError

if TYPE_CHECKING:
    from chroma.dye.model import Dye
    from chroma.photo.estimate import PhotoEstimate, Reading
    from chroma.photo.picture import Picture
    from chroma.photo.rack import Cuvette


@click.group("photo")
def command() -> None:
    """Read concentrations from a photo of cuvettes: print a card, calibrate a phone, estimate."""


rack_option = click.option(
    "--rack", required=True, metavar="RACK.csv", help="What stands where: name,role,concentration,x,y,width,height."
)
dye_option = click.option("--dye", "dyes", multiple=True, metavar="NAME.dye.json", help="The dye; two at most.")
path_option = click.option("--path-length", metavar="LENGTH", help="The cuvettes' path length (10mm).")
lamp_option = click.option(
    "--illuminant",
    "-i",
    "lamps",
    metavar="LAMP",
    multiple=True,
    help="The lamp, by name, formula or file; several where it may be any of them.  [default: unknown]",
)
overlay_option = click.option(
    "--overlay", metavar="FILE.png", help="The picture of what was measured.  [default: PHOTO.boxes.png, here]"
)


@command.command("card")
@click.option("--out", required=True, metavar="CARD.pdf", help="The page to write.")
@click.option("--paper", type=click.Choice(["a4", "letter"]), default="a4", show_default=True)
@click.option("--force", is_flag=True, help="Overwrite a file that is there.")
def card(out: str, paper: str, force: bool) -> None:
    r"""Write the card to print and stand behind the cuvettes.

    \b
    Example: lamplit photo card --out card.pdf
    """
    from chroma.photo.card import draw_card
    from chroma.readers.write import atomic_write

    if not out.lower().endswith(".pdf"):
        raise InputError(f"{out}: a card is a PDF", do="name the file CARD.pdf")
    with atomic_write(out, force) as beside:
        draw_card(paper, beside)
    click.echo(f"written: {out} ({paper}; print it at 100 %)", err=True)


@command.command("calibrate")
@click.argument("photo", metavar="PHOTO")
@rack_option
@dye_option
@path_option
@lamp_option
@overlay_option
@output_options
def calibrate(
    photo: str,
    rack: str,
    dyes: tuple[str, ...],
    path_length: str | None,
    lamps: tuple[str, ...],
    overlay: str | None,
    output: Output,
) -> None:
    r"""Learn from known cuvettes what this phone, lamp and cell do to a dye's colour; --out keeps it.

    \b
    Example: lamplit photo calibrate demo_spectra/photo/rack.jpg --rack demo_spectra/photo/rack.csv --dye heron.dye.json
    --path-length 10mm -i LED-B3 --out phone.cal.json
    """
    from chroma.photo.calibration import calibrated, calibration_text
    from chroma.photo.estimate import judge_rack, photo_flags, solved_photo
    from chroma.readers.write import atomic_write

    known, mm = _dyes(dyes, path_length)
    if len(known) != 1:
        raise InputError(f"{len(known)} dyes", why="a calibration is for one dye", do="give one --dye")
    if output.out is None:
        raise InputError("--out is missing", why="a calibration is kept in a file", do="add --out PHONE.cal.json")
    cuvettes = _rack(rack, known)
    judge_rack(cuvettes, unknowns=False)
    picture, reading, notes = _read(photo, cuvettes)
    solved, names, said = solved_photo(picture, reading, known, mm, [lamp_from(name) for name in lamps], None)
    learned = calibrated(picture, solved, names, known[0], mm)
    with atomic_write(output.out, output.force) as beside:
        beside.write_text(calibration_text(learned), encoding="utf-8")
    _overlay(picture, reading, overlay, photo, output)
    content = {
        "calibration": output.out,
        "dye": learned.dye,
        "unit": learned.unit,
        "standards": learned.standards,
        "lamp": learned.lamp,
        "limit_of_detection": float(solved.detection[0]),
        "taken": dict(learned.taken),
        "flags": photo_flags(reading, solved),
        "notes": [*notes, *said, *picture.notes],
    }
    shown = [f"{key}: {value}" for key, value in content.items() if key not in ("notes", "taken")]
    click.echo(as_json(content) if output.json else "\n".join([*shown, *(f"note: {n}" for n in content["notes"])]))  # type: ignore[attr-defined]  # a list of text


@command.command("estimate")
@click.argument("photos", metavar="PHOTO…", nargs=-1, required=True)
@rack_option
@dye_option
@path_option
@lamp_option
@click.option("--calibration", metavar="PHONE.cal.json", help="What an earlier photo of this set-up told.")
@overlay_option
@report_option
@output_options
def estimate_command(
    photos: tuple[str, ...],
    rack: str,
    dyes: tuple[str, ...],
    path_length: str | None,
    lamps: tuple[str, ...],
    calibration: str | None,
    overlay: str | None,
    report: str | None,
    output: Output,
) -> None:
    r"""Estimate the unknowns' concentrations, with 95 % intervals; standards in the photo are used where there are any.

    \b
    Example: lamplit photo estimate demo_spectra/photo/rack.jpg --rack demo_spectra/photo/rack.csv --dye heron.dye.json
    --path-length 10mm -i LED-B3
    """
    from chroma.photo.combine import combined
    from chroma.photo.words import estimate_object, estimate_rows

    if overlay is not None and len(photos) > 1:
        raise InputError("one --overlay for several photos", do="leave it out: each photo gets PHOTO.boxes.png")
    known, mm = _dyes(dyes, path_length) if dyes else ([], 0.0)
    cuvettes = _rack(rack, known)
    found = combined([_estimate(photo, cuvettes, known, mm, lamps, calibration, overlay, output) for photo in photos])
    if report is not None:
        from chroma.report.page import report_photo

        report_photo(noted(found), [_overlay_name(photo, overlay) for photo in photos], report, force=output.force)
        say_written(report)
    emit(
        output,
        table=lambda: _table(found),
        content=lambda: estimate_object(found),
        rows=lambda: estimate_rows(found),
    )


def _estimate(
    photo: str,
    cuvettes: tuple[Cuvette, ...],
    dyes: list[Dye],
    mm: float,
    lamps: tuple[str, ...],
    calibration: str | None,
    overlay: str | None,
    output: Output,
) -> PhotoEstimate:
    """One photo's estimate, and its overlay picture."""
    from dataclasses import replace

    from chroma.photo.calibration import read_calibration
    from chroma.photo.estimate import estimate
    from chroma.photo.without_dye import estimate_without_dye

    picture, reading, notes = _read(photo, cuvettes)
    if not dyes:
        if calibration is not None:
            raise InputError("--calibration without --dye", do="give the dye that it was made with")
        found = estimate_without_dye(picture, reading)
    else:
        kept = read_calibration(calibration) if calibration is not None else None
        named = [lamp_from(name) for name in lamps]
        if kept is not None and named:
            raise InputError(
                "--illuminant together with --calibration", why="the calibration holds its lamp", do="give one"
            )
        found = estimate(picture, reading, dyes, mm, lamps=named, calibration=kept)
    _overlay(picture, reading, overlay, photo, output)
    return replace(found, notes=(*notes, *found.notes))


def _dyes(files: tuple[str, ...], path_length: str | None) -> tuple[list[Dye], float]:
    from chroma.dye.files import read_dye

    if not files:
        raise InputError("--dye is missing", do="give NAME.dye.json, made by lamplit dye fit")
    if path_length is None:
        raise InputError("--path-length is missing", why="the dye's colour depends on it", do="add --path-length 10mm")
    return [read_dye(file) for file in files], path_length_mm(path_length)


def _rack(path: str, dyes: list[Dye]) -> tuple[Cuvette, ...]:
    from chroma.photo.rack import read_rack

    return read_rack(path, [dye.name for dye in dyes] or [""])


def _read(photo: str, cuvettes: tuple[Cuvette, ...]) -> tuple[Picture, Reading, tuple[str, ...]]:
    from chroma.photo.estimate import read_photo
    from chroma.photo.locate import located
    from chroma.photo.reading import read_picture

    picture = read_picture(photo)
    try:
        place = located(picture, cuvettes)
        return picture, read_photo(picture, place.cuvettes, place.field), place.notes
    except InputError as error:
        raise error.at(photo) from None


def _overlay_name(photo: str, overlay: str | None) -> str:
    return overlay or f"{Path(photo).stem}.boxes.png"


def _overlay(picture: Picture, reading: Reading, overlay: str | None, photo: str, output: Output) -> None:
    from chroma.photo.overlay import draw_overlay, is_overlay
    from chroma.readers.write import atomic_write

    target = _overlay_name(photo, overlay)
    boxes = {cuvette.name: cuvette.box for cuvette in reading.cuvettes if cuvette.box is not None}
    # An overlay of an earlier run may be written over; nothing else.
    with atomic_write(target, output.force or is_overlay(target)) as beside:
        draw_overlay(picture, boxes, beside)
    say_written(target)


def _table(found: PhotoEstimate) -> str:
    from chroma.photo.words import below, header, lines
    from chroma.report.text import aligned, notes

    parts = [aligned(header(found), lines(found)), *below(found), notes(found.notes)]
    return "\n".join(part for part in parts if part)
