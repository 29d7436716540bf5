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

import sweep

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


def test_rolling(tmp_path: Path) -> None:
    plan = sweep.load_plan(measuring.write_plan(tmp_path, AXES))
    sweep.run(plan, store=tmp_path / "warm.duckdb", jobs=1)  # imports and caches
    one, results = measuring.timed(lambda: sweep.run(plan, store=tmp_path / "one.duckdb", jobs=1))
    two, _ = measuring.timed(
        lambda: sweep.run(plan, store=tmp_path / "two.duckdb", jobs=measuring.CORES)
    )
    outcomes = results.outcomes()
    assert (outcomes["status"] == "ok").all()
    tests = 2 * len(outcomes)

    calls, ours = sampled(outcomes, measuring.drawn())
    with joblib.Parallel(n_jobs=measuring.CORES) as pool:
        pool(joblib.delayed(plain)(*call) for call in calls[:8])  # imports in the workers
        seconds, theirs = measuring.timed(
            lambda: pool(joblib.delayed(plain)(*call) for call in calls)
        )
    difference = np.abs(ours / np.array(theirs) - 1.0)
    assert difference.max() < 1e-8

    rate_one, rate_two, rate_plain = tests / one, tests / two, SAMPLE / seconds
    jobs = f"{measuring.CORES} jobs"
    measuring.say(
        f"tests                         {tests:,}",
        f"one job, store included       {rate_one:,.0f} tests a second ({one:.2f} s)",
        f"{jobs}, store included       {rate_two:,.0f} tests a second ({two:.2f} s)",
        f"the plain way, {jobs}        {rate_plain:,.0f} tests a second",
        f"ratio on the same cores       {rate_two / rate_plain:,.0f}",
        f"largest relative difference   {difference.max():.1e} over {SAMPLE} regressions",
    )
