"""Flips counted by enumeration: every choice of one or two axes, position by position.

Starts from the rows that :mod:`plain_twin` judged in words; shares nothing with the SQL.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import combinations, product
from typing import Any

import pandas as pd

from store.schema import AXES

Row = dict[str, Any]


@dataclass
class Flipping:
    """One set of changed choices and what its rows do."""

    changed: dict[str, int]
    rows: list[Row]
    alone: list[list[Row]] = field(default_factory=list)


class Neighbourhood:
    """All planned rows of one finding by their codes and position."""

    def __init__(self, judged: pd.DataFrame) -> None:
        self.rows = {
            (*(row[axis] for axis in AXES), row["position"]): row
            for row in judged.to_dict("records")
        }
        own = judged[judged["is_baseline"]].sort_values("position")
        self.home = own.iloc[-1].to_dict()
        self.codes = {axis: sorted(judged[axis].unique()) for axis in AXES}

    def sets(self, size: int) -> Iterator[Flipping]:
        """Yield every set of changed choices on a number of axes that has a row."""
        for axes in combinations(AXES, size):
            others = [[c for c in self.codes[a] if c != self.home[a]] for a in axes]
            for codes in product(*others):
                changed = dict(zip(axes, codes, strict=True))
                rows = self.at(changed)
                if rows:
                    yield Flipping(changed, rows, [
                        [self.at({a: c}, row["position"])[:1] for a, c in changed.items()]
                        for row in rows
                    ] if size == 2 else [])  # fmt: skip

    def at(self, changed: dict[str, int], position: int | None = None) -> list[Row]:
        """Return the rows with these choices and all others as in the baseline."""
        codes = tuple(changed.get(axis, self.home[axis]) for axis in AXES)
        if "window" not in changed:
            position = self.home["position"]
        if position is not None:
            found = self.rows.get((*codes, position))
            return [] if found is None else [found]
        return [row for key, row in self.rows.items() if key[:-1] == codes]

    def turns(self, row: Row) -> bool:
        """Say whether an admissible row answers otherwise than an admissible baseline."""
        return bool(
            self.home["admissible"]
            and row["admissible"]
            and row["survives"] != self.home["survives"]
        )

    def kinds(self, found: Flipping) -> dict[str, int]:
        """Count the turning rows of a pair by what its two changes do alone."""
        counts = {"joint": 0, "contained": 0, "unsettled": 0}
        for row, alone in zip(found.rows, found.alone, strict=True):
            if not self.turns(row):
                continue
            singles = [one[0] for one in alone if one]
            if any(self.turns(single) for single in singles):
                counts["contained"] += 1
            elif len(singles) == 2 and all(single["admissible"] for single in singles):
                counts["joint"] += 1
            else:
                counts["unsettled"] += 1
        return counts
