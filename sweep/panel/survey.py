"""What a data file holds: its date column, its frequency, and series fit for a regression."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date
from itertools import pairwise
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from sweep.errors import Fault, InputFault
from sweep.panel.calendar import FREQUENCIES, Calendar, Frequency, recognise_frequency
from sweep.panel.cells import CellError, is_blank, read_day, read_number, shown
from sweep.panel.dates import read_calendar
from sweep.panel.files import Table, read_table
from sweep.panel.series import Dataset, collinear_faults, constant_faults, missing_faults
from sweep.panel.traits import Traits, moves_with, traits_of

__all__ = ["Survey", "rows_needed", "survey_file"]

# What the screen "enough observations" asks for.
_LEAST_FREE = 20  # observations less coefficients that a regression should keep
_PER_COEFFICIENT = 3
# Share of cells that may not be dates where a column is taken for one of dates all the same.
_NEARLY = 0.25


@dataclass(frozen=True, slots=True)
class Survey:
    """What was found in a data file.

    Attributes
    ----------
    date : str
        Date column.
    frequency : Frequency
        Frequency of its dates.
    as_observed : bool
        True where the dates skip holidays.
    effect, cause : str
        First and second usable series.
    given : tuple of str
        Up to three further ones.
    unusable : tuple of (str, str)
        Columns that were passed over, with the reason.
    rows : int
        Rows on which all chosen series are known.
    middle, after : str
        Labels of the last row of their earlier half and of the next one.
    before, onwards : str
        Labels of two rows between them, an example of an episode's dates.
    traits : mapping of series to Traits
        What the chosen series look like.
    alike : tuple of (str, str)
        Series that are not given, since they move with the effect or the cause, and which.
    """

    date: str
    frequency: Frequency
    as_observed: bool
    effect: str
    cause: str
    given: tuple[str, ...]
    unusable: tuple[tuple[str, str], ...]
    rows: int
    middle: str
    after: str
    before: str
    onwards: str
    traits: Mapping[str, Traits]
    alike: tuple[tuple[str, str], ...]

    @property
    def series(self) -> tuple[str, ...]:
        """All chosen series, effect and cause first."""
        return (self.effect, self.cause, *self.given)

    @property
    def positive(self) -> tuple[str, ...]:
        """The chosen series of which a log exists everywhere."""
        return tuple(name for name in self.series if self.traits[name].positive)

    @property
    def seasonal(self) -> tuple[str, ...]:
        """The chosen series whose changes differ between the seasons."""
        return tuple(name for name in self.series if self.traits[name].seasonal)


def survey_file(path: Path) -> Survey:
    """Recognise the date column, the frequency and the usable series of a data file.

    Raises
    ------
    InputFault
        If the file cannot be read, the date column or the frequency is not recognised,
        fewer than two series are usable, or there are too few rows for one lag.
    """
    table = read_table(path)
    if table.faults:
        raise InputFault(*table.faults)
    date_column, calendar = _dates(table)
    names, unusable, dataset = _usable(table, date_column, calendar)
    alike, given = _apart(dataset, names)
    rows = _known(dataset, (*names[:2], *given))
    while given and rows.size < rows_needed(len(given) + 2, 1):
        given = given[:-1]
        rows = _known(dataset, (*names[:2], *given))
    if rows.size < rows_needed(len(given) + 2, 1):
        problem = f"only {rows.size} rows hold all of {', '.join(names[:2])}"
        mend = f"At least {rows_needed(2, 1)} are needed for a regression with one lag."
        raise InputFault(Fault(path.name, problem, mend))
    middle = int(rows[rows.size // 2 - 1])
    season = calendar.season(np.arange(len(calendar)))
    seasons = calendar.frequency.seasons
    return Survey(
        date=date_column,
        frequency=calendar.frequency,
        as_observed=calendar.as_observed,
        effect=names[0],
        cause=names[1],
        given=given,
        unusable=unusable,
        rows=int(rows.size),
        middle=calendar.label(middle),
        after=calendar.label(middle + 1),
        before=calendar.label(int(rows[rows.size // 3])),
        onwards=calendar.label(int(rows[rows.size // 3 + max(rows.size // 20, 1)])),
        traits={
            name: traits_of(dataset.column(name), season, seasons)
            for name in (*names[:2], *given)
        },
        alike=alike,
    )


def _known(dataset: Dataset, names: tuple[str, ...]) -> NDArray[np.int64]:
    """Return the rows on which all of some series are known."""
    values = np.column_stack([dataset.column(name) for name in names])
    return np.flatnonzero(np.isfinite(values).all(axis=1))


def _apart(
    dataset: Dataset, names: tuple[str, ...]
) -> tuple[tuple[tuple[str, str], ...], tuple[str, ...]]:
    """Split what may be given from what moves with the effect or the cause."""
    alike, given = [], []
    for name in names[2:]:
        like = [
            other
            for other in names[:2]
            if moves_with(dataset.column(name), dataset.column(other))
        ]
        if like:
            alike.append((name, like[0]))
        else:
            given.append(name)
    return tuple(alike), tuple(given)


def _dates(table: Table) -> tuple[str, Calendar]:
    """Find the first column of dates that run forward, and their frequency."""
    candidates = []
    repeats = ""
    nearly: list[tuple[int, str, int]] = []
    for name, cells in zip(table.header, table.columns, strict=True):
        read = [_day(cell) for cell in cells]
        days = [day for day in read if day is not None]
        if len(days) < len(read):
            nearly.append((len(read) - len(days), name, read.index(None)))
            continue
        if name and all(earlier < later for earlier, later in pairwise(days)):
            candidates.append((name, recognise_frequency(days)))
        elif name and not repeats:
            repeats = name
    if not candidates:
        problem = "no column was recognised as dates"
        mend = "Give one column dates written as 1990, 1990-Q1, 1990-03 or 1990-03-15 in every row."
        count, near, row = min(nearly, default=(len(table.lines), "", 0))
        if near and count <= _NEARLY * len(table.lines):
            raise InputFault(_near_miss(table, near, row, count))
        if repeats:
            problem = f"the dates in column {repeats} repeat or run backwards"
            mend = (
                "Sort the rows by date, one row for each period; where year and quarter or month "
                "stand in two columns, join them into one, as in 1990-Q1 or 1990-03."
            )
        raise InputFault(Fault(table.path.name, problem, mend))
    name, seen = next((pair for pair in candidates if pair[1]), candidates[0])
    if seen is None:
        problem = "the frequency of the dates was not recognised"
        mend = (
            f"Rows need to be one period apart ({', '.join(FREQUENCIES)}); "
            "look for repeated dates, gaps, or rows of another frequency."
        )
        raise InputFault(Fault(table.place(None, name), problem, mend))
    frequency = FREQUENCIES[seen]
    calendar, faults = read_calendar(table, name, frequency, as_observed=False)
    if calendar is None and seen in {"business daily", "weekly"}:
        calendar, faults = read_calendar(table, name, frequency, as_observed=True)
    if calendar is None:
        raise InputFault(*faults)
    return name, calendar


def _day(cell: object) -> date | None:
    try:
        return read_day(cell, "annual")
    except CellError:
        return None


def _near_miss(table: Table, name: str, row: int, count: int) -> Fault:
    """Say which cells keep a column from being dates."""
    cell = table.column(name)[row]
    good = len(table.lines) - count
    what = "the cell is empty" if is_blank(cell) else f"{shown(cell)} is not a date"
    more = f", nor are {count - 1:,} more" if count > 2 else ", nor is 1 more" * (count == 2)
    problem = f"{what}{more}; {good:,} other cells of the column are dates"
    mend = "Correct the cell, or take the row out if it is no observation."
    return Fault(table.place(row, name), problem, mend)


def _usable(
    table: Table, date_column: str, calendar: Calendar
) -> tuple[tuple[str, ...], tuple[tuple[str, str], ...], Dataset]:
    """Pick the first series that can stand in a regression together, up to five."""
    columns: dict[str, list[float]] = {}
    unusable: list[tuple[str, str]] = []
    for name, cells in zip(table.header, table.columns, strict=True):
        if name in {"", date_column}:
            continue
        try:
            columns[name] = [read_number(cell) for cell in cells]
        except CellError as error:
            text = next(cell for cell in cells if not is_blank(cell) and not _is_number(cell))
            unusable.append((name, f"“{text}” {error.kind}"))
    values = np.array(list(columns.values()), dtype=np.float64).reshape(len(columns), -1).T
    dataset = Dataset(
        table.path, calendar, tuple(columns), values, table.digest, table.lines, table.unit
    )
    names: list[str] = []
    for name in columns:
        if len(names) == 5:
            break
        if _counts_time(dataset.column(name), calendar):
            unusable.append((name, "it only counts time"))
            continue
        faults = missing_faults(dataset, [name]) + constant_faults(dataset, [name])
        faults = faults or collinear_faults(dataset, [*names, name])
        if faults:
            unusable.append((name, faults[0].problem))
        else:
            names.append(name)
    if len(names) < 2:
        why = "; ".join(f"{name}: {reason}" for name, reason in unusable)
        problem = f"{len(names)} usable series beside the dates, and a finding needs two"
        mend = f"Not usable: {why}." if why else "Add the series of your finding to the file."
        raise InputFault(Fault(table.path.name, problem, mend))
    return tuple(names), tuple(unusable), dataset


def _counts_time(values: NDArray[np.float64], calendar: Calendar) -> bool:
    """Recognise row numbers and columns that repeat the year, quarter, month or day."""
    if values.size > 2 and np.ptp(np.diff(values)) == 0.0 and values[0] != values[1]:
        return True
    days = calendar.dates
    parts = (
        [day.year for day in days],
        [(day.month + 2) // 3 for day in days],
        [day.month for day in days],
        [day.day for day in days],
    )
    return any(len(set(part)) > 1 and np.array_equal(values, part) for part in parts)


def _is_number(cell: object) -> bool:
    try:
        read_number(cell)
    except CellError:
        return False
    return True


def rows_needed(series: int, lags: int, terms: int = 2) -> int:
    """Return the rows that a regression of some series with some lags should have.

    One row is lost to differencing and one to each lag; the deterministic terms (a constant and
    a trend, if not told otherwise) and one coefficient for each series and lag are estimated.
    Three rows for each coefficient, and twenty to spare, are what the screen asks for.
    """
    coefficients = terms + series * lags
    return 1 + lags + max(_PER_COEFFICIENT * coefficients, coefficients + _LEAST_FREE)
