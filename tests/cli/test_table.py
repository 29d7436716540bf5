"""crosswind table: what is written where, under which names, and that it is whole."""

from __future__ import annotations

import csv
import io
import re
import shutil
import subprocess
import sys
from pathlib import Path

import pandas as pd
import pytest
import small_plans

import sweep
from sweep.cli import main
from sweep.errors import InputFault
from sweep.report.tables import TABLES, table_named
from sweep.results import Results

TAIL = """
[axes]
lags = [1, 2, 3, "AIC", { order = 4, name = "=four" }]
deterministics = ["constant", "linear trend"]
windows = ["full sample", { rolling = 50, step = 10 }]
tests = ["F", "LR", { test = "F", covariance = "HC1" }]
"""


def call(*arguments: object) -> int:
    """Run the command line and return its exit code."""
    with pytest.raises(SystemExit) as left:
        main([str(argument) for argument in arguments])
    return int(left.value.code or 0)


@pytest.fixture(scope="module")
def store(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("tables")
    # Few rows, so that some specifications reject and others do not.
    small_plans.write_data(folder, rows=90)
    return sweep.run(small_plans.write_plan(folder, TAIL), jobs=1).store


@pytest.fixture(scope="module")
def results(store: Path) -> Results:
    return sweep.open_results(store)


def csv_of(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text)))


@pytest.mark.parametrize("form", ["latex", "markdown", "csv"])
@pytest.mark.parametrize("name", TABLES)
def test_every_table_goes_to_standard_output(
    store: Path, results: Results, name: str, form: str, capsysbinary: pytest.CaptureFixture[bytes]
) -> None:
    assert call("table", store, name.replace(" ", "-"), "--format", form) == 0
    shown = capsysbinary.readouterr()
    assert shown.err == b""
    assert shown.out.decode("utf-8") == results.table(name).text(form)


def test_names_are_listed_without_a_store(capsys: pytest.CaptureFixture[str]) -> None:
    assert call("table", "--list") == 0
    lines = capsys.readouterr().out.splitlines()
    assert [line.split("  ")[0] for line in lines] == list(TABLES)
    assert all(module.SHOWS in line for module, line in zip(TABLES.values(), lines, strict=True))


@pytest.mark.parametrize("name", ["Single Changes", "single-changes", "single_changes"])
def test_names_may_be_written_in_several_ways(name: str) -> None:
    assert table_named(name).NAME == "single changes"


