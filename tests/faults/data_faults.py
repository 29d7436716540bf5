# ruff: noqa: E501 - a table of faults is read one fault at a time
"""One bad data file for each fault, and the whole message that names its place and its mend.

``{path}`` and ``{name}`` stand for the file's path and its bare name.
"""

from __future__ import annotations

from datetime import date, timedelta

from sweep.panel.calendar import advance, period_label

__all__ = ["FAULTS", "GOOD", "MONTHS", "cells", "table"]


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


# name: (content, what else is asked for, the whole message)
FAULTS = {
    "empty": (
        "", {},
        "{path}: the file is empty. It needs a header and a row for each period.",
    ),
    "only blanks": (
        "\n \n", {},
        "{path}: the file is empty. It needs a header and a row for each period.",
    ),
    "only a byte order mark": (
        "\ufeff", {},
        "{path}: the file is empty. It needs a header and a row for each period.",
    ),
    "only a header": (
        "month,rents,freight\n", {},
        "{path}: there is a header but no row of data. Add a row for each period.",
    ),
    "no header": (
        GOOD.split("\n", 1)[1], {},
        "{name}, line 1: the first row holds values (1990-01, 3, 2.5), not column names. Put a "
        "row of column names on top.",
    ),
    "semicolons": (
        table(MONTHS, ";"), {},
        "{name}, line 1: the fields look separated by semicolons, not by commas. Save the file "
        "again with commas between fields and points in decimal numbers.",
    ),
    "semicolons and decimal commas": (
        table(MONTHS, ";").replace(".", ","), {},
        "{name}, line 1: the fields look separated by semicolons, not by commas. Save the file "
        "again with commas between fields and points in decimal numbers.",
    ),
    "tabs": (
        table(MONTHS, "\t"), {},
        "{name}, line 1: the fields look separated by tabs, not by commas. Save the file again "
        "with commas between fields and points in decimal numbers.",
    ),
    "bars": (
        table(MONTHS, "|"), {},
        "{name}, line 1: the fields look separated by vertical bars, not by commas. Save the "
        "file again with commas between fields and points in decimal numbers.",
    ),
    "spaces": (
        table(MONTHS, " "), {},
        "{name}, line 1: the fields look separated by spaces, not by commas. Save the file again "
        "with commas between fields and points in decimal numbers.",
    ),
    "UTF-16": (
        GOOD.encode("utf-16"), {},
        "{path}: the text is written in UTF-16, not UTF-8. Save the file again as UTF-8.",
    ),
    "Latin-1": (
        GOOD.replace("month", "mês").encode("latin-1"), {},
        "{path}: the text is not UTF-8 (byte 0xea on line 1); it may be Latin-1 or Windows-1252. "
        "Save the file again as UTF-8.",
    ),
    "zero byte": (
        GOOD.replace("1990-05", "1990\0"), {},
        "{path}: there is a zero byte on line 6, so this is no plain text. Save the file again "
        "as UTF-8.",
    ),
    "open quotation mark": (
        GOOD.replace("1990-04", '"1990-04'), {},
        "{name}, line 5: the record cannot be read (unexpected end of data). Look for a "
        "quotation mark that is not closed.",
    ),
    "short line": (
        GOOD.replace("1990-03,", ""), {},
        "{name}, line 4: there are 2 cells where the header has 3. Every line needs as many "
        "cells as the header.",
    ),
    "decimal commas without quotation marks": (
        GOOD.replace(".", ","), {},
        "{name}, line 2: there are 4 cells where the header has 3 (likewise on 3, 4, 37 more). "
        "Every line needs as many cells as the header. Numbers take a decimal point; a comma "
        "starts a new cell.",
    ),
    "two columns of one name": (
        GOOD.replace("\n", ",1\n").replace("freight,1", "freight,rents"), {},
        "{name}, line 1: 2 columns are called “rents”. Give every column its own name.",
    ),
    "unknown column": (
        GOOD, {"columns": ["rents", "fright"]},
        "{name}: there is no column “fright”. Did you mean “freight”? The columns are month, "
        "rents, freight.",
    ),
    "unknown column, other case": (
        GOOD, {"columns": ["Rents", "freight"]},
        "{name}: there is no column “Rents”. Did you mean “rents”? The columns are month, rents, "
        "freight.",
    ),
    "unknown date column": (
        GOOD, {"date": "mouth"},
        "{name}: there is no column “mouth”. Did you mean “month”? The columns are month, rents, "
        "freight.",
    ),
    "date column as a series": (
        table(labels("annual", 20)), {"columns": ["rents", "month"], "frequency": "annual"},
        "{name}, column month: the date column cannot also be a series.",
    ),
    "unknown frequency": (
        GOOD, {"frequency": "montly"},
        "{name}: “montly” is not a frequency; choose annual, quarterly, monthly, weekly, "
        "business daily, daily. Did you mean “monthly”?",
    ),
    "observed calendar of monthly data": (
        GOOD, {"rule": "as observed"},
        "{name}: monthly data have no calendar “as observed”. It is for business daily and "
        "weekly data.",
    ),
    "duplicate date": (
        table([*MONTHS[:6], MONTHS[5], *MONTHS[6:]]), {},
        "{name}, line 8, column month: 1990-06 is also on line 7. Keep one row for each month.",
    ),
    "stacked series": (
        table([month for month in MONTHS for _ in range(2)]), {},
        "{name}, line 3, column month: 1990-01 is also on line 2 (39 more repeated dates). If "
        "the file stacks several series, give each of them its own column.",
    ),
    "two days of one month": (
        table([f"{month}-01" for month in MONTHS[:6]] + ["1990-06-30", *MONTHS[6:]]), {},
        "{name}, line 8, column month: lines 7 and 8 fall in the same month, 1990-06. Keep one "
        "row for each month.",
    ),
    "unsorted dates": (
        table([*MONTHS[:5], MONTHS[6], MONTHS[5], *MONTHS[7:]]), {},
        "{name}, line 8, column month: 1990-06 comes after 1990-07. Sort the rows by date.",
    ),
    "newest first": (
        table(MONTHS[::-1]), {},
        "{name}, line 2, column month: the rows run from the newest date to the oldest. Sort "
        "them by date, oldest first.",
    ),
    "a gap": (
        table([*MONTHS[:6], *MONTHS[7:]]), {},
        "{name}, column month: a row is missing: 1990-07. Give every period a row (with empty "
        "cells where nothing is known).",
    ),
    "long gaps": (
        table([*MONTHS[:6], *MONTHS[8:20], *MONTHS[30:]]), {},
        "{name}, column month: 12 months are missing: 1990-07, 1990-08, 1991-09, 1991-10, "
        "1991-11, 1991-12, 1992-01, 1992-02 and 4 more. Give every period a row (with empty "
        "cells where nothing is known).",
    ),
    "a gap between business days": (
        table([*BUSINESS[:10], *BUSINESS[11:]]), {"frequency": "business daily"},
        "{name}, column month: a row is missing: 1990-01-15. Give every period a row (with empty "
        "cells where nothing is known). If these are holidays, say calendar = \"as observed\" in "
        "[data].",
    ),
    "a weekend between business days": (
        table([*BUSINESS[:5], "1990-01-06", *BUSINESS[5:]]), {"frequency": "business daily"},
        "{name}, line 7, column month: 1990-01-06 is a Saturday, but the data are business "
        "daily. Leave weekends out, or say frequency = \"daily\" in [data].",
    ),
    "a weekend, as observed": (
        table([*BUSINESS[:5], "1990-01-06", *BUSINESS[5:]]),
        {"frequency": "business daily", "rule": "as observed"},
        "{name}, line 7, column month: 1990-01-06 is a Saturday, but the data are business "
        "daily. Leave weekends out, or say frequency = \"daily\" in [data].",
    ),
    "a week on another weekday": (
        table([*FRIDAYS[:4], "1990-02-01", *FRIDAYS[5:]]), {"frequency": "weekly"},
        "{name}, line 6, column month: 1990-02-01 is a Thursday, most weekly dates are a Friday. "
        "Give all weeks one weekday, or say calendar = \"as observed\" in [data].",
    ),
    "another frequency than said": (
        table(labels("quarterly", 40)).replace("-Q1", "-01").replace("-Q2", "-04") .replace("-Q3", "-07").replace("-Q4", "-10"),
        {},
        "{name}, column month: the dates look quarterly, but the plan says monthly. Say "
        "frequency = \"quarterly\" in [data], or check the dates.",
    ),
    "weekdays said to be daily": (
        table(BUSINESS), {"frequency": "daily"},
        "{name}, column month: the dates look business daily, but the plan says daily. Say "
        "frequency = \"business daily\" in [data], or check the dates.",
    ),
    "mixed frequency, then slower": (
        table([*MONTHS[:24], *MONTHS[24::3]]), {},
        "{name}, line 26, column month: mixed frequency: lines 26 to 31 are quarterly, other "
        "rows monthly. Bring all rows to one frequency, or keep the stretch that has it.",
    ),
    "mixed frequency, then quicker": (
        table([*MONTHS[:24:3], *MONTHS[24:30]]), {"frequency": "quarterly"},
        "{name}, line 11, column month: mixed frequency: lines 10 to 12 fall in the same "
        "quarter, 1992-Q1 (1 more quarters likewise). Keep one row for each quarter.",
    ),
    "mixed labels": (
        table([*MONTHS[:24], *labels("quarterly", 4, date(1992, 1, 1))]), {},
        "{name}, line 26, column month: “1992-Q1” names more than one month of monthly data "
        "(lines 27, 28, 29 likewise). Each row is one month: write the date more closely.",
    ),
    "mixed frequency, as observed": (
        table([*BUSINESS[:30], *BUSINESS[30::5]]),
        {"frequency": "business daily", "rule": "as observed"},
        "{name}, line 32, column month: mixed frequency: lines 32 to 37 are 7 days or more "
        "apart. Keep the rows that are business daily.",
    ),
    "a date that is none": (
        table([*MONTHS[:4], "soon", *MONTHS[5:]]), {},
        "{name}, line 6, column month: “soon” is not a date that can be read. Write dates as "
        "1990, 1990-Q1, 1990-03 or 1990-03-15.",
    ),
    "a month that is none": (
        table([*MONTHS[:4], "1990-13", *MONTHS[5:]]), {},
        "{name}, line 6, column month: “1990-13” is not a date that can be read. Write dates as "
        "1990, 1990-Q1, 1990-03 or 1990-03-15.",
    ),
    "day first": (
        table([f"01/{month[5:]}/{month[:4]}" for month in MONTHS]), {},
        "{name}, line 2, column month: “01/01/1990” could be day or month first (lines 3, 4, 5, "
        "6, 7, 8, 9, 10 and 31 more likewise). Write the year first, as in 1990-03-15 or 1990-03.",
    ),
    "month letter": (
        table([month.replace("-", "M") for month in MONTHS]), {},
        "{name}, line 2, column month: “1990M01” is not a date that can be read (lines 3, 4, 5, "
        "6, 7, 8, 9, 10 and 31 more likewise). Write 1990-01.",
    ),
    "packed date": (
        table([month.replace("-", "") for month in MONTHS]), {},
        "{name}, line 2, column month: “199001” is not a date that can be read (lines 3, 4, 5, "
        "6, 7, 8, 9, 10 and 31 more likewise). Write 1990-01.",
    ),
    "a row without a date": (
        table([*MONTHS[:4], "", *MONTHS[5:]]), {},
        "{name}, line 6, column month: “” is not a date. Every row needs a date.",
    ),
    "time of day": (
        table([*MONTHS[:4], "1990-05-01T09:30", *MONTHS[5:]]), {},
        "{name}, line 6, column month: “1990-05-01T09:30” has a time of day. Write the date "
        "alone, as 1990-03-15.",
    ),
    "text in numbers": (
        cells(1, 2, "n.a.", 4, "high"), {},
        "{name}, line 4, column rents: “n.a.” is not a number (and “high” on line 6). Leave the "
        "cell empty (or write NA, NaN or a full stop) where a value is missing.",
    ),
    "long text in numbers": (
        cells(1, 2, "x" * 80, 4, 5), {},
        "{name}, line 4, column rents: “xxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxx…” is not a "
        "number. Leave the cell empty (or write NA, NaN or a full stop) where a value is missing.",
    ),
    "infinite": (
        cells(1, "inf", 3, "-Infinity", "1e999"), {},
        "{name}, line 3, column rents: “inf” is not a finite number (and “-Infinity” on line 5, "
        "“1e999” on line 6). Leave the cell empty (or write NA, NaN or a full stop) where a "
        "value is missing.",
    ),
    "decimal comma": (
        cells(1, '"2,5"', 3, 4, 5), {},
        "{name}, line 3, column rents: “2,5” has a decimal comma. Numbers take a decimal point: "
        "write 2.5.",
    ),
    "thousands": (
        cells(1, '"1,234,567.5"', 3, 4, 5), {},
        "{name}, line 3, column rents: “1,234,567.5” has commas between thousands. Write "
        "1234567.5.",
    ),
    "per cent": (
        cells(1, "2%", 3, 4, 5), {},
        "{name}, line 3, column rents: “2%” has a per cent sign. Leave the sign out: write the "
        "number alone.",
    ),
    "typeset minus": (
        cells(1, "\u22122.5", 3, 4, 5), {},
        "{name}, line 3, column rents: “\u22122.5” has a typeset minus sign. Write the minus "
        "sign as a hyphen: -2.5.",
    ),
    "underscore": (
        cells(1, "1_0", 3, 4, 5), {},
        "{name}, line 3, column rents: “1_0” is not a number. Leave the cell empty (or write NA, "
        "NaN or a full stop) where a value is missing.",
    ),
    "digits of another script": (
        cells(1, "٣", 3, 4, 5), {},
        "{name}, line 3, column rents: “٣” is not a number. Leave the cell empty (or write NA, "
        "NaN or a full stop) where a value is missing.",
    ),
}  # fmt: skip
