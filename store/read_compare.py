"""Two sweeps side by side, of one store or of two; window entries of one sweep side by side."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pandas as pd

from store.database import Database, open_reading
from store.read_sweeps import findings
from store.schema import query

__all__ = ["LARGEST", "Sides", "compare_frames", "paired", "sides", "window_pairs", "window_paths"]

# Most rows of a frame that lists specifications.
LARGEST = 5000

_ROWS = {
    "counts": "compare_counts",
    "verdicts": "compare_verdicts",
    "changed": "compare_changed",
    "p_values": "compare_p_values",
}

# Name of the temporary view, the store's table or view, and the columns it is cut to.
_VIEWS = {
    "choice": "sweep_choice",
    "position": "window_position",
    "survival": "survival",
}


class Sides:
    """Two sweeps made readable through one connection.

    Parameters
    ----------
    database : Database
        Open on the first store, with the temporary views ``mine`` and ``theirs``.
    my_findings, their_findings : DataFrame
        The findings of both sweeps.
    """

    def __init__(
        self, database: Database, my_findings: pd.DataFrame, their_findings: pd.DataFrame
    ) -> None:
        self.database = database
        self.my_findings = my_findings
        self.their_findings = their_findings


@contextmanager
def sides(my_store: Path, my_sweep: int, their_store: Path, their_sweep: int) -> Iterator[Sides]:
    """Open two sweeps for comparison, read-only.

    Parameters
    ----------
    my_store, their_store : Path
        Store files; they may be the same.
    my_sweep, their_sweep : int
        Numbers of the sweeps.

    Raises
    ------
    store.errors.StoreError
        If a store is missing, locked, damaged, or of another version.
    """
    # Each store is opened by itself first: what is wrong with it is then said of its own file.
    with open_reading(their_store) as other:
        their_findings = findings(other, their_sweep)
    with open_reading(my_store) as database:
        my_findings = findings(database, my_sweep)
        prefix = ""
        if my_store.resolve() != their_store.resolve():
            database.attach(their_store, "other")
            prefix = "other."
        for side, source, sweep in (("my", "", my_sweep), ("their", prefix, their_sweep)):
            for name, table in _VIEWS.items():
                _view(database, f"{side}_{name}", f"{source}{table}", sweep)
            _view(database, "mine" if side == "my" else "theirs", f"{source}judged", sweep)
            database.execute(
                f"CREATE TEMP VIEW {side}_token AS SELECT axis, code, token_high, token_low "
                f"FROM {source}choice"
            )
        yield Sides(database, my_findings, their_findings)


def _view(database: Database, name: str, table: str, sweep: int) -> None:
    database.execute(
        f"CREATE TEMP VIEW {name} AS SELECT * FROM {table} WHERE sweep = {int(sweep)}"
    )


def paired(both: Sides) -> list[tuple[int, int]]:
    """Return the findings that two sweeps share, as pairs of their numbers.

    Findings are the same where cause, effect, given and exogenous series are; a claim may
    differ.
    """
    roles = ("cause", "effect", "given", "exogenous")
    known: dict[tuple[object, ...], int] = {}
    for record in both.their_findings.to_dict("records"):
        known.setdefault(tuple(record[role] for role in roles), int(record["finding"]))
    found = []
    for record in both.my_findings.to_dict("records"):
        number = known.get(tuple(record[role] for role in roles))
        if number is not None:
            found.append((int(record["finding"]), number))
    return found


def compare_frames(
    both: Sides, mine: int, theirs: int, limit: int = LARGEST
) -> dict[str, pd.DataFrame]:
    """Return what differs between two sweeps for one finding.

    Parameters
    ----------
    both : Sides
    mine, theirs : int
        Number of the finding in each sweep.
    limit : int
        Most rows of ``changed``.

    Returns
    -------
    dict of str to DataFrame
        ``counts`` (one row: rows of each sweep, shared ones, how many survive in both, one,
        neither, changed verdicts, differences of p), ``verdicts`` (pairs of verdicts with
        their rows), ``changed`` (specifications whose verdict, survival or admissibility
        differs, the largest move of p first, at most ``limit``), ``p_values`` (cells of a
        log scale, 20 to a factor of ten, with their rows) and ``survival`` (by choice, side
        by side).  Columns that begin with ``my`` are of the first sweep.
    """
    chosen = {"mine": mine, "theirs": theirs}
    frames = {}
    for name, rows in _ROWS.items():
        parameters = chosen | ({"limit": limit} if name == "changed" else {})
        text = query("compare_pairs") + query(rows)
        frames[name] = both.database.frame(text, parameters)
    frames["survival"] = both.database.frame(query("compare_survival"), chosen)
    return frames


def window_paths(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return the moving windows of a sweep along time, those of requests included.

    Returns
    -------
    pandas.DataFrame
        One row for each window entry and position: ``window_name, entry_kind, length``
        (periods), ``place, position, window_start, window_end, rows, admissible, survived,
        median_p, baseline_p, baseline_survives`` (the row with the baseline's choices on
        all other axes; missing where it is not admissible).
    """
    return db.frame(query("window_paths"), {"sweep": sweep, "finding": finding})


def window_pairs(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return how often two window entries agree on the same last date.

    Returns
    -------
    pandas.DataFrame
        One row for each pair of entries: ``first_window, second_window, shared`` (rows
        admissible in both, with the same other choices and last date), ``both_survive,
        only_first, only_second, neither, first_end, last_end``.
    """
    return db.frame(query("window_pairs"), {"sweep": sweep, "finding": finding})
