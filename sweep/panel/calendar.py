"""The calendar of a data set: which period each row is."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

from sweep.panel.periods import (
    FREQUENCIES,
    MONTHS,
    Frequency,
    Side,
    advance,
    as_frequency,
    canonical_period,
    ordinal_of,
    parse_period,
    period_label,
    period_of_cell,
)

__all__ = [
    "FREQUENCIES",
    "Calendar",
    "Frequency",
    "Side",
    "advance",
    "as_frequency",
    "build_calendar",
    "canonical_period",
    "ordinal_of",
    "parse_period",
    "period_label",
    "period_of_cell",
    "recognise_frequency",
]

# A frequency is recognised in spite of gaps when at least this share of steps is one period.
_REGULAR_SHARE = 0.9


@dataclass(frozen=True, slots=True, eq=False)
class Calendar:
    """The dates of the rows of a data set, one period after the other.

    Attributes
    ----------
    frequency : Frequency
        How often the series are observed.
    dates : tuple of date, length n
        First day of each row's period (the day itself for weekly and daily data).
    ordinals : int64 (n,)
        Number of each row's period; neighbours differ by one.
    as_observed : bool
        True where consecutive rows are consecutive periods whatever the days between them.
    """

    frequency: Frequency
    dates: tuple[date, ...]
    ordinals: NDArray[np.int64]
    as_observed: bool = False

    def __len__(self) -> int:
        return len(self.dates)

    def label(self, row: int) -> str:
        """Return the canonical label of a row's period."""
        return period_label(self.dates[row], self.frequency)

    def season(self, rows: ArrayLike) -> NDArray[np.int64]:
        """Return the season of each row, 0 to ``frequency.seasons - 1``.

        Quarter or month of the year; ISO week of the year (a 53rd week counts with the
        52nd); day of the week, Monday first, for daily and business-daily data.
        """
        name = self.frequency.name
        days = [self.dates[row] for row in np.atleast_1d(np.asarray(rows, dtype=np.int64))]
        if name in MONTHS:
            seasons = [(day.month - 1) // MONTHS[name] for day in days]
        elif name == "weekly":
            seasons = [min(day.isocalendar().week, 52) - 1 for day in days]
        else:
            seasons = [day.weekday() for day in days]
        return np.array(seasons, dtype=np.int64)

    def find(self, value: str | int | date, side: Side) -> int:
        """Return the row of a date.

        Parameters
        ----------
        value : str, int or date
            See `parse_period`.
        side : {"first", "last"}
            ``first``: the first row at or after the first day that the date names;
            ``last``: the last row at or before its last day.  A weekend or holiday inside
            an observed calendar therefore has a ``last`` row just before its ``first``.

        Raises
        ------
        ValueError
            If the value is not a date or names no day between the first and last row.
        """
        first, last = parse_period(value, self.frequency)
        if not self.dates or last < self.dates[0] or first > self.dates[-1]:
            span = f"{self.label(0)} to {self.label(-1)}" if self.dates else "no rows"
            raise ValueError(f"{value} lies outside the sample ({span})")
        if side == "first":
            return bisect_left(self.dates, first)
        return bisect_right(self.dates, last) - 1


def build_calendar(
    frequency: Frequency | str, days: Sequence[date], *, as_observed: bool = False
) -> Calendar:
    """Make a calendar from any day of each row's period.

    Raises
    ------
    ValueError
        If the days are not in order, or (unless ``as_observed``) not one period apart.
    """
    wanted = as_frequency(frequency)
    dates = tuple(advance(day, wanted, 0) if wanted.name in MONTHS else day for day in days)
    numbers = np.array([ordinal_of(day, wanted) for day in dates], dtype=np.int64)
    if any(later <= earlier for earlier, later in pairwise(dates)):
        raise ValueError("the dates are not in order")
    if as_observed:
        return Calendar(wanted, dates, np.arange(len(dates), dtype=np.int64), True)
    uneven = wanted.name == "weekly" and len({day.weekday() for day in dates}) > 1
    weekend = wanted.name == "business daily" and any(day.weekday() > 4 for day in dates)
    if uneven or weekend or np.any(np.diff(numbers) != 1):
        raise ValueError(f"the dates are not one {wanted.unit} apart")
    return Calendar(wanted, dates, numbers)


def recognise_frequency(dates: Sequence[date]) -> str | None:
    """Return the name of the frequency that the dates show, or None.

    The coarsest frequency at which all dates are one period apart is taken; where there
    is none, the coarsest at which no two dates share a period and at least nine steps in
    ten are one period.  The order of the dates does not matter; at least three different
    ones are needed.

    Examples
    --------
    >>> recognise_frequency([date(1990, month, 28) for month in (1, 4, 7, 10)])
    'quarterly'
    """
    days = sorted(set(dates))
    if len(days) < 3:
        return None
    for least in (1.0, _REGULAR_SHARE):
        for name in FREQUENCIES:
            steps = _steps(days, name)
            if steps.size and np.all(steps >= 1) and np.mean(steps == 1) >= least:
                return name
    return None


def _steps(days: Sequence[date], name: str) -> NDArray[np.float64]:
    """Return the steps between sorted days in periods; empty where the frequency cannot be."""
    if name == "weekly":
        spans = np.diff([day.toordinal() for day in days])
        # A holiday moves a weekly date by a day; such files are read “as observed”.
        return np.where((spans >= 6) & (spans <= 8), 1.0, np.where(spans > 8, spans / 7, 0.0))
    if name == "business daily" and any(day.weekday() > 4 for day in days):
        return np.empty(0)
    return np.diff([ordinal_of(day, name) for day in days]).astype(np.float64)
