"""Messages on what a user names wrongly: one clear line, the right exit code, no traceback."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest
import small_plans

import sweep
from sweep.cli import main

OTHER = '\n[[findings]]\nname = "y leads x"\ncause = "y"\neffect = "x"\ngiven = ["z"]'
DATES = [f"19{year}-{month:02d}" for year in range(90, 99) for month in range(1, 13)]


def call(*arguments: object) -> int:
    with pytest.raises(SystemExit) as left:
        main([str(argument) for argument in arguments])
    return int(left.value.code or 0)


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("made")
    sweep.run(small_plans.write_plan(folder, "[axes]\nlags = [1, 2]", OTHER), jobs=1)
    return folder


@pytest.fixture
def folder(made: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    for path in made.iterdir():
        shutil.copy(path, tmp_path)
    (tmp_path / "a folder").mkdir()
    (tmp_path / "empty.duckdb").touch()
    monkeypatch.chdir(tmp_path)
    return tmp_path


NOT_DUCKDB = "this is not a DuckDB file. Name the store that `crosswind run` wrote."
FOLDER = "this is a folder. Name the store that `crosswind run` wrote."


@pytest.mark.parametrize(
    ("arguments", "code", "message"),
    [
        (("show", "small.csv"), 5, f"small.csv: {NOT_DUCKDB}"),
        (("show", "plan.toml"), 5, f"plan.toml: {NOT_DUCKDB}"),
        (("show", "empty.duckdb"), 5, f"empty.duckdb: {NOT_DUCKDB}"),
        (("show", "a folder"), 5, f"a folder: {FOLDER}"),
        (("run", "plan.toml", "--store", "small.csv"), 5, f"small.csv: {NOT_DUCKDB}"),
        (("run", "plan.toml", "--store", "empty.duckdb"), 5, f"empty.duckdb: {NOT_DUCKDB}"),
        (("run", "plan.toml", "--store", "a folder"), 5, f"a folder: {FOLDER}"),
        (("show", "nope.duckdb"), 2,
         "nope.duckdb: there is no store here. Name an existing one, or run the plan."),
        (("show", "plan.duckdb", "--sweep", "9"), 2,
         "plan.duckdb: there is no sweep 9. `crosswind show plan.duckdb --sweeps` lists those that "
         "there are."),
        (("show", "plan.duckdb", "--finding", "q"), 2,
         'No finding is called "q"; known: x leads y, y leads x.'),
        (("explain", "plan.duckdb", "--data", "missing.csv"), 2,
         "missing.csv: there is no such file. Name the data file."),
        (("new", "nope.csv"), 2,
         "nope.csv: there is no such file. Check the name and the folder; a plan's data are looked "
         "for from the plan's folder."),
    ],
)  # fmt: skip
def test_one_line(
    folder: Path, arguments: tuple[str, ...], code: int, message: str,
    capsys: pytest.CaptureFixture[str],
) -> None:  # fmt: skip
    before = {path.name: path.read_bytes() for path in folder.iterdir() if path.is_file()}
    assert call(*arguments) == code
    shown = capsys.readouterr()
    assert shown.err == message + "\n"
    assert not shown.out
    after = {path.name: path.read_bytes() for path in folder.iterdir() if path.is_file()}
    assert after == before


@pytest.mark.parametrize("more", [("--by", "lags"), ("--finding", "x leads y"), ("--sweep", "1")])
def test_the_list_of_sweeps_takes_no_choice(
    folder: Path, more: tuple[str, str], capsys: pytest.CaptureFixture[str]
) -> None:
    assert call("show", "plan.duckdb", "--sweeps", *more) == 2
    assert "--sweeps lists all sweeps; leave out --by" in capsys.readouterr().err
    assert call("show", "plan.duckdb", "--sweeps") == 0


def test_a_missing_data_file_is_named_with_what_to_do(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (folder / "small.csv").unlink()
    assert call("explain", "plan.duckdb") == 2
    assert "the data file is not there. Name it with --data FILE." in capsys.readouterr().err


def _data(folder: Path, **changes: str) -> Path:
    """Write good monthly data with some first cells changed, by line of the file."""
    lines = ["month,x,y"]
    for number, day in enumerate(DATES, start=2):
        cell = changes.get(f"line_{number}", day)
        lines.append(f"{cell},{(number * 37 % 101) / 7:.4f},{(number * 53 % 97) / 9:.4f}")
    path = folder / "own.csv"
    path.write_text("\n".join(lines) + "\n" + changes.get("after", ""), encoding="utf-8")
    return path


MEND = "Correct the cell, or take the row out if it is no observation."


@pytest.mark.parametrize(
    ("changes", "place", "problem"),
    [
        ({"line_8": "1990-O7"}, "line 8", "“1990-O7” is not a date; 107 other cells"),
        ({"line_8": ""}, "line 8", "the cell is empty; 107 other cells"),
        ({"after": "Source: the port,,\n"}, "line 110",
         "“Source: the port” is not a date; 108 other cells"),
        ({"line_8": "x", "line_9": "y"}, "line 8",
         "“x” is not a date, nor is 1 more; 106 other cells"),
    ],
)  # fmt: skip
def test_a_column_that_is_nearly_one_of_dates(
    tmp_path: Path, changes: dict[str, str], place: str, problem: str,
    capsys: pytest.CaptureFixture[str],
) -> None:  # fmt: skip
    assert call("new", _data(tmp_path, **changes)) == 2
    said = capsys.readouterr().err
    assert said == f"own.csv, {place}, column month: {problem} of the column are dates. {MEND}\n"
    assert not (tmp_path / "own.toml").exists()


def test_one_row_is_no_series(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    plan = small_plans.write_plan(tmp_path)
    data = tmp_path / "small.csv"
    data.write_text("".join(data.read_text().splitlines(keepends=True)[:2]))
    for arguments in (("check", plan), ("new", data)):
        assert call(*arguments) == 2
        assert capsys.readouterr().err == (
            f"{data}: there is one row of data only. Add a row for each period.\n"
        )
