"""What several commands share: paths, formats, printing of frames."""

from __future__ import annotations

import json
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import click

from sweep.cli.paths import PLAN, STORE

if TYPE_CHECKING:
    import pandas as pd

    from sweep.report.content import ReportContent
    from sweep.results import Results

__all__ = [
    "FORMATS", "data_format", "plan_argument", "print_frame", "print_paragraphs", "print_summary",
    "say_unfinished", "store_argument", "sweep_option",
]  # fmt: skip

FORMATS = ("table", "csv", "json")

plan_argument = click.argument("plan", type=PLAN)
store_argument = click.argument("store", type=STORE)
sweep_option = click.option(
    "--sweep", type=int, default=None, help="Number of the sweep; the latest if left out."
)
data_format = click.option(
    "--format", "form", type=click.Choice(FORMATS), default="table", show_default=True,
    help="How data are printed.",
)  # fmt: skip


def say_unfinished(results: Results) -> None:
    """Say to standard error how much of a sweep is stored where that is not everything."""
    if results.unfinished and results.info["rows"]:
        click.echo(results.unfinished, err=True)


def print_frame(frame: pd.DataFrame, form: str) -> None:
    """Print a frame to standard output as a table, CSV or JSON records."""
    if form == "csv":
        click.echo(frame.to_csv(index=False), nl=False)
    elif form == "json":
        records = json.loads(frame.to_json(orient="records", date_format="iso"))
        click.echo(json.dumps(records, ensure_ascii=False, indent=1))
    else:
        print_rows(list(frame.columns), frame.astype(object).to_numpy().tolist())


def print_rows(columns: list[str], rows: list[list[Any]]) -> None:
    """Print rows as aligned columns, numbers to the right."""
    texts = [[str(cell) for cell in row] for row in rows]
    width = [max([len(c), *(len(row[j]) for row in texts)]) for j, c in enumerate(columns)]
    right = [all(_numeric(row[j]) for row in texts) and bool(texts) for j in range(len(columns))]

    def line(cells: list[str]) -> str:
        parts = [c.rjust(w) if r else c.ljust(w) for c, w, r in zip(cells, width, right,
                                                                  strict=True)]  # fmt: skip
        return "  ".join(parts).rstrip()

    click.echo(line(columns))
    for row in texts:
        click.echo(line(row))


def _numeric(text: str) -> bool:
    return text in ("–", "") or text.lstrip("−-<>")[:1].isdigit()


def print_summary(
    results: Results, finding: str | None = None, content: ReportContent | None = None
) -> None:
    """Print the sentences that sum up each finding, wrapped for a terminal."""
    if finding is not None:
        results.survival(finding=finding)  # refuses a finding that is not there
    for name, (statement, sentences) in zip(
        results.findings["name"], results.summary(content), strict=True
    ):
        if finding is not None and str(name) != finding:
            continue
        click.echo(f"\n{name}: {statement}")
        print_paragraphs(sentences)


def print_paragraphs(sentences: Sequence[str], indent: str = "  ") -> None:
    """Print sentences, each a paragraph of its own, wrapped for a terminal."""
    import shutil
    import textwrap

    width = min(shutil.get_terminal_size((96, 24)).columns, 110)
    for sentence in sentences:
        click.echo(textwrap.fill(sentence, width, initial_indent=indent,
                                 subsequent_indent=f"{indent}  "))  # fmt: skip
