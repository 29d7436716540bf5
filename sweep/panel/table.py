"""The cells of a data file, with the place of every cell."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from sweep.errors import Fault, InputFault
from sweep.panel.cells import looks_like_data

__all__ = ["Table", "header_faults"]

_SHOWN = 3


@dataclass(frozen=True, slots=True, eq=False)
class Table:
    """The cells of a data file.

    Attributes
    ----------
    path : Path
        The file.
    header : tuple of str
        Column names as written, without surrounding blanks.
    columns : tuple of lists
        Cells of each column, all of equal length; text in CSV, typed values otherwise.
    lines : tuple of int
        Line (CSV) or row (Excel, Parquet) of each row of cells, counted from 1.
    unit : str
        ``line`` or ``row``.
    digest : str
        SHA-256 of the file, in hexadecimal.
    faults : tuple of Fault
        What is wrong with the table as such and does not keep the cells from being read.
    ragged : frozenset of int
        Rows with more or fewer cells than the header, whose cells mean nothing.
    """

    path: Path
    header: tuple[str, ...]
    columns: tuple[list[object], ...]
    lines: tuple[int, ...]
    unit: str
    digest: str
    faults: tuple[Fault, ...] = ()
    ragged: frozenset[int] = frozenset()

    def column(self, name: str) -> list[object]:
        """Return the cells of a column.

        Raises
        ------
        ValueError
            If there is no such column.
        """
        return self.columns[self.header.index(name)]

    def place(self, row: int | None = None, column: str = "") -> str:
        """Name a place in the file: file, line and column."""
        parts = [self.path.name]
        if row is not None:
            parts.append(f"{self.unit} {self.lines[row]}")
        if column:
            parts.append(f"column {column}")
        return ", ".join(parts)


def header_faults(place: str, header: Sequence[str]) -> list[Fault]:
    """Find column names that are used twice.

    Raises
    ------
    InputFault
        If the header is a row of values.
    """
    faults = [
        Fault(place, f"{count} columns are called “{name}”", "Give every column its own name.")
        for name, count in Counter(header).items()
        if name and count > 1
    ]
    if header and all(looks_like_data(name) for name in header):
        # Without names nothing else in the file can be found, so this fault stands alone.
        problem = f"the first row holds values ({', '.join(header[:_SHOWN])}), not column names"
        raise InputFault(Fault(place, problem, "Put a row of column names on top."))
    return faults
