"""Range of the effect across scales, in quantities that have no unit."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from .model import Column, Table

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "effects across scales"
NEEDS = ("effects_overall",)
SHOWS = "range of the effect in quantities without a unit"

_COLUMNS = (
    Column("Quantity"),
    Column("Rows", "count"),
    Column("Positive", "count"),
    Column("Minimum", "number"),
    Column("Lower quartile", "number"),
    Column("Median", "number"),
    Column("Upper quartile", "number"),
    Column("Maximum", "number"),
)


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the ranges of one finding, one line a quantity."""
    rows = tuple(
        tuple(record[column.field] for column in _COLUMNS)
        for record in frames["effects_overall"].to_dict("records")
    )
    notes = (
        f"{context.lead} Signed partial R²: the share of the effect's remaining variation that the "
        "tested lags explain, with the sign of their sum. Standardised sum: the sum of the "
        "coefficients times the ratio of the standard deviations of cause and effect. "
        "Both can be compared across transformations and measures; rows admissible only. "
        f"{context.losses}"
    )
    return Table(
        NAME,
        f"Range of the effect across scales: {context.statement}.",
        _COLUMNS,
        rows,
        (notes,),
    )
