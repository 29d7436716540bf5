"""Samples of a plan: their share is that of the whole plan on average, their interval covers it.

The populations differ in what makes an interval go wrong: strata of unequal size, some drawn
whole, shares near none and all, rows that are not admissible, weights of test groups.
"""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
import small_plans

import sweep
from sweep.verdicts.survival import sampling_interval

REPETITIONS = 1500
Stratum = tuple[np.ndarray, np.ndarray, np.ndarray]


def population(
    rng: np.random.Generator, sizes: Sequence[int], level: float, spread: float, admissible: float
) -> list[Stratum]:
    """Return weight of the test, admissible and survived of every row, by stratum."""
    strata = []
    for size in sizes:
        share = 1 / (1 + np.exp(-(level + spread * rng.standard_normal())))
        strata.append((
            rng.choice([0.25, 0.25, 0.25, 0.25, 1.0], size),
            rng.random(size) < admissible,
            rng.random(size) < share,
        ))  # fmt: skip
    return strata


def share(strata: Sequence[Stratum]) -> float:
    """Return the headline share of a population, every stratum counting alike."""
    survived = sum((w * a * s).mean() for w, a, s in strata)
    return float(survived / sum((w * a).mean() for w, a, _ in strata))


def drawn(rng: np.random.Generator, strata: Sequence[Stratum], each: int) -> pd.DataFrame:
    """Draw rows of every stratum and count them as the store's query does."""
    rows = []
    for number, (weight, admissible, survived) in enumerate(strata):
        size = min(each, weight.size)
        picks = rng.choice(weight.size, size, replace=False)
        for w in np.unique(weight[picks]):
            held = picks[weight[picks] == w]
            rows.append({
                "window_name": str(number), "is_baseline": False, "weight": w / size,
                "rows": held.size, "admissible": int(admissible[held].sum()),
                "survived": int((admissible & survived)[held].sum()), "size": float(weight.size),
            })  # fmt: skip
    return pd.DataFrame(rows)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("sizes", "each", "level", "spread", "admissible"),
    [
        ([4, 4, 400, 400, 4000, 4000], 20, 0.0, 1.0, 0.9),
        ([60] * 6, 20, -1.0, 1.0, 0.9),
        ([2000] * 10, 12, 0.0, 2.0, 0.8),
        ([2000] * 10, 12, -4.0, 0.5, 0.8),
        ([5000] * 4, 50, 3.0, 0.3, 0.95),
        ([2000] * 12, 6, 0.0, 5.0, 1.0),
        ([30, 30, 30], 10, 0.0, 1.0, 1.0),
        ([46_000], 200, -3.0, 0.0, 0.9),
    ],
)
def test_the_interval_covers_the_share_of_the_whole_plan(
    sizes: list[int], each: int, level: float, spread: float, admissible: float
) -> None:
    """At least 95% within three binomial standard errors, and never far too wide for nothing."""
    rng = np.random.default_rng(20261201)
    covered = 0
    for repetition in range(REPETITIONS):
        if repetition % 50 == 0:
            strata = population(rng, sizes, level, spread, admissible)
            true = share(strata)
        interval = sampling_interval(drawn(rng, strata, each))
        assert interval is not None
        covered += interval[0] - 1e-12 <= true <= interval[1] + 1e-12
    assert covered / REPETITIONS > 0.95 - 3 * np.sqrt(0.95 * 0.05 / REPETITIONS)


AXES = """
[axes]
lags = [1, 2, 3, 4, 5, 6, "AIC", "BIC"]
deterministics = ["constant", "linear trend", "quadratic trend"]
windows = ["full sample", { from = "1994-01" }, { rolling = 70, step = 1 }, { expanding = 60 }]
tests = ["F", "LR", "Wald", "LM", { test = "F", covariance = "HC3" }]
transformations = ["level", "difference"]
[sweep]
coefficients = "none"
"""


@pytest.mark.slow
def test_samples_of_a_real_plan_are_right_on_average(tmp_path: Path) -> None:
    """Rows come from the store of the full plan, so a sample costs its bookkeeping alone."""
    store = tmp_path / "shared.duckdb"
    whole = sweep.run(small_plans.write_plan(tmp_path, AXES), store=store)
    true = float(whole.survival("all").iloc[0]["headline_share"])
    assert 0.05 < true < 0.95
    shares, covered, count = [], 0, 60
    for seed in range(count):
        plan = small_plans.write_plan(tmp_path, f"{AXES}design = {{ sample = 200 }}\n")
        text = plan.read_text(encoding="utf-8")
        plan.write_text(f"seed = {seed}\n{text}", encoding="utf-8")
        results = sweep.run(plan, store=store, jobs=1)
        assert results.run_report is not None
        assert results.run_report.computed == 0
        shares.append(float(results.survival("all").iloc[0]["headline_share"]))
        strata = results.content().findings[0].frames["strata"]
        assert strata["rows"].sum() == results.run_report.planned
        interval = sampling_interval(strata)
        assert interval is not None
        covered += interval[0] <= true <= interval[1]
    error = np.std(shares, ddof=1) / np.sqrt(count)
    assert abs(np.mean(shares) - true) < 3 * error
    assert covered >= 0.95 * count - 3 * np.sqrt(0.95 * 0.05 * count)
