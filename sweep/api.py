"""One function for each verb; the commands call these and nothing else."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any

from sweep.errors import Fault, InputFault
from sweep.plan.load import load_plan

if TYPE_CHECKING:
    from sweep.engine.check import Check
    from sweep.engine.run import Progress
    from sweep.plan.model import Plan
    from sweep.results import Results

__all__ = ["check", "load_plan", "new", "open_results", "run", "schema"]


def new(
    data: str | Path | None = None,
    *,
    example: str | None = None,
    output: str | Path | None = None,
    overwrite: bool = False,
) -> list[Path]:
    """Write a commented starter plan for a data file, or copy a shipped example.

    Parameters
    ----------
    data : str, Path or None
        CSV, Parquet or Excel file with a column of dates.
    example : str or None
        Name of a shipped example, instead of ``data``.
    output : str, Path or None
        Plan file to write (with ``example``, the folder); beside the data if None.
    overwrite : bool
        Replace files that are there already.

    Returns
    -------
    list of Path
        The files written, the plan first.

    Raises
    ------
    InputFault
        If the data cannot be read or used, there is no such example, or a file is there
        already.
    """
    if (data is None) == (example is None):
        mend = "Name a data file, or a shipped example instead (--example)."
        problem = "both a data file and an example" if example else "no data file"
        raise InputFault(Fault("new", f"{problem} was given", mend))
    if example is not None:
        from sweep.examples_shipped import copy_example

        return copy_example(example, Path(output or "."), overwrite=overwrite)
    from sweep.panel.starter import starter_plan
    from sweep.writing import write_new

    assert data is not None
    target = Path(output) if output is not None else Path(data).with_suffix(".toml")
    return [write_new(target, starter_plan(Path(data)), "toml", overwrite=overwrite)]


def schema() -> dict[str, Any]:
    """Return the JSON Schema of the plan file."""
    import json

    from sweep.plan.schema import schema_text

    plain: dict[str, Any] = json.loads(schema_text())
    return plain


def check(plan: Plan | str | Path, *, jobs: int | None = None) -> Check:
    """Validate a plan with its data and count its specifications; nothing is estimated.

    Parameters
    ----------
    plan : Plan, str or Path
        A plan, or the path of its file.
    jobs : int or None
        Worker processes that the time estimate assumes; None for one a core.

    Raises
    ------
    InputFault
        With every fault of plan and data.
    """
    from sweep.engine.check import check_plan

    return check_plan(_plan(plan), jobs=jobs)


def run(
    plan: Plan | str | Path,
    *,
    store: str | Path | None = None,
    jobs: int | None = None,
    progress: Callable[[Progress], None] | None = None,
) -> Results:
    """Run what the store does not have yet and return the results.

    Parameters
    ----------
    plan : Plan, str or Path
        A plan, or the path of its file.
    store : str, Path or None
        DuckDB file; beside the plan if none is given.
    jobs : int or None
        Worker processes; None for one a core.  Numbers do not depend on it.
    progress : callable or None
        Called with a :class:`sweep.engine.run.Progress` after every wave.

    Raises
    ------
    InputFault
        With every fault of plan and data; nothing is written then.
    Interrupted
        On Ctrl-C; run again to go on.
    store.errors.StoreError
        If the store is locked, damaged or of another version.
    """
    from sweep.engine.prepare import prepare
    from sweep.engine.run import run_prepared
    from sweep.results import Results

    found = _plan(plan)
    prepared = prepare(found)
    target = Path(store) if store is not None else found.store_path
    report = run_prepared(prepared, target, jobs=jobs, progress=progress)
    return Results(target, report.sweep, report)


def open_results(store: str | Path, sweep: int | None = None) -> Results:
    """Open the results of a sweep, the latest one if none is named.

    Raises
    ------
    store.errors.StoreError
        If the file is missing, locked, damaged, or no store of this version.
    """
    from sweep.results import Results

    return Results(store, sweep)


def _plan(plan: Plan | str | Path) -> Plan:
    return load_plan(plan) if isinstance(plan, str | Path) else plan
