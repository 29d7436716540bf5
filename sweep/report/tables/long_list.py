"""Every specification of a finding, one row each: the list behind all counts."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from operator import itemgetter
from typing import TYPE_CHECKING, Any

from .model import Column, Kind, Table, Target

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build", "reader"]

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


def reader(names: Sequence[str]) -> Callable[[tuple[Any, ...]], tuple[Any, ...]]:
    """Return the function that turns a row of the store's long list into the table's cells.

    Parameters
    ----------
    names : sequence of str
        Columns of the store's rows, in order.
    """
    place = {name: number for number, name in enumerate(names)}
    order, choice = place["lags"], place["lags_choice"]
    counted, survives = place["counted_as"], place["survives"]
    # Words that print makes of several columns stand behind the row's own.
    place |= {"lag_words": len(names), "outcome": len(names) + 1}
    pick = itemgetter(*(place[column.field] for column in _COLUMNS))

    def cells(row: tuple[Any, ...]) -> tuple[Any, ...]:
        used, label = row[order], row[choice]
        words = label if used is None or str(used) == label else f"{used} ({label})"
        outcome = row[counted]
        if outcome == "admissible":
            outcome = "holds" if row[survives] else "does not hold"
        picked: tuple[Any, ...] = pick((*row, words, outcome))
        return picked

    return cells


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
