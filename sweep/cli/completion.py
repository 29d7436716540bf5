"""crosswind completion SHELL."""

from __future__ import annotations

import click

from sweep.cli.guard import COMPLETING


@click.command()
@click.argument("shell", type=click.Choice(("bash", "zsh", "fish")))
def command(shell: str) -> None:
    """Write the script that completes commands, options and files in SHELL.

    For bash (4.4 or later) put  eval "$(crosswind completion bash)"  into ~/.bashrc; for zsh
    the same with zsh into ~/.zshrc, below compinit; for fish run once
    crosswind completion fish > ~/.config/fish/completions/crosswind.fish .
    """
    from click.shell_completion import get_completion_class

    from sweep.cli import group

    made = get_completion_class(shell)
    assert made is not None
    click.echo(made(group, {}, "crosswind", COMPLETING).source())
