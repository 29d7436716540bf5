"""Lag orders of the baseline's system, with what each criterion says of them."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from sweep.charts.context import baseline_record
from sweep.verdicts.words import counted, level_text, missing

from .model import Column, Table

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "lag selection"
NEEDS = ("lag_selection", "baseline")
SHOWS = "every lag order of the baseline's system with the criteria; needs the data file"

_COLUMNS = (
    Column("Order", "count"),
    Column("Used at the baseline", "mark", "used"),
    Column("Log likelihood", "fixed", "log_likelihood"),
    Column("LR against one lag fewer", "fixed", "lr_statistic"),
    Column("Degrees of freedom", "count", "lr_df"),
    Column("p of LR", "p", "lr_p_value", starred=True),
    Column("FPE", "number", "fpe"),
    Column("AIC", "fixed", "aic"),
    Column("HQ", "fixed", "hq"),
    Column("BIC", "fixed", "bic"),
    Column("Chosen by", name="chosen_by"),
)


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return one line an order, from 1 to the largest that is compared."""
    baseline = baseline_record(frames["baseline"])
    used = None if missing(baseline["lags"]) else int(baseline["lags"])
    rows = []
    for record in frames["lag_selection"].to_dict("records"):
        record["used"] = record["order"] == used
        rows.append(tuple(record[column.field] for column in _COLUMNS))
    notes = [context.lead]
    if rows:
        notes.append(_sample(frames["lag_selection"].iloc[0].to_dict(), baseline, len(rows)))
    notes += [
        "LR compares an order with one lag fewer, on the chi-square law with the degrees of "
        "freedom shown; the sequential rule goes from the largest order down to the first that "
        "the test rejects at its level. FPE, AIC, HQ and BIC are smallest where they choose.",
        context.losses,
    ]
    return Table(
        NAME,
        f"Lag orders and what the criteria choose, for the baseline: {context.statement}.",
        _COLUMNS,
        tuple(rows),
        tuple(notes),
    )


def _sample(one: Mapping[Any, Any], baseline: Mapping[str, Any], shown: int) -> str:
    """Say which regressions the orders are compared in."""
    equations = counted(int(one["equations"]), "equation")
    lowered = ""
    if shown < int(one["asked"]):
        lowered = (
            f" Orders up to {int(one['asked'])} were meant; the window has observations for "
            f"{shown}."
        )
    whole = "the vector autoregression" if one["scope"] == "system" else "the effect's equation"
    return (
        f"Orders are compared in {whole} ({equations}) on one common sample of "
        f"{counted(int(one['observations']), 'row')}, {one['first']} to {one['last']}; "
        f"deterministic terms: {baseline['deterministics']}; transformation: "
        f"{baseline['transformation']}; window: {baseline['window_name']}. The sequential rule "
        f"tests at {level_text(float(one['level']))}.{lowered}"
    )
