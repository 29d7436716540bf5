"""Shortest paths to a flip: the fewest changed choices under which the finding turns."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from sweep.verdicts.words import counted

from .model import Column, Table, pooled

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "shortest flips"
NEEDS = ("shortest_flips", "flip_distances")
SHOWS = "the fewest changed choices under which the finding turns"

_COLUMNS = (
    Column("Changes", "count"),
    Column("What changes", name="changed"),
    Column("Positions that turn", name="turning", within=("page", "print")),
    Column("Positions", "count", within=("data",)),
    Column("Admissible", "count", within=("data",)),
    Column("Turned", "count", "flips", within=("data",)),
    Column("p after", "p", "p_value", starred=True),
    Column("Reverse p", "p", "reverse_p_value", starred=True),
    Column("Turning windows from", "date", "window_start"),
    Column("to", "date", "window_end"),
    Column("Specification", within=("data",)),
)


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the nearest sets of changed choices under which the finding turns."""
    rows = []
    for record in frames["shortest_flips"].to_dict("records"):
        record["turning"] = f"{int(record['flips']):,} of {int(record['admissible']):,}"
        record.update(pooled(record, "p_value", "reverse_p_value"))
        rows.append(tuple(record[column.field] for column in _COLUMNS))
    by_distance = "; ".join(
        f"{counted(int(record['changes']), 'change')}: {int(record['turning']):,} of "
        f"{counted(int(record['sets']), 'set')} of changes ({int(record['flips']):,} of "
        f"{counted(int(record['rows']), 'row')})"
        for record in frames["flip_distances"].to_dict("records")
    )
    notes = [
        f"{context.lead} At most {len(rows):,} are listed, nearest first, then what turns in the "
        "larger part of its positions, then the p-value nearest to the baseline's. The positions "
        "of a moving window are one row: p is the median of those that are admissible, and the "
        "dates run from the first to the last window that turns."
    ]
    if by_distance:
        notes.append(f"What turns, by changes from the baseline: {by_distance}.")
    notes.append(context.losses)
    return Table(
        NAME,
        f"Shortest paths to a flip: {context.statement}.",
        _COLUMNS,
        tuple(rows),
        tuple(notes),
    )
