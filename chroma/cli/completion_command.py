"""``lamplit completion``: what makes a shell complete the program's commands, options and their choices."""

from __future__ import annotations

import click

from observers.errors import InputError

SHELLS = ("bash", "zsh", "fish")
VARIABLE = "_LAMPLIT_COMPLETE"  # the one that the program itself looks at when the shell asks it for completions


@click.command("completion")
@click.argument("shell", type=click.Choice(SHELLS))
@click.pass_context
def command(ctx: click.Context, shell: str) -> None:
    r"""Print the script that completes lamplit's commands, options and choices in a shell.

    \b
    For good: lamplit completion bash >> ~/.bashrc
              lamplit completion zsh >> ~/.zshrc
              lamplit completion fish > ~/.config/fish/completions/lamplit.fish

    \b
    Example: lamplit completion bash
    """
    from click.shell_completion import get_completion_class

    kind = get_completion_class(shell)
    if kind is None:
        raise InputError(f"no completion for {shell}", do="install a newer click")
    click.echo(kind(ctx.find_root().command, {}, "lamplit", VARIABLE).source())
