"""One specification by the slow path: its rows, least squares, the textbook formulas.

Shares the transformations and window rules with the fast path, none of its sums, factors,
criteria or statistics.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sweep.engine.feasible import FREEDOM_FOR_CRITERION
from sweep.engine.group import make_tasks
from sweep.engine.panel import window_values
from sweep.engine.prepare import Prepared
from sweep.engine.task import System, Task
from sweep.kernels.plain import (
    PlainFit,
    plain_design,
    plain_fit,
    plain_long_run,
    plain_order,
    plain_orders,
    plain_robust,
)
from sweep.panel.deterministics import TermContext, term_columns
from sweep.plan.choices import LagChoice, ProcedureChoice

__all__ = ["SlowDirection", "SlowResult", "SlowSample", "recheck", "slow_sample"]

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class SlowDirection:
    """One direction of a specification.

    Attributes
    ----------
    fit : PlainFit
    orders : (int, int, int)
        Lags of the effect, of the cause, of the given series.
    statistic, p_value : float
    df_num : int
    df_den : int or None
    coefficient_sum, coefficient_sum_error : float
        Raw units, as transformed; error by the specification's covariance.
    lag_errors : ndarray, shape (q,)
    partial_r2 : float
        (s0 − s1)/s0, unsigned.
    criterion_table : ndarray or None
        ln|Σ_p| of orders 0…m where a criterion chose.
    """

    fit: PlainFit
    orders: tuple[int, int, int]
    statistic: float
    p_value: float
    df_num: int
    df_den: int | None
    coefficient_sum: float
    coefficient_sum_error: float
    lag_errors: Floats
    partial_r2: float
    criterion_table: Floats | None


@dataclass(frozen=True, slots=True)
class SlowResult:
    """Both directions, and the rows they were run on.

    Attributes
    ----------
    forward, reverse : SlowDirection
    rows : ndarray of int, shape (t,)
        Calendar rows of the regression.
    """

    forward: SlowDirection
    reverse: SlowDirection
    rows: NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class SlowSample:
    """What one specification is estimated from.

    Attributes
    ----------
    task : Task
        Holds this one specification.
    system : System
        Its series.
    values : ndarray, shape (n, m)
        All series on the window's rows, as transformed; NaN where they must not be used.
    terms : ndarray, shape (n, d)
        Deterministic columns.
    bounds : (int, int)
        Rows of the window between which all its series exist.
    """

    task: Task
    system: System
    values: Floats
    terms: Floats
    bounds: tuple[int, int]


def recheck(prepared: Prepared, row: int) -> SlowResult:
    """Recompute one row of a plan the slow way.

    Parameters
    ----------
    prepared : Prepared
    row : int
        Row of ``prepared.rows``.

    Raises
    ------
    ValueError
        If the regression cannot be run on these rows.
    """
    sample = slow_sample(prepared, row)
    task, system = sample.task, sample.system
    values, terms, bounds = sample.values, sample.terms, sample.bounds
    forward, rows = _direction(task, system, values, terms, bounds)
    reverse, _ = _direction(task, system.turned(), values, terms, bounds)
    return SlowResult(forward, reverse, rows + int(task.first[0]))


def slow_sample(prepared: Prepared, row: int) -> SlowSample:
    """Return what one row of a plan is estimated from.

    Parameters and errors are those of :func:`recheck`.
    """
    nothing = np.zeros(prepared.rows.count, bool)
    (task,) = make_tasks(prepared, np.array([row], dtype=np.int64), nothing)
    values, exists = window_values(task, 0)
    system = task.systems[0]
    used = sorted({*system.modelled, *(column for column, _ in system.exogenous)})
    whole = np.flatnonzero(exists[:, used].all(axis=1))
    if not whole.size:
        raise ValueError("no date has a value of every series in this window")
    return SlowSample(task, system, values, _terms(task), (int(whole[0]), int(whole[-1])))


def _terms(task: Task) -> Floats:
    rows = np.arange(task.first[0], task.last[0] + 1)
    context = TermContext(
        rows, task.season[rows], task.seasons, float(rows.mean()),
        max((rows.size - 1) / 2, 1.0), float(rows.size),
    )  # fmt: skip
    return term_columns(task.terms[0], context)


def _direction(
    task: Task, system: System, values: Floats, terms: Floats, bounds: tuple[int, int]
) -> tuple[SlowDirection, NDArray[np.int64]]:
    choice, procedure = task.lags[0], task.procedures[0]
    orders, table = _orders(choice, system, values, terms, bounds)
    own, cause, given = orders
    unmodelled = max((lags for _, lags in system.exogenous), default=0)
    extra = procedure.extra_lags
    longest = max(own, cause, given if system.given else 0) + extra
    start = max(longest, unmodelled, choice.common)
    series = [(values[:, c], 0, lags) for c, lags in system.exogenous]
    series.append((values[:, system.effect], 1, own + extra))
    series += [(values[:, c], 1, given + extra) for c in system.given]
    # Extra lags of the cause stand before the tested ones, which come last.
    series.append((values[:, system.cause], cause + 1, cause + extra))
    series.append((values[:, system.cause], 1, cause))
    # The current values and, on a common sample, its lags: they say which rows are complete.
    series += [
        (values[:, c], 0, choice.common) for c in (system.effect, system.cause, *system.given)
    ]
    rows, which = plain_design(series, terms, *bounds, start)
    current = (2 + len(system.given)) * (choice.common + 1)
    regressors = rows[:, :-current]
    effect = rows[:, regressors.shape[1]]
    fit = plain_fit(effect, regressors[:, :-cause], regressors[:, -cause:])
    statistic, p_value, df_den = _statistic(fit, procedure, which, terms.shape[1])
    covariance = fit.covariance
    if procedure.covariance != "classical":
        covariance = _sandwich(fit, procedure, which, terms.shape[1])
    block = covariance[-cause:, -cause:]
    s0, s1 = fit.restricted_squares, fit.unrestricted_squares
    return (
        SlowDirection(
            fit, orders, statistic, p_value, cause, df_den, fit.coefficient_sum,
            float(np.sqrt(block.sum())), np.sqrt(np.diag(block)), (s0 - s1) / s0, table,
        ),
        which,
    )  # fmt: skip


def _orders(
    choice: LagChoice, system: System, values: Floats, terms: Floats, bounds: tuple[int, int]
) -> tuple[tuple[int, int, int], Floats | None]:
    if not choice.criterion:
        return (choice.own, choice.cause, choice.given), None
    modelled = list(system.modelled)
    width = len(modelled)
    exogenous = [(values[:, c], lags) for c, lags in system.exogenous]
    fixed = terms.shape[1] + sum(lags + 1 for _, lags in system.exogenous)
    effect = modelled.index(system.effect) if choice.scope == "equation" else None
    for maximum in range(choice.maximum, 0, -1):
        table, rows = plain_orders(
            values[:, modelled], exogenous, terms, bounds, maximum, effect=effect,
            common=choice.common,
        )  # fmt: skip
        if rows - (fixed + width * maximum) >= FREEDOM_FOR_CRITERION:
            order = plain_order(
                table, rows, fixed, width, width if effect is None else 1, choice.criterion,
                choice.level,
            )  # fmt: skip
            return (order, order, order), table
    raise ValueError("no order leaves 20 degrees of freedom in this window")


def _sandwich(
    fit: PlainFit, procedure: ProcedureChoice, times: NDArray[np.int64], terms: int
) -> Floats:
    """Return the sandwich covariance of the tested lags that an entry asks for."""
    how = procedure.sandwich
    if isinstance(how, str):
        return plain_robust(fit, how)
    return plain_long_run(fit, how, times, terms)


def _statistic(
    fit: PlainFit, procedure: ProcedureChoice, times: NDArray[np.int64], terms: int
) -> tuple[float, float, int | None]:
    """Return statistic, p-value and denominator degrees of freedom, from scipy.stats' laws."""
    from scipy import stats

    s0, s1, q = fit.restricted_squares, fit.unrestricted_squares, fit.restrictions
    t, freedom = fit.observations, fit.observations - fit.regressors
    if procedure.covariance != "classical":
        block = _sandwich(fit, procedure, times, terms)
        b = fit.lag_coefficients
        wald = float(b @ np.linalg.solve(block, b))
    else:
        wald = (t if procedure.divisor == "T" else freedom) * (s0 - s1) / s1
    statistic = procedure.form or procedure.statistic
    if statistic == "F":
        value = wald / q
        return value, float(stats.f.sf(value, q, freedom)), freedom
    value = {"Wald": wald, "LR": t * float(np.log(s0 / s1)), "LM": t * (s0 - s1) / s0}[
        statistic
    ]
    return value, float(stats.chi2.sf(value, q)), None
