"""Counts and shares: survival, what was not counted, directions, windows, effect sizes."""

from __future__ import annotations

import pandas as pd

from store.database import Database
from store.schema import query

__all__ = [
    "attrition",
    "directions",
    "effects",
    "effects_overall",
    "strata",
    "survival",
    "windows",
]


def survival(
    db: Database, sweep: int, finding: int | None = None, axis: str | None = None
) -> pd.DataFrame:
    """Return survival by choice, in plan order, the overall row (axis ``all``) first.

    Parameters
    ----------
    db : Database
        An open store.
    sweep : int
        Number of the sweep.
    finding : int, optional
        One finding only.
    axis : str, optional
        One axis only; ``all`` for the overall row.

    Returns
    -------
    pandas.DataFrame
        ``sweep, finding, axis, choice, code, choice_position, is_baseline, planned,
        not_applicable, infeasible, failed, screened_out, not_run, admissible, survived, other_sign,
        distinct, raw_share, headline_share, share_at_1, share_at_5, share_at_10,
        median_p_value``.  Counts are of planned rows; ``distinct`` counts distinct
        computations among the admissible ones; shares are in [0, 1] and missing where
        nothing is admissible; ``share_at_1`` is the headline share were the level 1%.
    """
    return db.frame(query("survival_rows"), {"sweep": sweep, "finding": finding, "axis": axis})


def attrition(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return why planned rows are not admissible.

    Returns
    -------
    pandas.DataFrame
        ``status`` (``not applicable``, ``infeasible``, ``failed``, ``screened out``, ``not run
        yet``),
        ``reason`` (for screened-out rows the required screens that failed), ``rows``,
        ``ruled`` (True where the plan's author ruled the combination out).
    """
    return db.frame(query("attrition"), {"sweep": sweep, "finding": finding})


def strata(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return the counts from which the interval of a drawn sample is made.

    Returns
    -------
    pandas.DataFrame
        ``window_name, is_baseline, weight, rows, admissible, survived, size``: planned rows
        of a window entry that have one weight, and the rows of the whole cross with that
        entry.  The baseline stands apart.
    """
    return db.frame(query("strata"), {"sweep": sweep, "finding": finding})


def directions(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return how often each direction verdict occurs among admissible planned rows.

    Returns
    -------
    pandas.DataFrame
        ``axis, choice, verdict, rows, share, choice_position``; ``share`` is of the
        choice's rows.  The axis ``all`` comes first.
    """
    return db.frame(query("directions"), {"sweep": sweep, "finding": finding})


def effects(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return the range of the sum of lag coefficients within each scale.

    Returns
    -------
    pandas.DataFrame
        ``scale, transformation, measures, form, rows, positive, negative, minimum,
        lower_quartile, median, upper_quartile, maximum, is_baseline``, over admissible
        planned rows that have a sum; in units of the effect per unit of the cause on that
        scale, with the sign turned where a measure is inverted.
    """
    return db.frame(query("effects"), {"sweep": sweep, "finding": finding})


def effects_overall(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return the range of the quantities that compare across scales.

    Returns
    -------
    pandas.DataFrame
        ``quantity`` (``signed partial R²``, ``standardised sum``), ``rows, positive,
        negative, minimum, lower_quartile, median, upper_quartile, maximum``; signs are
        turned where a measure is inverted.
    """
    return db.frame(query("effects_overall"), {"sweep": sweep, "finding": finding})


def windows(db: Database, sweep: int, finding: int, cells: int = 5000) -> pd.DataFrame:
    """Return survival and p-values over the positions of every window entry.

    Parameters
    ----------
    db : Database
        An open store.
    sweep, finding : int
        Numbers of the sweep and the finding.
    cells : int
        Most rows to return; beyond it neighbouring positions are pooled.

    Returns
    -------
    pandas.DataFrame
        ``window_name, entry_kind, length`` (periods, missing where fixed),
        ``window_start, window_end, position, planned, admissible, survived, share,
        median_p, p_low, p_high`` (quartiles over admissible rows), ``pooled`` (positions in
        the row).  A pooled row spans from the first start to the last end of its positions.
    """
    lengths = db.frame(
        "SELECT max(position) - min(position) + 1 AS positions FROM window_position "
        'WHERE sweep = ? AND finding = ? GROUP BY "window"',
        [sweep, finding],
    )["positions"]
    pooled = 1
    while (-(-lengths // pooled)).sum() > max(cells, len(lengths)):
        pooled += 1
    return db.frame(query("windows"), {"sweep": sweep, "finding": finding, "pooled": pooled})
