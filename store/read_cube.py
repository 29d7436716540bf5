"""The cube: counts by combination of choices, from which any selection of them can be counted.

A full cross of the axes is used where it is small enough.  Otherwise smaller crosses stand
in for it: one for every set of n axes, n being the largest number with which all of them
together stay within the bound.  A selection on some axes, and its split by one more, can then
be counted exactly as long as one of the crosses holds all these axes.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Mapping, Sequence
from typing import Any

import pandas as pd

from store.database import Database
from store.schema import AXES, query

__all__ = ["CUBE_CELLS", "WINDOW_CELLS", "cube", "cube_windows"]

# Most rows of all findings of a sweep together, in the cube and in its part over time: what a
# page of about a megabyte can hold, whatever the size of the sweep.
CUBE_CELLS = 20_000
WINDOW_CELLS = 60_000

# Most positions of all window entries of a finding: more cannot be told apart on a screen.
_POSITIONS = 400

# Larger crosses are not used: the place of a cell in one must be a whole number that every
# reader of JSON holds exactly, also when it is multiplied by the positions (2**53).
_LARGEST_CROSS = 2**40


def cube(db: Database, sweep: int, finding: int, cells: int | None = None) -> pd.DataFrame:
    """Return counts of planned rows by combination of choices.

    Parameters
    ----------
    db : Database
        An open store.
    sweep, finding : int
        Numbers of the sweep and the finding.
    cells : int, optional
        Most rows to return; where not given, ``CUBE_CELLS`` shared among the findings.

    Returns
    -------
    pandas.DataFrame
        One row a cell: for each axis the choice's place in plan order (-1 where the cell sums
        over the axis, as it does for axes of one choice), ``weight`` of each of its rows, and
        counts of rows: ``planned, not_applicable, infeasible, failed, screened_out, admissible,
        undetermined``, and ``survived, other_sign, one_way, reverse, both_ways`` at the plan's
        level and, ending in ``_1``, ``_5`` and ``_10``, at 1%, 5% and 10%.  Cells that sum over
        the same axes are a cross that holds every planned row once.  Empty where not even the
        crosses of two axes are within the bound.
    """
    rows, choices = _extent(db, sweep, finding)
    weights = _distinct_weights(db, sweep, finding)

    def size(axes: Sequence[str]) -> int:
        kinds = math.prod(count for axis, count in weights.items() if axis not in axes)
        return min(_cross(choices, axes) * kinds, rows)

    fewest = min(2, len(choices))
    sets = _sets(choices, size, _bound(db, sweep, CUBE_CELLS, cells), fewest)
    return _counted(db, "cube", sets, ("weight",), {"sweep": sweep, "finding": finding})


def cube_windows(db: Database, sweep: int, finding: int, cells: int | None = None) -> pd.DataFrame:
    """Return survival over the positions of the window entries, by combination of choices.

    Parameters
    ----------
    db : Database
        An open store.
    sweep, finding : int
        Numbers of the sweep and the finding.
    cells : int, optional
        Most rows to return; where not given, ``WINDOW_CELLS`` shared among the findings.

    Returns
    -------
    pandas.DataFrame
        ``window`` (place of the entry in plan order), ``entry_kind``, ``pool`` (number of the
        group of ``pooled`` neighbouring positions), ``window_start, window_end`` (first start
        and last end in the group), for each other axis the choice's place (-1 where summed
        over), ``admissible, survived`` and ``survived_1, survived_5, survived_10``.  Empty where
        the window entries alone are more than the bound.
    """
    bound = _bound(db, sweep, WINDOW_CELLS, cells)
    lengths = db.frame(
        "SELECT max(position) - min(position) + 1 AS positions FROM window_position "
        'WHERE sweep = ? AND finding = ? GROUP BY "window"',
        [sweep, finding],
    )["positions"]
    pooled = 1
    while (-(-lengths // pooled)).sum() > max(min(_POSITIONS, bound), len(lengths)):
        pooled += 1
    positions = int((-(-lengths // pooled)).sum())
    rows, choices = _extent(db, sweep, finding)
    others = {axis: count for axis, count in choices.items() if axis != "window"}
    sets = _sets(others, lambda axes: min(positions * _cross(others, axes), rows), bound, 0)
    params = {"sweep": sweep, "finding": finding, "pooled": pooled}
    return _counted(db, "cube_windows", sets, ("window", "pool"), params)


def _extent(db: Database, sweep: int, finding: int) -> tuple[int, dict[str, int]]:
    """Return the planned rows, and for each axis with several choices among them how many."""
    counts = ", ".join(f'count(DISTINCT "{axis}")' for axis in AXES)
    rows, *choices = db.execute(
        f"SELECT count(*), {counts} FROM outcome WHERE sweep = ? AND finding = ? AND request = 0",
        [sweep, finding],
    )[0]
    return rows, {axis: n for axis, n in zip(AXES, choices, strict=True) if n > 1}


def _distinct_weights(db: Database, sweep: int, finding: int) -> dict[str, int]:
    """Return how many different weights the choices of the two weighing axes have."""
    return dict(
        db.execute(
            "SELECT axis, count(DISTINCT weight) FROM sweep_choice "
            "WHERE sweep = ? AND finding = ? AND axis IN ('window', 'test') GROUP BY axis",
            [sweep, finding],
        )
    )


def _bound(db: Database, sweep: int, of_all: int, cells: int | None) -> int:
    """Return the most rows for one finding."""
    if cells is not None:
        return cells
    findings: int = db.scalar("SELECT count(*) FROM finding WHERE sweep = ?", [sweep])
    return of_all // max(1, findings)


def _cross(choices: Mapping[str, int], axes: Sequence[str]) -> int:
    return math.prod(choices[axis] for axis in axes)


def _sets(
    choices: Mapping[str, int], size: Callable[[Sequence[str]], int], bound: int, fewest: int
) -> list[tuple[str, ...]]:
    """Return all sets of n axes for the largest n with which they are within the bound."""
    for count in range(len(choices), fewest - 1, -1):
        sets = list(itertools.combinations(choices, count))
        small = all(_cross(choices, axes) <= _LARGEST_CROSS for axes in sets)
        if small and sum(size(axes) for axes in sets) <= bound:
            return sets
    return []


def _counted(
    db: Database,
    name: str,
    sets: Sequence[tuple[str, ...]],
    always: tuple[str, ...],
    params: Mapping[str, Any],
) -> pd.DataFrame:
    """Run a query that counts once for every set of axes; without a set, keep its columns."""
    used = [axis for axis in AXES if any(axis in axes for axes in sets)]
    # The other axes are empty in every row, so that grouping by them costs and parts nothing.
    fixed = [axis for axis in AXES if axis not in (*used, *always)]
    texts = [", ".join(f'"{column}"' for column in (*axes, *always, *fixed))
             for axes in sets or [()]]  # fmt: skip
    text = query(name).replace("/*sets*/", ", ".join(f"({columns})" for columns in texts))
    frame = db.frame(text, {**params, "axes": used})
    return frame if sets else frame.iloc[:0]
