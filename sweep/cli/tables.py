"""Survival counts as text for a terminal."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import pandas as pd

    from sweep.results import Results

__all__ = ["survival_rows"]

COLUMNS = ("choice", "survived", "of admissible", "weighted", "at 1%", "at 10%", "left out")


def survival_rows(results: Results, frame: pd.DataFrame) -> Iterator[str]:
    """Yield lines: for each finding and axis, one a choice, counts beside every share."""
    from sweep.verdicts.words import percent

    names = dict(zip(results.findings["finding"], results.findings["name"], strict=True))
    for (finding, axis), part in frame.groupby(["finding", "axis"], sort=False):
        yield f"\n{names.get(finding, finding)}, by {axis}"
        rows = [
            (
                f"{row['choice']}{' (baseline)' if row['is_baseline'] and axis != 'all' else ''}",
                f"{row['survived']:,}",
                f"{row['admissible']:,}",
                percent(row["headline_share"]),
                percent(row["share_at_1"]),
                percent(row["share_at_10"]),
                f"{row['planned'] - row['admissible']:,}",
            )
            for row in part.to_dict("records")
        ]
        width = [max(len(r[j]) for r in [COLUMNS, *rows]) for j in range(len(COLUMNS))]
        for row in [COLUMNS, *rows]:
            cells = [row[0].ljust(width[0]), *(c.rjust(w) for c, w in zip(row[1:], width[1:],
                                                                        strict=True))]  # fmt: skip
            yield "  " + "  ".join(cells)
