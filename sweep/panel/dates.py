"""From the cells of a date column to a calendar, or to every fault that is in the way."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from datetime import date
from itertools import pairwise

from sweep.errors import Fault
from sweep.panel.calendar import (
    Calendar,
    Frequency,
    advance,
    build_calendar,
    ordinal_of,
    period_label,
    recognise_frequency,
)
from sweep.panel.cells import CellError, read_day, shown
from sweep.panel.files import Table
from sweep.panel.periods import MONTHS

__all__ = ["listed", "read_calendar"]

_SHOWN_PERIODS = 8
# So many equal steps in a row are another frequency, not a series of gaps.
_RUN = 3


def listed(names: Sequence[str], limit: int = _SHOWN_PERIODS) -> str:
    """Join names for a message: the first few, then how many more there are.

    Examples
    --------
    >>> listed(["1990-01", "1990-02", "1990-03"], limit=2)
    '1990-01, 1990-02 and 1 more'
    """
    if len(names) <= limit:
        return ", ".join(names)
    return f"{', '.join(names[:limit])} and {len(names) - limit} more"


def read_calendar(
    table: Table, column: str, frequency: Frequency, *, as_observed: bool
) -> tuple[Calendar | None, list[Fault]]:
    """Read the date column of a table.

    Parameters
    ----------
    table : Table
        The data file.
    column : str
        Name of its date column.
    frequency : Frequency
        What the plan says about the data.
    as_observed : bool
        Take consecutive rows as consecutive periods (weekly and business daily data).

    Returns
    -------
    calendar : Calendar or None
        None where there is any fault.
    faults : list of Fault
        Every fault of the dates: cells that are no dates, wrong or mixed frequency,
        repeated and unsorted dates, gaps with the names of the missing periods.
    """
    days, faults = _read_days(table, column, frequency)
    if faults or table.ragged:
        return None, faults  # the order and gaps of some of the dates would say little
    faults = _order_faults(table, column, days, frequency)
    rows = sorted(range(len(days)), key=lambda row: days[row])
    rows = [
        row for place, row in enumerate(rows) if place == 0 or days[row] != days[rows[place - 1]]
    ]
    check = _observed_faults if as_observed else _regular_faults
    faults += check(table, column, frequency, [(days[row], row) for row in rows])
    if faults:
        return None, faults
    return build_calendar(frequency, days, as_observed=as_observed), []


def _read_days(table: Table, column: str, frequency: Frequency) -> tuple[list[date], list[Fault]]:
    days: list[date] = []
    bad: dict[str, list[tuple[int, CellError]]] = defaultdict(list)
    for row, cell in enumerate(table.column(column)):
        if row in table.ragged:
            continue
        try:
            days.append(read_day(cell, frequency))
        except CellError as error:
            bad[error.kind].append((row, error))
    faults = []
    for kind, cells in bad.items():
        row, first = cells[0]
        more = [str(table.lines[other]) for other, _ in cells[1:]]
        rest = f" ({table.unit}s {listed(more)} likewise)" if more else ""
        problem = f"{shown(table.column(column)[row] or '')} {kind}{rest}"
        faults.append(Fault(table.place(row, column), problem, first.mend))
    return days, faults


def _order_faults(
    table: Table, column: str, days: Sequence[date], frequency: Frequency
) -> list[Fault]:
    faults = []
    first_row: dict[date, int] = {}
    repeated = []
    for row, day in enumerate(days):
        if day in first_row:
            repeated.append((first_row[day], row))
        first_row.setdefault(day, row)
    if repeated:
        earlier, row = repeated[0]
        label = period_label(days[row], frequency)
        more = f" ({len(repeated) - 1} more repeated dates)" if len(repeated) > 1 else ""
        problem = f"{label} is also on {table.unit} {table.lines[earlier]}{more}"
        mend = f"Keep one row for each {frequency.unit}."
        if 2 * len(repeated) >= len(days):
            mend = "If the file stacks several series, give each of them its own column."
        faults.append(Fault(table.place(row, column), problem, mend))
    back = [row for row in range(1, len(days)) if days[row] < days[row - 1]]
    if back and len(back) == len(days) - 1 - len(repeated):
        problem = "the rows run from the newest date to the oldest"
        faults.append(Fault(table.place(0, column), problem, "Sort them by date, oldest first."))
    elif back:
        row = back[0]
        problem = (
            f"{period_label(days[row], frequency)} comes after "
            f"{period_label(days[row - 1], frequency)}"
        )
        faults.append(Fault(table.place(row, column), problem, "Sort the rows by date."))
    return faults


# -- every period has its row -------------------------------------------------------------


def _regular_faults(
    table: Table, column: str, frequency: Frequency, rows: Sequence[tuple[date, int]]
) -> list[Fault]:
    """Faults of sorted, different days that should be one period apart."""
    days = [day for day, _ in rows]
    place = table.place(None, column)
    if frequency.name == "business daily" and any(day.weekday() > 4 for day in days):
        day, row = next((day, row) for day, row in rows if day.weekday() > 4)
        problem = f"{day.isoformat()} is a {day:%A}, but the data are business daily"
        mend = 'Leave weekends out, or say frequency = "daily" in [data].'
        return [Fault(table.place(row, column), problem, mend)]
    if frequency.name == "weekly" and len({day.weekday() for day in days}) > 1:
        return [_weekday_fault(table, column, rows)]
    steps = [ordinal_of(b, frequency) - ordinal_of(a, frequency) for a, b in pairwise(days)]
    if all(step == 1 for step in steps):
        return []
    seen = recognise_frequency(days)
    if seen is not None and seen != frequency.name:
        problem = f"the dates look {seen}, but the plan says {frequency.name}"
        return [Fault(place, problem, f'Say frequency = "{seen}" in [data], or check the dates.')]
    mixed, explained = _mixed_faults(table, column, frequency, rows, steps)
    missing = [
        period_label(advance(days[i], frequency, ahead), frequency)
        for i, step in enumerate(steps)
        if step > 1 and i not in explained
        for ahead in range(1, step)
    ]
    if missing:
        count = f"{len(missing)} {frequency.unit}s are" if len(missing) > 1 else "a row is"
        problem = f"{count} missing: {listed(missing)}"
        mend = "Give every period a row (with empty cells where nothing is known)."
        if frequency.name in {"business daily", "weekly"}:
            mend += ' If these are holidays, say calendar = "as observed" in [data].'
        mixed.append(Fault(place, problem, mend))
    return mixed


def _weekday_fault(table: Table, column: str, rows: Sequence[tuple[date, int]]) -> Fault:
    weekdays = [f"{day:%A}" for day, _ in rows]
    usual = max(set(weekdays), key=weekdays.count)
    place = next(i for i, weekday in enumerate(weekdays) if weekday != usual)
    day, row = rows[place]
    problem = f"{day.isoformat()} is a {weekdays[place]}, most weekly dates are a {usual}"
    mend = 'Give all weeks one weekday, or say calendar = "as observed" in [data].'
    return Fault(table.place(row, column), problem, mend)


def _mixed_faults(
    table: Table,
    column: str,
    frequency: Frequency,
    rows: Sequence[tuple[date, int]],
    steps: Sequence[int],
) -> tuple[list[Fault], set[int]]:
    """Stretches of a slower or quicker frequency, and the steps that they explain."""
    mend = "Bring all rows to one frequency, or keep the stretch that has it."
    slower = [run for run in _runs(steps) if steps[run[0]] > 1 and run[1] - run[0] >= _RUN]
    faults = []
    for start, stop in slower:
        apart = _pace(frequency, steps[start])
        lines = _lines(table, rows[start][1], rows[stop][1])
        problem = f"mixed frequency: {lines} are {apart}, other rows {frequency.name}"
        faults.append(Fault(table.place(rows[start][1], column), problem, mend))
    shared = [run for run in _runs(steps) if steps[run[0]] == 0]
    if shared:
        start, stop = shared[0]
        lines = _lines(table, rows[start][1], rows[stop][1])
        period = period_label(rows[start][0], frequency)
        more = f" ({len(shared) - 1} more {frequency.unit}s likewise)" if len(shared) > 1 else ""
        quicker = "mixed frequency: " if len(shared) > 1 or stop - start > 1 else ""
        problem = f"{quicker}{lines} fall in the same {frequency.unit}, {period}{more}"
        one = f"Keep one row for each {frequency.unit}."
        faults.append(Fault(table.place(rows[start + 1][1], column), problem, one))
    return faults, {step for start, stop in slower for step in range(start, stop)}


def _pace(frequency: Frequency, size: int) -> str:
    months = MONTHS.get(frequency.name, 0) * size
    names = [name for name, length in MONTHS.items() if length == months]
    return names[0] if names else f"{size} {frequency.unit}s apart"


def _lines(table: Table, first: int, last: int) -> str:
    joint = "and" if last == first + 1 else "to"
    return f"{table.unit}s {table.lines[first]} {joint} {table.lines[last]}"


def _runs(steps: Sequence[int]) -> list[tuple[int, int]]:
    """Return the (start, stop) of each stretch of equal steps."""
    edges = [0, *(i for i in range(1, len(steps)) if steps[i] != steps[i - 1]), len(steps)]
    return list(pairwise(edges)) if steps else []


# -- rows as observed ---------------------------------------------------------------------


def _observed_faults(
    table: Table, column: str, frequency: Frequency, rows: Sequence[tuple[date, int]]
) -> list[Fault]:
    """Faults of dates that need not be evenly apart: weekends, and another frequency."""
    days = [day for day, _ in rows]
    if frequency.name == "business daily" and any(day.weekday() > 4 for day in days):
        return _regular_faults(table, column, frequency, rows)
    spans = [(b - a).days for a, b in pairwise(days)]
    # Holidays stretch one step; three long ones on end are rows of a slower frequency.
    short, long = (1, 6) if frequency.name == "business daily" else (4, 13)
    wrong = [0 if span < short else 2 if span > long else 1 for span in spans]
    for start, stop in _runs(wrong):
        if wrong[start] != 1 and stop - start >= _RUN:
            first, last = rows[start][1], rows[stop][1]
            apart = min(spans[start:stop])
            problem = (
                f"mixed frequency: {table.unit}s {table.lines[first]} to {table.lines[last]} are "
                f"{apart} days or more apart"
                if wrong[start] == 2
                else f"mixed frequency: {table.unit}s {table.lines[first]} to "
                f"{table.lines[last]} are only a few days apart"
            )
            mend = f"Keep the rows that are {frequency.name}."
            return [Fault(table.place(first, column), problem, mend)]
    return []
