"""One bad data file for each fault: one message each, with its place and its mend."""

from __future__ import annotations

import pandas as pd
import pytest
import small_plans
from data_faults import FAULTS, GOOD, MONTHS, table

import sweep
from sweep.cli import main
from sweep.errors import InputFault
from sweep.panel.load import read_dataset


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
    content, asked, message = FAULTS[name]
    path = tmp_path / "harbour.csv"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    assert faults_of(path, **asked) == [message.format(path=path, name=path.name)]
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
