"""crosswind compare A [B]."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from sweep.cli.common import data_format, print_frame, say_unfinished, sweep_option
from sweep.cli.paths import OUTPUT, STORE

if TYPE_CHECKING:
    from sweep.comparison import Comparison


@click.command()
@click.argument("store", metavar="A", type=STORE)
@click.argument("other", metavar="[B]", required=False, type=STORE)
@sweep_option
@click.option("--against", type=int, default=None,
              help="Number of the sweep in B; the latest if left out.")
@click.option("--finding", default=None, help="Name of one finding.")
@click.option("--part", default=None,
              help="Print one part as data: counts, verdicts, changed, p_values, survival, data; "
                   "without B: paths, pairs, episodes.")
@data_format
@click.option("--output", type=OUTPUT, default=None,
              help="Also write the comparison as one HTML page.")
@click.option("--quiet", is_flag=True, help="No messages.")  # fmt: skip
def command(
    store: Path, other: Path | None, sweep: int | None, against: int | None,
    finding: str | None, part: str | None, form: str, output: Path | None, quiet: bool,
) -> None:  # fmt: skip
    """Set two sweeps side by side: what changed, which findings moved, which rows differ.

    A and B are stores; they may be the same file, with --sweep and --against naming the sweeps.
    Rows are matched by what a specification means, so that vintages of the data can be
    compared.  Without B, the moving windows of A are set side by side by their last date.
    """
    from sweep.api import open_results
    from sweep.engine.check import shown_path

    if other is None and against is not None:
        raise click.UsageError("--against names a sweep of B; name B, which may be A itself.")
    mine = open_results(store, sweep)
    theirs = None if other is None else open_results(other, against)
    for results in filter(None, (mine, theirs)):
        say_unfinished(results)
    found = mine.compare(theirs, finding=finding)
    if part is not None or form != "table":
        print_frame(found.frame(part or ("episodes" if other is None else "changed")), form)
    else:
        _print(found)
    if output is not None:
        path = found.report(output)
        if not quiet:
            click.echo(f"\nPage: {shown_path(path)}", err=True)


def _print(found: Comparison) -> None:
    """Print the sentences, wrapped for a terminal."""
    from sweep.cli.common import print_paragraphs

    click.echo(f"{found.title}.")
    print_paragraphs(found.remarks, indent="")
    for name, sentences in found.summary:
        click.echo(f"\n{name}")
        print_paragraphs(sentences)
