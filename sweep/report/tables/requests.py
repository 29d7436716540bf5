"""The baseline beside the answer to each request."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from sweep.charts.context import baseline_record
from sweep.verdicts.answers import request_name
from sweep.verdicts.words import counted, missing, reason_text

from .model import Column, Table, pooled

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "requests"
NEEDS = ("requests", "answers", "baseline")
SHOWS = "the baseline beside the answer to each request"

_COLUMNS = (
    Column("Request"),
    Column("Changed"),
    Column("Row"),
    Column("Rows", "count", "positions"),
    Column("Survived", "count"),
    Column("Lags used", "count", "order_used"),
    Column("Statistic", "number"),
    Column("p", "p", "p_value", starred=True),
    Column("Reverse p", "p", "reverse_p_value", starred=True),
    Column("Sum of coefficients", "number", "coefficient_sum"),
    Column("Standard error", "number", "coefficient_sum_se"),
    Column("Observations", "count"),
    Column("Finding"),
)


def _outcome(row: Any) -> str:
    if not int(row["admissible"]):
        return reason_text(row["status"], row["reason"])
    if int(row["positions"]) > 1:
        return f"holds in {int(row['survived']):,} of {int(row['admissible']):,}"
    return "holds" if int(row["survived"]) else "does not hold"


def _baseline(record: Mapping[str, Any]) -> tuple[Any, ...]:
    survives = record["survives"]
    said = reason_text(record["status"], record["reason"])
    if not missing(survives):
        said = "holds" if survives else "does not hold"
    if not missing(record["failed_screens"]) and record["failed_screens"]:
        said = f"screened out ({record['failed_screens']})"
    names = ("lags", "statistic", "p_value", "reverse_p_value", "coefficient_sum",
             "coefficient_sum_se", "observations")  # fmt: skip
    kept = None if missing(survives) else int(bool(survives))
    return ("baseline", "", "planned", 1, kept, *(record[name] for name in names), said)


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the baseline and, request by request, what its choices give instead."""
    rows = [_baseline(baseline_record(frames["baseline"]))]
    for record in frames["answers"].to_dict("records"):
        record.update(pooled(record, "p_value", "reverse_p_value"))
        origin = "planned" if record["planned"] else "added"
        numbers = (record[column.field] for column in _COLUMNS[3:-1])
        rows.append(
            (request_name(record), record["changed"], origin, *numbers, _outcome(record))
        )
    asked = [
        f"{request_name(record)}: “{record['asks']}”"
        for record in frames["requests"].to_dict("records")
        if record["concerned"] and record["asks"]
    ]
    added = [
        f"{request_name(record)} added {counted(int(record['added']), 'row')}, "
        f"{int(record['survived']):,} of {int(record['admissible']):,} admissible ones survive"
        for record in frames["requests"].to_dict("records")
        if record["concerned"]
    ]
    notes = [
        f"{context.lead} Each row is the baseline with the named choices put in, all others kept. "
        "For moving windows p and the sum are medians over the admissible positions, or over all "
        "that could be run where none is admissible. Rows that a request added "
        f"do not count in the headline share. {context.losses}"
    ]
    notes += [f"{'; '.join(part)}." for part in (added,) if part]
    notes += asked
    return Table(
        NAME,
        f"Answers to requests beside the baseline: {context.statement}.",
        _COLUMNS,
        tuple(rows),
        tuple(notes),
        grouped=True,
    )
