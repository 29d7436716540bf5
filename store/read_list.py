"""All rows of a finding, in portions that bound the memory whatever their number."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import pandas as pd

from store.database import Database
from store.schema import query

__all__ = ["LIST_COLUMNS", "alternatives", "list_rows", "list_size"]

# Columns of the long list, named as in the view ``outcomes``.
LIST_COLUMNS = (
    "specification", "origin", "request", "lags_choice", "lags", "deterministics", "window_name",
    "window_entry", "position", "window_start", "window_end", "transformation", "test",
    "conditioning", "measures", "observations", "statistic", "df_num", "df_den", "p_value",
    "coefficient_sum", "coefficient_sum_se", "signed_partial_r2", "standardised_sum",
    "reverse_statistic", "reverse_p_value", "reverse_coefficient_sum", "status",
    "reverse_status", "reason", "counted_as", "failed_screens", "survives", "other_sign",
    "verdict", "weight", "is_baseline", "computation", "solver",
)  # fmt: skip

# Rows that are sorted at once: more are asked for part by part.
_AT_ONCE = 60_000


def alternatives(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return the baseline and each choice that differs from it on one axis, in full.

    Returns
    -------
    pandas.DataFrame
        One row for the baseline (axis ``baseline``) and one a choice in plan order: ``axis``,
        the labels ``lags_choice, deterministics, window_name, transformation, test, conditioning,
        measures``, ``test_meaning`` (JSON), ``positions, admissible, survived, flips``,
        ``order_least, order_most, observations_least, observations_most`` (over positions),
        ``statistic, reverse_statistic, df_num, df_den, coefficient_sum_se`` (missing where there
        are several positions), ``p_value, reverse_p_value, coefficient_sum,
        reverse_coefficient_sum`` (medians over positions; the signs of the sums turned where a
        measure is inverted), ``window_start, window_end`` (from the
        first to the last window), ``status, reason, specification``.
    """
    return db.frame(
        query("changes") + query("alternatives"), {"sweep": sweep, "finding": finding}
    )


def list_size(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return how many rows the long list has: one row with ``rows``."""
    return db.frame(
        "SELECT count(*) AS rows FROM outcome WHERE sweep = ? AND finding = ?", [sweep, finding]
    )


def list_rows(db: Database, sweep: int, finding: int) -> Iterator[tuple[Any, ...]]:
    """Yield every row of a finding, planned and added, with the columns ``LIST_COLUMNS``.

    In plan order by window entry, transformation, deterministic terms, conditioning, measures,
    lags, test, and position in time.
    """
    for part in _parts(db, sweep, finding):
        _, portions = db.stream(
            query("long_list"), {"sweep": sweep, "finding": finding} | part, size=2000
        )
        for rows in portions:
            yield from rows


def _parts(db: Database, sweep: int, finding: int) -> Iterator[dict[str, str | None]]:
    """Yield conditions that split the rows, in order, into parts small enough to sort."""
    counts = db.frame(query("list_parts"), {"sweep": sweep, "finding": finding})
    for window, within in counts.groupby("window", sort=False):
        whole: dict[str, str | None] = {
            "window": str(window), "transformation": None, "deterministics": None,
        }  # fmt: skip
        if within["rows"].sum() <= _AT_ONCE:
            yield whole
            continue
        for transformation, narrower in within.groupby("transformation", sort=False):
            some = whole | {"transformation": str(transformation)}
            if narrower["rows"].sum() <= _AT_ONCE:
                yield some
                continue
            for deterministics in narrower["deterministics"]:
                yield some | {"deterministics": str(deterministics)}
