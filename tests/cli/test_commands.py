"""Every command through its entry point: what goes where, and with which exit code."""

from __future__ import annotations

import json
import tomllib
from pathlib import Path

import jsonschema
import pytest
import small_plans

import sweep
from sweep.cli import main
from sweep.plan.choices import AXES

TAIL = '[axes]\nlags = [1, 2, "AIC"]\nwindows = ["full sample", { rolling = 80, step = 20 }]'


def call(*arguments: object) -> int:
    """Run the command line and return its exit code."""
    with pytest.raises(SystemExit) as left:
        main([str(argument) for argument in arguments])
    return int(left.value.code or 0)


@pytest.fixture
def plan(tmp_path: Path) -> Path:
    return small_plans.write_plan(tmp_path, TAIL)


@pytest.fixture(scope="module")
def store(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("shown")
    return sweep.run(small_plans.write_plan(folder, TAIL), jobs=1).store


def test_check_counts_and_writes_nothing(plan: Path, capsys: pytest.CaptureFixture[str]) -> None:
    before = sorted(plan.parent.iterdir())
    assert call("check", plan, "--format", "json") == 0
    found = json.loads(capsys.readouterr().out)
    assert found["specifications"] == found["findings"][0]["to_run"] == 3 * (1 + 5)
    assert found["findings"][0]["axes"]["window"]["positions"] == 6
    assert call("check", plan) == 0
    shown = capsys.readouterr()
    assert "18 specifications in all" in shown.out
    assert not shown.err
    assert sorted(plan.parent.iterdir()) == before


def test_run_writes_store_and_report(plan: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert call("run", plan, "--jobs", 1) == 0
    shown = capsys.readouterr()
    assert "The finding survives in" in shown.out
    assert "18 specifications planned: computed 18" in shown.err
    assert plan.with_suffix(".duckdb").exists()
    assert "<html" in plan.with_suffix(".html").read_text(encoding="utf-8")
    assert call("run", plan, "--jobs", 1, "--quiet", "--no-report") == 0
    assert not capsys.readouterr().err


def test_require_reproduced(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    plain = small_plans.write_plan(tmp_path, TAIL)
    assert call("run", plain, "--no-report", "--quiet", "--require", "reproduced") == 4
    results = sweep.open_results(plain.with_suffix(".duckdb"))
    base = results.specification("baseline")
    told = f"[baseline.reported]\nstatistic = {base['statistic']:.4f}\n{TAIL}"
    good = small_plans.write_plan(tmp_path, told, name="good.toml")
    assert call("run", good, "--no-report", "--quiet", "--require", "reproduced") == 0
    wrong = small_plans.write_plan(tmp_path, f"[baseline.reported]\nstatistic = 99\n{TAIL}",
                                   name="wrong.toml")  # fmt: skip
    capsys.readouterr()
    assert call("run", wrong, "--no-report", "--quiet", "--require", "reproduced") == 4
    assert "99" in capsys.readouterr().err


@pytest.mark.parametrize("axis", [*AXES, "all"])
def test_show_by_axis(store: Path, axis: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert call("show", store, "--by", axis, "--format", "json") == 0
    rows = json.loads(capsys.readouterr().out)
    assert {row["axis"] for row in rows} == {axis}
    assert sum(row["planned"] for row in rows) == 18
    assert call("show", store, "--by", axis, "--format", "csv") == 0
    assert capsys.readouterr().out.count("\n") == len(rows) + 1
    assert call("show", store, "--by", axis) == 0
    assert rows[0]["choice"] in capsys.readouterr().out


def test_show_lists_sweeps_and_refuses_unknown_findings(
    store: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert call("show", store, "--sweeps", "--format", "json") == 0
    assert len(json.loads(capsys.readouterr().out)) == 1
    assert call("show", store, "--finding", "x lead y") == 2
    assert 'did you mean "x leads y"?' in capsys.readouterr().err


def test_explain(store: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert call("explain", store, "--format", "json") == 0
    found = json.loads(capsys.readouterr().out)
    assert found["row"]["window_start"] == "1990-01-01"
    assert found["sample"][0].startswith("The window runs from 1990-01 to 2003-04 ")
    for item in found["compared"]:
        assert item["stored"] == pytest.approx(item["slow"], rel=1e-8)
    assert call("explain", store, found["row"]["specification"][:10]) == 0
    assert "Hypothesis: every lag coefficient" in capsys.readouterr().out
    assert call("explain", store, "zz") == 2
    assert call("explain", store, "") == 2


def test_report_and_export(store: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert call("report", store, "--output", tmp_path / "own.html") == 0
    assert (tmp_path / "own.html").stat().st_size > 100_000
    assert call("report", store, "--output", tmp_path / "no" / "folder.html") == 2
    capsys.readouterr()
    assert call("export", store, tmp_path / "files") == 0
    written = capsys.readouterr().out.split()
    assert {Path(name).suffix for name in written} == {".parquet", ".csv"}


def test_schema_holds_for_the_examples(capsys: pytest.CaptureFixture[str]) -> None:
    assert call("schema") == 0
    schema = json.loads(capsys.readouterr().out)
    jsonschema.Draft202012Validator.check_schema(schema)
    validator = jsonschema.Draft202012Validator(schema)
    configs = Path(__file__).parents[2] / "configs"
    for name in ("us_macro", "harbour"):
        text = (configs / f"{name}.toml").read_text(encoding="utf-8")
        validator.validate(tomllib.loads(text))
    wrong = tomllib.loads((configs / "harbour.toml").read_text(encoding="utf-8"))
    wrong["baseline"]["lagz"] = 3
    assert not validator.is_valid(wrong)


@pytest.mark.parametrize("name", ["us_macro", "harbour"])
def test_examples_are_copied(name: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert call("new", "--example", name, "--output", tmp_path) == 0
    assert call("check", tmp_path / f"{name}.toml") == 0
    assert call("new", "--example", name, "--output", tmp_path) == 2
    assert "is there already" in capsys.readouterr().err
    assert call("new", "--example", "harbor", "--output", tmp_path) == 2
    assert 'did you mean "harbour"?' in capsys.readouterr().err


def test_a_mistyped_command(capsys: pytest.CaptureFixture[str]) -> None:
    assert call("chekc", "x.toml") == 2
    assert 'did you mean "check"?' in capsys.readouterr().err
