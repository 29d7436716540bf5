"""Survival by axis and choice, with every count."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import TYPE_CHECKING

from sweep.verdicts.survival import OVERALL

from .model import Column, Table

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "survival"
NEEDS = ("survival",)
SHOWS = "survival by axis and choice, with every count"

_COLUMNS = (
    ("axis", Column("Axis")),
    ("choice", Column("Choice")),
    ("is_baseline", Column("Baseline", "mark", "is_baseline")),
    ("planned", Column("Planned", "count")),
    ("not_applicable", Column("Not applicable", "count", within=("page", "data"))),
    ("infeasible", Column("Infeasible", "count", within=("page", "data"))),
    ("failed", Column("Failed", "count", within=("page", "data"))),
    ("screened_out", Column("Screened out", "count", within=("page", "data"))),
    ("not_run", Column("Not run yet", "count", within=("page", "data"))),
    ("left_out", Column("Left out", "count", within=("print",))),
    ("admissible", Column("Admissible", "count")),
    ("survived", Column("Survived", "count")),
    ("other_sign", Column("Other sign", "count")),
    ("distinct", Column("Distinct", "count")),
    ("raw_share", Column("Share of rows", "share", "raw_share")),
    ("headline_share", Column("Weighted share", "share", "headline_share")),
    ("share_at_1", Column("at 1%", "share", "share_at_1")),
    ("share_at_5", Column("at 5%", "share", "share_at_5")),
    ("share_at_10", Column("at 10%", "share", "share_at_10")),
    ("median_p_value", Column("Median p", "p", "median_p_value")),
)


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the table of one finding, overall row first."""
    frame = frames["survival"]
    rows = []
    for record in frame.to_dict("records"):
        if record["axis"] == OVERALL:
            record |= {"axis": "overall", "choice": "all choices"}
        record["left_out"] = int(record["planned"]) - int(record["admissible"])
        rows.append(tuple(record[name] for name, _ in _COLUMNS))
    unfinished = context.counts.not_run > 0
    columns = [
        # Readers of a finished sweep need no column of zeros.
        replace(column, within=("data",)) if name == "not_run" and not unfinished else column
        for name, column in _COLUMNS
    ]
    notes = (
        f"{context.lead} Planned = admissible + left out (not applicable, infeasible, failed, "
        f"screened out{', not run yet' if unfinished else ''}). Distinct: distinct computations "
        "among the admissible rows. Weighted share: "
        "each row weighs 1 / (positions of its window entry) / (size of its test group). Other "
        "sign: significant, but not with the claimed sign. The columns at 1, 5 and 10% are the "
        f"weighted share were that the level. {context.losses}"
    )
    return Table(
        NAME,
        f"Survival by axis and choice: {context.statement}.",
        tuple(columns),
        tuple(rows),
        (notes,),
        grouped=True,
    )
