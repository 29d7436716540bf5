"""Changes away from the baseline: single changes, shortest flips, flips by distance."""

from __future__ import annotations

from statistics import NormalDist

import pandas as pd

from store.database import Database
from store.schema import query

__all__ = ["Z_CAP", "flip_distances", "shortest_flips", "single_changes", "z_value"]

# Beyond it the normal survival function underflows (p below about 5e-300).
Z_CAP = 37.0


def z_value(p: float) -> float:
    """Return the inverse normal survival function of a p-value, held to ±37.

    Parameters
    ----------
    p : float
        p-value in [0, 1].

    Examples
    --------
    >>> round(z_value(0.025), 3)
    1.96
    >>> z_value(0.0), z_value(1.0)
    (37.0, -37.0)
    """
    if p <= 0.0:
        return Z_CAP
    if p >= 1.0:
        return -Z_CAP
    return min(Z_CAP, max(-Z_CAP, -NormalDist().inv_cdf(p)))


def single_changes(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return what each single change from the baseline does.

    Returns
    -------
    pandas.DataFrame
        One row for each choice that differs from the baseline on its own axis, in plan
        order: ``axis, choice, entry_kind`` (``fixed`` or the kind of moving window),
        ``positions`` (rows of the choice), ``rows_ok, admissible, survived, flips``
        (admissible rows whose answer differs from the baseline's), ``p_value`` (the row's,
        or the median over positions), ``p_low, p_high`` (least and greatest),
        ``reverse_p_value`` (median), ``z_change`` (median z less the baseline's z, z the
        inverse normal survival function of p held to ±37), ``coefficient_sum`` (median),
        ``status`` (``ok`` where any row is admissible, else the mildest loss), ``reason``,
        ``specification`` (missing where several positions share the row),
        ``baseline_p_value, baseline_survives, axis_position, choice_position``.
        Empty where no baseline row is stored and nothing differs from it.
    """
    frame = db.frame(
        query("changes") + query("single_changes"), {"sweep": sweep, "finding": finding}
    )
    middle = zip(
        frame["p_middle_low"], frame["p_middle_high"], frame["baseline_p_value"], strict=True
    )
    change = [
        float("nan")
        if pd.isna(low) or pd.isna(base)
        else (z_value(low) + z_value(high)) / 2 - z_value(base)
        for low, high, base in middle
    ]
    place = int(frame.columns.get_loc("reverse_p_value")) + 1  # type: ignore[arg-type]
    frame.insert(place, "z_change", pd.Series(change, dtype="float64"))
    return frame.drop(columns=["p_middle_low", "p_middle_high"])


def shortest_flips(db: Database, sweep: int, finding: int, limit: int = 20) -> pd.DataFrame:
    """Return the admissible specifications nearest to the baseline that answer differently.

    Returns
    -------
    pandas.DataFrame
        ``changes`` (axes that differ), ``specification, changed`` (words, such as
        ``lags: 4 → 8; test: F → HC3``), ``p_value, reverse_p_value, window_start,
        window_end``; by number of changes, then distance of p from the baseline's p.
    """
    return db.frame(
        query("changes") + query("shortest_flips"),
        {"sweep": sweep, "finding": finding, "limit": limit},
    )


def flip_distances(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return how many admissible rows flip at each number of changed axes.

    Returns
    -------
    pandas.DataFrame
        ``changes`` (from 1), ``rows`` (admissible), ``flips``.
    """
    return db.frame(
        query("changes") + query("flip_distances"), {"sweep": sweep, "finding": finding}
    )
