"""One bad data file for each fault: one message each, with its place and its mend."""

from __future__ import annotations

from datetime import date, timedelta

import pandas as pd
import pytest
import small_plans

import sweep
from sweep.cli import main
from sweep.errors import InputFault
from sweep.panel.calendar import advance, period_label
from sweep.panel.load import read_dataset


def labels(frequency, count, start=date(1990, 1, 1)):
    return [period_label(advance(start, frequency, step), frequency) for step in range(count)]


def table(dates, sign=","):
    rows = [f"{day}{sign}{3 + i * 7 % 11}{sign}{2.5 + i * 5 % 13}" for i, day in enumerate(dates)]
    return "\n".join([f"month{sign}rents{sign}freight", *rows, ""])


MONTHS = labels("monthly", 40)
FRIDAYS = [(date(1990, 1, 5) + timedelta(days=7 * i)).isoformat() for i in range(30)]
BUSINESS = labels("business daily", 60)
GOOD = table(MONTHS)


def cells(*rents):
    """Five months of rents beside good freight."""
    rows = [f"{month},{cell},{i * i}" for i, (month, cell) in enumerate(zip(MONTHS, rents))]  # noqa: B905
    return "\n".join(["month,rents,freight", *rows, ""])


# name: (content, what else is asked for, start of the message, what it must also say)
FAULTS = {
    "empty": ("", {}, "{path}: the file is empty.", "header"),
    "only blanks": ("\n \n", {}, "{path}: the file is empty.", "header"),
    "only a byte order mark": ("\ufeff", {}, "{path}: the file is empty.", "header"),
    "only a header": (
        "month,rents,freight\n", {}, "{path}: there is a header but no row of data.", "Add a row"
    ),
    "no header": (
        GOOD.split("\n", 1)[1], {},
        "{name}, line 1: the first row holds values (1990-01, 3, 2.5), not column names.",
        "column names on top",
    ),
    "semicolons": (
        table(MONTHS, ";"), {}, "{name}, line 1: the fields look separated by semicolons", "commas"
    ),
    "semicolons and decimal commas": (
        table(MONTHS, ";").replace(".", ","), {},
        "{name}, line 1: the fields look separated by semicolons", "points in decimal numbers",
    ),
    "tabs": (table(MONTHS, "\t"), {}, "{name}, line 1: the fields look separated by tabs", "comm"),
    "bars": (table(MONTHS, "|"), {}, "{name}, line 1: the fields look separated by vertical b", ""),
    "spaces": (table(MONTHS, " "), {}, "{name}, line 1: the fields look separated by spaces", ""),
    "UTF-16": (GOOD.encode("utf-16"), {}, "{path}: the text is written in UTF-16", "as UTF-8"),
    "Latin-1": (
        GOOD.replace("month", "mês").encode("latin-1"), {},
        "{path}: the text is not UTF-8 (byte 0xea on line 1)", "as UTF-8",
    ),
    "zero byte": (GOOD.replace("1990-05", "1990\0"), {}, "{path}: there is a zero byte on li", ""),
    "open quotation mark": (
        GOOD.replace("1990-04", '"1990-04'), {}, "{name}, line 5: the record cannot be read", "quot"
    ),
    "short line": (
        GOOD.replace("1990-03,", ""), {}, "{name}, line 4: there are 2 cells where the header has",
        "as many cells",
    ),
    "decimal commas without quotation marks": (
        GOOD.replace(".", ","), {},
        "{name}, line 2: there are 4 cells where the header has 3 (likewise on 3, 4, 37 more)",
        "decimal point",
    ),
    "two columns of one name": (
        GOOD.replace("freight", "rents"), {"columns": ["rents"]},
        "{name}, line 1: 2 columns are called “rents”", "its own name",
    ),
    "unknown column": (
        GOOD, {"columns": ["rents", "fright"]}, "{name}: there is no column “fright”",
        "Did you mean “freight”? The columns are month, rents, freight.",
    ),
    "unknown column, other case": (
        GOOD, {"columns": ["Rents"]}, "{name}: there is no column “Rents”", "Did you mean “rents”?"
    ),
    "unknown date column": (
        GOOD, {"date": "mouth"}, "{name}: there is no column “mouth”", "Did you mean “month”?"
    ),
    "date column as a series": (
        table(labels("annual", 20)), {"columns": ["rents", "month"], "frequency": "annual"},
        "{name}, column month: the date column cannot also be a series", "",
    ),
    "unknown frequency": (
        GOOD, {"frequency": "montly"}, "{name}: “montly” is not a frequency", "mean “monthly”?"
    ),
    "observed calendar of monthly data": (
        GOOD, {"rule": "as observed"}, "{name}: monthly data have no calendar “as observed”",
        "business daily and weekly",
    ),
    "duplicate date": (
        table([*MONTHS[:6], MONTHS[5], *MONTHS[6:]]), {},
        "{name}, line 8, column month: 1990-06 is also on line 7.", "Keep one row for each month",
    ),
    "stacked series": (
        table([month for month in MONTHS for _ in range(2)]), {},
        "{name}, line 3, column month: 1990-01 is also on line 2 (39 more repeated dates)",
        "its own column",
    ),
    "two days of one month": (
        table([f"{month}-01" for month in MONTHS[:6]] + ["1990-06-30", *MONTHS[6:]]), {},
        "{name}, line 8, column month: lines 7 and 8 fall in the same month, 1990-06.", "Keep one",
    ),
    "unsorted dates": (
        table([*MONTHS[:5], MONTHS[6], MONTHS[5], *MONTHS[7:]]), {},
        "{name}, line 8, column month: 1990-06 comes after 1990-07.", "Sort the rows",
    ),
    "newest first": (
        table(MONTHS[::-1]), {},
        "{name}, line 2, column month: the rows run from the newest date to the oldest.", "Sort",
    ),
    "a gap": (
        table([*MONTHS[:6], *MONTHS[7:]]), {}, "{name}, column month: a row is missing: 1990-07.",
        "Give every period a row",
    ),
    "long gaps": (
        table([*MONTHS[:6], *MONTHS[8:20], *MONTHS[30:]]), {},
        "{name}, column month: 12 months are missing: 1990-07, 1990-08, 1991-09, 1991-10, 1991-11, "
        "1991-12, 1992-01, 1992-02 and 4 more.", "",
    ),
    "a gap between business days": (
        table([*BUSINESS[:10], *BUSINESS[11:]]), {"frequency": "business daily"},
        "{name}, column month: a row is missing: 1990-01-15.", 'calendar = "as observed"',
    ),
    "a weekend between business days": (
        table([*BUSINESS[:5], "1990-01-06", *BUSINESS[5:]]), {"frequency": "business daily"},
        "{name}, line 7, column month: 1990-01-06 is a Saturday", 'frequency = "daily"',
    ),
    "a weekend, as observed": (
        table([*BUSINESS[:5], "1990-01-06", *BUSINESS[5:]]),
        {"frequency": "business daily", "rule": "as observed"},
        "{name}, line 7, column month: 1990-01-06 is a Saturday", "",
    ),
    "a week on another weekday": (
        table([*FRIDAYS[:4], "1990-02-01", *FRIDAYS[5:]]), {"frequency": "weekly"},
        "{name}, line 6, column month: 1990-02-01 is a Thursday, most weekly dates are a Friday.",
        'calendar = "as observed"',
    ),
    "another frequency than said": (
        table(labels("quarterly", 40)).replace("-Q1", "-01").replace("-Q2", "-04")
        .replace("-Q3", "-07").replace("-Q4", "-10"), {},
        "{name}, column month: the dates look quarterly, but the plan says monthly.",
        'frequency = "quarterly"',
    ),
    "weekdays said to be daily": (
        table(BUSINESS), {"frequency": "daily"},
        "{name}, column month: the dates look business daily, but the plan says daily.", "",
    ),
    "mixed frequency, then slower": (
        table([*MONTHS[:24], *MONTHS[24::3]]), {},
        "{name}, line 26, column month: mixed frequency: lines 26 to 31 are quarterly, other rows "
        "monthly.", "one frequency",
    ),
    "mixed frequency, then quicker": (
        table([*MONTHS[:24:3], *MONTHS[24:30]]), {"frequency": "quarterly"},
        "{name}, line 11, column month: mixed frequency: lines 10 to 12 fall in the same quarter, "
        "1992-Q1 (1 more quarters likewise).", "Keep one row for each quarter",
    ),
    "mixed labels": (
        table([*MONTHS[:24], *labels("quarterly", 4, date(1992, 1, 1))]), {},
        "{name}, line 26, column month: “1992-Q1” names more than one month of monthly data "
        "(lines 27, 28, 29 likewise).", "",
    ),
    "mixed frequency, as observed": (
        table([*BUSINESS[:30], *BUSINESS[30::5]]),
        {"frequency": "business daily", "rule": "as observed"},
        "{name}, line 32, column month: mixed frequency: lines 32 to 37 are 7 days or more apart.",
        "business daily",
    ),
    "a date that is none": (
        table([*MONTHS[:4], "soon", *MONTHS[5:]]), {},
        "{name}, line 6, column month: “soon” is not a date that can be read.", "1990-03-15",
    ),
    "a month that is none": (
        table([*MONTHS[:4], "1990-13", *MONTHS[5:]]), {},
        "{name}, line 6, column month: “1990-13” is not a date", "",
    ),
    "day first": (
        table([f"01/{month[5:]}/{month[:4]}" for month in MONTHS]), {},
        "{name}, line 2, column month: “01/01/1990” could be day or month first (lines 3, 4, 5, 6, "
        "7, 8, 9, 10 and 31 more likewise).", "year first",
    ),
    "month letter": (
        table([month.replace("-", "M") for month in MONTHS]), {},
        "{name}, line 2, column month: “1990M01” is not a date that can be read", "Write 1990-01.",
    ),
    "packed date": (
        table([month.replace("-", "") for month in MONTHS]), {},
        "{name}, line 2, column month: “199001” is not a date that can be read", "Write 1990-01.",
    ),
    "a row without a date": (
        table([*MONTHS[:4], "", *MONTHS[5:]]), {},
        "{name}, line 6, column month: “” is not a date.", "Every row needs a date",
    ),
    "time of day": (
        table([*MONTHS[:4], "1990-05-01T09:30", *MONTHS[5:]]), {},
        "{name}, line 6, column month: “1990-05-01T09:30” has a time of day.", "the date alone",
    ),
    "text in numbers": (
        cells(1, 2, "n.a.", 4, "high"), {},
        "{name}, line 4, column rents: “n.a.” is not a number (and “high” on line 6).",
        "Leave the cell empty",
    ),
    "long text in numbers": (
        cells(1, 2, "x" * 80, 4, 5), {}, "{name}, line 4, column rents: “" + "x" * 39 + "…” is", ""
    ),
    "infinite": (
        cells(1, "inf", 3, "-Infinity", "1e999"), {},
        "{name}, line 3, column rents: “inf” is not a finite number (and “-Infinity” on line 5, "
        "“1e999” on line 6).", "Leave the cell empty",
    ),
    "decimal comma": (
        cells(1, '"2,5"', 3, 4, 5), {}, "{name}, line 3, column rents: “2,5” has a decimal comma.",
        "write 2.5",
    ),
    "thousands": (
        cells(1, '"1,234,567.5"', 3, 4, 5), {},
        "{name}, line 3, column rents: “1,234,567.5” has commas between thousands.", "1234567.5",
    ),
    "per cent": (cells(1, "2%", 3, 4, 5), {}, "{name}, line 3, column rents: “2%” has a per", ""),
    "typeset minus": (
        cells(1, "\u22122.5", 3, 4, 5), {},
        "{name}, line 3, column rents: “\u22122.5” has a typeset minus sign.", "-2.5",
    ),
    "underscore": (cells(1, "1_0", 3, 4, 5), {}, "{name}, line 3, column rents: “1_0” is not", ""),
    "digits of another script": (
        cells(1, "٣", 3, 4, 5), {}, "{name}, line 3, column rents: “٣” is not a number", ""
    ),
}  # fmt: skip


