"""crosswind new DATA."""

from __future__ import annotations

from pathlib import Path

import click

from sweep.cli.paths import DATA


@click.command()
@click.argument("data", type=DATA, required=False)
@click.option("--example", is_flag=False, flag_value="us_macro", default=None, metavar="[NAME]",
              help="Copy a shipped example instead: us_macro (the default) or harbour.")
@click.option("--output", type=click.Path(path_type=Path), default=None,
              help="Plan file to write (with --example, the folder); beside DATA if left out.")
@click.option("--overwrite", is_flag=True, help="Replace files that are there already.")
def command(
    data: Path | None, example: str | None, output: Path | None, *, overwrite: bool
) -> None:  # fmt: skip
    """Read a data file and write a commented starter plan beside it.

    DATA is a CSV, Parquet or Excel file with a column of dates.
    """
    from sweep.cli.files import write_new
    from sweep.engine.check import shown_path

    if example is not None:
        if data is not None:
            raise click.UsageError("give a data file or --example, not both")
        from sweep.examples_shipped import copy_example

        for path in copy_example(example, output or Path(), overwrite=overwrite):
            click.echo(f"Wrote {shown_path(path)}", err=True)
        plan = (output or Path()) / f"{example}.toml"
        click.echo(f"Next: crosswind run {plan}", err=True)
        return
    if data is None:
        raise click.UsageError("name a data file, or use --example for a shipped example")
    from sweep.panel.starter import starter_plan

    target = output or data.with_suffix(".toml")
    write_new(target, starter_plan(data), overwrite=overwrite)
    click.echo(f"Wrote {shown_path(target)}. Put your finding into it, then: "
               f"crosswind check {shown_path(target)}", err=True)  # fmt: skip
