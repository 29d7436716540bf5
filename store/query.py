"""Questions that a user asks in SQL: one statement that reads, and this store alone.

The store must have been opened with ``confined=True``.  What may be asked is settled there,
by DuckDB; the check here is for a message that says what to do.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import pandas as pd

from store.database import Database
from store.errors import QueryFault

__all__ = ["query_frame", "query_stream"]


def query_frame(db: Database, sweep: int, sql: str) -> pd.DataFrame:
    """Return the answer to a query as a pandas frame.

    Parameters
    ----------
    db : Database
        A store opened with ``confined=True``.
    sweep : int
        What ``$sweep`` stands for in the query.
    sql : str
        One statement that reads (``SELECT``, ``WITH``, ``FROM``, ``DESCRIBE``, ``SHOW``).

    Raises
    ------
    QueryFault
        It is not one such statement, or cannot be answered.
    """
    return db.asked(sql, _parameters(db, sweep, sql))


def query_stream(
    db: Database, sweep: int, sql: str, size: int = 1000
) -> tuple[list[tuple[str, str]], Iterator[list[tuple[Any, ...]]]]:
    """Return the columns (name, type) of an answer and its rows, ``size`` at a time.

    Parameters and errors are those of :func:`query_frame`; the portions may raise it too.
    """
    return db.stream(sql, _parameters(db, sweep, sql), size)


def _parameters(db: Database, sweep: int, sql: str) -> dict[str, int]:
    """Refuse all but one reading statement and return the values of its parameters."""
    found = db.statements(sql)
    if len(found) != 1:
        count = "no statement" if not found else f"{len(found)} statements"
        raise QueryFault(f"The query has {count}. Give one that reads, such as FROM survival.")
    (statement,) = found
    if statement.kind != "SELECT":
        raise QueryFault(
            f"The query is of the kind {statement.kind}, and only reading is allowed. "
            "Use SELECT, WITH, FROM, DESCRIBE or SHOW."
        )
    unknown = sorted(statement.parameters - {"sweep"})
    if unknown:
        raise QueryFault(
            f"The query has a parameter ${unknown[0]}, and only $sweep has a value. "
            "Write the value itself."
        )
    return dict.fromkeys(statement.parameters, sweep)
