"""crosswind new: the plan that it writes is checked and run as it stands, whatever the data."""

from __future__ import annotations

import re
import tomllib
from datetime import date
from pathlib import Path

import numpy as np
import pytest

import sweep
from sweep.cli import main
from sweep.errors import InputFault
from sweep.panel.calendar import FREQUENCIES, advance, period_label

SHAPES = ("positive", "mixed", "seasonal")
MODERATE = 30_000


def call(*arguments: object) -> int:
    with pytest.raises(SystemExit) as left:
        main([str(argument) for argument in arguments])
    return int(left.value.code or 0)


def write_data(folder: Path, frequency: str, rows: int, shape: str, width: int = 4) -> Path:
    """Write invented series of a shape: random walks above zero, a mixture, seasonal ones."""
    rng = np.random.default_rng(rows)
    values = 100.0 * np.exp(np.cumsum(0.01 * rng.standard_normal((rows, width)), axis=0))
    if shape == "mixed":
        values[:, 0] = rng.standard_normal(rows)
        values[:, 1] = np.cumsum(rng.standard_normal(rows))
    if shape == "seasonal":
        seasons = FREQUENCIES[frequency].seasons
        values *= np.exp(0.05 * np.sin(2 * np.pi * np.arange(rows) / max(seasons, 4)))[:, None]
    first = date(1950, 1, 2)  # a Monday
    days = [period_label(advance(first, frequency, i), frequency) for i in range(rows)]
    names = ["rents", "freight", "diesel", "rail"][:width]
    lines = [",".join(["when", *names])]
    lines += [",".join([day, *map(repr, row)]) for day, row in zip(days, values.tolist(),
                                                                  strict=True)]  # fmt: skip
    path = folder / "own.csv"
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return path


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("rows", [40, 90, 240, 900])
@pytest.mark.parametrize("frequency", FREQUENCIES)
def test_a_starter_plan_is_sound_and_moderate(
    frequency: str, rows: int, shape: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert call("new", write_data(tmp_path, frequency, rows, shape)) == 0
    said = capsys.readouterr().err
    told = re.search(r"As it stands, it runs: ([\d,]+) specifications in all; (about|a few)", said)
    assert told is not None
    checked = sweep.check(tmp_path / "own.toml")
    assert checked.planned == int(told[1].replace(",", ""))
    assert 4 <= checked.planned <= MODERATE
    assert all(size.positions >= 1 for size in checked.axes)


@pytest.mark.parametrize("frequency", FREQUENCIES)
def test_a_starter_plan_runs_as_it_stands(frequency: str, tmp_path: Path) -> None:
    """On short data: most of what is run has rows enough, and nothing fails."""
    data = write_data(tmp_path, frequency, 70, "seasonal", width=3)
    assert call("new", data) == 0
    assert call("run", tmp_path / "own.toml", "--no-report", "--quiet", "--jobs", 1) == 0
    results = sweep.open_results(tmp_path / "own.duckdb")
    overall = results.survival("all").iloc[0]
    assert overall["failed"] == 0
    assert overall["admissible"] > overall["planned"] / 2
    assert bool(results.specification("baseline")["admissible"])


@pytest.mark.slow
@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("frequency", FREQUENCIES)
def test_a_starter_plan_runs_on_long_data(frequency: str, shape: str, tmp_path: Path) -> None:
    assert call("new", write_data(tmp_path, frequency, 600, shape)) == 0
    assert call("run", tmp_path / "own.toml", "--no-report", "--quiet") == 0
    overall = sweep.open_results(tmp_path / "own.duckdb").survival("all").iloc[0]
    assert overall["failed"] == 0
    assert overall["admissible"] > overall["planned"] / 2


def test_files_are_not_replaced(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    data = write_data(tmp_path, "monthly", 90, "positive")
    assert call("new", data) == 0
    plan = tmp_path / "own.toml"
    plan.write_text("mine", encoding="utf-8")
    assert call("new", data) == 2
    assert "the file is there already" in capsys.readouterr().err
    assert plan.read_text(encoding="utf-8") == "mine"
    assert call("new", data, "--overwrite") == 0
    assert tomllib.loads(plan.read_text(encoding="utf-8"))["title"]


def test_in_python(tmp_path: Path) -> None:
    data = write_data(tmp_path, "monthly", 90, "positive")
    assert sweep.new(data) == [tmp_path / "own.toml"]
    assert sweep.new(str(data), output=tmp_path / "b.toml") == [tmp_path / "b.toml"]
    written = sweep.new(example="harbour", output=tmp_path / "copy")
    assert written[0] == tmp_path / "copy" / "harbour.toml"
    assert all(path.exists() for path in written)
    with pytest.raises(InputFault, match="no data file was given"):
        sweep.new()
    with pytest.raises(InputFault, match="both a data file and an example"):
        sweep.new(data, example="harbour")


def test_bad_usage(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert call("new") == 2
    assert "no data file was given" in capsys.readouterr().err
    assert call("new", tmp_path / "none.csv") == 2
    assert "none.csv" in capsys.readouterr().err
    assert not list(tmp_path.iterdir())
