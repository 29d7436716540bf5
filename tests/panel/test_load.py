"""Data sets as they are read: formats, dates, missing values, digests, faults of series."""

from __future__ import annotations

import hashlib
import os
import struct
import subprocess
import sys
from datetime import date, datetime
from pathlib import Path

import duckdb
import numpy as np
import openpyxl
import pytest

from sweep.errors import InputFault
from sweep.panel.calendar import build_calendar
from sweep.panel.load import (
    Dataset,
    collinear_faults,
    constant_faults,
    data_digest,
    missing_faults,
    peek,
    positive_faults,
    read_dataset,
)

ROOT = Path(__file__).parents[2]
MACRO = ROOT / "tests" / "published" / "data" / "macrodata.csv"
SMALL = "month,rents,freight\n1990-01,1,2.5\n1990-02,-2e1,\n1990-03,3,4\n"


@pytest.fixture
def write(tmp_path):
    def written(text, name="harbour.csv"):
        path = tmp_path / name
        path.write_bytes(text if isinstance(text, bytes) else text.encode())
        return path

    return written


def dataset(frequency="quarterly", **columns):
    """Series without a file, from 1990 on."""
    from sweep.panel.calendar import advance

    n = len(next(iter(columns.values())))
    days = [advance(date(1990, 1, 1), frequency, step) for step in range(n)]
    values = np.column_stack([np.asarray(column, dtype=float) for column in columns.values()])
    return Dataset(
        Path("made.csv"), build_calendar(frequency, days), tuple(columns), values, "none"
    )


# -- reading ------------------------------------------------------------------------------


def test_a_small_file(write):
    path = write(SMALL)
    data = read_dataset(path, "month", "monthly", ["freight", "rents"])
    assert data.names == ("freight", "rents")
    assert data.calendar.dates == (date(1990, 1, 1), date(1990, 2, 1), date(1990, 3, 1))
    np.testing.assert_array_equal(data.column("rents"), [1.0, -20.0, 3.0])
    np.testing.assert_array_equal(data.column("freight"), [2.5, np.nan, 4.0])
    assert data.lines == (2, 3, 4)
    assert data.file_digest == hashlib.sha256(path.read_bytes()).hexdigest()
    with pytest.raises(KeyError):
        data.column("coal")


def test_a_published_file():
    data = read_dataset(MACRO, "date", "quarterly", ["unemp", "infl", "tbilrate"])
    assert data.values.shape == (203, 3)
    assert (data.calendar.label(0), data.calendar.label(-1)) == ("1959-Q1", "2009-Q3")
    assert data.column("unemp")[:2].tolist() == [5.8, 5.1]
    assert not missing_faults(data, data.names)


@pytest.mark.parametrize("mark", ["", "NA", "na", "NaN", "nan", ".", " . "])
def test_ways_to_write_a_missing_value(write, mark):
    path = write(f"year,a\n1990,{mark}\n1991,2\n1992,3\n")
    data = read_dataset(path, "year", "annual", ["a"])
    np.testing.assert_array_equal(data.column("a"), [np.nan, 2.0, 3.0])


@pytest.mark.parametrize(
    "text",
    [
        "\ufeff" + SMALL,
        SMALL.replace("\n", "\r\n"),
        SMALL.replace("\n", "\n\n"),
        SMALL + ",,\n,,\n",
        SMALL.rstrip("\n"),
        SMALL.replace("month", '"month"').replace("1990-03", '"1990-03"'),
        SMALL.replace(",", ", "),
        SMALL.replace("1990-02", "1990-02-28").replace("1990-03", "1990-03-01 00:00:00"),
    ],
    ids=["byte order mark", "CRLF", "blank lines", "bare commas at the end", "no last newline",
         "quotation marks", "blanks after commas", "any day of the month, midnight"],
)  # fmt: skip
def test_harmless_differences_change_nothing(write, text):
    plain = read_dataset(write(SMALL, "plain.csv"), "month", "monthly", ["rents", "freight"])
    other = read_dataset(write(text), "month", "monthly", ["rents", "freight"])
    assert data_digest(plain, plain.names) == data_digest(other, other.names)


def test_lines_are_those_of_the_file_whatever_stands_between(write):
    path = write('month,a,note\n1990-01,1,"two\nlines"\n\n1990-02,2,x\n1990-03,no,x\n')
    with pytest.raises(InputFault, match="line 6, column a: “no”"):
        read_dataset(path, "month", "monthly", ["a"])


def test_columns_that_are_not_named_are_not_read(write):
    path = write("month,a,note\n1990-01,1,high\n1990-02,2,\n1990-03,3,low\n")
    assert read_dataset(path, "month", "monthly", ["a", "a"]).names == ("a",)


