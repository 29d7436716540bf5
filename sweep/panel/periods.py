"""Frequencies and periods: how a date is written, numbered and named.

A *period* is one year, quarter, month, week or day.  Dates may be written as any day
of their period (``1990-03-15``), or as ``1990``, ``1990-Q1``, ``1990Q1`` or ``1990-03``.
Weekly and daily periods are named by the day itself.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from datetime import date, datetime, timedelta
from typing import Literal

__all__ = [
    "FREQUENCIES",
    "MONTHS",
    "Frequency",
    "Side",
    "advance",
    "as_frequency",
    "canonical_period",
    "ordinal_of",
    "parse_period",
    "period_label",
    "period_of_cell",
]

Side = Literal["first", "last"]


@dataclass(frozen=True, slots=True)
class Frequency:
    """How often the series are observed, and what is usual at that pace.

    Attributes
    ----------
    name : str
        Trade word: annual, quarterly, monthly, weekly, business daily, daily.
    seasons : int
        Periods of the seasonal cycle (1 where there is none; the week for daily data).
    year : int or None
        Periods a year; None for business daily data, whose years differ in length.
    criterion_maximum : int
        Largest lag order an information criterion considers unless the plan says otherwise.
    hamilton_horizon : int
        Two years in periods, the horizon of the Hamilton filter (Hamilton 2018): 8 quarters,
        24 months.
    smoothing : float or None
        Hodrick-Prescott parameter 1600 (f/4)^4 (Ravn & Uhlig 2002); None where no value is usual.
    unit : str
        One period in words.
    """

    name: str
    seasons: int
    year: int | None
    criterion_maximum: int
    hamilton_horizon: int
    smoothing: float | None
    unit: str

    @property
    def hamilton_lags(self) -> int:
        """Values on the right-hand side of the Hamilton filter: one seasonal cycle.

        Hamilton (2018) takes one year, 4 quarters or 12 months, so that a seasonal pattern is
        filtered out as well; for daily data the cycle is the week.
        """
        return self.seasons


FREQUENCIES: dict[str, Frequency] = {
    frequency.name: frequency
    for frequency in (
        Frequency("annual", 1, 1, 4, 2, 6.25, "year"),
        Frequency("quarterly", 4, 4, 8, 8, 1600.0, "quarter"),
        Frequency("monthly", 12, 12, 12, 24, 129_600.0, "month"),
        Frequency("weekly", 52, 52, 12, 104, None, "week"),
        # 520 = two years of 52 weeks of five days.
        Frequency("business daily", 5, None, 20, 520, None, "business day"),
        Frequency("daily", 7, 365, 20, 730, None, "day"),
    )
}

# Months of a period, for the frequencies that are made of whole months.
MONTHS = {"annual": 12, "quarterly": 3, "monthly": 1}
_WRITTEN = re.compile(
    r"(?P<year>\d{4})(?:-?[Qq](?P<quarter>[1-4])|-(?P<month>\d{2})(?:-(?P<day>\d{2}))?)?",
    re.ASCII,
)
_HOW_TO_WRITE = "write it as 1990, 1990-Q1, 1990-03 or 1990-03-15"


def as_frequency(frequency: Frequency | str) -> Frequency:
    """Return the frequency record of a name.

    Raises
    ------
    ValueError
        If the name is not one of ``FREQUENCIES``.

    Examples
    --------
    >>> as_frequency("monthly").seasons
    12
    """
    if isinstance(frequency, Frequency):
        return frequency
    if frequency not in FREQUENCIES:
        raise ValueError(f"“{frequency}” is not a frequency; choose {', '.join(FREQUENCIES)}")
    return FREQUENCIES[frequency]


def _month_start(months: int) -> date:
    return date(months // 12, months % 12 + 1, 1)


def ordinal_of(day: date, frequency: Frequency | str) -> int:
    """Return the number of the period that holds a day; neighbouring periods differ by one.

    Business days count Monday to Friday; a Saturday or Sunday has the number of the
    Monday that follows it.  Weeks are counted from the weekday of the day given, so only
    days of one weekday can be compared.
    """
    name = as_frequency(frequency).name
    if name in MONTHS:
        return (day.year * 12 + day.month - 1) // MONTHS[name]
    # Day 1 of the proleptic calendar is a Monday, so whole weeks start on Mondays.
    weeks, weekday = divmod(day.toordinal() - 1, 7)
    if name == "weekly":
        return weeks
    return weeks * 5 + min(weekday, 5) if name == "business daily" else day.toordinal()


def advance(day: date, frequency: Frequency | str, periods: int) -> date:
    """Return the first day of the period that lies some periods after the one of a day.

    For weekly data this is the same weekday; ``periods`` may be negative.
    """
    name = as_frequency(frequency).name
    if name in MONTHS:
        return _month_start((ordinal_of(day, name) + periods) * MONTHS[name])
    if name == "weekly":
        return day + timedelta(days=7 * periods)
    if name == "business daily":
        weeks, weekday = divmod(ordinal_of(day, name) + periods, 5)
        return date.fromordinal(weeks * 7 + weekday + 1)
    return day + timedelta(days=periods)


def period_label(day: date, frequency: Frequency | str) -> str:
    """Return the canonical label of the period that holds a day.

    Examples
    --------
    >>> period_label(date(2009, 2, 14), "quarterly"), period_label(date(2009, 2, 14), "weekly")
    ('2009-Q1', '2009-02-14')
    """
    name = as_frequency(frequency).name
    if name == "annual":
        return f"{day.year:04d}"
    if name == "quarterly":
        return f"{day.year:04d}-Q{(day.month + 2) // 3}"
    return f"{day.year:04d}-{day.month:02d}" if name == "monthly" else day.isoformat()


def _written(value: str | int | date) -> tuple[date, date, str]:
    """Read a date as it stands: its first day, its last day and the name of its period."""
    if isinstance(value, datetime):
        value = value.date()
    if isinstance(value, date):
        return value, value, "daily"
    text = "" if isinstance(value, bool) else str(value).strip()
    match = _WRITTEN.fullmatch(text)
    if match is None or not 1000 <= int(match["year"]) <= 2999:
        raise ValueError(f"“{value}” is not a date that can be read; {_HOW_TO_WRITE}")
    year = int(match["year"])
    try:
        if match["day"]:
            day = date(year, int(match["month"]), int(match["day"]))
            return day, day, "daily"
        if match["month"]:
            first, grain = date(year, int(match["month"]), 1), "monthly"
        elif match["quarter"]:
            first, grain = date(year, 3 * int(match["quarter"]) - 2, 1), "quarterly"
        else:
            first, grain = date(year, 1, 1), "annual"
    except ValueError:
        raise ValueError(f"“{value}” is not a day or month of the calendar") from None
    return first, advance(first, grain, 1) - timedelta(days=1), grain


def parse_period(value: str | int | date, frequency: Frequency | str) -> tuple[date, date]:
    """Return the first and last day of what a date names, in whole periods of the frequency.

    Parameters
    ----------
    value : str, int or date
        ``1990`` (also as a number), ``1990-Q1``, ``1990Q1``, ``1990-03``, ``1990-03-15``
        or a date.
    frequency : Frequency or str
        Anything finer is widened to the period that holds it; anything coarser stays as
        wide as it is (``1990`` on quarterly data runs from January to December).

    Raises
    ------
    ValueError
        If the value is not a date; the message says how to write one.

    Examples
    --------
    >>> [str(day) for day in parse_period("2009-02", "quarterly")]
    ['2009-01-01', '2009-03-31']
    >>> [str(day) for day in parse_period(2009, "monthly")]
    ['2009-01-01', '2009-12-31']
    """
    name = as_frequency(frequency).name
    first, last, _ = _written(value)
    if name in MONTHS:
        return advance(first, name, 0), advance(last, name, 1) - timedelta(days=1)
    return first, last


def period_of_cell(value: str | int | date, frequency: Frequency | str) -> date:
    """Return the (first) day that a row's date names, which must lie in one period.

    Raises
    ------
    ValueError
        If the value is not a date, or names a longer stretch than one period.
    """
    wanted = as_frequency(frequency)
    first, last, grain = _written(value)
    if grain != "daily" and advance(first, wanted, 1) <= last:
        written = FREQUENCIES[grain].unit
        raise ValueError(f"“{value}” names a whole {written}, but the data are {wanted.name}")
    return first


def canonical_period(value: str | int | date, frequency: Frequency | str, side: Side) -> str:
    """Return the canonical label of the first or last period that a date names.

    Raises
    ------
    ValueError
        If the value is not a date.

    Examples
    --------
    >>> canonical_period("2008", "quarterly", "last")
    '2008-Q4'
    """
    first, last = parse_period(value, frequency)
    return period_label(first if side == "first" else last, frequency)
