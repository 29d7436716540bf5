"""crosswind check PLAN."""

from __future__ import annotations

import json
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from sweep.cli.common import plan_argument, print_rows

if TYPE_CHECKING:
    from sweep.engine.check import Check
    from sweep.plan.model import Plan


@click.command()
@plan_argument
@click.option("--jobs", type=click.IntRange(min=1), default=None,
              help="Worker processes that the time estimate assumes; one a core if left out.")
@click.option("--format", "form", type=click.Choice(("table", "json")), default="table",
              show_default=True, help="How the sizes are printed.")  # fmt: skip
def command(plan: Path, jobs: int | None, form: str) -> None:
    """Validate PLAN and its data, count its specifications and estimate the time.

    Nothing is estimated and nothing is written.
    """
    from sweep.api import check
    from sweep.notebook import specifications

    found = check(plan, jobs=jobs)
    if form == "json":
        click.echo(json.dumps(_plain(found), ensure_ascii=False, indent=1))
        return
    click.echo(f"{found.plan.title}\nData from {found.first} to {found.last}.")
    for name, planned, to_run in found.findings:
        axes = [size for size in found.axes if size.finding == name]
        click.echo(f"\n{name}: {specifications(planned)}, {to_run:,} to run")
        print_rows(
            ["axis", "choices", "baseline", "positions"],
            [[a.axis, len(a.choices), a.baseline, a.positions if a.axis == "window" else ""]
             for a in axes],
        )  # fmt: skip
    if found.plan.origin is not None:
        click.echo(f"\n{_starts_from(found.plan)}")
    if found.requests:
        click.echo("\nRequests:")
        for asked in found.requests:
            who = ", ".join(filter(None, (asked.asked_by, asked.request)))
            adds = "adds nothing that is not already there"
            if asked.added:
                adds = f"adds {specifications(asked.added)}"
            click.echo(f"  {who}, on “{asked.finding}”: {adds}")
    if found.ruled_out:
        click.echo("\nRuled out:")
        for item in found.ruled_out:
            click.echo(f"  {item.finding}: {specifications(item.specifications)}, because "
                       f"{item.because}")  # fmt: skip
    if found.lowered:
        click.echo("\nLargest orders that the data lower:")
        for sentence in found.lowered:
            click.echo(f"  {sentence}")
    if found.notes:
        click.echo("\nSame numbers by construction:")
        for note in found.notes:
            click.echo(f"  {note}")
    click.echo(f"\n{found}")


def _starts_from(plan: Plan) -> str:
    """Say which plan this one starts from and what it says anew."""
    assert plan.origin is not None
    words = f"Starts from {plan.origin.name}; its store is {plan.store_path.name}."
    if plan.replaced:
        words += f" Replaces there: {', '.join(plan.replaced)}."
    return words


def _plain(found: Check) -> dict[str, Any]:
    return {
        "title": found.plan.title,
        "first": found.first,
        "last": found.last,
        "specifications": found.planned,
        "added": found.added,
        "requests": [
            {"name": a.request, "from": a.asked_by, "finding": a.finding, "added": a.added}
            for a in found.requests
        ],
        "seconds": round(found.seconds, 1),
        "jobs": found.jobs,
        "findings": [
            {
                "name": name,
                "specifications": planned,
                "to_run": to_run,
                "axes": {
                    a.axis: {
                        "choices": list(a.choices),
                        "baseline": a.baseline,
                        "positions": a.positions,
                    }
                    for a in found.axes
                    if a.finding == name
                },
            }
            for name, planned, to_run in found.findings
        ],
        "ruled_out": [
            {"finding": i.finding, "specifications": i.specifications, "because": i.because}
            for i in found.ruled_out
        ],
        "lowered": list(found.lowered),
        "same_numbers": list(found.notes),
    }
