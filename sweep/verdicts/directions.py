"""Which way the link runs in each specification, signs aside."""

from __future__ import annotations

from typing import TYPE_CHECKING

from .words import counted, joined, percent

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["VERDICTS", "WORDS", "sentence", "totals"]

# In the order in which they are always listed.
VERDICTS = ("one way", "reverse", "both ways", "neither rejected", "undetermined")

WORDS = {
    "one way": "only cause to effect is significant",
    "reverse": "only effect to cause is significant",
    "both ways": "both directions are significant",
    "neither rejected": "neither direction is significant",
    "undetermined": "a direction could not be estimated",
}


def totals(directions: pd.DataFrame) -> dict[str, int]:
    """Return rows by verdict, each specification counted once.

    Parameters
    ----------
    directions : DataFrame
        Columns axis, choice, verdict, rows.  The rows of axis ``all`` are used where there
        are any; otherwise those of the first axis, since every axis sums to the same rows.
    """
    counts = dict.fromkeys(VERDICTS, 0)
    if directions.empty:
        return counts
    axis = "all" if (directions["axis"] == "all").any() else directions["axis"].iloc[0]
    rows = directions[directions["axis"] == axis]
    for verdict, count in zip(rows["verdict"], rows["rows"], strict=True):
        counts[str(verdict)] = counts.get(str(verdict), 0) + int(count)
    return counts


def sentence(directions: pd.DataFrame) -> str:
    """Put the verdicts of all specifications into one sentence, with counts."""
    counts = totals(directions)
    total = sum(counts.values())
    if not total:
        return "No specification could be given a direction."
    parts = [
        f"{WORDS.get(verdict, verdict)} in {count:,} ({percent(count / total)})"
        for verdict, count in counts.items()
        if count
    ]
    text = f"Of {counted(total, 'row')}: {joined(parts)}."
    if counts["neither rejected"]:
        text += " Failing to reject both ways is not evidence of independence."
    return text
