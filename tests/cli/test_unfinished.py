"""Sweeps that a run was stopped in: what is missing is said, whatever is asked."""

from __future__ import annotations

import functools
import json
from pathlib import Path

import pandas as pd
import pytest
import small_plans

import sweep
from sweep.cli import main
from sweep.engine import waves
from sweep.engine.compute import compute_task
from sweep.engine.task import Outcome, Task

AXES = """
[axes]
lags = [1, 2, 3, "AIC"]
windows = ["full sample", { rolling = 80, step = 4 }]
transformations = ["level", "difference"]
tests = ["F", "LM"]
[baseline.reported]
statistic = 3.2
[[rule_out]]
when = { transformation = ["difference"], lags = [3] }
because = "three lags of a difference are too many"
[[requests]]
name = "longer lags"
asks = "What about six lags?"
axes = { lags = [6] }
"""


def call(*arguments: object) -> int:
    with pytest.raises(SystemExit) as left:
        main([str(argument) for argument in arguments])
    return int(left.value.code or 0)


def _stopped_after(task: Task, *, limit: int, seen: list[int]) -> Outcome:
    seen.append(1)
    if len(seen) > limit:
        raise KeyboardInterrupt
    return compute_task(task)


def stopped(plan: Path, limit: int, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Run a plan until ``limit`` tasks are stored, and what it rules out; return the store."""
    with monkeypatch.context() as patched:
        patched.setattr(waves, "TASKS_A_WORKER", 1)
        patched.setattr("sweep.engine.group.LARGEST_TASK", 40)
        work = functools.partial(_stopped_after, limit=limit, seen=[])
        patched.setattr(waves, "compute_task", work)
        with pytest.raises(sweep.errors.Interrupted) as caught:
            sweep.run(plan, jobs=1)
    store = plan.with_suffix(".duckdb")
    if limit:
        assert "specifications are stored in plan.duckdb" in str(caught.value)
    return store


def counts(frame: pd.DataFrame) -> pd.DataFrame:
    return frame.set_index(["finding", "axis", "choice"])[["planned"]]


def test_the_planned_count_is_the_plans(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    plan = small_plans.write_plan(tmp_path, AXES)
    store = stopped(plan, 2, monkeypatch)
    partly = sweep.open_results(store)
    survival = partly.survival()
    kinds = ["not_applicable", "infeasible", "failed", "screened_out", "not_run", "admissible"]
    assert (survival[kinds].sum(axis=1) == survival["planned"]).all()
    stored = partly.outcomes(["origin", "lags_choice"])
    planned = stored[stored["origin"] == "planned"]
    whole = survival[survival["axis"] == "all"].iloc[0]
    assert whole["planned"] == sweep.check(plan).findings[0][1]
    assert whole["not_run"] == whole["planned"] - len(planned) > 0
    lags = survival[survival["axis"] == "lags"].set_index("choice")
    held = planned["lags_choice"].value_counts()
    for choice, row in lags.iterrows():
        assert row["not_run"] == row["planned"] - held.get(choice, 0)
    losses = partly.content().findings[0].frames["attrition"]
    missing = losses[losses["status"] == "not run yet"]
    assert list(missing["rows"]) == [whole["not_run"]]
    sweeps = partly.sweeps().iloc[0]
    assert sweeps["rows"] == len(stored) < sweeps["planned"]
    finished = sweep.run(plan, jobs=1)
    assert finished.unfinished == ""
    after = finished.survival()
    pd.testing.assert_frame_equal(counts(after), counts(survival))
    assert (after["not_run"] == 0).all()
    assert finished.sweeps().iloc[0]["planned"] == len(finished.outcomes())


@pytest.mark.parametrize("limit", [1, 3])
def test_every_command_says_so(
    tmp_path: Path, limit: int, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    store = stopped(small_plans.write_plan(tmp_path, AXES), limit, monkeypatch)
    results = sweep.open_results(store)
    rows, planned = results.info["rows"], results.info["planned"]
    said = f"Unfinished: {rows:,} of {planned:,} specifications are stored; run the plan again"
    assert said in results.unfinished
    assert said in repr(results)
    capsys.readouterr()
    for arguments in (
        ("show", store), ("show", store, "--by", "lags", "--format", "json"),
        ("export", store, tmp_path / "files"),
        ("report", store, "--output", tmp_path / "page.html"),
        ("verify", store, "--rows", 10, "--quiet"), ("compare", store),
        ("table", store, "survival"),
    ):  # fmt: skip
        assert call(*arguments) == 0
        shown = capsys.readouterr()
        assert shown.err.startswith(said)
        if "json" in arguments:
            assert sum(row["not_run"] for row in json.loads(shown.out)) > 0
    assert call("show", store) == 0
    assert "not run yet" in capsys.readouterr().out
    page = (tmp_path / "page.html").read_text(encoding="utf-8")
    assert page.index(said) < page.index("<nav")
    exported = pd.read_csv(tmp_path / "files" / "survival.csv")
    assert exported.query("axis == 'all'")["not_run"].sum() > 0


@pytest.mark.parametrize(
    "arguments",
    [("show",), ("show", "--by", "lags"), ("explain",), ("report",), ("export", "files"),
     ("verify",), ("compare",)],
)  # fmt: skip
def test_nothing_stored_yet_is_one_message(
    tmp_path: Path, arguments: tuple[str, ...], monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:  # fmt: skip
    plan = small_plans.write_plan(tmp_path, AXES.split("[baseline.reported]", maxsplit=1)[0])
    store = stopped(plan, 0, monkeypatch)
    before = sorted(tmp_path.iterdir())
    monkeypatch.chdir(tmp_path)
    capsys.readouterr()
    assert call(arguments[0], store, *arguments[1:]) == 2
    shown = capsys.readouterr()
    assert shown.err == (
        f"{store}: nothing of sweep 1 is stored yet. Run the plan again to go on.\n"
    )
    assert not shown.out
    assert sorted(tmp_path.iterdir()) == before
    assert call("show", store, "--sweeps") == 0


def test_only_ruled_out_rows_are_stored(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    plan = small_plans.write_plan(tmp_path, AXES)
    store = stopped(plan, 0, monkeypatch)
    capsys.readouterr()
    assert call("show", store) == 0
    assert "not run yet" in capsys.readouterr().out
    assert call("report", store) == 0
    page = store.with_suffix(".html").read_text(encoding="utf-8")
    assert "The baseline was not run yet, so no change can be set beside it." in page
    assert "is not known: it was not run yet" in page
    assert call("export", store, tmp_path / "files") == 0
    assert call("explain", store) == 2
    assert "specifications are stored; run the plan again" in capsys.readouterr().err
