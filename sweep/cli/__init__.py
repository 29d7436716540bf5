"""The command line: one short file a command, nothing heavy imported before it is needed."""

from __future__ import annotations

from importlib import import_module
from typing import Any

import click
from click.shell_completion import CompletionItem

from sweep import __version__
from sweep.cli.guard import guarded

__all__ = ["COMMANDS", "main"]

# Command and what it does, in the order of a working day; each lives in a file of its name.
COMMANDS = {
    "new": "Write a commented starter plan for a data file, or copy a shipped example.",
    "check": "Validate a plan and its data, count specifications, estimate the time.",
    "run": "Run what is not stored yet, print the survival summary, write the report.",
    "show": "Print the survival summary again, whole or by one axis.",
    "explain": "Show one specification in full, recomputed by the slow path.",
    "table": "Write a table as LaTeX, Markdown or CSV.",
    "report": "Write the report as one HTML file that opens offline.",
    "chart": "Write one figure as SVG, PDF, PNG, HTML, JSON or the numbers behind it.",
    "compare": "Set two sweeps, or the moving windows of one, side by side.",
    "export": "Write outcomes, survival and details as Parquet and CSV files.",
    "verify": "Recompute a sample of stored rows by two slow paths and compare.",
    "query": "Ask the store a question in SQL, read-only; table, CSV or JSON.",
    "schema": "Write the JSON Schema of the plan file, for editors.",
    "completion": "Write the script that completes commands in bash, zsh or fish.",
}


class _LazyGroup(click.Group):
    """Lists commands from the dictionary and imports one when it is called."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        if cmd_name not in COMMANDS:
            return None
        command = import_module(f"sweep.cli.{cmd_name}").command
        assert isinstance(command, click.Command)
        return command

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        from sweep.plan.suggest import suggestion

        if args and args[0] not in COMMANDS and not args[0].startswith("-"):
            ctx.fail(f'there is no command "{args[0]}"' + suggestion(args[0], COMMANDS))
        return super().resolve_command(ctx, args)

    def shell_complete(self, ctx: click.Context, incomplete: str) -> list[CompletionItem]:
        """Offer commands from the dictionary, without importing any of them."""
        names = [name for name in COMMANDS if name.startswith(incomplete)]
        items = [CompletionItem(name, help=COMMANDS[name]) for name in names]
        return items + click.Command.shell_complete(self, ctx, incomplete)

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


@click.group(cls=_LazyGroup, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="crosswind")
def group() -> None:
    """Run every defensible specification of a directional finding and count where it survives.

    Data go to standard output, messages to standard error.  Exit codes: 0 done, 1 internal
    error, 2 bad usage, plan or data, 3 finished with failed specifications, 4 a rule given
    with --require was not met or verify found a stored value that does not come out again,
    5 store locked, damaged or of another version, 130 interrupted (run again to go on).
    """


def main(arguments: list[str] | None = None) -> Any:
    """Run the command line and leave with its exit code."""
    return guarded(group, arguments)
