"""Every specification of a finding, one row each: the list behind all counts."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from .model import Column, Kind, Table, Target

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build", "row_of"]

NAME = "long list"
NEEDS = ("list_size",)
SHOWS = "every specification with all its numbers; as CSV of any length"

_DATA: tuple[Target, ...] = ("data",)
_PRINT: tuple[Target, ...] = ("page", "print")


def _kept(names: str, kind: Kind = "text") -> tuple[Column, ...]:
    """Return columns that only data files hold, named as the store names them."""
    return tuple(Column(name, kind, name, within=_DATA) for name in names.split())


_COLUMNS = (
    *_kept("specification origin request"),
    Column("Lags", name="lag_words", within=_PRINT),
    *_kept("lags_choice"),
    *_kept("lags", "count"),
    Column("Deterministic terms", name="deterministics"),
    Column("Window", name="window_name"),
    *_kept("window_entry"),
    *_kept("position", "count"),
    *_kept("window_start", "date"),
    Column("Last date", "date", "window_end"),
    Column("Transformation"),
    Column("Test"),
    Column("Conditioning"),
    Column("Measures"),
    Column("T", "count", "observations"),
    Column("Statistic", "fixed"),
    *_kept("df_num df_den", "count"),
    Column("p", "p", "p_value", starred=True),
    Column("Sum of coefficients", "number", "coefficient_sum"),
    *_kept("coefficient_sum_se signed_partial_r2 standardised_sum reverse_statistic", "number"),
    Column("Reverse p", "p", "reverse_p_value", starred=True),
    *_kept("reverse_coefficient_sum", "number"),
    *_kept("status reverse_status reason counted_as failed_screens survives other_sign verdict"),
    *_kept("weight", "number"),
    *_kept("is_baseline", "mark"),
    *_kept("computation", "count"),
    *_kept("solver"),
    Column("Finding", name="outcome", within=_PRINT),
)


def row_of(record: Mapping[str, Any]) -> tuple[Any, ...]:
    """Return the cells of one row of the store's long list."""
    order, choice = record["lags"], str(record["lags_choice"])
    words = choice if order is None or str(order) == choice else f"{order} ({choice})"
    outcome = str(record["counted_as"])
    if outcome == "admissible":
        outcome = "holds" if record["survives"] else "does not hold"
    cells = {**record, "lag_words": words, "outcome": outcome}
    return tuple(cells[column.field] for column in _COLUMNS)


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the table without its rows, which whoever can read the store puts in."""
    size = frames["list_size"]
    notes = (
        f"{context.lead} One row a specification, by window entry, transformation, deterministic "
        "terms, conditioning, measures, lags, test, and position in time. Lags: the order used, "
        "and in brackets the rule that chose it. Last date: of the window, before lags are taken; "
        f"T: rows of the regression. {context.losses}"
    )
    return Table(
        NAME,
        f"All specifications: {context.statement}.",
        _COLUMNS,
        (),
        (notes,),
        total=0 if size.empty else int(size["rows"].iloc[0]),
    )
