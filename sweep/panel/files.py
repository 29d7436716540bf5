"""Data files of every kind as tables of cells."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from sweep.errors import Fault, InputFault
from sweep.panel.binaryfiles import read_excel, read_parquet
from sweep.panel.csvfile import read_csv
from sweep.panel.table import Table

__all__ = ["Peek", "Table", "peek", "read_table"]

_KINDS = {
    ".csv": "csv",
    ".txt": "csv",
    ".tsv": "csv",
    ".parquet": "parquet",
    ".pq": "parquet",
    ".xlsx": "excel",
    ".xlsm": "excel",
}


@dataclass(frozen=True, slots=True)
class Peek:
    """The head of a data file: column names, the first rows of cells, and how many rows."""

    header: tuple[str, ...]
    rows: tuple[tuple[object, ...], ...]
    total: int


def peek(path: Path, rows: int = 5) -> Peek:
    """Return the column names and first rows of a data file.

    Raises
    ------
    InputFault
        If the file cannot be read as a table.
    """
    table = read_table(path)
    head = tuple(zip(*(cells[:rows] for cells in table.columns), strict=True))
    return Peek(table.header, head, len(table.lines))


def read_table(path: Path, columns: Sequence[str] | None = None) -> Table:
    """Read a data file: ``.csv`` (also ``.txt``), ``.parquet`` or ``.xlsx``.

    Parameters
    ----------
    path : Path
        CSV must be UTF-8 (a byte order mark is allowed) with commas between fields; of an
        Excel file the first sheet is read, with the values that its formulas last had.
    columns : sequence of str, optional
        The only columns whose cells are needed; Parquet then reads no others.  The header
        is always complete.

    Raises
    ------
    InputFault
        If there is no such file, or nothing in it can be read as a table.
    """
    kind = _kind(path)
    try:
        content = path.read_bytes()
    except OSError as error:
        raise InputFault(
            Fault(str(path), f"the file cannot be read ({error.strerror or error})")
        ) from error
    if not content.strip():
        raise InputFault(
            Fault(str(path), "the file is empty", "It needs a header and a row for each period.")
        )
    digest = hashlib.sha256(content).hexdigest()
    if kind == "csv":
        table = read_csv(path, content, digest)
    elif kind == "parquet":
        table = read_parquet(path, digest, columns)
    else:
        table = read_excel(path, digest)
    if not table.lines:
        problem = "there is a header but no row of data"
        raise InputFault(*table.faults, Fault(str(path), problem, "Add a row for each period."))
    if len(table.lines) == 1:
        problem = "there is one row of data only"
        raise InputFault(*table.faults, Fault(str(path), problem, "Add a row for each period."))
    return table


def _kind(path: Path) -> str:
    if path.is_dir():
        raise InputFault(Fault(str(path), "this is a folder, not a data file"))
    if not path.exists():
        mend = "Check the name and the folder; a plan's data are looked for from the plan's folder."
        raise InputFault(Fault(str(path), "there is no such file", mend))
    suffix = path.suffix.lower()
    if suffix not in _KINDS:
        mend = "Save the data as .csv, .parquet or .xlsx."
        ending = f"files ending in “{suffix}”" if suffix else "files without an ending"
        raise InputFault(Fault(str(path), f"{ending} cannot be read", mend))
    return _KINDS[suffix]
