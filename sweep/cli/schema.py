"""crosswind schema."""

from __future__ import annotations

from pathlib import Path

import click

from sweep.cli.paths import OUTPUT


@click.command()
@click.option("--output", type=OUTPUT, default=None,
              help="File to write; standard output if left out.")  # fmt: skip
def command(output: Path | None) -> None:
    """Write the JSON Schema of the plan file, for completion and checks in an editor."""
    from sweep.plan.schema import schema_text

    text = schema_text()
    if output is None:
        click.echo(text, nl=False)
    else:
        from sweep.writing import write_whole

        write_whole(output, text, "json")