def faults_of(path, columns=("rents", "freight"), date="month", frequency="monthly",
              rule="every period"):  # fmt: skip
    with pytest.raises(InputFault) as caught:
        read_dataset(path, date, frequency, columns, calendar_rule=rule)
    assert caught.value.exit_code == 2
    return [str(fault) for fault in caught.value.faults]


def test_the_good_file_is_good(tmp_path):
    path = tmp_path / "harbour.csv"
    path.write_text(GOOD)
    assert read_dataset(path, "month", "monthly", ["rents"]).values.shape == (40, 1)


@pytest.mark.parametrize("name", FAULTS)
def test_each_fault_has_one_message(tmp_path, name):
    content, asked, start, also = FAULTS[name]
    path = tmp_path / "harbour.csv"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    messages = faults_of(path, **asked)
    assert len(messages) == 1, messages
    assert messages[0].startswith(start.format(path=path, name=path.name)), messages[0]
    assert also in messages[0]
    assert sorted(tmp_path.iterdir()) == [path]


def test_all_faults_are_told_at_once(tmp_path):
    path = tmp_path / "harbour.csv"
    text = table([*MONTHS[:6], *MONTHS[7:]]).replace("1990-03,6", "1990-03,six")
    path.write_text(text.replace("month,rents", "month,rents").replace("2.5\n", "inf\n", 1))
    messages = faults_of(path, columns=["rents", "freight", "diesel"])
    assert [message.split(": ")[0] for message in messages] == [
        "harbour.csv",
        "harbour.csv, column month",
        "harbour.csv, line 4, column rents",
        "harbour.csv, line 2, column freight",
    ]


