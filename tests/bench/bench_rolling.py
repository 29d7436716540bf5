"""Rolling windows: how many tests a second a core, and how many times the plain way.

Three series of 800 rows, lags 1 to 12, three deterministic choices, every window of 120
rows, both directions of all pairs given the third series: about 147,000 tests, each with
its tail probability.  The plain way is a joblib loop over statsmodels' VAR on the same
cores, on a sample of the same regressions, and must give the same numbers.

Screens: ``require = ["enough observations"]``.
"""

from __future__ import annotations

from pathlib import Path

import joblib
import measuring
import numpy as np
import pandas as pd
import pytest
from threadpoolctl import threadpool_limits

import sweep
from sweep.engine.compute import compute_task
from sweep.engine.group import make_tasks
from sweep.engine.prepare import prepare
from sweep.plan.model import Plan
from sweep.results import Results

pytestmark = pytest.mark.bench

WINDOW = 120
SAMPLE = 600
AXES = f"""
lags = {list(range(1, 13))}
deterministics = {list(measuring.TRENDS)}
windows = [{{ rolling = {WINDOW}, name = "rolling" }}]
"""


def plain(values: np.ndarray, order: int, trend: str, cause: int, effect: int) -> float:
    """One regression the plain way: fit the VAR, then its Granger test."""
    from statsmodels.tsa.api import VAR

    fitted = VAR(values).fit(order, trend=trend)
    return float(fitted.test_causality(effect, causing=cause, kind="f").test_statistic)


def sampled(outcomes: pd.DataFrame, data: pd.DataFrame) -> tuple[list, np.ndarray]:
    """Draw regressions of both directions; return their calls and our statistics."""
    rows = outcomes[outcomes["window_name"] == "rolling"].sample(SAMPLE, random_state=7)
    dates = {pd.Timestamp(f"{date}-01"): row for row, date in enumerate(data["date"])}
    values = data[list(measuring.SERIES)].to_numpy()
    calls, ours = [], []
    for number, (_, row) in enumerate(rows.iterrows()):
        first = dates[pd.Timestamp(row["window_start"])]
        cause, effect = (measuring.SERIES.index(row[role]) for role in ("cause", "effect"))
        reverse = number % 2 == 1
        pair = (effect, cause) if reverse else (cause, effect)
        trend = measuring.TRENDS[row["deterministics"]]
        calls.append((values[first : first + WINDOW], int(row["lags"]), trend, *pair))
        ours.append(row["reverse_statistic" if reverse else "statistic"])
    return calls, np.array(ours, dtype=float)


def compute_only(plan: Plan) -> float:
    """Best of three: seconds that one core takes for the numbers alone, tails included."""
    prepared = prepare(plan)
    count = prepared.rows.count
    tasks = make_tasks(prepared, np.arange(count), np.zeros(count, bool))
    with threadpool_limits(1):
        return min(
            measuring.timed(lambda: [compute_task(task) for task in tasks])[0] for _ in range(3)
        )


def stored(plan: Plan, folder: Path, jobs: int) -> tuple[float, Results]:
    """Best of three whole runs into a new store."""
    times = []
    for number in range(3):
        store = folder / f"{jobs}_{number}.duckdb"
        seconds, results = measuring.timed(lambda: sweep.run(plan, store=store, jobs=jobs))  # noqa: B023
        times.append(seconds)
    return min(times), results


def plain_rate(calls: list, jobs: int) -> tuple[float, np.ndarray]:
    """Return regressions a second of the joblib loop, and its statistics."""
    with joblib.Parallel(n_jobs=jobs) as pool:
        pool(joblib.delayed(plain)(*call) for call in calls[:8])  # imports in the workers
        seconds, theirs = measuring.timed(
            lambda: pool(joblib.delayed(plain)(*call) for call in calls)
        )
    return len(calls) / seconds, np.array(theirs)


def test_rolling(tmp_path: Path) -> None:
    plan = sweep.load_plan(measuring.write_plan(tmp_path / "one", AXES))
    numbers = compute_only(plan)
    one, results = stored(plan, tmp_path, 1)
    # Two workers need work that outlasts their start: the same over four times the rows.
    longer = sweep.load_plan(measuring.write_plan(tmp_path / "four", AXES, 4 * measuring.ROWS))
    two, more = stored(longer, tmp_path, measuring.CORES)
    outcomes = results.outcomes()
    assert (outcomes["status"] == "ok").all()
    tests, many = 2 * len(outcomes), 2 * int(more.survival(by="all")["planned"].sum())

    calls, ours = sampled(outcomes, measuring.drawn())
    plain_one, theirs = plain_rate(calls, 1)
    plain_two, _ = plain_rate(calls, measuring.CORES)
    difference = np.abs(ours / theirs - 1.0)
    assert difference.max() < 1e-8

    measuring.say(
        f"one core, numbers only        {tests / numbers:,.0f} tests a second ({tests:,} tests)",
        f"one core, store included      {tests / one:,.0f} tests a second",
        f"two cores, store included     {many / two:,.0f} tests a second ({many:,} tests)",
        f"plain way, one core           {plain_one:,.0f} tests a second",
        f"plain way, two cores          {plain_two:,.0f} tests a second",
        f"ratio, one core, numbers      {tests / numbers / plain_one:,.0f}",
        f"ratio, one core, with store   {tests / one / plain_one:,.0f}",
        f"ratio, two cores, with store  {many / two / plain_two:,.0f}",
        f"largest relative difference   {difference.max():.1e} over {SAMPLE} regressions",
    )
