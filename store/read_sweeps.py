"""What a store holds: its sweeps, their findings and choices."""

from __future__ import annotations

import json
from typing import Any

import pandas as pd

from store.database import Database
from store.errors import NotFound, NothingStored
from store.schema import query

__all__ = [
    "choices", "findings", "latest_sweep", "require_rows", "stored_rows", "sweep_info", "sweeps",
]  # fmt: skip


def sweeps(db: Database) -> pd.DataFrame:
    """Return one row for each sweep, oldest first.

    Returns
    -------
    pandas.DataFrame
        ``sweep, plan_digest, title, started, finished, significance, rows, findings,
        planned``; ``finished`` (universal time, like ``started``) is NaT where a run has not
        ended; ``rows`` are stored and ``planned`` are all there will be, requests included.
    """
    return db.frame(query("sweeps"))


def latest_sweep(db: Database) -> int:
    """Return the number of the sweep begun last.

    Raises
    ------
    NotFound
        The store holds no sweep.
    """
    number = db.scalar("SELECT max(sweep) FROM sweep")
    if number is None:
        raise NotFound(f"{db.path}: the store holds no sweep yet. Run a plan into it first.")
    return int(number)


def findings(db: Database, sweep: int) -> pd.DataFrame:
    """Return the findings of a sweep in plan order.

    Returns
    -------
    pandas.DataFrame
        ``sweep`` and every field of :class:`store.records.FindingRecord`.
    """
    return db.frame("SELECT * FROM finding WHERE sweep = ? ORDER BY finding", [sweep])


def choices(db: Database, sweep: int, finding: int | None = None) -> pd.DataFrame:
    """Return the choices of a sweep's findings in plan order.

    Returns
    -------
    pandas.DataFrame
        Every field of :class:`store.records.SweepChoiceRecord`, and ``meaning`` (JSON).
    """
    return db.frame(
        "SELECT s.* EXCLUDE (sweep), c.meaning FROM sweep_choice AS s "
        "JOIN choice AS c ON c.axis = s.axis AND c.code = s.code "
        "WHERE s.sweep = $sweep AND ($finding IS NULL OR s.finding = $finding) "
        "ORDER BY s.finding, list_position(['lags', 'deterministics', 'window', "
        "'transformation', 'test', 'conditioning', 'measures'], s.axis), s.position",
        {"sweep": sweep, "finding": finding},
    )


def stored_rows(db: Database, sweep: int) -> int:
    """Return how many outcomes of a sweep are stored, those that requests added included."""
    return int(db.scalar("SELECT count(*) FROM outcome WHERE sweep = ?", [sweep]))


def require_rows(db: Database, sweep: int) -> None:
    """Refuse a sweep of which nothing is stored.

    Raises
    ------
    NothingStored
        A run was stopped before it stored anything.
    """
    if not db.execute("SELECT 1 FROM outcome WHERE sweep = ? LIMIT 1", [sweep]):
        raise NothingStored(
            f"{db.path}: nothing of sweep {sweep} is stored yet. Run the plan again to go on."
        )


def sweep_info(db: Database, sweep: int) -> dict[str, Any]:
    """Return what is recorded about a sweep.

    Returns
    -------
    dict
        Every column of the table ``sweep`` (``data_note`` and ``versions`` as stored JSON
        text), ``finished`` (datetime or None), ``wall_seconds`` and ``counts`` of the last
        run that ended (None and ``{}`` before), ``rows`` stored, and ``planned``: all there
        will be, requests included.

    Raises
    ------
    NotFound
        There is no such sweep.
    """
    frame = db.frame("SELECT * FROM sweep WHERE sweep = ?", [sweep])
    if frame.empty:
        raise NotFound(
            f"{db.path}: there is no sweep {sweep}. `crosswind show {db.path} --sweeps` lists "
            "those that there are."
        )
    names = list(frame.columns)
    info = dict(
        zip(names, db.execute("SELECT * FROM sweep WHERE sweep = ?", [sweep])[0], strict=True)
    )
    ended = db.execute(
        "SELECT happened, text FROM event WHERE sweep = ? AND kind = 'finished' "
        "ORDER BY happened DESC LIMIT 1",
        [sweep],
    )
    last = json.loads(ended[0][1]) if ended else {}
    info["finished"] = ended[0][0] if ended else None
    info["wall_seconds"] = last.get("wall_seconds")
    info["counts"] = last.get("counts", {})
    info["rows"] = stored_rows(db, sweep)
    info["planned"] = db.scalar("SELECT sum(planned + added) FROM finding WHERE sweep = ?", [sweep])
    return info