def test_an_unknown_name_is_told(store: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert call("table", store, "lag-selektion") == 2
    assert 'did you mean "lag selection"?' in capsys.readouterr().err
    with pytest.raises(InputFault, match='no table is called "flop"'):
        table_named("flop")


def test_a_file_is_written_by_its_ending(
    store: Path, results: Results, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    for ending, form in ((".tex", "latex"), (".md", "markdown"), (".csv", "csv")):
        path = tmp_path / f"flips{ending}"
        assert call("table", store, "flips", "--output", path) == 0
        shown = capsys.readouterr()
        assert path.name in shown.out
        assert not shown.err
        assert path.read_text(encoding="utf-8") == results.table("flips").text(form)
    assert call("table", store, "flips", "--output", tmp_path / "flips.docx") == 2
    assert "its ending does not say" in capsys.readouterr().err
    assert call("table", store, "flips", "--output", tmp_path / "x.txt", "--format", "csv") == 0
    assert call("table", store, "flips", "--output", tmp_path / "no" / "flips.tex") == 2
    assert "cannot be written" in capsys.readouterr().err
    assert sorted(path.name for path in tmp_path.iterdir()) == [
        "flips.csv", "flips.md", "flips.tex", "x.txt",
    ]  # fmt: skip


def test_a_failure_leaves_nothing_half_written(results: Results, tmp_path: Path) -> None:
    table = results.table("long list")

    def breaking():
        yield table.rows[0] if table.rows else next(iter(table.every_row()))
        raise RuntimeError("the reader broke off")

    object.__setattr__(table, "stream", breaking)
    kept = tmp_path / "list.csv"
    kept.write_text("specification\nas it was", encoding="utf-8")
    with pytest.raises(RuntimeError):
        table.save(kept)
    assert kept.read_text(encoding="utf-8") == "specification\nas it was"
    assert list(tmp_path.iterdir()) == [kept]


def test_stars_are_for_print(store: Path, capsys: pytest.CaptureFixture[str]) -> None:
    plain, starred = [], []
    for name in ("baseline-and-alternatives", "long-list"):
        assert call("table", store, name) == 0
        plain.append(capsys.readouterr().out)
        assert call("table", store, name, "--stars") == 0
        starred.append(capsys.readouterr().out)
    assert not any("\\*\\*\\*" in text for text in plain)
    assert all("\\*\\*\\*" in text and "Stars: \\* p at most 0.10" in text for text in starred)
    assert call("table", store, "flips", "--stars", "--format", "csv") == 2
    assert "CSV has none" in capsys.readouterr().err


def test_the_long_list_is_whole_in_csv_and_cut_in_print(
    store: Path, results: Results, capsysbinary: pytest.CaptureFixture[bytes]
) -> None:
    assert call("table", store, "long-list", "--format", "csv") == 0
    rows = csv_of(capsysbinary.readouterr().out.decode("utf-8"))
    view = results.outcomes()
    assert len(rows) == len(view) == 5 * 2 * (1 + 5) * 3
    by_id = {row["specification"]: row for row in rows}
    for row in view.to_dict("records"):
        own = by_id[row["specification"]]
        for name in ("p_value", "statistic", "coefficient_sum", "reverse_p_value", "weight"):
            assert float(own[name]) == row[name], name
        assert own["survives"] == str(bool(row["survives"])).lower()
        assert int(own["computation"]) == row["computation"]
        lags = str(row["lags_choice"])
        assert own["lags_choice"] == (f"'{lags}" if lags.startswith("=") else lags)
    assert call("table", store, "long-list", "--rows", 7) == 0
    text = capsysbinary.readouterr().out.decode("utf-8")
    assert sum(line.startswith("| ") for line in text.splitlines()) == 7 + 2
    assert "The first 7 of 180 rows are shown; 173 left out." in text
    assert call("table", store, "long-list", "--rows", 7, "--format", "csv") == 0
    assert len(csv_of(capsysbinary.readouterr().out.decode("utf-8"))) == 7


def test_csv_has_full_precision_and_starts_no_formula(results: Results) -> None:
    rows = csv_of(results.table("single changes").text("csv"))
    frame = results.table("single changes").only("data")
    place = [column.field for column in frame.columns].index("p_value")
    assert [float(row["p_value"]) for row in rows] == [row[place] for row in frame.rows]
    for name in TABLES:
        text = results.table(name).text("csv")
        for row in csv.reader(io.StringIO(text)):
            for cell in row:
                assert not cell.startswith(("=", "+", "@", "\t", "\r", "\n")), (name, cell)
                if cell.startswith("-"):
                    float(cell)
    assert "'=four" in results.table("single changes").text("csv")


def test_every_heading_of_a_data_file_is_a_machine_name(results: Results) -> None:
    for name in TABLES:
        fields = [column.field for column in results.table(name).only("data").columns]
        assert len(set(fields)) == len(fields), name
        assert all(field.replace("_", "").isalnum() and field == field.lower() for field in fields)


def test_alternatives_give_both_directions(results: Results) -> None:
    rows = csv_of(results.table("baseline and alternatives").text("csv"))
    half = len(rows) // 2
    assert [row["direction"] for row in rows] == ["cause to effect"] * half + ["reverse"] * half
    base = results.specification("baseline")
    for row, start in ((rows[0], ""), (rows[half], "reverse_")):
        assert row["axis"] == "baseline"
        assert row["specification"] == base["specification"]
        for name in ("statistic", "p_value", "coefficient_sum"):
            assert float(row[name]) == base[f"{start}{name}"]
        assert (int(row["df_num"]), int(row["df_den"])) == (base["df_num"], base["df_den"])
    assert "all lags of x are zero in the equation of y" in rows[0]["hypothesis"]
    assert "all lags of y are zero in the equation of x" in rows[half]["hypothesis"]
    tests = {row["test"]: row for row in rows[:half] if row["axis"] == "test"}
    assert {row["covariance"] for row in tests.values()} == {"classical", "HC1"}
    assert {row["statistic_kind"] for row in tests.values()} == {"LR", "F"}
    singles = results.table("single changes")
    assert half == 1 + len(singles.rows)


def test_no_p_value_is_written_as_zero_or_one(results: Results) -> None:
    for name in TABLES:
        for form in ("latex", "markdown"):
            text = results.table(name).text(form)
            assert not re.search(r"(?<![\d.])[01]\.000(?!\d)", text), (name, form)


def test_a_table_of_another_finding(store: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert call("table", store, "baseline", "--finding", "x leads y") == 0
    assert "given z" in capsys.readouterr().out
    assert call("table", store, "baseline", "--finding", "y leads x") == 2
    assert "No finding is called" in capsys.readouterr().err


def test_lag_selection_without_its_data_is_told(
    store: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    moved = tmp_path / "moved.duckdb"
    shutil.copy(store, moved)
    assert call("table", moved, "lag selection") == 2
    assert "the data file is not there. Name it with --data FILE." in capsys.readouterr().err
    assert call("table", moved, "lag selection", "--data", store.parent / "small.csv") == 0
    assert "AIC" in capsys.readouterr().out


def test_tables_show_themselves_in_notebooks(results: Results) -> None:
    shown = results.table("flips")._repr_html_()
    assert shown.startswith("<table><caption>")
    assert "http" not in shown


def test_a_reader_that_leaves_early_is_no_error(store: Path) -> None:
    """As in ``crosswind table … | head -1``."""
    code = "import sys; from sweep.cli import main; main(sys.argv[1:])"
    command = [sys.executable, "-c", code, "table", str(store), "long-list", "--format", "csv"]
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE) as process:
        assert process.stdout is not None
        assert process.stderr is not None
        assert process.stdout.readline().startswith(b"specification,")
        process.stdout.close()
        assert b"Traceback" not in process.stderr.read()
        assert process.wait(timeout=60) == 0


def test_flips_of_a_run_agree_with_its_rows(results: Results) -> None:
    """Enumerated in pandas from the outcomes as they are exported."""
    rows = results.outcomes()
    axes = {
        "lags": "lags_choice", "deterministics": "deterministics", "window": "window_name",
        "transformation": "transformation", "test": "test", "conditioning": "conditioning",
        "measures": "measures",
    }  # fmt: skip
    home = rows[rows["is_baseline"]].iloc[0]
    changes = sum((rows[name].astype(str) != str(home[name])).astype(int) for name in axes.values())
    near = rows[changes.isin([1, 2]) & rows["admissible"]]
    near = near[near["survives"].astype(bool) != bool(home["survives"])]
    expected = near.groupby([near[name].astype(str) for name in axes.values()]).size()
    listed = csv_of(results.table("flips").text("csv"))
    assert len(listed) == len(expected)
    found = {}
    for row in listed:
        key = {axis: str(home[name]) for axis, name in axes.items()}
        for which in ("first", "second"):
            if row[f"{which}_axis"]:
                key[row[f"{which}_axis"]] = row[f"{which}_to"].removeprefix("'")
        found[tuple(key.values())] = int(row["flips"])
    assert found == {tuple(key): int(count) for key, count in expected.items()}
    assert isinstance(expected, pd.Series)
    assert len(expected) >= 3
