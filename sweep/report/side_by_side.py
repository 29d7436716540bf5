"""Tables that set two sweeps, or the moving windows of one, side by side."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from .tables.model import Column, Table

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["changed_table", "data_table", "pairs_table", "survival_table", "verdicts_table"]

# Specifications in the page's table; the rest is in the data file.
SHOWN = 40


def _rows(frame: pd.DataFrame, columns: tuple[Column, ...]) -> tuple[tuple[Any, ...], ...]:
    fields = [column.field for column in columns]
    return tuple(tuple(row[field] for field in fields) for row in frame.to_dict("records"))


def survival_table(frame: pd.DataFrame, names: tuple[str, str], finding: str) -> Table:
    """Return survival by choice in both sweeps."""
    first, second = names
    columns = (
        Column("Axis"), Column("Choice"),
        Column(f"Survived, {first}", "count", "my_survived"),
        Column(f"Admissible, {first}", "count", "my_admissible"),
        Column(f"Weighted share, {first}", "share", "my_share"),
        Column(f"Survived, {second}", "count", "their_survived"),
        Column(f"Admissible, {second}", "count", "their_admissible"),
        Column(f"Weighted share, {second}", "share", "their_share"),
    )  # fmt: skip
    notes = (
        "All planned rows of each sweep count, whether the other has them or not. Choices are "
        "matched by what they mean; a choice that only one sweep has leaves the other's cells "
        "empty."
    )
    return Table("survival", f"Survival side by side: {finding}.", columns, _rows(frame, columns),
                 (notes,), grouped=True)  # fmt: skip


def verdicts_table(frame: pd.DataFrame, names: tuple[str, str], finding: str) -> Table:
    """Return how many rows have each pair of verdicts."""
    columns = (
        Column(f"Verdict, {names[0]}", "text", "my_verdict"),
        Column(f"Verdict, {names[1]}", "text", "their_verdict"),
        Column("Rows", "count"),
    )
    notes = "Rows admissible in both. Verdicts say which directions are significant, signs aside."
    return Table("verdicts", f"Direction verdicts side by side: {finding}.", columns,
                 _rows(frame, columns), (notes,))  # fmt: skip


def changed_table(
    frame: pd.DataFrame, names: tuple[str, str], finding: str, total: int
) -> Table:
    """Return the specifications whose answer differs, the largest move of p first."""
    first, second = names
    columns = (
        Column("Lags"), Column("Deterministics"), Column("Window"),
        Column("Last date", "date", "window_end"), Column("Transformation"), Column("Test"),
        Column("Conditioning"), Column("Measures"),
        Column(f"p, {first}", "p", "my_p"), Column(f"p, {second}", "p", "their_p"),
        Column(f"Verdict, {first}", "text", "my_verdict"),
        Column(f"Verdict, {second}", "text", "their_verdict"),
    )  # fmt: skip
    shown = frame.head(SHOWN)
    left = f" {total - len(shown):,} more are not shown." if total > len(shown) else ""
    notes = f"{total:,} specifications answer differently; the largest moves of p come first.{left}"
    return Table("changed", f"Specifications that answer differently: {finding}.", columns,
                 _rows(shown, columns), (notes,))  # fmt: skip


def data_table(frame: pd.DataFrame, names: tuple[str, str]) -> Table:
    """Return the dates at which the data of two sweeps differ."""
    columns = (
        Column("Series"), Column("Date"),
        Column(names[0], "number", "mine"), Column(names[1], "number", "theirs"),
        Column("Difference", "number"),
    )  # fmt: skip
    shown = frame.head(SHOWN)
    left = f" {len(frame) - len(shown):,} more are not shown." if len(frame) > len(shown) else ""
    notes = f"{len(frame):,} values differ or are in one of the two only.{left}"
    return Table("data", "Data that differ.", columns, _rows(shown, columns), (notes,),
                 grouped=True)  # fmt: skip


def pairs_table(frame: pd.DataFrame, finding: str) -> Table:
    """Return how often two moving windows agree at the same last date."""
    columns = (
        Column("First window", "text", "first_window"), Column("Second window", "text",
                                                              "second_window"),
        Column("Shared", "count"), Column("Both survive", "count"),
        Column("First only", "count", "only_first"), Column("Second only", "count", "only_second"),
        Column("Neither", "count"), Column("From", "date", "first_end"),
        Column("To", "date", "last_end"),
    )  # fmt: skip
    notes = "Admissible rows with the same last date and the same choices on all other axes."
    return Table("windows", f"Moving windows side by side: {finding}.", columns,
                 _rows(frame, columns), (notes,))  # fmt: skip
