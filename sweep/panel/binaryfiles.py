"""Parquet and Excel files; their readers are imported only when such a file is met."""

from __future__ import annotations

import warnings
from collections.abc import Sequence
from pathlib import Path

from sweep.errors import Fault, InputFault
from sweep.panel.cells import is_blank
from sweep.panel.table import Table, header_faults

__all__ = ["read_excel", "read_parquet"]


def _identifier(name: str) -> str:
    """Quote a column name for SQL."""
    return '"' + name.replace('"', '""') + '"'


def read_parquet(path: Path, digest: str, columns: Sequence[str] | None) -> Table:
    """Read a Parquet file through DuckDB, of ``columns`` alone where they are given.

    Raises
    ------
    InputFault
        If the file is damaged.
    """
    import duckdb

    # The name is a pattern to the reader, and folders named a=b would add a column a.
    source = "read_parquet(?, hive_partitioning = false)"
    name = ["".join(f"[{sign}]" if sign in "*?[" else sign for sign in str(path))]
    connection = duckdb.connect()
    try:
        described = connection.execute(f"DESCRIBE SELECT * FROM {source}", name)
        header = tuple(str(row[0]) for row in described.fetchall())
        wanted = [label for label in header if columns is None or label in columns]
        quoted = ", ".join(_identifier(label) for label in wanted) or "NULL"
        rows = connection.execute(f"SELECT {quoted} FROM {source}", name).fetchall()
    except duckdb.Error as error:
        words = str(error).splitlines()[0]
        raise InputFault(
            Fault(str(path), f"the file cannot be read as Parquet ({words})")
        ) from error
    finally:
        connection.close()
    cells: dict[str, list[object]] = {
        name: [row[place] for row in rows] for place, name in enumerate(wanted)
    }
    table = tuple(cells.get(name, [None] * len(rows)) for name in header)
    return Table(path, header, table, tuple(range(1, len(rows) + 1)), "row", digest)


def _sheet(path: Path) -> tuple[str, list[tuple[int, list[object]]]]:
    """Return the title of the first sheet, and the number and cells of each of its rows."""
    try:
        import openpyxl
    except ImportError:
        mend = "Install the reader with: pip install 'crosswind[excel]'"
        raise InputFault(Fault(str(path), "reading Excel files needs openpyxl", mend)) from None
    with warnings.catch_warnings():
        # Styles and other features that it drops have no part in the values.
        warnings.filterwarnings("ignore", category=UserWarning, module="openpyxl")
        try:
            book = openpyxl.load_workbook(path, read_only=True, data_only=True)
        except Exception as error:  # it lets errors of zipfile and XML through
            words = str(error).splitlines()[0] if str(error) else type(error).__name__
            problem = f"the file cannot be read as Excel ({words})"
            raise InputFault(Fault(str(path), problem)) from error
        try:
            if not book.worksheets:
                raise InputFault(Fault(str(path), "there is no sheet with cells in the file"))
            sheet = book.worksheets[0]
            sheet.reset_dimensions()  # some writers record a wrong size
            rows_of_cells = enumerate(sheet.iter_rows(values_only=True), start=1)
            return str(sheet.title), [(line, list(cells)) for line, cells in rows_of_cells]
        finally:
            book.close()


def read_excel(path: Path, digest: str) -> Table:
    """Read the first sheet of an Excel file, with the values that its formulas last had.

    Raises
    ------
    InputFault
        If the reader is not installed, or the file is damaged or empty.
    """
    title, records = _sheet(path)
    while records and all(is_blank(cell) for cell in records[-1][1]):
        records.pop()
    while records and all(is_blank(cell) for cell in records[0][1]):
        records.pop(0)
    if not records:
        raise InputFault(Fault(str(path), f"the first sheet, “{title}”, is empty"))
    (first, names), rows = records[0], records[1:]
    header = tuple("" if name is None else str(name).strip() for name in names)
    width = len(header)
    columns: tuple[list[object], ...] = tuple(
        [cells[place] if place < len(cells) else None for _, cells in rows]
        for place in range(width)
    )
    faults = header_faults(f"{path.name}, row {first}", header)
    lines = tuple(line for line, _ in rows)
    return Table(path, header, columns, lines, "row", digest, tuple(faults))
