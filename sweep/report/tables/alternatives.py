"""The baseline beside each choice that differs from it on one axis, both directions in full."""

from __future__ import annotations

import json
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from sweep.charts.context import baseline_record
from sweep.verdicts.words import missing, reason_text

from .model import Column, Table, Target, pooled

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "baseline and alternatives"
NEEDS = ("alternatives", "baseline")
SHOWS = "the baseline beside each single change, both directions with all their numbers"

_WORDS: tuple[Target, ...] = ("page", "print")
_DATA: tuple[Target, ...] = ("data",)
_COLUMNS = (
    Column("Hypothesis"),
    Column("Direction", within=_DATA),
    Column("Axis", within=_DATA),
    Column("Change", within=_WORDS),
    Column("Lags", "figure", "lags", within=_WORDS),
    Column("Lag choice", name="lags_choice", within=_DATA),
    Column("Lowest order", "count", "order_least", within=_DATA),
    Column("Highest order", "count", "order_most", within=_DATA),
    Column("Kind of statistic", name="statistic_kind", within=_DATA),
    Column("Statistic", "fixed"),
    Column("Law", within=_WORDS),
    Column("Restrictions", "count", "df_num", within=_DATA),
    Column("Degrees of freedom", "count", "df_den", within=_DATA),
    Column("p", "p", "p_value", starred=True),
    Column("Sum of coefficients", "number", "coefficient_sum"),
    Column("Standard error", "number", "coefficient_sum_se"),
    Column("T", "figure", "observations", within=_WORDS),
    Column("Fewest observations", "count", "observations_least", within=_DATA),
    Column("Most observations", "count", "observations_most", within=_DATA),
    Column("Sample", within=_WORDS),
    Column("Window", name="window_name", within=_DATA),
    Column("Window from", "date", "window_start", within=_DATA),
    Column("Window to", "date", "window_end", within=_DATA),
    Column("Deterministic terms", name="deterministics"),
    Column("Transformation"),
    Column("Covariance"),
    Column("Test", within=_DATA),
    Column("Conditioning", within=_DATA),
    Column("Measures", within=_DATA),
    Column("Finding", name="outcome", within=_WORDS),
    Column("Positions", "count", within=_DATA),
    Column("Admissible", "count", within=_DATA),
    Column("Survived", "count", within=_DATA),
    Column("Turned", "count", "flips", within=_DATA),
    Column("Status", within=_DATA),
    Column("Reason", within=_DATA),
    Column("Specification", within=_DATA),
)
_AXES = {
    "lags": "lags_choice", "deterministics": "deterministics", "window": "window_name",
    "transformation": "transformation", "test": "test", "conditioning": "conditioning",
    "measures": "measures",
}  # fmt: skip


def _between(least: Any, most: Any) -> str:
    """Write a number that may differ over the positions of a moving window."""
    if missing(least):
        return ""
    return f"{int(least):,}" if least == most else f"{int(least):,}–{int(most):,}"


def _lags(record: Mapping[Any, Any]) -> str:
    """Write the order used and, where it says more, the choice that gave it."""
    order, choice = _between(record["order_least"], record["order_most"]), record["lags_choice"]
    if not order:
        return str(choice)
    return order if order == choice else f"{order} ({choice})"


def _law(record: Mapping[Any, Any]) -> str:
    if missing(record["df_num"]):
        return ""
    if missing(record["df_den"]):
        return f"χ²({int(record['df_num'])})"
    return f"F({int(record['df_num'])}, {int(record['df_den'])})"


def _outcome(record: Mapping[Any, Any]) -> str:
    rows, kept = int(record["admissible"]), int(record["survived"])
    if not rows:
        return reason_text(record["status"], record["reason"])
    if int(record["positions"]) > 1:
        return f"holds in {kept:,} of {rows:,}"
    return "holds" if kept else "does not hold"


def _shared(record: Mapping[Any, Any], context: Context) -> dict[str, Any]:
    """Return what both directions of a specification have in common."""
    axis = str(record["axis"])
    meaning = json.loads(record["test_meaning"])
    dates = f"{context.period(record['window_start'])} to {context.period(record['window_end'])}"
    return {
        "change": "baseline" if axis == "baseline" else f"{axis}: {record[_AXES[axis]]}",
        "lags": _lags(record),
        "law": _law(record),
        "statistic_kind": meaning["statistic"],
        "covariance": meaning.get("covariance", "classical"),
        "observations": _between(record["observations_least"], record["observations_most"]),
        "sample": f"{record['window_name']}, {dates}",
        "outcome": _outcome(record),
    }


def _side(record: Mapping[Any, Any], direction: str) -> dict[str, Any]:
    """Return the numbers of one direction; medians carry no stars."""
    start = "reverse_" if direction == "reverse" else ""
    name = f"{start}p_value"
    return {
        "statistic": record[f"{start}statistic"],
        "p_value": pooled(record, name).get(name, record[name]),
        "coefficient_sum": record[f"{start}coefficient_sum"],
        # The store keeps the standard error of the sum of cause to effect alone.
        "coefficient_sum_se": None if start else record["coefficient_sum_se"],
    }


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return two parts, cause to effect and the reverse, the baseline first in each."""
    baseline = baseline_record(frames["baseline"])
    cause, effect = baseline["cause"] or "the cause", baseline["effect"] or "the effect"
    sides = (("cause to effect", cause, effect), ("reverse", effect, cause))
    rows = []
    for direction, source, target in sides:
        hypothesis = (
            f"Hypothesis: the coefficients of all lags of {source} are zero in the equation of "
            f"{target}"
        )
        for record in frames["alternatives"].to_dict("records"):
            cells = {str(name): value for name, value in record.items()}
            cells |= {"hypothesis": hypothesis, "direction": direction}
            cells |= _shared(record, context) | _side(record, direction)
            rows.append(tuple(cells[column.field] for column in _COLUMNS))
    notes = [
        f"{context.lead} Each row changes one choice of the baseline and keeps all others. Lags: "
        "the order used, and in brackets the rule that chose it. The statistic is the one of the "
        "specification's test, on the law named beside it. T: rows of the regression. Sample: "
        "window, its first and last observation before lags are taken. For moving windows p and "
        "the sum are medians over the admissible positions, or over all that could be run where "
        "none is admissible; what has no median is left out. The standard error "
        f"is kept for cause to effect alone. {context.losses}"
    ]
    return Table(
        NAME,
        f"The baseline and its single alternatives: {context.statement}.",
        _COLUMNS,
        tuple(rows),
        tuple(notes),
        grouped=True,
    )
