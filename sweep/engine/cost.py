"""How long a task takes, roughly: for cutting work into even tasks and for ``check``.

The figures were measured on one core at 2.8 GHz and only steer the cutting.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from sweep.engine.prepare import Prepared
from sweep.plan.choices import LagChoice, ProcedureChoice, WindowChoice

__all__ = ["estimate_seconds", "seconds_a_row", "seconds_a_window"]

Ints = NDArray[np.int64]

MOVING_ROW = 7e-6
FIXED_ROW = 9e-5
ROBUST_ROW = 6e-5
CRITERION_WINDOW = 6e-5
START_UP = 0.8


def seconds_a_row(prepared: Prepared, members: Ints) -> float:
    """Return the mean seconds a row of a block that shares a panel."""
    plan, rows = prepared.plan, prepared.rows
    choice = plan.axes["window"][int(rows.codes["window"][members[0]])]
    assert isinstance(choice, WindowChoice)
    robust = np.array(
        [isinstance(c, ProcedureChoice) and c.covariance != "classical" for c in plan.axes["test"]]
    )
    share = float(robust[rows.codes["test"][members]].mean())
    plain = MOVING_ROW if choice.moving and not choice.without else FIXED_ROW
    return plain + share * ROBUST_ROW


def seconds_a_window(prepared: Prepared, members: Ints) -> float:
    """Return the seconds a window that criteria take."""
    plan, rows = prepared.plan, prepared.rows
    used = np.unique(rows.codes["lags"][members])
    criteria = sum(1 for c in used if _is_criterion(plan.axes["lags"][int(c)]))
    return CRITERION_WINDOW * criteria


def _is_criterion(choice: object) -> bool:
    return isinstance(choice, LagChoice) and bool(choice.criterion)


def estimate_seconds(prepared: Prepared, jobs: int) -> float:
    """Return the seconds a whole run takes, start of the workers included."""
    plan, rows = prepared.plan, prepared.rows
    moving = np.array([bool(getattr(c, "moving", "")) for c in plan.axes["window"]])
    robust = np.array([getattr(c, "covariance", "") != "classical" for c in plan.axes["test"]])
    run = rows.rule < 0
    per_row = np.where(moving[rows.codes["window"]], MOVING_ROW, FIXED_ROW)
    per_row = per_row + np.where(robust[rows.codes["test"]], ROBUST_ROW, 0.0)
    return START_UP + float(per_row[run].sum()) / max(jobs, 1) + 2.5e-6 * rows.count
