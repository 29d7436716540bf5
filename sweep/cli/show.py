"""crosswind show STORE."""

from __future__ import annotations

from pathlib import Path

import click

from sweep.cli.common import (
    data_format,
    print_frame,
    print_summary,
    say_unfinished,
    store_argument,
    sweep_option,
)
from sweep.plan.choices import AXES


@click.command()
@store_argument
@sweep_option
@click.option("--by", type=click.Choice((*AXES, "all")), default=None,
              help="Count by the choices of one axis instead of the summary; all: overall.")
@click.option("--finding", default=None, help="Name of one finding.")
@click.option("--sweeps", is_flag=True, help="List the sweeps of the store.")
@data_format  # fmt: skip
def command(
    store: Path, sweep: int | None, by: str | None, finding: str | None, sweeps: bool, form: str
) -> None:
    """Print the survival summary of STORE again, whole or by one axis."""
    from sweep.api import open_results

    if sweeps and (by is not None or finding is not None or sweep is not None):
        raise click.UsageError("--sweeps lists all sweeps; leave out --by, --finding and --sweep")
    results = open_results(store, sweep)
    if sweeps:
        print_frame(results.sweeps(), form)
        return
    say_unfinished(results)
    if by is None and form == "table":
        print_summary(results, finding)
    else:
        frame = results.survival(by, finding)
        if form == "table":
            from sweep.cli.tables import survival_rows

            for part in survival_rows(results, frame):
                click.echo(part)
        else:
            print_frame(frame, form)
