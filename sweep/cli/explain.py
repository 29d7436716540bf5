"""crosswind explain STORE SPEC."""

from __future__ import annotations

import dataclasses
import json
import textwrap
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING

import click

from sweep.cli.common import print_rows, store_argument, sweep_option
from sweep.cli.paths import DATA
from sweep.notebook import number_words

if TYPE_CHECKING:
    from sweep.engine.explain import Explanation


@click.command()
@store_argument
@click.argument("specification", metavar="[SPEC]", default="baseline")
@sweep_option
@click.option("--finding", default=None, help="Name of the finding, where several share SPEC.")
@click.option("--data", type=DATA, default=None,
              help="Data file, where it is no longer where the plan says.")
@click.option("--format", "form", type=click.Choice(("table", "json")), default="table",
              show_default=True, help="How it is printed.")  # fmt: skip
def command(
    store: Path, specification: str, sweep: int | None, finding: str | None,
    data: Path | None, form: str,
) -> None:  # fmt: skip
    """Show one specification in full.

    SPEC is its id, a unique beginning of it, or "baseline": the data used, the regression, the
    lag choice, screens and statistic, with the stored numbers beside the same numbers by the
    slow path.
    """
    from sweep.api import open_results

    found = open_results(store, sweep).explain(specification, finding, data)
    if form == "json":
        content = dataclasses.asdict(found)
        click.echo(json.dumps(content, ensure_ascii=False, indent=1, default=_plain))
        return
    for line in _lines(found):
        click.echo(line)
    if found.compared:
        click.echo("\nStored beside recomputed by least squares on the rows:")
        print_rows(
            ["number", "stored", "recomputed", "relative difference"],
            [[number_words(c.name), _number(c.stored), _number(c.slow),
              "–" if c.difference is None else f"{c.difference:.0e}"] for c in found.compared],
        )  # fmt: skip
    if found.coefficients:
        click.echo(f"\nCoefficients of {found.row['cause']}:")
        print_rows(
            ["lag", "coefficient", "standard error"],
            [[lag, f"{value:.6g}", f"{error:.6g}"] for lag, value, error in found.coefficients],
        )


def _lines(found: Explanation) -> list[str]:
    width = 96
    row = found.row
    lines = [f"{row['finding']}: {found.statement}", f"Specification {row['specification']}"]
    name = max(len(axis) for axis, _, _ in found.choices)
    for axis, label, because in found.choices:
        reason = f"  (because {because})" if because else ""
        lines.append(f"  {axis.ljust(name)}  {label}{reason}")
    hypothesis = f"Hypothesis: {found.null}."
    for sentence in (*found.sample, *found.regression, hypothesis, *found.verdict):
        lines.append(textwrap.fill(sentence, width))
    return lines


def _number(value: float | None) -> str:
    return "–" if value is None else f"{value:.10g}"


def _plain(value: object) -> object:
    if isinstance(value, datetime):
        return value.date().isoformat()  # windows begin and end on days
    if hasattr(value, "item"):
        return value.item()
    return str(value)
