"""crosswind run PLAN."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from sweep.cli.common import plan_argument, print_summary
from sweep.cli.paths import STORE
from sweep.errors import RuleNotMet

if TYPE_CHECKING:
    from sweep.plan.model import Plan
    from sweep.report.content import ReportContent
    from sweep.report.library import Library
    from sweep.results import Results


@click.command()
@plan_argument
@click.option("--store", type=STORE, default=None,
              help="DuckDB file; PLAN with the ending .duckdb if left out.")
@click.option("--jobs", type=click.IntRange(min=1), default=None,
              help="Worker processes; one a core if left out. Numbers do not depend on it.")
@click.option("--report/--no-report", default=True, show_default=True,
              help="Write the report beside the store.")
@click.option("--require", "rules", multiple=True, type=click.Choice(("reproduced",)),
              help="Leave with exit code 4 unless the baseline reproduces the reported numbers.")
@click.option("--quiet", is_flag=True, help="No progress and no messages.")  # fmt: skip
def command(
    plan: Path, store: Path | None, jobs: int | None, report: bool, rules: tuple[str, ...],
    quiet: bool,
) -> int:  # fmt: skip
    """Run what is not stored yet, print the survival summary, write the report.

    Stop with Ctrl-C at any time; the same command goes on where it stopped.
    """
    from sweep.api import load_plan

    found = load_plan(plan)
    if not report:
        return _run(found, store, jobs, rules, quiet=quiet)
    from sweep.report.library import Library

    with Library() as library:
        return _run(found, store, jobs, rules, quiet=quiet, library=library)


def _run(
    plan: Plan, store: Path | None, jobs: int | None, rules: tuple[str, ...], *, quiet: bool,
    library: Library | None = None,
) -> int:  # fmt: skip
    """Run a plan; write the report where a drawing library is given."""
    from sweep.api import run
    from sweep.cli.progress import Reporter

    with Reporter(quiet=quiet) as reporter:
        results = run(plan, store=store, jobs=jobs, progress=reporter.advance)
    done = results.run_report
    assert done is not None
    if not quiet:
        click.echo(_did(results), err=True)
    content = results.content()
    path = None
    if library is not None:
        # A plan that extends another shares its store, but its report is its own.
        place = plan.report_path if store is None and plan.origin is not None else None
        path = results.report(place, content=content, library=library)
    print_summary(results, content=content)
    if path is not None and not quiet:
        click.echo(f"\nReport: {_short(path)}", err=True)
    if "reproduced" in rules:
        _require_reproduced(content)
    return 3 if done.failed else 0


def _did(results: Results) -> str:
    done = results.run_report
    assert done is not None
    parts = [f"computed {done.computed:,}"]
    if done.stored:
        parts.append(f"{done.stored:,} were stored before")
    if done.reused:
        parts.append(f"{done.reused:,} were taken over from another sweep in this store")
    if done.ruled:
        parts.append(f"{done.ruled:,} are ruled out by the plan")
    if done.failed:
        parts.append(f"{done.failed:,} failed (the store's log says how)")
    words = (f"{done.words}: {', '.join(parts)}; {done.seconds:.1f} s. "
             f"Store: {_short(done.store)}")  # fmt: skip
    if done.other_data is not None:
        what = done.changed[0].upper() + done.changed[1:]
        words += (
            f"\n{what} have changed since sweep {done.other_data} of this plan; this is sweep "
            f"{results.sweep} beside it."
        )
    return words


def _short(path: Path) -> str:
    from sweep.engine.check import shown_path

    return shown_path(path)


def _require_reproduced(content: ReportContent) -> None:
    """Fail unless every finding with reported numbers reproduces them, and there is one."""
    found = [f.reproduction for f in content.findings]
    told = [item for item in found if item.reproduced is not None]
    if not told:
        raise RuleNotMet(
            "--require reproduced: the plan reports no numbers; add [baseline.reported]."
        )
    for item in told:
        if not item.reproduced:
            raise RuleNotMet(f"--require reproduced: {item.sentence}")
