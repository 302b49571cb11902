"""The program ``lamplit``: words in, words out. This module is the one boundary where errors become exit codes."""

from __future__ import annotations

import os
import sys
from importlib import import_module
from typing import Any

import click

from chroma.version import PROGRAM
from observers.errors import InputError

# Each command lives in a module of its own, imported when it is called: --help must stay quick.
COMMANDS = {
    "spectra": ("chroma.cli.spectra_command", "what is in a file of spectra; convert and correct it"),
    "predict": ("chroma.cli.predict_command", "the colour of spectra under each lamp"),
    "dye": ("chroma.cli.dye_command", "the absorptivity of a dye from a dilution series"),
    "match": ("chroma.cli.match_command", "recipes of dyes that meet a target"),
    "unmix": ("chroma.cli.unmix_command", "what is in a solution that was measured"),
    "check": ("chroma.cli.check_command", "a verdict on each batch against a target"),
    "photo": ("chroma.cli.photo_command", "concentrations from a photo of cuvettes"),
    "completion": ("chroma.cli.completion_command", "a script for the shell that completes commands and options"),
    "demo": ("chroma.cli.demo_command", "the whole job on invented spectra of fountain water"),
}


class Commands(click.Group):
    """A group whose commands are imported only when they are wanted."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """The names in the order of the work."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """The command of that name, or None."""
        if cmd_name not in COMMANDS:
            return None
        from chroma.cli.common import common

        return common(import_module(COMMANDS[cmd_name][0]).command)

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """The list for --help, from the table above, so that no command is imported for it."""
        with formatter.section("Commands"):
            formatter.write_dl([(name, text) for name, (_, text) in COMMANDS.items()])


def _version(ctx: click.Context, _: click.Parameter, wanted: bool) -> None:
    if wanted:
        click.echo(PROGRAM)
        ctx.exit()


@click.group(cls=Commands, context_settings={"help_option_names": ["-h", "--help"]})
@click.option(
    "--version", is_flag=True, is_eager=True, expose_value=False, callback=_version, help="Print the version."
)
def program() -> None:
    """The colour of liquids, from spectrum to decision."""


def main(arguments: list[str] | None = None) -> None:
    """Run the program and leave with its exit code: 0 done, 1 not within tolerance, 2 could not be done."""
    arguments = sys.argv[1:] if arguments is None else arguments
    as_json = "--json" in arguments
    try:
        code = program.main(arguments, prog_name="lamplit", standalone_mode=False)
        sys.stdout.flush()
    except InputError as error:
        code = _refuse(error, as_json)
    except click.ClickException as error:
        code = _refuse(_usage(error), as_json)
    except (click.Abort, KeyboardInterrupt):
        code = _refuse(InputError("stopped"), as_json)
    except BrokenPipeError:
        # The reader of our output left (as head does); nothing more can be said on that pipe.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        code = 2
    except OSError as error:
        code = _refuse(InputError(error.strerror or str(error), where=str(error.filename or "")), as_json)
    except MemoryError:
        code = _refuse(InputError("out of memory", do="give less at a time"), as_json)
    except Exception as error:  # the last resort: a person gets a sentence; LAMPLIT_DEBUG=1 gets the traceback
        if os.environ.get("LAMPLIT_DEBUG"):
            raise
        text = f"this should not happen: {type(error).__name__}: {error}"
        code = _refuse(InputError(text, do="please report it; LAMPLIT_DEBUG=1 shows where"), as_json)
    sys.exit(code if isinstance(code, int) else 0)


def _usage(error: click.ClickException) -> InputError:
    ctx = getattr(error, "ctx", None)
    help_for = ctx.command_path if ctx is not None else "lamplit"
    return InputError(error.format_message().rstrip("."), do=f"See {help_for} --help")


def _refuse(error: InputError, as_json: bool) -> int:
    if as_json:
        import json

        content: dict[str, Any] = {"error": error.as_dict()}
        print(json.dumps(content, ensure_ascii=False))
    else:
        print(f"lamplit: {error}", file=sys.stderr)
    return 2
