"""Every lag order of the baseline's system with what the criteria say of it, by the slow path.

The system, window, transformation and deterministic terms are the baseline's; all orders are
compared on the common sample of the largest one, as the criteria of a lag choice are.  With Σ_p
the residual covariance of order p with divisor T, K equations and n regressors in each,

    ln L = −(T/2)(K (1 + ln 2π) + ln|Σ_p|)        LR = T (ln|Σ_{p−1}| − ln|Σ_p|) on χ²(q)

with q the coefficients that one lag adds (Lütkepohl 2005, sections 3.4 and 4.3); the criteria are
those of :mod:`sweep.kernels.criteria`.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from sweep.engine.feasible import FREEDOM_FOR_CRITERION
from sweep.engine.recheck import SlowSample, slow_sample
from sweep.engine.stored import prepared_again, row_of
from sweep.errors import Fault, InputFault
from sweep.kernels.criteria import CRITERIA, criterion_table
from sweep.kernels.layout import Floats
from sweep.kernels.plain import plain_order, plain_orders
from sweep.panel.periods import FREQUENCIES
from sweep.plan.choices import LagChoice

if TYPE_CHECKING:
    import pandas as pd

    from sweep.results import Results

__all__ = ["lag_selection"]


def lag_selection(
    results: Results, finding: int, specification: str, data: Path | None = None
) -> pd.DataFrame:
    """Return the criteria of every lag order for one stored specification.

    Parameters
    ----------
    results : Results
        The sweep.
    finding : int
        Number of the finding.
    specification : str
        All 32 digits, such as the baseline's.
    data : Path or None
        Data file, where it is no longer where the plan says.

    Returns
    -------
    pandas.DataFrame
        One row an order from 1 to the maximum: ``order, log_likelihood, lr_statistic, lr_df,
        lr_p_value`` (against one lag fewer), ``fpe, aic, hq, bic``, ``chosen_by`` (names of the
        criteria that choose it, joined by ``", "``); and, the same in every row, ``observations``
        (rows of the common sample), ``equations``, ``terms`` (deterministic and exogenous
        regressors of an equation), ``first, last`` (its periods in words), ``asked`` (the maximum
        before it was lowered for want of observations), ``scope``, ``level`` (of the sequential
        test), ``order_used`` (0 where a criterion chose the specification's order), ``rule`` (that
        criterion).

    Raises
    ------
    InputFault
        If the data are gone or have changed, or if no order leaves enough degrees of freedom.
    """
    import pandas as pd

    prepared = prepared_again(results, data)
    row = row_of(prepared, finding, specification)
    try:
        sample = slow_sample(prepared, row)
    except ValueError as error:
        raise InputFault(Fault("lag selection", str(error))) from None
    choice = prepared.plan.axes["lags"][int(prepared.rows.codes["lags"][row])]
    assert isinstance(choice, LagChoice)
    asked = choice.maximum or FREQUENCIES[sample.task.frequency].criterion_maximum
    determinants, rows = _largest(sample, choice, asked)
    frame = pd.DataFrame(_table(sample, choice, determinants, rows))
    calendar = prepared.dataset.calendar
    first = int(sample.task.first[0])
    start = max(len(determinants) - 1, choice.common)
    return frame.assign(
        observations=rows,
        equations=_equations(sample, choice),
        terms=_fixed(sample),
        first=calendar.label(first + sample.bounds[0] + start),
        last=calendar.label(first + sample.bounds[1]),
        asked=asked,
        scope=choice.scope,
        level=choice.level,
        order_used=0 if choice.criterion else choice.cause,
        rule=choice.criterion,
    )


def _fixed(sample: SlowSample) -> int:
    """Return the regressors of an equation that no lag adds."""
    return int(sample.terms.shape[1]) + sum(lags + 1 for _, lags in sample.system.exogenous)


def _equations(sample: SlowSample, choice: LagChoice) -> int:
    return len(sample.system.modelled) if choice.scope == "system" else 1


def _largest(sample: SlowSample, choice: LagChoice, asked: int) -> tuple[Floats, int]:
    """Return ln|Σ_p| of orders 0…m and their common rows, m the largest that leaves enough."""
    modelled = list(sample.system.modelled)
    exogenous = [(sample.values[:, column], lags) for column, lags in sample.system.exogenous]
    effect = modelled.index(sample.system.effect) if choice.scope == "equation" else None
    for maximum in range(asked, 0, -1):
        if sample.bounds[1] - sample.bounds[0] + 1 <= maximum:
            continue
        table, rows = plain_orders(
            sample.values[:, modelled], exogenous, sample.terms, sample.bounds, maximum,
            effect=effect, common=choice.common,
        )  # fmt: skip
        if rows - (_fixed(sample) + len(modelled) * maximum) >= FREEDOM_FOR_CRITERION:
            return table, rows
    raise InputFault(
        Fault(
            "lag selection",
            f"no order leaves {FREEDOM_FOR_CRITERION} degrees of freedom in the baseline's window",
        )
    )


def _table(
    sample: SlowSample, choice: LagChoice, determinants: Floats, rows: int
) -> dict[str, object]:
    from scipy import stats

    width, fixed = len(sample.system.modelled), _fixed(sample)
    equations = _equations(sample, choice)
    orders = np.arange(1, len(determinants))
    table = {
        name: criterion_table(
            determinants[None], np.array([rows]), fixed, width, equations, name
        )[0, 1:]
        for name in ("AIC", "BIC", "HQ", "FPE")
    }
    chosen = {
        name: plain_order(determinants, rows, fixed, width, equations, name, choice.level)
        for name in CRITERIA
    }
    ratio = rows * (determinants[:-1] - determinants[1:])
    constant = equations * (1.0 + np.log(2.0 * np.pi))
    return {
        "order": orders,
        "log_likelihood": -0.5 * rows * (constant + determinants[1:]),
        "lr_statistic": ratio,
        "lr_df": width * equations,
        "lr_p_value": stats.chi2.sf(ratio, width * equations),
        "fpe": np.exp(table["FPE"]),
        "aic": table["AIC"],
        "hq": table["HQ"],
        "bic": table["BIC"],
        "chosen_by": [
            ", ".join(name for name in CRITERIA if chosen[name] == order) for order in orders
        ],
    }
