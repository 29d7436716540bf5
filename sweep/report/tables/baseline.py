"""The baseline: what it is and what it gives, beside the printed numbers."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from sweep.charts.context import baseline_record
from sweep.verdicts.words import fixed, missing, number, p_text, reason_text

from .model import Column, Table

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "baseline"
NEEDS = ("baseline",)
SHOWS = "the baseline specification and its numbers"


def _law(row: Mapping[str, Any]) -> str:
    """Write the reference law, e.g. ``F(4, 342)`` or ``χ²(4)``."""
    if missing(row["df_num"]):
        return ""
    if missing(row["df_den"]):
        return f"χ²({int(row['df_num'])})"
    return f"F({int(row['df_num'])}, {int(row['df_den'])})"


def _window(row: Mapping[str, Any], context: Context) -> str:
    dates = f"{context.period(row['window_start'])} to {context.period(row['window_end'])}"
    return f"{row['window_name']} ({dates})"


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the baseline's choices and numbers, one a line."""
    row = baseline_record(frames["baseline"])
    order = "" if missing(row["lags"]) else f" (order used: {int(row['lags'])})"
    ok = row["status"] == "ok"
    holds = "not admissible" if missing(row["survives"]) else "yes" if row["survives"] else "no"
    lines = [
        ("Lags", f"{row['lags_choice']}{order}"),
        ("Deterministic terms", row["deterministics"]),
        ("Window, before lags are taken", _window(row, context)),
        ("Transformation", row["transformation"]),
        ("Test", row["test"]),
        ("Conditioning", row["conditioning"]),
        ("Measures", row["measures"]),
        ("Rows in the regression", "" if missing(row["observations"]) else row["observations"]),
        ("Statistic, cause to effect", fixed(row["statistic"], 4)),
        ("Reference law", _law(row)),
        ("p-value, cause to effect", p_text(row["p_value"])),
        ("Sum of the tested coefficients", number(row["coefficient_sum"], 4)),
        ("Its standard error", number(row["coefficient_sum_se"], 4)),
        ("Signed partial R²", number(row["signed_partial_r2"])),
        ("Standardised sum", number(row["standardised_sum"])),
        ("Statistic, reverse", fixed(row["reverse_statistic"], 4)),
        ("p-value, reverse", p_text(row["reverse_p_value"])),
        ("Status", row["status"] if ok else reason_text(row["status"], row["reason"])),
        ("Failed screens", row["failed_screens"] or "none"),
        ("Finding holds", holds),
        ("Verdict, signs aside", row["verdict"]),
        ("Specification", row["specification"]),
    ]
    return Table(
        NAME,
        f"The baseline specification: {context.statement}.",
        (Column("Item"), Column("Value")),
        tuple((label, "" if missing(value) else str(value)) for label, value in lines),
        (
            f"{context.lead} Rows, statistic and order are those of this specification alone. "
            f"{context.losses}",
        ),
    )
