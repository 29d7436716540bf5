"""crosswind table STORE NAME."""

from __future__ import annotations

from pathlib import Path

import click
from click.shell_completion import CompletionItem

from sweep.cli.common import say_unfinished, store_argument, sweep_option
from sweep.cli.paths import DATA, OUTPUT

FORMATS = ("latex", "markdown", "csv")


def _list(ctx: click.Context, _: click.Parameter, value: bool) -> None:
    """Print the names of the tables and leave; neither a store nor a name is needed."""
    if not value or ctx.resilient_parsing:
        return
    from sweep.report.tables import TABLES

    width = max(len(name) for name in TABLES)
    for name, module in TABLES.items():
        click.echo(f"{name.ljust(width)}  {module.SHOWS}")
    ctx.exit()


def _names(ctx: click.Context, param: click.Parameter, incomplete: str) -> list[CompletionItem]:
    from sweep.report.tables import TABLES

    names = (name.replace(" ", "-") for name in TABLES)
    return [CompletionItem(name) for name in names if name.startswith(incomplete)]


@click.command()
@store_argument
@click.argument("name", shell_complete=_names)
@click.option("--list", is_flag=True, is_eager=True, expose_value=False, callback=_list,
              help="List the names of the tables and what they show.")
@click.option("--format", "form", type=click.Choice(FORMATS), default=None,
              help="How it is written; by the ending of --output (.tex, .md, .csv) if left out, "
              "else markdown.")
@click.option("-o", "--output", type=OUTPUT, default=None,
              help="File to write; standard output if left out.")
@click.option("--finding", default=None, help="Name of the finding; the first if left out.")
@sweep_option
@click.option("--rows", type=click.IntRange(min=1), default=None,
              help="Most rows; if left out 500 in LaTeX and Markdown and all in CSV. The notes "
              "say how many are left out.")
@click.option("--stars", is_flag=True,
              help="Mark small p-values of single specifications by stars in print.")
@click.option("--data", type=DATA, default=None,
              help="Data file, for lag selection, where it has moved.")  # fmt: skip
def command(
    store: Path, name: str, form: str | None, output: Path | None, finding: str | None,
    sweep: int | None, rows: int | None, stars: bool, data: Path | None,
) -> None:  # fmt: skip
    """Write the table NAME of STORE as LaTeX, Markdown or CSV.

    Spaces of a name may be written as hyphens. LaTeX is a part of a document that names the
    packages it needs; CSV has machine names and full precision.
    """
    from sweep.api import open_results
    from sweep.engine.check import shown_path
    from sweep.report.tables.saving import form_of

    form = form or ("markdown" if output is None else form_of(output))
    if stars and form == "csv":
        raise click.UsageError("--stars marks p-values in print; CSV has none.")
    results = open_results(store, sweep)
    say_unfinished(results)
    table = results.table(name, finding, rows=rows, stars=stars, data=data)
    count = len(results.findings)
    if finding is None and count > 1:
        first = results.findings["name"].iloc[0]
        click.echo(f'Finding: "{first}", the first of {count}; --finding names another.', err=True)
    if output is not None:
        click.echo(shown_path(table.save(output, form)))
        return
    for part in table.parts(form):
        click.echo(part.encode("utf-8"), nl=False)
