"""crosswind chart STORE NAME."""

from __future__ import annotations

from pathlib import Path

import click
from click.shell_completion import CompletionItem

from sweep.charts import CHARTS
from sweep.cli.common import say_unfinished, store_argument, sweep_option
from sweep.cli.paths import OUTPUT

_WIDTHS = ("wide", "narrow")


def _list(ctx: click.Context, _: click.Parameter, value: bool) -> None:
    """Print the charts with their questions and leave; neither a store nor a name is needed."""
    if not value or ctx.resilient_parsing:
        return
    from sweep.charts import chart

    width = max(map(len, CHARTS))
    for name in CHARTS:
        click.echo(f"{name.ljust(width)}  {chart(name).QUESTION}")
    ctx.exit()


def _names(ctx: click.Context, param: click.Parameter, incomplete: str) -> list[CompletionItem]:
    names = (name.replace(" ", "-") for name in CHARTS)
    return [CompletionItem(name) for name in names if name.startswith(incomplete)]


def _split(ctx: click.Context, param: click.Parameter, value: tuple[str, ...]) -> tuple[str, ...]:
    """Return the formats; each option may hold several, joined by commas."""
    parts = [part.strip().lower() for text in value for part in text.split(",")]
    return tuple(part for part in parts if part)


@click.command()
@store_argument
@click.argument("name", shell_complete=_names)
@click.option("--list", is_flag=True, is_eager=True, expose_value=False, callback=_list,
              help="List the names of the charts and the questions that they answer.")
@click.option("-o", "--output", type=OUTPUT, default=None,
              help="File to write, by its ending; beside STORE, with the chart's name, if left "
              "out.")
@click.option("--format", "formats", multiple=True, callback=_split, metavar="LIST",
              help="How it is written: svg, pdf, png, html, json, csv, txt or all; several are "
              "joined by commas, and each makes a file of that ending. If left out, what the "
              "ending of --output says, else svg.")
@click.option("--finding", default=None, help="Name of the finding; the first if left out.")
@click.option("--width", type=click.Choice(_WIDTHS), default="wide", show_default=True,
              help="Print width: 175 mm or 85 mm.")
@click.option("--axes", default=None, metavar="A,B",
              help="Of two axes: which two; the pair that acts together most if left out.")
@click.option("--scale", default=None,
              help="Of specification curve: one scale by its name or the first words of it, "
              "baseline, or all; the only one there is or all if left out.")
@sweep_option  # fmt: skip
def command(
    store: Path, name: str, output: Path | None, formats: tuple[str, ...], finding: str | None,
    width: str, axes: str | None, scale: str | None, sweep: int | None,
) -> None:  # fmt: skip
    """Write the chart NAME of STORE into files, whose paths are printed.

    Spaces of a name may be written as hyphens.  HTML opens offline and shows numbers at the
    pointer, JSON is the chart for other programs, CSV the numbers behind it, txt the figure in
    words.  Files that are there already are replaced.
    """
    from sweep.api import open_results
    from sweep.engine.check import shown_path

    results = open_results(store, sweep)
    say_unfinished(results)
    written = results.save_chart(
        name, output, formats, finding, width, axes=axes, scale=scale
    )
    count = len(results.findings)
    if finding is None and count > 1:
        first = results.findings["name"].iloc[0]
        click.echo(f'Finding: "{first}", the first of {count}; --finding names another.', err=True)
    for path in written:
        click.echo(shown_path(path))
