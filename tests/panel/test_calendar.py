from __future__ import annotations

from datetime import date, datetime, timedelta

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from sweep.panel.calendar import (
    FREQUENCIES,
    advance,
    as_frequency,
    build_calendar,
    canonical_period,
    ordinal_of,
    parse_period,
    period_label,
    recognise_frequency,
)

DAYS = st.dates(date(1200, 1, 1), date(2800, 1, 1))
NAMES = st.sampled_from(sorted(FREQUENCIES))


def days_of(frequency: str, count: int, start: date = date(1990, 1, 1)) -> list[date]:
    return [advance(start, frequency, step) for step in range(count)]


# -- periods ------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "frequency", "first", "last"),
    [
        ("1990", "annual", "1990-01-01", "1990-12-31"),
        (1990, "annual", "1990-01-01", "1990-12-31"),
        ("1990-Q1", "quarterly", "1990-01-01", "1990-03-31"),
        ("1990Q4", "quarterly", "1990-10-01", "1990-12-31"),
        ("1990q2", "quarterly", "1990-04-01", "1990-06-30"),
        ("1990-02", "monthly", "1990-02-01", "1990-02-28"),
        ("1992-02", "monthly", "1992-02-01", "1992-02-29"),
        ("1990-03-15", "monthly", "1990-03-01", "1990-03-31"),
        ("1990-03-15", "quarterly", "1990-01-01", "1990-03-31"),
        ("1990-03-15", "annual", "1990-01-01", "1990-12-31"),
        ("1990-05", "quarterly", "1990-04-01", "1990-06-30"),
        ("1990", "quarterly", "1990-01-01", "1990-12-31"),
        ("1990-Q3", "monthly", "1990-07-01", "1990-09-30"),
        ("1990-03-15", "weekly", "1990-03-15", "1990-03-15"),
        ("1990-03", "weekly", "1990-03-01", "1990-03-31"),
        ("1990", "daily", "1990-01-01", "1990-12-31"),
        (date(1990, 3, 15), "monthly", "1990-03-01", "1990-03-31"),
        (datetime(1990, 3, 15, 9, 30), "business daily", "1990-03-15", "1990-03-15"),
        (" 1990-03 ", "monthly", "1990-03-01", "1990-03-31"),
    ],
)
def test_what_a_written_date_names(value, frequency, first, last):
    assert [day.isoformat() for day in parse_period(value, frequency)] == [first, last]


@pytest.mark.parametrize(
    "value",
    ["", "1990-13", "1990-02-30", "1990-Q5", "90", "1990/03/15", "15.03.1990", "1990-3", "199003",
     "next year", "0990", "3000", True, "1990-03-15T09:30", "１９９０"],
)  # fmt: skip
def test_what_is_no_date(value):
    with pytest.raises(ValueError, match=r"date|calendar"):
        parse_period(value, "monthly")


@pytest.mark.parametrize(
    ("value", "frequency", "side", "label"),
    [
        (2009, "annual", "first", "2009"),
        ("2009-05-06", "annual", "last", "2009"),
        (2009, "quarterly", "first", "2009-Q1"),
        (2009, "quarterly", "last", "2009-Q4"),
        ("2009Q1", "quarterly", "last", "2009-Q1"),
        ("2009", "monthly", "last", "2009-12"),
        ("2009-02", "daily", "last", "2009-02-28"),
    ],
)
def test_canonical_label(value, frequency, side, label):
    assert canonical_period(value, frequency, side) == label


def test_every_way_to_write_a_period_has_one_label():
    written = ["2009-01", "2009-01-01", "2009-01-31", date(2009, 1, 9)]
    assert {canonical_period(value, "monthly", "first") for value in written} == {"2009-01"}


def test_an_unknown_frequency_lists_the_known_ones():
    with pytest.raises(ValueError, match="business daily"):
        as_frequency("fortnightly")


@given(DAYS, NAMES, st.integers(-400, 400))
def test_advancing_moves_the_number_by_as_many_periods(day, name, periods):
    if name == "business daily" and day.weekday() > 4:
        day += timedelta(days=7 - day.weekday())
    moved = advance(day, name, periods)
    assert ordinal_of(moved, name) - ordinal_of(day, name) == periods
    assert advance(moved, name, -periods) == advance(day, name, 0)


@given(DAYS, NAMES)
def test_a_label_reads_back_as_the_period_it_names(day, name):
    first, last = parse_period(period_label(day, name), name)
    assert first <= day <= last
    assert period_label(first, name) == period_label(last, name) == period_label(day, name)


def test_business_days_are_consecutive_over_a_weekend():
    friday, monday = date(2024, 3, 1), date(2024, 3, 4)
    assert advance(friday, "business daily", 1) == monday
    assert ordinal_of(monday, "business daily") - ordinal_of(friday, "business daily") == 1


# -- calendars ----------------------------------------------------------------------------