def test_a_missing_file(tmp_path):
    (message,) = faults_of(tmp_path / "absent.csv")
    assert message.startswith(f"{tmp_path / 'absent.csv'}: there is no such file.")


def test_a_folder(tmp_path):
    (message,) = faults_of(tmp_path)
    assert "this is a folder" in message


@pytest.mark.parametrize("name", ["data.xls", "data.dta", "data.csv.gz", "data"])
def test_a_kind_of_file_that_is_not_read(tmp_path, name):
    (tmp_path / name).write_text(GOOD)
    (message,) = faults_of(tmp_path / name)
    assert "cannot be read" in message
    assert ".csv, .parquet or .xlsx" in message


@pytest.mark.parametrize(("name", "kind"), [("data.parquet", "Parquet"), ("data.xlsx", "Excel")])
def test_a_damaged_file(tmp_path, name, kind):
    (tmp_path / name).write_text(GOOD)
    (message,) = faults_of(tmp_path / name)
    assert f"cannot be read as {kind}" in message
    assert "\n" not in message


@pytest.mark.parametrize(
    ("size", "problem"),
    [("3e301", "1 value is larger than 1e+75 in size: 1990-05"),
     ("-1e76", "1 value is larger than 1e+75 in size: 1990-05")],
)  # fmt: skip
def test_a_number_too_large_to_be_squared(tmp_path, capsys, size, problem):
    plan = small_plans.write_plan(tmp_path)
    data = tmp_path / "small.csv"
    lines = data.read_text().splitlines()
    cells = lines[5].split(",")
    lines[5] = ",".join([*cells[:2], size, *cells[3:]])
    data.write_text("\n".join(lines))
    before = sorted(tmp_path.iterdir())
    for command in ("check", "run"):
        with pytest.raises(SystemExit) as left:
            main([command, str(plan)])
        assert left.value.code == 2
        assert capsys.readouterr().err.startswith(f"small.csv, line 6, column y: {problem}. Such")
    assert sorted(tmp_path.iterdir()) == before


@pytest.mark.parametrize("unit", [1e70, 1e-70])
def test_numbers_may_be_large_or_small(tmp_path, unit):
    plan = small_plans.write_plan(tmp_path)
    expected = sweep.run(plan, jobs=1).specification("baseline")
    data = tmp_path / "small.csv"
    frame = pd.read_csv(data)
    numbers = frame.drop(columns="month") * unit
    numbers.insert(0, "month", frame["month"])
    numbers.to_csv(data, index=False)
    found = sweep.run(plan, jobs=1).specification("baseline")
    # A change of unit is exact but for the last digit of each value.
    assert found["statistic"] == pytest.approx(expected["statistic"], rel=1e-9)
    tiny = numbers.drop(columns="month") * (1e-78 / unit)
    tiny.insert(0, "month", frame["month"])
    tiny.to_csv(data, index=False)
    if unit < 1:
        with pytest.raises(InputFault, match="every value is smaller than 1e-75 in size"):
            sweep.run(plan, jobs=1)
