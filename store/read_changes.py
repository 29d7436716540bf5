"""Changes away from the baseline: single changes, flips of one and two changes, shortest flips."""

from __future__ import annotations

from statistics import NormalDist

import pandas as pd

from store.database import Database
from store.schema import query

__all__ = [
    "MOST_FLIPS",
    "Z_CAP",
    "flip_counts",
    "flip_distances",
    "flips",
    "shortest_flips",
    "single_changes",
    "z_value",
]

# Most rows of a list that leave the database; the counts are stated beside them.
MOST_FLIPS = 5000

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
        (admissible rows whose answer differs from the baseline's), ``flips_forward,
        flips_reverse, flips_sign`` (those in which the test of cause to effect, the reverse
        one, or the sign answers otherwise; a row may count under several), ``p_value`` (the
        row's, or the median over admissible positions, over all that could be run where none
        is; so for what follows), ``p_low, p_high`` (least and greatest),
        ``reverse_p_value`` (median), ``z_change, reverse_z_change`` (median z less the
        baseline's z, z the inverse normal survival function of p held to ±37),
        ``coefficient_sum`` (median, the sign turned where a measure is inverted), ``status``
        (``ok`` where any row is admissible, else the mildest loss), ``reason``,
        ``specification`` (missing where several positions share the row), ``baseline_p_value,
        baseline_reverse_p_value, baseline_survives`` (missing where the baseline is not
        admissible), ``axis_position, choice_position``.
        Empty where no baseline row is stored and nothing differs from it.
    """
    frame = db.frame(
        query("changes") + query("single_changes"), {"sweep": sweep, "finding": finding}
    )
    return _with_z_changes(frame)


def flips(db: Database, sweep: int, finding: int, limit: int = MOST_FLIPS) -> pd.DataFrame:
    """Return the sets of one or two changed choices under which the finding turns.

    Parameters
    ----------
    db : Database
        An open store.
    sweep, finding : int
        Numbers of the sweep and the finding.
    limit : int
        Most rows to return; :func:`flip_counts` says how many there are.

    Returns
    -------
    pandas.DataFrame
        One row a set, single changes first, then pairs that turn although neither change
        alone does, then the other pairs; within each first what turns in the larger part of
        its positions, then the p-value that moved furthest:
        ``changes`` (1 or 2), ``kind`` (words), ``first_axis, first_from, first_to,
        second_axis, second_from, second_to`` (labels; the second missing for one change),
        ``entry_kind``, and, over the positions of a moving window, ``positions, rows_ok,
        admissible, survived, flips, joint`` (both changes alone are admissible and neither
        turns), ``contained`` (one of them turns alone), ``unsettled`` (neither turns, one is
        not admissible), ``flips_forward, flips_reverse, flips_sign, p_value, p_low, p_high,
        reverse_p_value, z_change, reverse_z_change`` (as in :func:`single_changes`),
        ``first_p_value, second_p_value`` (medians after each change of a pair alone),
        ``window_start, window_end`` (from the first to the last window that turns),
        ``specification, baseline_p_value, baseline_reverse_p_value, baseline_survives``.
    """
    frame = db.frame(
        query("changes") + query("flip_sets") + query("flips"),
        {"sweep": sweep, "finding": finding, "limit": limit},
    )
    return _with_z_changes(frame)


def flip_counts(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return how many sets of one and two changed choices turn the finding.

    Returns
    -------
    pandas.DataFrame
        ``changes`` (1, 2), ``sets`` of changed choices, ``admissible`` (sets with an
        admissible row), ``turning`` (sets that turn in a position at least), of which
        ``joint, contained, unsettled`` (pairs by kind, as in :func:`flips`), ``rows``
        (admissible), ``flips`` (rows that turn).
    """
    return db.frame(
        query("changes") + query("flip_sets") + query("flip_counts"),
        {"sweep": sweep, "finding": finding},
    )


def shortest_flips(db: Database, sweep: int, finding: int, limit: int = 20) -> pd.DataFrame:
    """Return the sets of changed choices nearest to the baseline under which the finding turns.

    Returns
    -------
    pandas.DataFrame
        One row a set, whose window positions are counted together: ``changes`` (axes that
        differ), ``changed`` (words, such as ``lags: 4 → 8; test: F → HC3``), ``positions,
        admissible, flips`` (positions that turn), ``p_value, reverse_p_value`` (medians over
        the positions that have one), ``window_start`` (of the first position that turns),
        ``window_end`` (of the last one), ``specification`` (missing where there are several
        positions); by number of changes, then share of positions that turn, then distance of
        p from the baseline's p.
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
        ``changes`` (from 1), ``rows`` (admissible), ``flips``, ``sets`` of changed choices
        with an admissible row, ``turning`` (sets with a flip).
    """
    return db.frame(
        query("changes") + query("flip_distances"), {"sweep": sweep, "finding": finding}
    )


def _with_z_changes(frame: pd.DataFrame) -> pd.DataFrame:
    """Put the changes in z beside the p-values and drop the middle values they come from."""
    # Each is put in at the same place, so that the last one stands first.
    for name, base in (("reverse_", "baseline_reverse_p_value"), ("", "baseline_p_value")):
        middle = [f"{name or 'p_'}middle_low", f"{name or 'p_'}middle_high"]
        change = [
            float("nan")
            if pd.isna(low) or pd.isna(own)
            else (z_value(low) + z_value(high)) / 2 - z_value(own)
            for low, high, own in zip(frame[middle[0]], frame[middle[1]], frame[base], strict=True)
        ]
        place = int(frame.columns.get_loc("reverse_middle_high")) + 1  # type: ignore[arg-type]
        frame.insert(place, f"{name}z_change", pd.Series(change, dtype="float64"))
    columns = [name for name in frame.columns if "middle" not in name]
    return frame[columns]
