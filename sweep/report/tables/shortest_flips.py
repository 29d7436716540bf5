"""Shortest paths to a flip: the fewest changed choices under which the finding turns."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from sweep.verdicts.words import counted

from .model import Column, Table

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "build"]

NAME = "shortest flips"
NEEDS = ("shortest_flips", "flip_distances")

_COLUMNS = (
    Column("Changes", "count"),
    Column("What changes", name="changed"),
    Column("p after", "p", "p_value"),
    Column("Window from", "date", "window_start"),
    Column("to", "date", "window_end"),
    Column("Specification"),
)


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the nearest specifications under which the finding turns."""
    frame = frames["shortest_flips"]
    rows = tuple(
        tuple(record[column.field] for column in _COLUMNS) for record in frame.to_dict("records")
    )
    by_distance = "; ".join(
        f"{counted(int(record['changes']), 'change')}: {int(record['flips']):,} of "
        f"{counted(int(record['rows']), 'admissible row')}"
        for record in frames["flip_distances"].to_dict("records")
        if int(record["changes"])
    )
    notes = [f"{context.lead} At most {len(rows):,} are listed, nearest first."]
    if by_distance:
        notes.append(f"Rows that turn, by changes from the baseline: {by_distance}.")
    return Table(
        NAME,
        f"Shortest paths to a flip: {context.statement}.",
        _COLUMNS,
        rows,
        tuple(notes),
    )
