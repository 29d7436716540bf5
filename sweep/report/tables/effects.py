"""Range of the sum of coefficients, within one scale at a time."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from .model import Column, Table

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "effects within scales"
NEEDS = ("effects",)
SHOWS = "range of the sum of coefficients within each scale"

_COLUMNS = (
    Column("Scale"),
    Column("Rows", "count"),
    Column("Positive", "count"),
    Column("Negative", "count"),
    Column("Minimum", "number"),
    Column("Lower quartile", "number"),
    Column("Median", "number"),
    Column("Upper quartile", "number"),
    Column("Maximum", "number"),
)


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the ranges of one finding, one line a scale."""
    rows = []
    for record in frames["effects"].to_dict("records"):
        scale = (
            f"{record['scale']} (baseline's scale)" if record["is_baseline"] else record["scale"]
        )
        rows.append((scale, *(record[column.field] for column in _COLUMNS[1:])))
    notes = (
        f"{context.lead} Sum of the tested lag coefficients in units of the effect per unit of the "
        "cause on that scale. A scale is one transformation, measure and form of the test; sums of "
        f"different scales must not be compared; rows admissible only. {context.losses}"
    )
    return Table(
        NAME,
        f"Range of the effect within each scale: {context.statement}.",
        _COLUMNS,
        tuple(rows),
        (notes,),
    )
