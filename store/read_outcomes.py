"""Rows with names: outcomes, the baseline, one specification and its details."""

from __future__ import annotations

import string
from collections.abc import Sequence

import pandas as pd

from store.database import Database
from store.errors import Ambiguous, NotFound
from store.schema import query

__all__ = ["baseline", "details", "outcome_columns", "outcomes", "specification"]

_FULL = 2**64 - 1
_NAMED = {
    "finding": "SELECT DISTINCT name FROM finding",
    "cause": "SELECT DISTINCT cause FROM finding",
    "effect": "SELECT DISTINCT effect FROM finding",
    "given": "SELECT DISTINCT given FROM finding",
    "claim": "SELECT DISTINCT claim FROM finding",
    "request": "SELECT DISTINCT name FROM request",
    "lags_choice": "SELECT DISTINCT label FROM sweep_choice WHERE axis = 'lags'",
    "deterministics": "SELECT DISTINCT label FROM sweep_choice WHERE axis = 'deterministics'",
    "window_name": "SELECT DISTINCT label FROM sweep_choice WHERE axis = 'window'",
    "transformation": "SELECT DISTINCT label FROM sweep_choice WHERE axis = 'transformation'",
    "test": "SELECT DISTINCT label FROM sweep_choice WHERE axis = 'test'",
    "conditioning": "SELECT DISTINCT label FROM sweep_choice WHERE axis = 'conditioning'",
    "measures": "SELECT DISTINCT label FROM sweep_choice WHERE axis = 'measures'",
}
_FIXED = {
    "origin": ("planned", "added"),
    "window_entry": ("fixed", "rolling", "expanding", "shrinking"),
    "solver": ("none", "cholesky", "qr", "library"),
    "status": ("ok", "not applicable", "infeasible", "failed"),
    "reverse_status": ("ok", "not applicable", "infeasible", "failed"),
    "counted_as": ("admissible", "screened out", "infeasible", "not applicable", "failed"),
    "verdict": ("one way", "both ways", "reverse", "neither rejected", "undetermined"),
}
# Texts whose values are known only from the rows; they become categories after reading.
_FREE = ("reason", "failed_screens")


def outcome_columns(db: Database) -> list[str]:
    """Return the names of the columns of the view ``outcomes``."""
    return [str(row[0]) for row in db.execute("SELECT column_name FROM (DESCRIBE outcomes)")]


def outcomes(
    db: Database,
    sweep: int | None = None,
    columns: Sequence[str] | None = None,
    where: str | None = None,
    limit: int | None = None,
) -> pd.DataFrame:
    """Return rows of the view ``outcomes``, names as pandas categoricals.

    Parameters
    ----------
    db : Database
        An open store.
    sweep : int, optional
        One sweep only.
    columns : sequence of str, optional
        Columns of the view, in this order; all of them where not given.
    where : str, optional
        A condition in SQL on columns of the view, such as ``"lags_choice = 'AIC'"``.
    limit : int, optional
        Most rows to return.

    Returns
    -------
    pandas.DataFrame
        One row for each finding and specification.  Repeated names come as categoricals,
        ``specification`` as text of 32 hexadecimal digits.  A million rows with all columns
        need about a gigabyte: name columns, a condition or a limit where rows are many.

    Raises
    ------
    ValueError
        A column that the view does not have, or a condition that is no single expression.
    QueryFault
        A condition that cannot be answered.
    """
    known = outcome_columns(db)
    wanted = list(known if columns is None else columns)
    unknown = [name for name in wanted if name not in known]
    if unknown or not wanted:
        raise ValueError(
            f"No such column of outcomes: {', '.join(unknown) or 'none named'}. "
            f"The columns are {', '.join(known)}."
        )
    conditions = []
    if sweep is not None:
        conditions.append(f"sweep = {int(sweep)}")
    if where is not None:
        conditions.append(f"({_condition(where)})")
    sql = f"SELECT {', '.join(_selected(db, name) for name in wanted)} FROM outcomes"
    if conditions:
        sql += f" WHERE {' AND '.join(conditions)}"
    if limit is not None:
        sql += f" LIMIT {int(limit)}"
    frame = db.frame(sql) if where is None else db.asked(sql)
    for name in wanted:
        if name in _FREE or (name in _NAMED and frame[name].dtype != "category"):
            frame[name] = frame[name].astype("category")
    return frame


