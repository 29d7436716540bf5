"""How long work takes, roughly: for cutting it into even tasks and for ``check``.

The figures were measured on one core at 2.8 GHz and only steer the cutting.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from sweep.engine.prepare import Prepared
from sweep.plan.choices import LagChoice

__all__ = ["estimate_seconds", "task_seconds"]

Ints = NDArray[np.int64]

CALL = 1.2e-3
"""Seconds for each lag choice × terms × system of a task, whatever its windows."""
ROW = 6e-6
ROBUST_ROW = 5e-5
CRITERION = 3e-3
FIXED_WINDOW = 1.5e-4
WRITTEN_ROW = 2.5e-6
START_UP = 1.5


def task_seconds(prepared: Prepared, members: Ints) -> tuple[float, float]:
    """Return seconds for a task on these rows: those that do not shrink with it, and a row's.

    Parameters
    ----------
    prepared : Prepared
    members : ndarray of int
        Rows that share a panel.
    """
    plan, rows = prepared.plan, prepared.rows
    used = {
        axis: np.unique(rows.codes[axis][members])
        for axis in ("lags", "deterministics", "conditioning", "test")
    }
    findings = np.unique(rows.finding[members]).size
    calls = findings * used["lags"].size * used["deterministics"].size * used["conditioning"].size
    criteria = sum(1 for code in used["lags"] if _is_criterion(plan.axes["lags"][int(code)]))
    share = _robust(prepared, members)
    return CALL * calls + CRITERION * criteria * used["deterministics"].size, (
        ROW + ROBUST_ROW * share
    )


def _robust(prepared: Prepared, members: Ints) -> float:
    sandwich = np.array([getattr(c, "covariance", "") != "classical"
                         for c in prepared.plan.axes["test"]])  # fmt: skip
    return float(sandwich[prepared.rows.codes["test"][members]].mean())


def _is_criterion(choice: object) -> bool:
    return isinstance(choice, LagChoice) and bool(choice.criterion)


def estimate_seconds(prepared: Prepared, jobs: int) -> float:
    """Return the seconds a whole run takes, start of the workers included."""
    plan, rows = prepared.plan, prepared.rows
    run = np.flatnonzero(rows.rule < 0)
    if not run.size:
        return START_UP
    calls, per_row = task_seconds(prepared, run)
    panels = len(plan.axes["transformation"]) * len(plan.axes["measures"])
    work = calls * panels + per_row * run.size
    return START_UP + work / max(jobs, 1) + WRITTEN_ROW * rows.count