@pytest.mark.parametrize("name", FREQUENCIES)
def test_a_calendar_of_every_frequency(name):
    calendar = build_calendar(name, days_of(name, 130))
    assert len(calendar) == 130
    assert np.all(np.diff(calendar.ordinals) == 1)
    for row in (0, 64, 129):
        label = calendar.label(row)
        assert calendar.find(label, "first") == calendar.find(label, "last") == row
    seasons = calendar.season(np.arange(130))
    assert seasons.dtype == np.int64
    assert set(seasons) == set(range(FREQUENCIES[name].seasons))


def test_any_day_of_the_period_is_the_period():
    ends = [date(1990, 3, 31), date(1990, 6, 30), date(1990, 9, 28)]
    calendar = build_calendar("quarterly", ends)
    assert calendar.dates == (date(1990, 1, 1), date(1990, 4, 1), date(1990, 7, 1))
    assert [calendar.label(row) for row in range(3)] == ["1990-Q1", "1990-Q2", "1990-Q3"]


def test_seasons_repeat_with_the_year():
    calendar = build_calendar("monthly", days_of("monthly", 30, date(1990, 11, 1)))
    assert calendar.season([0, 1, 2, 14]).tolist() == [10, 11, 0, 0]


def test_the_53rd_week_counts_with_the_52nd():
    calendar = build_calendar("weekly", [date(2020, 12, 24), date(2020, 12, 31), date(2021, 1, 7)])
    assert calendar.season([0, 1, 2]).tolist() == [51, 51, 0]


@pytest.mark.parametrize(
    ("value", "side", "row"),
    [
        ("1990", "first", 0),
        ("1990", "last", 11),
        ("1991", "first", 12),
        ("1991-Q2", "last", 17),
        ("1990-03-31", "first", 2),
        ("1990-03-31", "last", 2),
        ("1992", "last", 29),  # the sample ends within the year
    ],
)
def test_finding_a_row(value, side, row):
    assert build_calendar("monthly", days_of("monthly", 30)).find(value, side) == row


@pytest.mark.parametrize("value", ["1989", "1989-12", "1992-07", "2020"])
def test_a_date_outside_the_sample_names_the_sample(value):
    calendar = build_calendar("monthly", days_of("monthly", 30))
    with pytest.raises(ValueError, match=r"outside the sample \(1990-01 to 1992-06\)"):
        calendar.find(value, "first")


def test_a_weekend_inside_an_observed_calendar_lies_between_two_rows():
    days = [date(2024, 2, 29), date(2024, 3, 1), date(2024, 3, 5), date(2024, 3, 6)]
    calendar = build_calendar("business daily", days, as_observed=True)
    assert calendar.ordinals.tolist() == [0, 1, 2, 3]
    assert calendar.find("2024-03-03", "first") == 2
    assert calendar.find("2024-03-03", "last") == 1


@pytest.mark.parametrize(
    ("name", "days"),
    [
        ("monthly", [date(1990, 1, 1), date(1990, 3, 1)]),
        ("monthly", [date(1990, 2, 1), date(1990, 1, 1)]),
        ("monthly", [date(1990, 1, 1), date(1990, 1, 9)]),
        ("weekly", [date(1990, 1, 5), date(1990, 1, 11)]),
        ("business daily", [date(2024, 3, 1), date(2024, 3, 2)]),
        ("daily", [date(2024, 3, 1), date(2024, 3, 3)]),
    ],
)
def test_a_broken_calendar_is_refused(name, days):
    with pytest.raises(ValueError, match=r"in order|apart"):
        build_calendar(name, days)


# -- recognising --------------------------------------------------------------------------


@pytest.mark.parametrize("name", FREQUENCIES)
@pytest.mark.parametrize("count", [12, 60])
def test_a_frequency_is_recognised(name, count):
    assert recognise_frequency(days_of(name, count)) == name


@pytest.mark.parametrize("name", FREQUENCIES)
def test_a_frequency_is_recognised_in_spite_of_a_gap_and_of_disorder(name):
    days = days_of(name, 60)
    del days[30]
    assert recognise_frequency(days[::-1]) == name


def test_month_ends_are_monthly():
    ends = [advance(day, "monthly", 1) - timedelta(days=1) for day in days_of("monthly", 24)]
    assert recognise_frequency(ends) == "monthly"


def test_holidays_leave_weekly_and_business_daily_data_recognised():
    weekly = days_of("weekly", 60, date(1990, 1, 5))
    weekly[20] -= timedelta(days=1)
    assert recognise_frequency(weekly) == "weekly"
    business = [day for i, day in enumerate(days_of("business daily", 260)) if i % 40 != 17]
    assert recognise_frequency(business) == "business daily"


@pytest.mark.parametrize(
    "days",
    [
        [],
        days_of("monthly", 2),
        days_of("monthly", 24) + days_of("quarterly", 24, date(1992, 1, 1)),
        [date(1990, 1, 1) + timedelta(days=step * step) for step in range(20)],
    ],
)
def test_no_frequency_is_made_up(days):
    assert recognise_frequency(days) is None
