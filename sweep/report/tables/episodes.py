"""Episodes in which a finding holds, for each moving window."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from sweep.verdicts.rolling import episodes

from .model import Column, Table

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "episodes"
NEEDS = ("window_paths",)
SHOWS = "when the finding holds under each moving window"

_COLUMNS = (
    Column("Window", "text", "window_name"),
    Column("What counts", "text", "basis"),
    Column("Windows ending from", "date", "first_end"),
    Column("to", "date", "last_end"),
    Column("Positions", "count"),
    Column("Start of first window", "date", "first_start"),
    Column("lowest p", "p", "lowest_p"),
    Column("highest p", "p", "highest_p"),
    Column("Still open", "text", "open_end"),
)


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the episodes in which the finding holds, in order of window and time."""
    runs = episodes(frames["window_paths"])
    held = runs[runs["state"] == "holds"]
    rows = [
        tuple(
            ("yes" if row["open_end"] else "no") if column.name == "open_end" else row[column.field]
            for column in _COLUMNS
        )
        for row in held.to_dict("records")
    ]
    notes = (
        f"{context.lead} An episode is a run of neighbouring window positions in which the "
        "finding holds; its dates are the last dates of its first and last window. Baseline's "
        "other choices: the specification that differs from the baseline in its window only. At "
        "least half of the rows: of all admissible specifications with that window; p-values are "
        "then medians. Still open: the episode reaches the last window. Neighbouring windows "
        "share most of their data, so an episode is not as many pieces of evidence as it has "
        f"positions. {context.losses}",
    )
    return Table(
        NAME,
        f"Episodes in which the finding holds: {context.statement}.",
        _COLUMNS,
        tuple(rows),
        notes,
        grouped=True,
    )
