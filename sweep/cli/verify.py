"""crosswind verify STORE."""

from __future__ import annotations

import dataclasses
import json
import sys
from pathlib import Path
from typing import TYPE_CHECKING

import click

from sweep.cli.common import print_rows, say_unfinished, store_argument, sweep_option
from sweep.cli.paths import DATA
from sweep.errors import RuleNotMet
from sweep.notebook import number_words

if TYPE_CHECKING:
    from sweep.engine.verify import Verification

SHOWN = 20
"""Disagreements that the table names; the rest are counted."""


@click.command()
@store_argument
@sweep_option
@click.option("--rows", type=click.IntRange(min=1), default=200, show_default=True,
              help="Rows to check; more where every choice and status needs more.")
@click.option("--seed", type=int, default=0, show_default=True,
              help="The same seed draws the same rows.")
@click.option("--data", type=DATA, default=None,
              help="Data file, where it is no longer where the plan says.")
@click.option("--tolerance", type=click.FloatRange(0, 1, min_open=True, max_open=True),
              default=1e-8, show_default=True, help="Largest relative difference allowed.")
@click.option("--format", "form", type=click.Choice(("table", "json")), default="table",
              show_default=True, help="How it is printed.")
@click.option("--quiet", is_flag=True, help="No progress.")  # fmt: skip
def command(
    store: Path, sweep: int | None, rows: int, seed: int, data: Path | None, tolerance: float,
    form: str, quiet: bool,
) -> None:  # fmt: skip
    """Recompute a sample of STORE's rows by two slow paths and compare.

    One is least squares on the rows with the textbook formulas, the other statsmodels on rows
    that pandas built.  The sample holds every choice, every finding and every way in which rows
    end.  Statistics may differ by 1e-8, which is what the store promises; sound computations
    differ by some 1e-10.  Differences are relative to the number, or where it is close to zero
    to its noise; a p-value may differ by as much more as its tail magnifies.  Where anything
    differs, the exit code is 4: the store was read, and does not hold what its plan and data
    give.
    """
    from sweep.api import open_results

    progress = None if quiet else _progress
    results = open_results(store, sweep)
    say_unfinished(results)
    found = results.verify(rows, seed, data, tolerance, progress)
    if progress is not None and sys.stderr.isatty():
        click.echo("\r\x1b[K", nl=False, err=True)
    if form == "json":
        content = {**dataclasses.asdict(found), "agrees": found.agrees}
        click.echo(json.dumps(content, ensure_ascii=False, indent=1))
    else:
        _print(found)
    if not found.agrees:
        many = len({(item.finding, item.specification) for item in found.disagreements})
        raise RuleNotMet(
            f"{store}: {many:,} of {found.rows:,} rows checked do not hold what their plan and "
            "data give. Restore a copy, or run the plan into a new store with --store."
        )


def _progress(done: int, rows: int) -> None:
    if sys.stderr.isatty():
        click.echo(f"\r{done:,} of {rows:,} rows checked", nl=False, err=True)


def _print(found: Verification) -> None:
    click.echo(f"Sweep {found.sweep}: {found.rows:,} of {found.stored:,} rows recomputed, seed "
               f"{found.seed}.")  # fmt: skip
    held = [f"{name} {held} of {all_}" for name, held, all_ in found.represented if all_ > 1]
    if held:
        click.echo(f"Represented: {', '.join(held)}.")
    click.echo("\nLargest relative difference from the stored number:")
    print_rows(
        ["number", "compared", "least squares", "statsmodels", "allowed", "differing"],
        [
            [number_words(q.name), f"{q.compared:,}", _short(q.slow),
             _short(q.outside), _allowed(q.name, found.tolerance), f"{q.differing:,}"]
            for q in found.quantities
            if q.compared
        ],
    )  # fmt: skip
    if found.agrees:
        click.echo("\nEvery stored value came out again.")
        return
    click.echo("\nThese did not:")
    for item in found.disagreements[:SHOWN]:
        click.echo(f"  {item.specification} ({item.finding}), {number_words(item.quantity)}: "
                   f"stored {item.stored}, {item.by} gives {item.recomputed}")  # fmt: skip
    more = len(found.disagreements) - SHOWN
    if more > 0:
        click.echo(f"  and {more:,} more (--format json lists them all)")


def _short(value: float | None) -> str:
    return "–" if value is None else f"{value:.0e}" if value else "0"


def _allowed(name: str, tolerance: float) -> str:
    if name.endswith("p_value"):
        return f"{tolerance:g} × tail"
    from sweep.engine.verify_row import EXACT

    return "equal" if name in EXACT else f"{tolerance:g}"
