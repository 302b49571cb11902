"""Options that several commands share, declared once; each group arrives in the command as one frozen object."""

from __future__ import annotations

import functools
from collections.abc import Callable, Mapping
from dataclasses import dataclass, fields
from typing import Any, cast

import click

from chroma.difference.formulas import FORMULAS, Formula, FormulaName
from chroma.spectra import ABSORBANCE_LIMIT, QUANTITIES, Quantity
from chroma.units import ratio
from observers.errors import InputError
from observers.human import STANDARD
from observers.weights import ENDS, METHODS, Ends, Method

Command = Callable[..., Any]

# A text that a shell completes with the names of files; whether there is one, and may be read, its reader says.
FILE = click.Path(readable=False)


@dataclass(frozen=True, eq=False)
class Reading:
    """How files of spectra are to be read."""

    quantity: Quantity | None
    blank: str | None
    dark: str | None
    wavelengths: str | None
    sheet: str | None
    absorbance_limit: float


@dataclass(frozen=True, eq=False)
class Viewing:
    """Under which lamps, by which observer, with which weights."""

    illuminant: tuple[str, ...]
    observer: str | None
    weights: Method | None
    ends: Ends
    bandpass: bool


@dataclass(frozen=True, eq=False)
class Output:
    """Where an answer goes."""

    json: bool
    out: str | None
    force: bool


def gathered(kind: type, argument: str, *options: Command) -> Callable[[Command], Command]:
    """A decorator that adds options to a command and hands their values over as one object."""
    names = [field.name for field in fields(kind)]

    def decorate(command: Command) -> Command:
        @functools.wraps(command)
        def wrapped(**values: Any) -> Any:
            values[argument] = kind(**{name: values.pop(name) for name in names})
            return command(**values)

        for option in reversed(options):
            wrapped = option(wrapped)
        return cast(Command, wrapped)

    return decorate


reading_options = gathered(
    Reading,
    "reading",
    click.option(
        "--quantity", type=click.Choice(QUANTITIES), help="What the numbers are, where the file does not say."
    ),
    click.option(
        "--blank",
        metavar="NAME",
        help="The sample that is the blank: counts and fractions are divided by it, from absorbance it is subtracted.",
    ),
    click.option("--dark", metavar="NAME", help="The sample that is the dark reading, taken off sample and blank."),
    click.option(
        "--wavelengths", metavar="FIRST:LAST:STEP", help="The grid, for a file that holds no wavelengths (350:750:1nm)."
    ),
    click.option("--sheet", metavar="NAME", help="The sheet of a workbook."),
    click.option(
        "--absorbance-limit",
        type=float,
        default=ABSORBANCE_LIMIT,
        show_default=True,
        help="The absorbance beyond which the instrument is not to be trusted.",
    ),
)

viewing_options = gathered(
    Viewing,
    "viewing",
    click.option(
        "--illuminant",
        "-i",
        metavar="LAMP",
        multiple=True,
        help="CIE name, daylight:5600K, blackbody:2900K, led:525nm/30nm or a file; may be repeated.  [default: D65]",
    ),
    click.option("--observer", type=click.Choice(tuple(STANDARD)), help="Who looks.  [default: 10]"),
    click.option(
        "--weights", type=click.Choice(METHODS), help="How spectra are summed: CIE 15 or ASTM E308.  [default: cie]"
    ),
    click.option(
        "--ends",
        type=click.Choice(ENDS),
        default="nearest",
        show_default=True,
        help="Less than 380–780 nm measured: hold the nearest band from 400–700 nm on, refuse, or hold anyway.",
    ),
    click.option("--bandpass", is_flag=True, help="Undo a triangular bandpass as wide as the step of the grid."),
)

output_options = gathered(
    Output,
    "output",
    click.option("--json", is_flag=True, help="Print one JSON object instead of the table."),
    click.option(
        "--out", metavar="FILE", type=FILE, help="Write the data: .csv, .parquet, .json or .xlsx (spectra also .jdx)."
    ),
    click.option("--force", is_flag=True, help="Overwrite a file that is there."),
)


def formula_from(name: str | None, k: str | None, l_c: str | None) -> Formula:
    """The formula of ``--formula``, ``--k`` and ``--cmc``."""
    if l_c is not None and name is None:
        name = "cmc"
    return Formula(
        cast(FormulaName, name or "ciede2000"),
        cast("tuple[float, float, float] | None", ratio(k, 3, "1:1:1") if k is not None else None),
        cast("tuple[float, float] | None", ratio(l_c, 2, "2:1") if l_c is not None else None),
    )


def formula_options(command: Command) -> Command:
    """``--formula``, ``--cmc`` and ``--k``."""
    for option in (
        click.option(
            "--k", "k", metavar="kL:kC:kH", help="Parametric factors of ciede2000 or cie94.  [default: 1:1:1]"
        ),
        click.option("--cmc", "l_c", metavar="l:c", help="Weights of cmc.  [default: 2:1]"),
        click.option("--formula", type=click.Choice(FORMULAS), help="The colour difference.  [default: ciede2000]"),
    ):
        command = option(command)
    return command


def refuse_both(given: Mapping[str, object], because: str) -> None:
    """Refuse options that a file settles already, so that none of the two is passed over in silence."""
    named = [name for name, value in given.items() if value not in (None, (), False)]
    if named:
        raise InputError(
            f"{', '.join(named)} together with {because}", why="both say the same thing", do="give one of them"
        )


report_option = click.option(
    "--report", metavar="FILE.html", help="Write a page with pictures, conditions and files, in one file."
)


def dyes_option(text: str) -> Command:
    """``--dye NAME.dye.json``, given at least once."""
    return click.option("--dye", "dyes", type=FILE, multiple=True, required=True, metavar="NAME.dye.json", help=text)
