"""Runs as a user meets them: workers, stops, sharing, faults, exit codes."""

from __future__ import annotations

import functools
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import joblib
import numpy as np
import pandas as pd
import pytest
import small_plans

import sweep
from sweep.engine import waves
from sweep.engine.compute import compute_task
from sweep.engine.group import make_tasks
from sweep.engine.prepare import prepare
from sweep.engine.run import run_prepared
from sweep.engine.task import Outcome, Task
from sweep.plan.load import load_plan
from sweep.results import Results

AXES = """
[axes]
lags = [1, 2, 3, 4, "AIC", "HQ"]
deterministics = ["constant", "linear trend"]
windows = ["full sample", { rolling = 80, step = 1 }, { without = ["1995-01", "1995-04"] }]
transformations = ["level", "difference"]
tests = ["F", { test = "F", covariance = "HC3" }]
"""


def table(results: Results) -> pd.DataFrame:
    """Return all rows, sorted, without what belongs to the store and not to the numbers."""
    frame = results.outcomes().drop(columns=["sweep"])
    order = ["finding", "specification"]
    return frame.sort_values(order).reset_index(drop=True).astype(object)


def same(one: pd.DataFrame, other: pd.DataFrame) -> None:
    pd.testing.assert_frame_equal(one, other, check_exact=True)


