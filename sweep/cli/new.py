"""crosswind new DATA."""

from __future__ import annotations

from pathlib import Path

import click

from sweep.cli.paths import DATA, OUTPUT


@click.command()
@click.argument("data", type=DATA, required=False)
@click.option("--example", is_flag=False, flag_value="us_macro", default=None, metavar="[NAME]",
              help="Copy a shipped example instead: us_macro (the default) or harbour.")
@click.option("--output", type=OUTPUT, default=None,
              help="Plan file to write (with --example, the folder); beside DATA if left out.")
@click.option("--overwrite", is_flag=True, help="Replace files that are there already.")
def command(
    data: Path | None, example: str | None, output: Path | None, *, overwrite: bool
) -> None:  # fmt: skip
    """Read a data file and write a commented starter plan beside it.

    DATA is a CSV, Parquet or Excel file with a column of dates.
    """
    from sweep.api import check, new
    from sweep.engine.check import shown_path

    written = new(data, example=example, output=output, overwrite=overwrite)
    for path in written:
        click.echo(f"Wrote {shown_path(path)}", err=True)
    plan = shown_path(written[0])
    if example is not None:
        click.echo(f"Next: crosswind run {plan}", err=True)
        return
    click.echo(f"As it stands, it runs: {check(written[0])}", err=True)
    click.echo(f"Put your finding into it, then: crosswind check {plan}", err=True)
