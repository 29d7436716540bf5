"""Writing a sweep out as Parquet and CSV, for readers without DuckDB."""

from __future__ import annotations

import os
from collections.abc import Sequence
from pathlib import Path

from store.database import Database

__all__ = ["FORMATS", "export", "targets"]

FORMATS = ("parquet", "csv")

# What is written, one file a name and format.
_PARTS = {
    "outcomes": "SELECT * FROM outcomes WHERE sweep = {sweep} "
    "ORDER BY finding_number, specification",
    "survival": "SELECT f.name AS finding_name, s.* FROM survival AS s "
    "JOIN finding AS f ON f.sweep = s.sweep AND f.finding = s.finding "
    "WHERE s.sweep = {sweep} ORDER BY s.finding, s.axis, s.choice_position, s.code",
    "details": "SELECT sweep, finding, printf('%016x%016x', spec_high, spec_low) AS specification, "
    "* EXCLUDE (sweep, finding, spec_high, spec_low) FROM details WHERE sweep = {sweep} "
    "ORDER BY finding, specification, kind, position, date",
    "choices": "SELECT s.*, c.meaning FROM sweep_choice AS s "
    "JOIN choice AS c ON c.axis = s.axis AND c.code = s.code "
    "WHERE s.sweep = {sweep} ORDER BY s.finding, s.axis, s.position",
    "findings": "SELECT * FROM finding WHERE sweep = {sweep} ORDER BY finding",
    "windows": "SELECT w.*, c.label AS window_name FROM window_position AS w "
    "JOIN sweep_choice AS c ON c.sweep = w.sweep AND c.finding = w.finding "
    "AND c.axis = 'window' AND c.code = w.\"window\" "
    'WHERE w.sweep = {sweep} ORDER BY w.finding, w."window", w.position',
}


def targets(folder: Path, formats: Sequence[str] = FORMATS) -> list[tuple[Path, str]]:
    """Return the files that an export writes, each with its format."""
    return [(folder / f"{name}.{form}", form) for form in formats for name in _PARTS]


def export(
    db: Database,
    sweep: int,
    folder: str | os.PathLike[str],
    formats: Sequence[str] = FORMATS,
) -> list[Path]:
    """Write a sweep's outcomes, survival, details, choices, findings and windows.

    Parameters
    ----------
    db : Database
        An open store.
    sweep : int
        Number of the sweep.
    folder : path
        Where to write; created where it does not exist.
    formats : sequence of str
        Any of ``parquet`` and ``csv``.

    Returns
    -------
    list of pathlib.Path
        The files written, in a fixed order.  Each replaces an older one only when complete.

    Raises
    ------
    ValueError
        A format that is not offered.

    Notes
    -----
    In CSV a text that a spreadsheet would run as a formula (it begins with ``=``, ``+``,
    ``-``, ``@``, a tab or a line break) is given a leading apostrophe.
    """
    unknown = [name for name in formats if name not in FORMATS]
    if unknown:
        raise ValueError(f"No such format: {', '.join(unknown)}. Choose from {', '.join(FORMATS)}.")
    target = Path(folder)
    target.mkdir(parents=True, exist_ok=True)
    written = []
    threads = db.scalar("SELECT current_setting('threads')")
    # Sorting a million wide rows needs memory for each thread; one keeps it within the limit.
    db.execute("SET threads = 1")
    try:
        for format_ in formats:
            for name, sql in _PARTS.items():
                path = target / f"{name}.{format_}"
                _write(db, sql.format(sweep=int(sweep)), path, format_)
                written.append(path)
    finally:
        db.execute(f"SET threads = {threads}")
    return written


def _write(db: Database, sql: str, path: Path, format_: str) -> None:
    if format_ == "csv":
        _copy(db, _neutralised(db, sql), path, "FORMAT csv, HEADER true")
    else:
        _copy(db, sql, path, "FORMAT parquet, COMPRESSION zstd")


def _copy(db: Database, sql: str, path: Path, options: str) -> None:
    """Write a query's rows to a file that appears only when it is complete."""
    part = path.with_name(path.name + ".part")
    try:
        db.copy(sql, part, options)
        part.replace(path)
    except BaseException:
        part.unlink(missing_ok=True)
        raise


def _neutralised(db: Database, sql: str) -> str:
    """Return the query with text columns made safe for spreadsheets."""
    described = db.execute(f"SELECT column_name, column_type FROM (DESCRIBE {sql})")
    cells = [
        f"CASE WHEN regexp_matches(\"{name}\", '^[=+@\\t\\r\\n-]') "
        f'THEN \'\'\'\' || "{name}" ELSE "{name}" END AS "{name}"'
        if kind == "VARCHAR"
        else f'"{name}"'
        for name, kind in described
    ]
    return f"SELECT {', '.join(cells)} FROM ({sql})"
