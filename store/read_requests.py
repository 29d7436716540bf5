"""Requests of referees: what each asks, the rows that it added, the answer beside the baseline."""

from __future__ import annotations

import pandas as pd

from store.database import Database
from store.schema import query

__all__ = ["answers", "requests"]


def requests(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return one row for each request of a sweep, in plan order.

    Returns
    -------
    pandas.DataFrame
        ``request`` (number from 1), ``request_name, asked_by, asks``, the counts of the rows
        that it added for this finding (``added`` = ``not_applicable`` + ``infeasible`` +
        ``failed`` + ``screened_out`` + ``admissible``; ``survived``, ``distinct``),
        ``raw_share`` and ``weighted_share`` in [0, 1], missing where nothing is admissible,
        ``concerned`` (whether it asks about this finding).
    """
    return db.frame(query("requests"), {"sweep": sweep, "finding": finding})


def answers(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return the baseline with the choices of each request put in.

    Returns
    -------
    pandas.DataFrame
        One row for each request and combination of its choices with the baseline's:
        ``request, request_name, asked_by, asks, changes`` (axes that differ), ``changed``
        (words, such as ``lags 8; test F, HC3``), ``planned`` (whether the plan had the row
        already), ``positions, admissible, survived, order_used, observations, statistic,
        df_num, df_den, p_value`` (median over the admissible positions, over all that could be
        run where none is), ``p_low, p_high, reverse_p_value, coefficient_sum`` (signs turned
        where a measure is inverted),
        ``coefficient_sum_se, status, reason, specification`` (missing where several
        positions share the row), ``baseline_p_value, baseline_survives``.
    """
    return db.frame(query("answers"), {"sweep": sweep, "finding": finding})
