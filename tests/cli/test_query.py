"""crosswind query: the three formats, their words for what is missing, and exit codes."""

from __future__ import annotations

import csv
import io
import json
import subprocess
import sys
from pathlib import Path

import pytest
import small_plans

import sweep
from sweep.cli import main

VALUES = """
SELECT * FROM (VALUES
    (1, 0.1, 'plain', NULL, DATE '2001-02-03', TRUE),
    (2, 2.5e-9, '', 'a "b", c', NULL, FALSE),
    (30, NULL, '=1+2', 'two\nlines', NULL, NULL)
) AS t(count, number, word, other, day, flag)
"""


@pytest.fixture(scope="module")
def store(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return sweep.run(small_plans.write_plan(tmp_path_factory.mktemp("asked")), jobs=1).store


def ask(*arguments: object) -> int:
    with pytest.raises(SystemExit) as left:
        main(["query", *map(str, arguments)])
    return int(left.value.code or 0)


def test_table(store: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert ask(store, VALUES) == 0
    shown = capsys.readouterr()
    assert not shown.err
    assert shown.out.splitlines() == [
        "count   number  word   other      day         flag",
        "    1      0.1  plain  NULL       2001-02-03  true",
        '    2  2.5e-09         a "b", c   NULL        false',
        "   30     NULL  =1+2   two lines  NULL        NULL",
    ]


def test_csv(store: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """An empty text is not a missing value, and no text runs in a spreadsheet."""
    assert ask(store, VALUES, "--format", "csv") == 0
    text = capsys.readouterr().out
    assert text.splitlines()[2] == '2,2.5e-09,"","a ""b"", c",,false'
    read = list(csv.reader(io.StringIO(text)))
    assert read[0] == ["count", "number", "word", "other", "day", "flag"]
    assert read[3] == ["30", "", "'=1+2", "two\nlines", "", ""]


def test_json(store: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert ask(store, VALUES, "--format", "json") == 0
    found = json.loads(capsys.readouterr().out)
    assert [row["number"] for row in found] == [0.1, 2.5e-9, None]
    assert found[0] == {
        "count": 1, "number": 0.1, "word": "plain", "other": None, "day": "2001-02-03",
        "flag": True,
    }  # fmt: skip
    sql = "SELECT 'nan'::DOUBLE AS a, [1, NULL] AS b, {'x': DATE '2000-01-01'} AS c, 1.50 AS d"
    assert ask(store, sql, "--format", "json") == 0
    (row,) = json.loads(capsys.readouterr().out)
    assert row == {"a": "NaN", "b": [1, None], "c": {"x": "2000-01-01"}, "d": 1.5}
    assert ask(store, "SELECT 1 AS a, 2 AS a", "--format", "json") == 2
    assert 'Two columns are called "a"' in capsys.readouterr().err


@pytest.mark.parametrize("form", ["table", "csv", "json"])
def test_more_than_one_portion(
    store: Path, form: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert ask(store, "SELECT range AS n FROM range(2500)", "--format", form) == 0
    text = capsys.readouterr().out
    if form == "json":
        assert [row["n"] for row in json.loads(text)] == list(range(2500))
    else:
        assert [int(line) for line in text.splitlines()[1:]] == list(range(2500))


@pytest.mark.parametrize(("form", "text"), [("table", "n\n"), ("csv", "n\n"), ("json", "[]\n")])
def test_no_rows(
    store: Path, form: str, text: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert ask(store, "SELECT 1 AS n WHERE false", "--format", form) == 0
    assert capsys.readouterr().out == text


def test_the_sweep_is_a_parameter(store: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert ask(store, "SELECT $sweep AS sweep", "--format", "csv") == 0
    assert capsys.readouterr().out == "sweep\n1\n"
    assert ask(store, "SELECT 1", "--sweep", 7) == 2
    assert "there is no sweep 7" in capsys.readouterr().err


def test_from_standard_input(
    store: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr("sys.stdin", io.StringIO("SELECT 7 AS n\n"))
    assert ask(store, "-", "--format", "csv") == 0
    assert capsys.readouterr().out == "n\n7\n"


def test_faults(store: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert ask(store, f"COPY outcome TO '{tmp_path}/out.csv'") == 2
    shown = capsys.readouterr()
    assert not shown.out
    assert "only reading is allowed" in shown.err
    assert not list(tmp_path.iterdir())
    assert ask(tmp_path / "none.duckdb", "SELECT 1") == 2
    assert "there is no store here" in capsys.readouterr().err


def test_a_reader_that_leaves_early_is_no_fault(store: Path) -> None:
    """As in ``crosswind query … | head -1``: exit code 0, and nothing said."""
    run = "import sys; from sweep.cli import main; main(sys.argv[1:])"
    command = [sys.executable, "-c", run, "query", str(store), "FROM range(2000000)"]
    asking = subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE)
    assert asking.stdout is not None
    assert asking.stdout.readline().split() == [b"range"]
    asking.stdout.close()
    assert asking.stderr is not None
    said = asking.stderr.read()
    asking.stderr.close()
    assert asking.wait(60) == 0
    assert not said