def _selected(db: Database, name: str) -> str:
    """Return the SQL of a column: names as an enumeration, which arrives as a categorical."""
    if name in _FIXED:
        values = list(_FIXED[name])
    elif name in _NAMED:
        values = sorted(row[0] for row in db.execute(_NAMED[name]))
    else:
        return f'"{name}"'
    if not values:
        return f'"{name}"'
    quoted = ", ".join("'" + value.replace("'", "''") + "'" for value in values)
    return f'CAST("{name}" AS ENUM ({quoted})) AS "{name}"'


def _condition(where: str) -> str:
    """Return a condition after refusing what would leave its parentheses."""
    depth, quote = 0, ""
    for sign in where:
        if quote:
            quote = "" if sign == quote else quote
        elif sign in "'\"":
            quote = sign
        else:
            depth += (sign == "(") - (sign == ")")
            if depth < 0 or sign == ";":
                break
    if quote or depth != 0 or ";" in where or "--" in where or not where.strip():
        raise ValueError(f"The condition {where!r} is not one SQL expression.")
    return where


def baseline(db: Database, sweep: int, finding: int) -> pd.DataFrame:
    """Return the baseline's row of a finding with every column of ``outcomes``.

    Returns
    -------
    pandas.DataFrame
        One row; none where the baseline is not stored yet.  Where the baseline is a moving
        window, its last position stands for it.
    """
    return db.frame(
        "SELECT * FROM outcomes WHERE sweep = ? AND finding_number = ? AND is_baseline "
        "ORDER BY position DESC LIMIT 1",
        [sweep, finding],
    )


def specification(
    db: Database, sweep: int, prefix: str, finding: int | None = None
) -> pd.DataFrame:
    """Return the row of the specification that begins with a prefix.

    Parameters
    ----------
    db : Database
        An open store.
    sweep : int
        Number of the sweep.
    prefix : str
        1 to 32 hexadecimal digits.
    finding : int, optional
        Number of the finding, needed where two findings share their specifications.

    Returns
    -------
    pandas.DataFrame
        One row with every column of ``outcomes``.

    Raises
    ------
    NotFound
        Nothing matches, or the prefix is not hexadecimal.
    Ambiguous
        Several specifications, or several findings, match.
    """
    text = prefix.strip().lower()
    if not 1 <= len(text) <= 32 or any(sign not in string.hexdigits for sign in text):
        raise NotFound(
            f"{prefix!r} is not the beginning of a specification: give up to 32 hexadecimal digits."
        )
    first, last = int(text.ljust(32, "0"), 16), int(text.ljust(32, "f"), 16)
    within = len(text) > 16
    matches = db.execute(
        query("specifications"),
        {
            "sweep": sweep,
            "finding": finding,
            "high_from": first >> 64,
            "high_to": last >> 64,
            "low_from": first & _FULL if within else 0,
            "low_to": last & _FULL if within else _FULL,
        },
    )
    if not matches:
        raise NotFound(f"No specification of sweep {sweep} begins with {text}.")
    if len(matches) > 1:
        names = dict(db.execute("SELECT finding, name FROM finding WHERE sweep = ?", [sweep]))
        found = ", ".join(f"{high:016x}{low:016x} (“{names[f]}”)" for f, high, low in matches)
        raise Ambiguous(
            f"Several specifications of sweep {sweep} begin with {text}: {found}. "
            "Give more digits, or name the finding."
        )
    number, high, low = matches[0]
    return db.frame(
        "SELECT * FROM outcomes WHERE sweep = ? AND finding_number = ? AND specification = ?",
        [sweep, number, f"{high:016x}{low:016x}"],
    )


def details(db: Database, sweep: int, finding: int, specification: str) -> pd.DataFrame:
    """Return the entries of one specification beyond its row.

    Parameters
    ----------
    db : Database
        An open store.
    sweep, finding : int
        Numbers of the sweep and the finding.
    specification : str
        All 32 hexadecimal digits.

    Returns
    -------
    pandas.DataFrame
        ``kind, position, date, value, standard_error, p_value, critical_value``.
    """
    number = int(specification, 16)
    return db.frame(
        query("details_rows"),
        {"sweep": sweep, "finding": finding, "high": number >> 64, "low": number & _FULL},
    )
