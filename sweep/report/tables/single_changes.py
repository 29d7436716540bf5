"""One change at a time: every choice that differs from the baseline on one axis."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import TYPE_CHECKING

from sweep.charts.context import baseline_record
from sweep.verdicts.flips import TWO_WAY, turned_by
from sweep.verdicts.words import p_text, reason_text

from .model import Column, Table, pooled

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build", "one_way"]

NAME = "single changes"
NEEDS = ("single_changes", "baseline")
SHOWS = "what each choice does that differs from the baseline on one axis"

_COLUMNS = (
    Column("Axis"),
    Column("Choice"),
    Column("Rows", "count", "positions"),
    Column("Admissible", "count"),
    Column("Survived", "count"),
    Column("Turned", "count", "flips"),
    Column("Turned by", name="turned_by"),
    Column("p after", "p", "p_value", starred=True),
    Column("lowest p", "p", "p_low"),
    Column("highest p", "p", "p_high"),
    Column("Reverse p", "p", "reverse_p_value", starred=True),
    Column("Change in z", "number", "z_change"),
    Column("Change in reverse z", "number", "reverse_z_change", within=("page", "data")),
    Column("Sum of coefficients", "number", "coefficient_sum"),
    Column("Status"),
)


def one_way(column: Column, claim: str, changes: pd.DataFrame) -> Column:
    """Keep to data files what says nothing where a claim looks at one direction and has no sign.

    Parameters
    ----------
    column : Column
        A column of a table of changes.
    claim : str
        The claim's kind.
    changes : DataFrame
        The changes, with ``flips_sign``.
    """
    only = column.field == "reverse_z_change" or (
        column.field == "turned_by" and not (changes["flips_sign"].fillna(0) > 0).any()
    )
    return replace(column, within=("data",)) if only and claim not in TWO_WAY else column


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the single changes of one finding in plan order."""
    rows = []
    for record in frames["single_changes"].to_dict("records"):
        record.update(pooled(record, "p_value", "reverse_p_value"))
        record["turned_by"] = turned_by(record, context.claim)
        fields = (column.field for column in _COLUMNS[:-1])
        status = reason_text(record["status"], record["reason"])
        rows.append((*(record[field] for field in fields), status))
    baseline = baseline_record(frames["baseline"])
    reverse = f", reverse {p_text(baseline['reverse_p_value'])}"
    notes = (
        f"{context.lead} Baseline: p {p_text(baseline['p_value'])}"
        f"{reverse if context.claim in TWO_WAY else ''}. Turned: rows in which the "
        "finding holds where it does not at the baseline, or the other way round. For moving "
        "windows p, z and the sum are medians over the admissible positions, or over all that "
        "could be run where none is admissible. z is the inverse normal survival "
        "function of p, capped at 37; a change in z says how far the evidence moved, whether or "
        f"not the level was crossed. {context.losses}"
    )
    return Table(
        NAME,
        f"Single changes from the baseline: {context.statement}.",
        tuple(one_way(column, context.claim, frames["single_changes"]) for column in _COLUMNS),
        tuple(rows),
        (notes,),
        grouped=True,
    )
