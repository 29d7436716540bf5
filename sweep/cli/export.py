"""crosswind export STORE FOLDER."""

from __future__ import annotations

from pathlib import Path

import click

from sweep.cli.common import say_unfinished, store_argument, sweep_option
from sweep.cli.paths import FOLDER


@click.command()
@store_argument
@click.argument("folder", type=FOLDER)
@sweep_option
@click.option("--only", type=click.Choice(("parquet", "csv")), default=None,
              help="One format; both if left out.")  # fmt: skip
def command(store: Path, folder: Path, sweep: int | None, only: str | None) -> None:
    """Write outcomes, survival and details of STORE into FOLDER as Parquet and CSV files."""
    from sweep.api import open_results
    from sweep.engine.check import shown_path

    results = open_results(store, sweep)
    say_unfinished(results)
    for path in results.export(folder, only):
        click.echo(shown_path(path))
