"""What every command has in common: ``--quiet``, the defaults of ``lamplit.toml``, and word while it works."""

from __future__ import annotations

import contextlib
import io
import os
from typing import Any

import click
from click.core import ParameterSource

from chroma.cli.progress import KEY as WORKING
from chroma.cli.progress import Working

FILE_NAME = "lamplit.toml"  # in the working folder, else in the user's folder of configuration
QUIET, FILE = "lamplit.quiet", "lamplit.defaults.file"
# The parameter that a key of the file stands for, where a command has it. A dye of `predict` bears a concentration and
# that of `photo` is what the cuvettes hold, so the shelf of the file is not meant there.
PARAMETERS = {
    "illuminants": ("illuminant",),
    "observer": ("observer",),
    "formula": ("formula",),
    "weights": ("weights",),
    "path_length": ("path_length",),
}
SHELVES = {"match": "dyes", "unmix": "dyes", "check": "dye"}
# On the command line these say the same thing, and go before a default.
SETTLES = {
    ("check", "tolerance"): ("illuminant", "observer", "weights", "formula"),
    ("check", "cmc"): ("formula",),
    ("match", "l_c"): ("formula",),
}
# A default that has nothing to act on is not used, and not said to be.
NEEDS = {
    ("spectra", "path_length"): "to_path_length",
    ("predict", "path_length"): "dyes",
    ("check", "path_length"): "dye",
    ("check", "dye"): "path_length",
    ("estimate", "path_length"): "dyes",
}


class Common(click.Command):
    """A command with what all have in common."""

    def parse_args(self, ctx: click.Context, args: list[str]) -> list[str]:
        """Parse as ever; then leave out defaults that the command line settles or that have nothing to act on."""
        rest = super().parse_args(ctx, args)
        if ctx.default_map:
            for (command, given), names in SETTLES.items():
                if command == self.name and ctx.params.get(given) is not None:
                    set_aside(*names)
            for (command, name), wanted in NEEDS.items():
                if command == self.name and not ctx.params.get(wanted):
                    set_aside(name)
        return rest

    def invoke(self, ctx: click.Context) -> Any:
        """Run the command: in silence on stderr with --quiet, else with word of what it does where that takes long."""
        if ctx.meta.get(QUIET):
            with contextlib.redirect_stderr(io.StringIO()):
                return super().invoke(ctx)
        with Working(ctx.command_path) as working:
            ctx.meta[WORKING] = working
            return super().invoke(ctx)


def common(command: click.Command) -> click.Command:
    """The same command, or group of commands, with what all have in common."""
    if isinstance(command, click.Group):
        inner = {name: common(one) for name, one in command.commands.items()}
        return click.Group(command.name, commands=inner, help=command.help)
    return Common(
        command.name, callback=command.callback, params=[*command.params, *_options()], help=command.help,
        epilog=command.epilog, short_help=command.short_help, context_settings=command.context_settings,
    )  # fmt: skip


def set_aside(*names: str) -> None:
    """Do without the file's defaults of these parameters, in the command that runs now."""
    ctx = click.get_current_context()
    for param in ctx.command.params:
        if param.name in names and ctx.get_parameter_source(param.name) is ParameterSource.DEFAULT_MAP:
            ctx.params[param.name] = () if param.multiple else None


def from_file(name: str) -> bool:
    """Whether the value of a parameter of the command that runs now comes from the file of defaults."""
    return click.get_current_context().get_parameter_source(name) is ParameterSource.DEFAULT_MAP


def used_defaults() -> dict[str, Any] | None:
    """The file of defaults with those of its values that the command that runs now uses; None where it uses none."""
    ctx = click.get_current_context(silent=True)
    if ctx is None or not ctx.default_map:
        return None
    keys = {name: key for key, names in PARAMETERS.items() for name in names}
    keys |= dict.fromkeys(SHELVES.values(), "dyes")
    values = {
        keys[name]: list(value) if isinstance(value, tuple) else value
        for name, value in ctx.params.items()
        if name in keys and value and ctx.get_parameter_source(name) is ParameterSource.DEFAULT_MAP
    }
    return {"file": ctx.meta[FILE], "values": values} if values else None


def _options() -> list[click.Parameter]:
    return [
        click.Option(
            ["--quiet", "-q"], is_flag=True, expose_value=False, callback=_quiet, is_eager=True,
            help="No talk on stderr; the answer stays.",
        ),
        click.Option(
            ["--no-defaults"], is_flag=True, expose_value=False, callback=_defaults, is_eager=True,
            help="Leave lamplit.toml unread.",
        ),
    ]  # fmt: skip


def _file() -> str | None:
    """The file of defaults: in the working folder, else in the user's folder of configuration; None without one."""
    # Without pathlib, which every start would pay for.
    paths = (FILE_NAME, os.path.join(click.get_app_dir("lamplit"), FILE_NAME))  # noqa: PTH118
    return next(filter(os.path.isfile, paths), None)


def _quiet(ctx: click.Context, _: click.Parameter, wanted: bool) -> None:
    ctx.meta[QUIET] = wanted


def _defaults(ctx: click.Context, _: click.Parameter, none: bool) -> None:
    """Hand the file's values to click as defaults of this command; eager, so that they are there for all others."""
    if none or ctx.resilient_parsing:
        return
    if (path := _file()) is None:
        return
    from chroma.defaults import read_defaults

    found = read_defaults(path)
    own = {param.name for param in ctx.command.params}
    shelf = SHELVES.get(ctx.command.name or "")
    names = PARAMETERS | ({"dyes": (shelf,)} if shelf else {})
    ctx.meta[FILE] = found.path
    ctx.default_map = {name: value for key, value in found.values.items() for name in names.get(key, ()) if name in own}