def test_numbers_do_not_depend_on_jobs(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(waves, "INLINE_SECONDS", 0.0)
    plan = small_plans.write_plan(tmp_path, AXES)
    one = sweep.run(plan, store=tmp_path / "one.duckdb", jobs=1)
    two = sweep.run(plan, store=tmp_path / "two.duckdb", jobs=2)
    same(table(one), table(two))


def test_joblib_of_the_session_is_left_as_it_was(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A run with workers neither takes joblib's own executor nor leaves it another."""
    monkeypatch.setattr(waves, "INLINE_SECONDS", 0.0)
    plan = small_plans.write_plan(tmp_path, AXES)
    for number in range(2):
        sweep.run(plan, store=tmp_path / f"{number}.duckdb", jobs=2)
        squares = joblib.Parallel(n_jobs=2)(joblib.delayed(pow)(n, 2) for n in range(5))
        assert squares == [0, 1, 4, 9, 16]


def test_running_again_computes_nothing(tmp_path: Path) -> None:
    plan = small_plans.write_plan(tmp_path, AXES)
    first = sweep.run(plan, jobs=1).run_report
    again = sweep.run(plan, jobs=1).run_report
    assert first is not None
    assert again is not None
    assert first.computed == first.planned
    assert (again.computed, again.stored, again.sweep) == (0, first.planned, first.sweep)


def _interrupted_after(task: Task, *, limit: int, seen: list[int]) -> Outcome:
    seen.append(1)
    if len(seen) > limit:
        raise KeyboardInterrupt
    return compute_task(task)


def test_an_interrupted_run_goes_on_to_the_same_numbers(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    plan = small_plans.write_plan(tmp_path, AXES)
    whole = sweep.run(plan, store=tmp_path / "whole.duckdb", jobs=1)
    monkeypatch.setattr(waves, "TASKS_A_WORKER", 1)
    monkeypatch.setattr("sweep.engine.group.LARGEST_TASK", 400)
    work = functools.partial(_interrupted_after, limit=3, seen=[])
    monkeypatch.setattr(waves, "compute_task", work)
    store = tmp_path / "stopped.duckdb"
    with pytest.raises(sweep.errors.Interrupted):
        run_prepared(prepare(load_plan(plan)), store, jobs=1)
    monkeypatch.setattr(waves, "compute_task", compute_task)
    resumed = sweep.run(plan, store=store, jobs=1)
    report = resumed.run_report
    assert report is not None
    assert 0 < report.stored < report.planned
    assert report.computed == report.planned - report.stored
    same(table(whole), table(resumed))


def _start(plan: Path, store: Path, jobs: int = 1) -> subprocess.Popen[str]:
    """Start a run in a session of its own that writes after every task, slowly."""
    code = (
        "import sys, time\n"
        "from sweep.engine import waves, compute\n"
        "def slow(task, real=compute.compute_task):\n"
        "    time.sleep(0.3)\n"
        "    return real(task)\n"
        "waves.compute_task = slow\n"
        "from sweep.engine.sink import StoreSink\n"
        "def flagged(sink, outcomes, real=StoreSink.write):\n"
        "    real(sink, outcomes)\n"
        "    open(sys.argv[4], 'w').close()\n"
        "StoreSink.write = flagged\n"
        "waves.TASKS_A_WORKER = 1\n"
        "waves.INLINE_SECONDS = 0.0\n"
        "import sweep.engine.group as group\n"
        "group.LARGEST_TASK = 300\n"
        "from sweep.cli import main\n"
        "main(['run', sys.argv[1], '--store', sys.argv[2], '--jobs', sys.argv[3], '--no-report'])\n"
    )
    return subprocess.Popen(
        [sys.executable, "-c", code, str(plan), str(store), str(jobs), str(_flag(store))],
        stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, start_new_session=True,
    )  # fmt: skip


def _wait_for(path: Path) -> None:
    """Wait until a file is there."""
    deadline = time.monotonic() + 60
    while time.monotonic() < deadline:
        if path.exists():
            return
        time.sleep(0.02)
    raise AssertionError(f"there is no {path.name} after a minute")


def _flag(store: Path) -> Path:
    """Return the file that appears once rows are stored."""
    return store.with_suffix(".written")


@pytest.mark.parametrize(("by", "code"), [(signal.SIGKILL, -9), (signal.SIGINT, 130)])
def test_a_stopped_process_leaves_a_resumable_store(
    tmp_path: Path, by: signal.Signals, code: int
) -> None:
    plan = small_plans.write_plan(tmp_path, AXES)
    store = tmp_path / "stopped.duckdb"
    process = _start(plan, store)
    try:
        _wait_for(_flag(store))
        os.kill(process.pid, by)
        _, messages = process.communicate(timeout=60)
    finally:
        process.kill()
        process.communicate()
    assert process.returncode == code
    if by == signal.SIGINT:
        assert "run the same command to go on" in messages
        assert "Traceback" not in messages
    resumed = sweep.run(plan, store=store, jobs=1)
    whole = sweep.run(plan, store=tmp_path / "whole.duckdb", jobs=1)
    report = resumed.run_report
    assert report is not None
    assert 0 < report.stored < report.planned
    same(table(whole), table(resumed))


@pytest.mark.parametrize("seconds", [None, 0.0, 0.1, 0.4])
def test_ctrl_c_with_workers_leaves_no_traceback_and_goes_on_to_the_same_numbers(
    tmp_path: Path, seconds: float | None
) -> None:
    """As a terminal does it: every process of the group gets the signal, workers included.

    Without ``seconds`` it comes once rows are stored, else that long after the store is there,
    while the workers start.
    """
    plan = small_plans.write_plan(tmp_path, AXES)
    store = tmp_path / "stopped.duckdb"
    process = _start(plan, store, jobs=2)
    try:
        _wait_for(_flag(store) if seconds is None else store)
        time.sleep(seconds or 0.0)
        os.killpg(process.pid, signal.SIGINT)
        _, messages = process.communicate(timeout=60)
    finally:
        process.kill()
        process.communicate()
    assert process.returncode == 130
    assert "Traceback" not in messages
    assert "Error" not in messages
    resumed = sweep.run(plan, store=store, jobs=1)
    report = resumed.run_report
    assert report is not None
    if seconds is None:
        assert report.stored > 0
    last = messages.strip().splitlines()[-1]
    kept = f"{report.stored:,} of {report.planned:,} specifications are stored in stopped.duckdb"
    assert last.startswith("Stopped. " if report.stored else "Stopped before anything was stored")
    assert not report.stored or kept in last
    assert last.endswith("run the same command to go on.")
    whole = sweep.run(plan, store=tmp_path / "whole.duckdb", jobs=1)
    same(table(whole), table(resumed))


def test_a_second_ctrl_c_stops_at_once(tmp_path: Path) -> None:
    plan = small_plans.write_plan(tmp_path, AXES)
    store = tmp_path / "stopped.duckdb"
    process = _start(plan, store, jobs=2)
    try:
        _wait_for(_flag(store))
        os.killpg(process.pid, signal.SIGINT)
        time.sleep(0.15)  # two signals at one moment would be one
        os.killpg(process.pid, signal.SIGINT)
        _, messages = process.communicate(timeout=60)
    finally:
        process.kill()
        process.communicate()
    assert process.returncode == 130
    assert "Traceback" not in messages
    assert sweep.run(plan, store=store, jobs=1).run_report.stored > 0


def test_while_a_run_writes_others_are_told_who_holds_the_store(tmp_path: Path) -> None:
    plan = small_plans.write_plan(tmp_path, AXES)
    store = tmp_path / "held.duckdb"
    process = _start(plan, store)
    try:
        _wait_for(_flag(store))
        shown = subprocess.run(
            [sys.executable, "-c", "from sweep.cli import main; main()", "show", str(store)],
            capture_output=True, text=True, check=False,
        )  # fmt: skip
    finally:
        process.kill()
        process.communicate()
    assert shown.returncode == 5
    assert str(process.pid) in shown.stderr
    assert "Traceback" not in shown.stderr


def test_an_edited_plan_takes_rows_over(tmp_path: Path) -> None:
    plan = small_plans.write_plan(tmp_path, AXES)
    store = tmp_path / "shared.duckdb"
    first = sweep.run(plan, store=store, jobs=1)
    longer = AXES.replace("lags = [1,", "lags = [8, 1,")
    edited = small_plans.write_plan(tmp_path, longer, 'claim = "leads one way"', "other.toml")
    second = sweep.run(edited, store=store, jobs=1)
    report = second.run_report
    assert first.run_report is not None
    assert report is not None
    assert report.reused == first.run_report.planned
    assert report.computed == report.planned - report.reused
    numbers = ["specification", "p_value", "reverse_p_value", "computation"]
    fresh = sweep.run(edited, store=tmp_path / "fresh.duckdb", jobs=1)
    same(table(second)[numbers], table(fresh)[numbers])


def test_edited_data_begin_a_new_sweep(tmp_path: Path) -> None:
    plan = small_plans.write_plan(tmp_path)
    first = sweep.run(plan, jobs=1)
    small_plans.write_data(tmp_path, seed=4)
    second = sweep.run(plan, jobs=1)
    assert second.sweep == first.sweep + 1
    assert second.run_report is not None
    assert second.run_report.reused == 0
    assert second.run_report.other_data == first.sweep
    assert second.run_report.changed == "the data"
    # Said once, by the run that begins the sweep.
    again = sweep.run(plan, jobs=1).run_report
    assert again is not None
    assert (again.sweep, again.other_data, again.changed) == (second.sweep, None, "")
    ids = [set(results.outcomes(["specification"])["specification"]) for results in (first, second)]
    assert ids[0] == ids[1]
    with pytest.raises(sweep.errors.InputFault, match="the data have changed"):
        first.explain()


def test_what_has_changed_is_named(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    from sweep.cli import main

    plan = small_plans.write_plan(tmp_path)

    def said() -> str:
        with pytest.raises(SystemExit):
            main(["run", str(plan), "--no-report", "--jobs", "1"])
        return capsys.readouterr().err

    assert "have changed" not in said()
    assert "have changed" not in said()
    monkeypatch.setattr("sweep.procedures.ENGINE_NUMERICS", 99)
    assert "The program's numerics have changed since sweep 1 of this plan" in said()
    monkeypatch.setattr("sweep.procedures.ENGINE_NUMERICS", 100)
    small_plans.write_data(tmp_path, seed=4)
    assert "The data and the program's numerics have changed since sweep 2 of this" in said()


def test_a_step_that_never_steps_is_not_applicable(tmp_path: Path) -> None:
    tail = """
    [axes]
    lags = [2, "AIC"]
    deterministics = ["constant", { trend = "none", steps = ["1990-01"] },
                      { trend = "none", steps = ["1995-01"] }, { trend = "none", seasonal = true }]
    windows = ["full sample", { from = "1996-01" }, { rolling = 80, step = 20 }]
    """
    results = sweep.run(small_plans.write_plan(tmp_path, tail), jobs=1)
    frame = results.outcomes(["deterministics", "window_start", "lags", "status", "reason"])
    step = frame["deterministics"].astype(str)
    constant = (step == "none + step 1990-01") | (
        # From here on every row of the regression lies behind the step.
        (step == "none + step 1995-01") & (frame["window_start"] >= "1995-01-01")
    )
    assert constant.sum() > 8
    assert (frame["status"] == "ok").equals(~constant)
    words = "a step, pulse, seasonal or Fourier term is constant or collinear within the window"
    assert set(frame.loc[constant, "reason"]) == {words}
    assert results.verify(rows=500).agrees


def test_a_largest_order_that_the_data_lower_is_said(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    from sweep.cli import main

    tail = '[axes]\nlags = [2, "AIC", { criterion = "AIC", maximum = 60 }]'
    plan = small_plans.write_plan(tmp_path, tail)
    check = sweep.check(plan)
    # 160 − 34 rows, a constant and 3 × 34 lags: 23 degrees of freedom; with 35 lags 19.
    (said,) = check.lowered
    assert said.startswith('"AIC up to 60" considers at most 34 of 60 lags of "x leads y": more')
    results = sweep.run(plan, jobs=1)
    rows = results.outcomes(["lags_choice", "specification"])
    wide = rows.loc[rows["lags_choice"] == "AIC up to 60", "specification"].iloc[0]
    words = " ".join(results.explain(wide).regression)
    assert "among 1 to 34, compared on their common sample" in words
    assert "Orders up to 60 were to be considered; 34 is the largest that leaves 20" in words
    usual = rows.loc[rows["lags_choice"] == "AIC", "specification"].iloc[0]
    assert "were to be considered" not in " ".join(results.explain(usual).regression)
    with pytest.raises(SystemExit):
        main(["check", str(plan)])
    assert said in capsys.readouterr().out


@pytest.mark.parametrize("design", ['"one change"', '"two changes"', "{ sample = 60 }"])
def test_smaller_designs(tmp_path: Path, design: str) -> None:
    plan = small_plans.write_plan(tmp_path, f"{AXES}\n[sweep]\ndesign = {design}")
    results = sweep.run(plan, jobs=1)
    frame = results.outcomes()
    baseline = frame[frame["is_baseline"]]
    assert len(baseline) == 1
    whole = results.survival("all").iloc[0]
    axes = ["lags_choice", "deterministics", "window_name", "transformation", "test"]
    base = baseline.iloc[0]
    changes = sum((frame[axis].astype(str) != str(base[axis])).astype(int) for axis in axes)
    if "sample" in design:
        per_entry = frame.groupby("window_name", observed=True).size()
        assert per_entry.max() - per_entry.min() <= 1
        assert 60 <= len(frame) <= 61
        assert whole["headline_share"] is not None
    else:
        most = 1 if "one" in design else 2
        assert changes.max() == most
        assert pd.isna(whole["headline_share"])
        assert not frame["specification"].duplicated().any()
    assert results.summary()


def test_a_sample_of_everything_has_the_share_of_the_full_cross(tmp_path: Path) -> None:
    full = sweep.run(small_plans.write_plan(tmp_path, AXES), jobs=1)
    tail = f"{AXES}\n[sweep]\ndesign = {{ sample = 100000 }}"
    drawn = sweep.run(small_plans.write_plan(tmp_path, tail), jobs=1)
    names = ["planned", "admissible", "survived", "distinct", "headline_share", "share_at_1"]
    one, other = (results.survival("all").iloc[0] for results in (full, drawn))
    assert other[names].astype(float).to_numpy() == pytest.approx(
        one[names].astype(float).to_numpy(), rel=1e-12
    )
    assert drawn.summary()[0][1][2].startswith("These rows are a sample of the plan")


def _dies_once(task: Task, flag: Path) -> Outcome:
    if not flag.exists():
        flag.write_text("died", encoding="utf-8")
        os._exit(1)
    return compute_task(task)


def _always_dies(task: Task) -> Outcome:
    os._exit(1)


def _breaks(task: Task) -> Outcome:
    raise RuntimeError("a fault of ours")


def _tasks(folder: Path) -> list[Task]:
    whole = prepare(load_plan(small_plans.write_plan(folder, AXES)))
    rows = np.arange(whole.rows.count)
    return make_tasks(whole, rows, np.zeros(rows.size, bool))


def test_a_dead_worker_costs_the_tasks_in_hand_only(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(waves, "INLINE_SECONDS", 0.0)
    tasks = _tasks(tmp_path)
    work = functools.partial(_dies_once, flag=tmp_path / "flag")
    done = [item for wave in waves.compute_in_waves(tasks, 2, work) for item in wave]
    assert all(isinstance(item, Outcome) for item in done)
    rows = np.concatenate([item.row for item in done])
    assert np.array_equal(np.sort(rows), np.arange(rows.size))
    (wave,) = waves.compute_in_waves(tasks[:1], 2, _always_dies)
    assert [type(item) for item in wave] == [waves.Broken]


def test_a_broken_task_becomes_failed_rows_and_exit_code_3(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    from sweep.cli import main

    monkeypatch.setattr(waves, "compute_task", _breaks)
    plan = small_plans.write_plan(tmp_path, AXES)
    with pytest.raises(SystemExit) as left:
        main(["run", str(plan), "--jobs", "1", "--no-report", "--quiet"])
    assert left.value.code == 3
    whole = sweep.open_results(plan.with_suffix(".duckdb")).survival("all").iloc[0]
    assert whole["failed"] == whole["planned"] > 0
    monkeypatch.undo()
    resumed = sweep.run(plan, jobs=1)
    assert resumed.survival("all").iloc[0]["planned"] == whole["planned"]


def test_waves_wait_for_the_writer(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A paused writer stops the work: no task of a later wave is begun meanwhile."""
    monkeypatch.setattr(waves, "TASKS_A_WORKER", 1)
    done: list[int] = []

    def work(task: Task) -> Outcome:
        done.append(1)
        return compute_task(task)

    tasks = _tasks(tmp_path) * 4
    stream = waves.compute_in_waves(tasks, 1, work)
    for number in range(1, 4):
        next(stream)
        time.sleep(0.2)
        assert len(done) == number
