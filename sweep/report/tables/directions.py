"""Which way the link runs, by axis and choice, signs aside."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from sweep.verdicts.directions import VERDICTS
from sweep.verdicts.survival import OVERALL

from .model import Column, Table

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["NAME", "NEEDS", "SHOWS", "build"]

NAME = "directions"
NEEDS = ("directions",)
SHOWS = "which way each specification points, by choice"


def build(frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
    """Return rows by verdict, one line a choice, in a fixed order of verdicts."""
    counts: dict[tuple[str, str], dict[str, int]] = {}
    for record in frames["directions"].to_dict("records"):
        place = (str(record["axis"]), str(record["choice"]))
        if record["axis"] == OVERALL:
            place = ("overall", "all choices")
        own = counts.setdefault(place, {})
        own[str(record["verdict"])] = int(record["rows"])
    rows: list[tuple[Any, ...]] = []
    for (axis, choice), own in counts.items():
        every = [own.get(verdict, 0) for verdict in VERDICTS]
        total = sum(every)
        rows.append((axis, choice, total, *every, every[0] / total if total else None))
    notes = (
        f"{context.lead} Admissible rows. One way: cause to effect is "
        "significant and the reverse is not. "
        "Neither rejected is not evidence of independence. Undetermined: a direction could not "
        f"be estimated. {context.losses}"
    )
    columns = (
        Column("Axis"),
        Column("Choice"),
        Column("Rows", "count"),
        *(Column(verdict.capitalize(), "count") for verdict in VERDICTS),
        Column("Share one way", "share"),
    )
    return Table(
        NAME,
        f"Direction verdicts by choice, signs aside: {context.statement}.",
        columns,
        tuple(rows),
        (notes,),
        grouped=True,
    )
