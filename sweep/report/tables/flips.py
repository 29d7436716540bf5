"""All changes of one or two choices under which the finding turns."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from sweep.charts.context import baseline_record
from sweep.verdicts.flips import TWO_WAY, pair_sentence, step_words, turned_by
from sweep.verdicts.words import counted, number, p_text

from .model import Column, Table, Target, pooled
from .single_changes import one_way

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "flips"
NEEDS = ("flips", "flip_counts", "baseline")
SHOWS = "every change of one or two choices under which the finding turns"

_PAGE_ROWS = 50
_WORDS: tuple[Target, ...] = ("page", "print")
_DATA: tuple[Target, ...] = ("data",)
_COLUMNS = (
    Column("Changes", name="kind"),
    Column("What changes", name="changed", within=_WORDS),
    Column("First axis", within=_DATA),
    Column("First from", within=_DATA),
    Column("First to", within=_DATA),
    Column("Second axis", within=_DATA),
    Column("Second from", within=_DATA),
    Column("Second to", within=_DATA),
    Column("Positions that turn", name="turning", within=_WORDS),
    Column("Positions", "count", within=_DATA),
    Column("Admissible", "count", within=_DATA),
    Column("Survived", "count", within=_DATA),
    Column("Turned", "count", "flips", within=_DATA),
    Column("Turned jointly", "count", "joint", within=_DATA),
    Column("Turned with one alone", "count", "contained", within=_DATA),
    Column("Turned, unsettled", "count", "unsettled", within=_DATA),
    Column("Turned by", name="turned_by"),
    Column("p after", "p", "p_value", starred=True),
    Column("Lowest p", "p", "p_low", within=_DATA),
    Column("Highest p", "p", "p_high", within=_DATA),
    Column("Change in z", "number", "z_change"),
    Column("Reverse p", "p", "reverse_p_value", starred=True),
    Column("Change in reverse z", "number", "reverse_z_change", within=("page", "data")),
    Column("p after first alone", "p", "first_p_value"),
    Column("p after second alone", "p", "second_p_value"),
    Column("Turning windows from", "date", "window_start"),
    Column("to", "date", "window_end"),
    Column("Specification", within=_DATA),
)


def _counts(frame: pd.DataFrame, survives: Any, design: str) -> list[str]:
    """Say how many sets of changes were tried and how many turn, whatever is listed."""
    sentences = []
    for record in frame[frame["changes"] == 1].to_dict("records"):
        sentences.append(
            f"{int(record['turning']):,} of "
            f"{counted(int(record['admissible']), 'single change')} that could be judged turn the "
            f"finding ({int(record['flips']):,} of {counted(int(record['rows']), 'row')})."
        )
    sentence = pair_sentence(frame, survives, design)
    return [*sentences, sentence] if sentence else sentences


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return the flips of one finding, single changes first, then pairs by what they hold."""
    rows = []
    for record in frames["flips"].to_dict("records"):
        record["changed"] = "; ".join(
            words for words in (step_words(record, "first"), step_words(record, "second")) if words
        )
        record["turning"] = f"{int(record['flips']):,} of {int(record['admissible']):,}"
        if 0 < int(record["joint"]) < int(record["flips"]):
            record["turning"] += f" ({int(record['joint']):,} jointly)"
        record.update(pooled(record, "p_value", "reverse_p_value"))
        record["turned_by"] = turned_by(record, context.claim)
        rows.append(tuple(record[column.field] for column in _COLUMNS))
    baseline = baseline_record(frames["baseline"])
    total = int(frames["flip_counts"]["turning"].sum())
    notes = [context.lead, *_counts(frames["flip_counts"], baseline["survives"], context.design)]
    if len(rows) < total:
        notes.append(f"Listed are {len(rows):,} of {total:,} sets of changes, the first of each.")
    reverse = f", reverse {p_text(baseline['reverse_p_value'])}"
    notes.append(
        f"Baseline: p {p_text(baseline['p_value'])}"
        f"{reverse if context.claim in TWO_WAY else ''}. The positions of a moving window are one "
        "row: p-values and changes in z are medians over those that are admissible, and the dates "
        "run from the first to the last window that turns. z is the inverse normal survival "
        f"function of p, capped at {number(37)}. One turns alone: the finding turns after one of "
        "the two changes by itself already; jointly: neither does, and both could be judged. A "
        "moving window stands with the first if a position of it does. "
        f"{context.losses} How many flips a stable effect would show is not calibrated."
    )
    return Table(
        NAME,
        f"Changes of one or two choices that turn the finding: {context.statement}.",
        tuple(one_way(column, context.claim, frames["flips"]) for column in _COLUMNS),
        tuple(rows),
        tuple(notes),
        grouped=True,
        page_rows=_PAGE_ROWS,
    )