def test_years_as_numbers_and_quarters_as_labels(write):
    path = write("when,a\n1990Q4,1\n1991-Q1,2\n1991-06-30,3\n")
    assert read_dataset(path, "when", "quarterly", ["a"]).calendar.label(2) == "1991-Q2"


def test_observed_calendars(write):
    days = ["2024-03-28", "2024-04-02", "2024-04-03", "2024-04-04"]  # over Easter
    path = write("day,a\n" + "".join(f"{day},{i}\n" for i, day in enumerate(days)))
    data = read_dataset(path, "day", "business daily", ["a"], calendar_rule="as observed")
    assert data.calendar.as_observed
    assert data.calendar.ordinals.tolist() == [0, 1, 2, 3]
    with pytest.raises(InputFault, match="2024-03-29, 2024-04-01"):
        read_dataset(path, "day", "business daily", ["a"])


def test_weeks_on_shifting_weekdays_as_observed(write):
    days = ["1990-01-05", "1990-01-11", "1990-01-19", "1990-01-26"]
    path = write("week,a\n" + "".join(f"{day},{i}\n" for i, day in enumerate(days)))
    data = read_dataset(path, "week", "weekly", ["a"], calendar_rule="as observed")
    assert data.calendar.label(1) == "1990-01-11"


def test_peeking(write):
    head = peek(write(SMALL), rows=2)
    assert head.header == ("month", "rents", "freight")
    assert head.rows == (("1990-01", "1", "2.5"), ("1990-02", "-2e1", ""))
    assert head.total == 3


# -- other formats ------------------------------------------------------------------------


def excel(path, rows, sheets=1):
    book = openpyxl.Workbook()
    for row in rows:
        book.active.append(row)
    for _ in range(sheets - 1):
        book.create_sheet()
    book.save(path)
    return path


def test_excel_and_parquet_give_what_csv_gives(write, tmp_path):
    plain = read_dataset(write(SMALL), "month", "monthly", ["rents", "freight"])
    months = [datetime(1990, month, 1) for month in (1, 2, 3)]
    values = [(1, 2.5), (-20.0, None), (3, 4)]
    sheet = excel(
        tmp_path / "harbour.xlsx",
        [["month", "rents", "freight"], *([m, *v] for m, v in zip(months, values, strict=True))],
        sheets=2,
    )
    parquet = tmp_path / "port=1" / "harbour's [new] *.parquet"
    parquet.parent.mkdir()
    query = (
        "COPY (SELECT * FROM (VALUES (DATE '1990-01-01', 1::SMALLINT, 2.5), "
        "(DATE '1990-02-01', -20, NULL), (DATE '1990-03-01', 3, 4)) t(month, rents, freight)) "
    )
    duckdb.sql(query + f"TO '{str(parquet).replace(chr(39), chr(39) * 2)}' (FORMAT parquet)")
    for path in (sheet, parquet):
        data = read_dataset(path, "month", "monthly", ["rents", "freight"])
        assert data_digest(data, data.names) == data_digest(plain, plain.names)
        assert data.unit == "row"


def test_excel_faults_name_the_row(tmp_path):
    path = excel(
        tmp_path / "a.xlsx", [["year", "a"], [1990, 1], [1991.0, "high"], [1992, True], [1993, 2]]
    )
    with pytest.raises(InputFault) as caught:
        read_dataset(path, "year", "annual", ["a"])
    assert str(caught.value).startswith("a.xlsx, row 3, column a: “high” is not a number")
    assert "“True” on row 4" in str(caught.value)


def test_excel_below_empty_rows(tmp_path):
    path = excel(tmp_path / "a.xlsx", [[], [None, None], ["year", "a"], [1990, 1], [1991, 2]])
    data = read_dataset(path, "year", "annual", ["a"])
    assert data.lines == (4, 5)


def test_a_missing_excel_reader_names_the_pip_line(tmp_path, monkeypatch):
    path = excel(tmp_path / "a.xlsx", [["year", "a"], [1990, 1]])
    monkeypatch.setitem(sys.modules, "openpyxl", None)
    with pytest.raises(InputFault) as caught:
        read_dataset(path, "year", "annual", ["a"])
    assert "pip install 'crosswind[excel]'" in str(caught.value)


def test_reading_csv_imports_no_heavy_library(write):
    path = write(SMALL)
    code = (
        "import sys; from pathlib import Path; from sweep.panel.load import read_dataset; "
        f"read_dataset(Path({str(path)!r}), 'month', 'monthly', ['rents']); "
        "import sweep.panel.transforms, sweep.panel.starter; "
        "heavy = {'duckdb', 'pandas', 'openpyxl', 'scipy', 'statsmodels', 'altair'}; "
        "print(sorted(heavy & set(sys.modules)))"
    )
    environment = {**os.environ, "PYTHONPATH": str(ROOT)}
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, env=environment
    )
    assert done.stdout.strip() == "[]"


# -- digest -------------------------------------------------------------------------------


