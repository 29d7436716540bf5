"""What was planned and not counted, with reasons."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from .model import Column, Table

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "attrition"
NEEDS = ("attrition",)
SHOWS = "what was planned and not counted, with reasons"


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the losses of one finding, one line a reason."""
    planned = context.counts.planned
    rows = [
        (
            record["status"],
            record["reason"],
            "by the plan" if record["ruled"] else "by the data or the choice",
            record["rows"],
            int(record["rows"]) / planned if planned else None,
        )
        for record in frames["attrition"].to_dict("records")
    ]
    columns = (
        Column("Status"),
        Column("Reason"),
        Column("Ruled out", name="ruled"),
        Column("Rows", "count"),
        Column("Share of planned", "share"),
    )
    notes = (
        f"{context.lead} {context.losses} Not applicable: the choice makes no sense there or the "
        "plan rules it out. Infeasible: too few observations. Failed: the computation broke "
        "down. Screened out: a required precondition does not hold; a row that misses "
        "several is counted under each set of them once."
    )
    return Table(
        NAME,
        f"What was not counted, and why: {context.statement}.",
        columns,
        tuple(rows),
        (notes,),
        grouped=True,
    )
