"""crosswind report STORE."""

from __future__ import annotations

from pathlib import Path

import click

from sweep.cli.common import say_unfinished, store_argument, sweep_option
from sweep.cli.paths import OUTPUT


@click.command()
@store_argument
@sweep_option
@click.option("--output", type=OUTPUT, default=None,
              help="HTML file; STORE with the ending .html if left out.")
@click.option("--quiet", is_flag=True, help="No message.")  # fmt: skip
def command(store: Path, sweep: int | None, output: Path | None, quiet: bool) -> None:
    """Write the report of STORE as one HTML file that opens offline."""
    from sweep.api import open_results
    from sweep.engine.check import shown_path

    results = open_results(store, sweep)
    say_unfinished(results)
    path = results.report(output)
    if not quiet:
        click.echo(f"Report: {shown_path(path)}", err=True)