def test_the_digest_depends_on_what_the_data_are():
    y, x = np.arange(6.0) ** 2, np.cos(np.arange(6.0))
    base = data_digest(dataset(y=y, x=x), ["y", "x"])
    assert base == data_digest(dataset(x=x, more=x + 1, y=y), ["x", "y", "x"])
    assert all(0 <= half < 2**64 for half in base)
    holed, edited = y.copy(), y.copy()
    holed[0], edited[5] = np.nan, np.nextafter(y[5], 99)
    others = [
        data_digest(dataset(y=x, x=y), ["y", "x"]),
        data_digest(dataset(y=holed, x=x), ["y", "x"]),
        data_digest(dataset(y=edited, x=x), ["y", "x"]),
        data_digest(dataset(y=y, x=x), ["y"]),
        data_digest(dataset("monthly", y=y, x=x), ["y", "x"]),
    ]
    assert len({base, *others}) == 6


def test_zero_has_one_digest_whatever_its_sign():
    assert data_digest(dataset(y=[0.0, 1]), ["y"]) == data_digest(dataset(y=[-0.0, 1]), ["y"])


def test_the_digest_is_fixed_for_ever():
    # Stored rows are found again by this key: a change here loses every store's rows.
    days = [day.toordinal() for day in (date(1990, 1, 1), date(1990, 4, 1), date(1990, 7, 1))]
    plain = b"quarterly\0every period\0" + struct.pack("<3q", *days)
    plain += b"y\0" + struct.pack("<3d", 1.0, 2.5, np.nan)
    key = int.from_bytes(hashlib.blake2b(plain, digest_size=16).digest(), "big")
    high, low = data_digest(dataset(y=[1.0, 2.5, np.nan]), ["y"])
    assert (high << 64) + low == key == 0x21B04074EF6DA716CDE50D1DEDEB5120


# -- faults of series ---------------------------------------------------------------------


def only(faults):
    assert len(faults) == 1, [str(fault) for fault in faults]
    return str(faults[0])


def test_missing_inside_but_not_at_the_ends():
    data = dataset(y=[np.nan, 1, np.nan, np.nan, 2, np.nan], x=range(6))
    assert "2 values are missing inside the sample: 1990-Q3, 1990-Q4" in only(
        missing_faults(data, ["y", "x"])
    )
    assert "1990-Q4" in only(missing_faults(data, ["y"], [(2, 2)]))
    assert missing_faults(data, ["y"], [(2, 3)]) == []
    assert missing_faults(data, ["x"]) == []


def test_a_column_without_values():
    data = dataset(y=[np.nan] * 4)
    assert "no value in the column" in only(missing_faults(data, ["y"]))
    assert constant_faults(data, ["y"]) == []


def test_constant_series():
    data = dataset(y=[np.nan, 7, 7, 7], x=[7, 7, 7, 7.5])
    assert "column y: the series is constant: every value is 7" in only(
        constant_faults(data, ["y", "x"])
    )


def test_not_positive():
    data = dataset(y=[1, 0, -2, np.nan], x=[1, 2, 3, 4])
    message = only(positive_faults(data, ["y", "x"]))
    assert "2 values are zero or negative, so no log exists: 1990-Q2, 1990-Q3" in message
    assert "“difference”" in message


GENERATOR = np.random.default_rng(7)
A, B, C = GENERATOR.standard_normal((3, 60)).cumsum(axis=1)


@pytest.mark.parametrize(
    ("columns", "words"),
    [
        ({"a": A, "b": 3.0 - 2.5 * A}, ["column b: perfectly collinear with a."]),
        ({"a": A, "b": B, "c": 1.0 + A - 3 * B}, ["column c: perfectly collinear: a fixed comb"]),
        ({"a": 1e6 + A, "b": 1e6 + B, "c": 2e6 + A + B}, ["combination of a, b"]),
        ({"a": A, "b": A * 1e-9, "c": B, "d": 5 + B}, ["b: perfectly coll", "d: perfectly coll"]),
    ],
)  # fmt: skip
def test_perfectly_collinear(columns, words):
    data = dataset(**columns)
    faults = [str(fault) for fault in collinear_faults(data, list(columns))]
    assert len(faults) == len(words)
    assert all(word in fault for word, fault in zip(words, faults, strict=True))


@pytest.mark.parametrize(
    "columns",
    [
        {"a": A, "b": B, "c": C},
        {"a": A, "b": A + 1e-6 * B},
        {"a": A, "b": B, "c": np.round(A + B, 6)},  # a printed total
        {"a": 1e6 + A, "b": 1e6 + A + 1e-4 * B},
        {"a": A, "b": np.full(60, 3.0)},  # another fault's business
        {"a": A},
    ],
)
def test_not_perfectly_collinear(columns):
    assert collinear_faults(dataset(**columns), list(columns)) == []
