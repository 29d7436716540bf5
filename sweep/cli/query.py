"""crosswind query STORE SQL."""

from __future__ import annotations

import sys
from pathlib import Path

import click

from sweep.cli.common import data_format, store_argument, sweep_option


@click.command()
@store_argument
@click.argument("sql")
@sweep_option
@data_format
def command(store: Path, sql: str, sweep: int | None, form: str) -> None:
    """Ask STORE a question in SQL; nothing but the store can be read, nothing written.

    SQL is one statement of DuckDB's that reads (SELECT, WITH, FROM, DESCRIBE, SHOW), or "-" to
    take it from standard input.  The views outcomes and survival hold every sweep of the store
    with names in words; $sweep stands for the number of the sweep.  A missing value is NULL in a
    table, null in JSON and an empty field in CSV, where an empty text is written "".

    For example: "SELECT lags_choice, avg(p_value) FROM outcomes WHERE sweep = $sweep GROUP BY 1".
    """
    from sweep.api import open_results
    from sweep.cli.streams import WRITERS

    question = sys.stdin.read() if sql == "-" else sql
    with open_results(store, sweep).stream(question) as (columns, portions):
        for text in WRITERS[form](columns, portions):
            click.echo(text, nl=False)
