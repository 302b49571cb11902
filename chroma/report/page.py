"""Reports: one self-contained HTML page, with nothing outside it and no script."""

from __future__ import annotations

import os
from collections.abc import Sequence
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

from chroma.batches import Checked
from chroma.colours import Colours
from chroma.readers.write import atomic_write
from chroma.report.sections_base import Page, Section
from chroma.spectra import Source
from chroma.version import PROGRAM
from observers.errors import InputError

if TYPE_CHECKING:
    from chroma.batch_corrections import BatchCorrection
    from chroma.dye.build import DyeFit
    from chroma.dye.unmix import Unmixed
    from chroma.matching.prepare import Aim
    from chroma.matching.recipes import Matches
    from chroma.photo.estimate import PhotoEstimate
    from chroma.strength import Strength

TEMPLATES = Path(__file__).parent / "templates"
SUFFIXES = (".html", ".htm")


def report_colours(colours: Colours, path: str, *, turns: Sequence[str] = (), force: bool = False) -> None:
    """Write the report of predicted colours; ``turns`` are sentences on where a sweep's hue turns."""
    from chroma.report.sections_colour import colours_page

    write_page(colours_page(colours, turns), path, force=force)


def report_fit(found: DyeFit, path: str, *, force: bool = False) -> None:
    """Write the report of a dye's fit."""
    from chroma.report.sections_dye import fit_page

    write_page(fit_page(found), path, force=force)


def report_unmixed(found: Unmixed, path: str, *, force: bool = False) -> None:
    """Write the report of unmixed samples."""
    from chroma.report.sections_dye import unmixed_page

    write_page(unmixed_page(found), path, force=force)


def report_matches(found: Matches, aim: Aim, path: str, *, force: bool = False) -> None:
    """Write the report of recipes for a target."""
    from chroma.report.sections_match import matches_page

    write_page(matches_page(found, aim), path, force=force)


def report_checked(
    checked: Checked,
    target: Colours,
    batches: Colours,
    path: str,
    *,
    corrections: Sequence[BatchCorrection] = (),
    strength: Strength | None = None,
    force: bool = False,
) -> None:
    """Write the report of a check; target and batches are the colours of the same samples (`chroma.colours.predict`)."""
    from chroma.report.sections_check import check_page

    write_page(check_page(checked, target, batches, corrections=corrections, strength=strength), path, force=force)


def report_photo(found: PhotoEstimate, overlays: Sequence[str], path: str, *, force: bool = False) -> None:
    """Write the report of a photo's estimate; overlays are the pictures of what was measured, as files."""
    from chroma.report.sections_photo import photo_page

    write_page(photo_page(found, overlays), path, force=force)


def report_generic(
    title: str,
    answer: str,
    sections: Sequence[Section],
    path: str,
    force: bool = False,
    *,
    conditions: Sequence[tuple[str, str]] = (),
    sources: Sequence[Source] = (),
    cautions: Sequence[str] = (),
) -> None:
    """Write the report of any other answer, from sections made with `chroma.report.sections_base` and `sections_svg`."""
    page = Page(title, answer, tuple(sections), tuple(conditions), tuple(sources), tuple(cautions))
    write_page(page, path, force=force)


def write_page(page: Page, path: str, *, force: bool = False) -> None:
    """Write a page, beside and renamed.

    Raises InputError for a suffix other than .html or .htm, or a file that is there already without ``force``.
    """
    if Path(path).suffix.lower() not in SUFFIXES:
        raise InputError(f"a report named {path!r}", why="a report is a web page", do="name it FILE.html")
    text = page_html(page)
    with atomic_write(path, force) as beside:
        beside.write_text(text, encoding="utf-8")


def page_html(page: Page) -> str:
    """The page as HTML; every word of it is escaped, pictures are put in as they are."""
    from jinja2 import Environment, FileSystemLoader, StrictUndefined

    engine = Environment(
        loader=FileSystemLoader(TEMPLATES),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    style = (TEMPLATES / "page.css").read_text(encoding="utf-8")
    return engine.get_template("page.html.j2").render(page=page, style=_Plain(style), program=PROGRAM, made=made_on())


class _Plain(str):
    """A text of our own that is put in as it is: the style holds quotes, which are not to be escaped."""

    def __html__(self) -> str:
        return self


def made_on() -> str:
    """Today's date (UTC) as 2026-01-31; SOURCE_DATE_EPOCH sets it, so that a report can be made again alike.

    Raises InputError when SOURCE_DATE_EPOCH is no number of seconds. Reference: reproducible-builds.org.
    """
    epoch = os.environ.get("SOURCE_DATE_EPOCH")
    if epoch is None:
        return datetime.now(UTC).date().isoformat()
    try:
        return datetime.fromtimestamp(int(epoch), UTC).date().isoformat()
    except (ValueError, OverflowError, OSError):
        raise InputError(f"SOURCE_DATE_EPOCH is {epoch!r}", why="it is a whole number of seconds") from None
