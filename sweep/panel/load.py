"""Data sets: the numeric columns of a file on its calendar, or every fault at once.

CSV files are UTF-8 with commas between fields and points in decimal numbers.  A missing
value is an empty cell, ``NA``, ``NaN`` or a full stop.  Excel files give their first sheet.
"""

from __future__ import annotations

import difflib
from collections import defaultdict
from collections.abc import Sequence
from pathlib import Path
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from sweep.errors import Fault, InputFault
from sweep.panel.calendar import FREQUENCIES, Frequency, as_frequency
from sweep.panel.cells import CellError, read_number, shown
from sweep.panel.dates import listed, read_calendar
from sweep.panel.files import Peek, Table, peek, read_table
from sweep.panel.series import (
    Dataset,
    collinear_faults,
    constant_faults,
    data_digest,
    magnitude_faults,
    missing_faults,
    positive_faults,
    values_digest,
)

__all__ = [
    "CalendarRule",
    "Dataset",
    "Peek",
    "collinear_faults",
    "constant_faults",
    "data_digest",
    "magnitude_faults",
    "missing_faults",
    "peek",
    "positive_faults",
    "read_dataset",
    "values_digest",
]

CalendarRule = Literal["every period", "as observed"]
_OBSERVED = ("business daily", "weekly")


def read_dataset(
    path: Path,
    date_column: str,
    frequency: str,
    columns: Sequence[str],
    *,
    calendar_rule: CalendarRule = "every period",
) -> Dataset:
    """Read the named series of a data file.

    Parameters
    ----------
    path : Path
        A ``.csv``, ``.parquet`` or ``.xlsx`` file.
    date_column : str
        Column of dates: any day of the period, or ``1990``, ``1990-Q1``, ``1990Q1``,
        ``1990-03``.
    frequency : str
        Name from `FREQUENCIES`.
    columns : sequence of str
        Series to read as numbers; other columns are not looked at.
    calendar_rule : {"every period", "as observed"}
        ``as observed`` takes consecutive rows of weekly or business-daily data as
        consecutive periods.

    Returns
    -------
    Dataset
        Values in the units of the file, NaN where missing.

    Raises
    ------
    InputFault
        With every fault of the file, its dates and its numbers.
    """
    wanted = _frequency(path, frequency)
    names = tuple(dict.fromkeys(columns))
    table = read_table(path, (date_column, *names))
    faults = list(table.faults)
    observed = calendar_rule == "as observed"
    if observed and wanted.name not in _OBSERVED:
        problem = f"{wanted.name} data have no calendar “as observed”"
        faults.append(Fault(path.name, problem, f"It is for {' and '.join(_OBSERVED)} data."))
        observed = False
    faults += _column_faults(table, date_column, names)
    calendar = None
    if date_column in table.header:
        calendar, found = read_calendar(table, date_column, wanted, as_observed=observed)
        faults += found
    values = np.full((len(table.lines), len(names)), np.nan)
    for place, name in enumerate(names):
        if name in table.header and name != date_column:
            values[:, place], found = _read_numbers(table, name)
            faults += found
    if faults or calendar is None:
        raise InputFault(*faults)
    return Dataset(path, calendar, names, values, table.digest, table.lines, table.unit)


def _frequency(path: Path, name: str) -> Frequency:
    try:
        return as_frequency(name)
    except ValueError as error:
        close = difflib.get_close_matches(name, FREQUENCIES, n=1)
        mend = f"Did you mean “{close[0]}”?" if close else ""
        raise InputFault(Fault(path.name, str(error), mend)) from None


def _column_faults(table: Table, date_column: str, names: Sequence[str]) -> list[Fault]:
    faults = []
    present = [name for name in table.header if name]
    for name in dict.fromkeys((date_column, *names)):
        if name in present:
            continue
        close = difflib.get_close_matches(name, present, n=1)
        exact = [other for other in present if other.lower() == name.lower()]
        mend = f"Did you mean “{(exact or close)[0]}”? " if exact or close else ""
        mend += f"The columns are {listed(present, limit=12)}."
        faults.append(Fault(table.path.name, f"there is no column “{name}”", mend))
    if date_column in names:
        problem = "the date column cannot also be a series"
        faults.append(Fault(table.place(None, date_column), problem))
    return faults


def _read_numbers(table: Table, name: str) -> tuple[NDArray[np.float64], list[Fault]]:
    """Return a column as numbers, and one fault for each kind of defect in it."""
    cells = table.column(name)
    values = np.full(len(cells), np.nan)
    bad: dict[str, list[tuple[int, CellError]]] = defaultdict(list)
    for row, cell in enumerate(cells):
        if row in table.ragged:
            continue
        try:
            values[row] = read_number(cell)
        except CellError as error:
            bad[error.kind].append((row, error))
    faults = []
    for kind, found in bad.items():
        row, first = found[0]
        more = [
            f"{shown(cells[other])} on {table.unit} {table.lines[other]}" for other, _ in found[1:]
        ]
        rest = f" (and {listed(more, limit=3)})" if more else ""
        problem = f"{shown(cells[row])} {kind}{rest}"
        faults.append(Fault(table.place(row, name), problem, first.mend))
    return values, faults
