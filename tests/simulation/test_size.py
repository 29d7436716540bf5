"""How often the procedures reject when there is nothing to find.

Two independent first-order autoregressions with coefficient 0.5, a constant, 5 per cent
level.  Each pair of columns is a finding, so that one sweep holds all replications; both
directions count, since neither series leads the other.

The published rates were simulated with another program (1,000 replications for the fixed
sample, 300 for the rolling windows).  A rate of ours and one of theirs may differ by 3.5
standard errors of the difference.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest

import sweep

pytestmark = pytest.mark.slow

LEVEL = 0.05
PERSISTENCE = 0.5
PAIRS = 500
ROLLING_PAIRS = 150
ORDERS = tuple(range(1, 9))

# Rows: F with 4 lags, chi-square Wald (divisor T) with 4, F with 8, Wald with 8, any of 1-8.
PUBLISHED = {
    60: (0.048, 0.118, 0.058, 0.278, 0.187),
    120: (0.049, 0.079, 0.048, 0.116, 0.136),
    240: (0.056, 0.074, 0.054, 0.082, 0.170),
}
PUBLISHED_REPLICATIONS = 1000
# Window length: share of samples with any rejecting window, mean share of rejecting windows.
PUBLISHED_ROLLING = {40: (0.82, 0.058), 60: (0.58, 0.053), 80: (0.46, 0.054)}
PUBLISHED_ROLLING_REPLICATIONS = 300


def draw_pairs(rows: int, pairs: int, seed: int) -> dict[str, np.ndarray[Any, Any]]:
    """Draw columns x0, y0, x1, y1, … that have nothing to do with one another."""
    shocks = np.random.default_rng([seed, rows]).standard_normal((rows + 50, 2 * pairs))
    values = np.zeros_like(shocks)
    for t in range(1, rows + 50):
        values[t] = PERSISTENCE * values[t - 1] + shocks[t]
    names = [f"{letter}{pair}" for pair in range(pairs) for letter in "xy"]
    return dict(zip(names, values[50:].T, strict=True))


def run_pairs(folder: Path, rows: int, pairs: int, axes: str, seed: int) -> pd.DataFrame:
    """Sweep every pair as a finding of its own; both directions as rows of ``p_value``."""
    frame = pd.DataFrame(draw_pairs(rows, pairs, seed))
    periods = [f"{1900 + row // 4}-Q{row % 4 + 1}" for row in range(rows)]
    frame.insert(0, "date", periods)
    frame.to_csv(folder / "pairs.csv", index=False)
    findings = "".join(
        f'[[findings]]\nname = "pair {pair}"\ncause = "x{pair}"\neffect = "y{pair}"\n\n'
        for pair in range(pairs)
    )
    plan = folder / "pairs.toml"
    plan.write_text(
        'title = "Nothing to find"\n\n'
        '[data]\nfile = "pairs.csv"\ndate = "date"\nfrequency = "quarterly"\n\n'
        f"{findings}"
        '[baseline]\nlags = 4\ndeterministics = "constant"\nwindow = "full sample"\n'
        'transformation = "level"\ntest = "F"\n\n'
        f"[axes]\n{axes}\n",
        encoding="utf-8",
    )
    results = sweep.run(sweep.load_plan(plan), store=folder / "pairs.duckdb", jobs=1)
    outcomes = results.outcomes()
    assert (outcomes["status"] == "ok").all()
    forward = outcomes.assign(direction="forward")
    reverse = outcomes.assign(direction="reverse", p_value=outcomes["reverse_p_value"])
    return pd.concat([forward, reverse], ignore_index=True)


def margin(rate: float, ours: int, theirs: int) -> float:
    return 3.5 * float(np.sqrt(rate * (1 - rate) * (1 / ours + 1 / theirs)))


@pytest.fixture(scope="module", params=PUBLISHED)
def fixed(
    request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory
) -> tuple[int, pd.DataFrame]:
    axes = (
        f"lags = {list(ORDERS)}\n"
        'tests = [{ test = "F", name = "F" }, { test = "Wald", divisor = "T", name = "Wald T" }]'
    )
    folder = tmp_path_factory.mktemp(f"rows_{request.param}")
    return request.param, run_pairs(folder, request.param, PAIRS, axes, seed=11)


def rate(rows: pd.DataFrame) -> float:
    return float((rows["p_value"] <= LEVEL).mean())


def test_f_rejects_at_its_nominal_rate(fixed: tuple[int, pd.DataFrame]) -> None:
    """Within Monte Carlo error, and half a point for F being approximate with own lags."""
    _, outcomes = fixed
    for order in ORDERS:
        rows = outcomes[(outcomes["test"] == "F") & (outcomes["lags"] == order)]
        assert len(rows) == 2 * PAIRS
        error = 3.5 * np.sqrt(LEVEL * (1 - LEVEL) / len(rows))
        assert abs(rate(rows) - LEVEL) < error + 0.005, order


def test_rates_are_the_published_ones(fixed: tuple[int, pd.DataFrame]) -> None:
    size, outcomes = fixed
    cells = [("F", 4), ("Wald T", 4), ("F", 8), ("Wald T", 8)]
    for (procedure, order), published in zip(cells, PUBLISHED[size], strict=False):
        rows = outcomes[(outcomes["test"] == procedure) & (outcomes["lags"] == order)]
        allowed = margin(published, len(rows), PUBLISHED_REPLICATIONS)
        assert abs(rate(rows) - published) < allowed, (procedure, order)


def test_best_of_eight_orders(fixed: tuple[int, pd.DataFrame]) -> None:
    """The smallest p-value of eight orders is below 5% in far more than 5% of samples."""
    size, outcomes = fixed
    rows = outcomes[outcomes["test"] == "F"]
    smallest = rows.groupby(["finding", "direction"], observed=True)["p_value"].min()
    found = float((smallest <= LEVEL).mean())
    published = PUBLISHED[size][-1]
    assert len(smallest) == 2 * PAIRS
    assert abs(found - published) < margin(published, len(smallest), PUBLISHED_REPLICATIONS)
    assert found > 2 * LEVEL


def test_rolling_windows(tmp_path: Path) -> None:
    """T = 240, two lags, a window every second quarter: some window nearly always rejects."""
    entries = ", ".join(
        f'{{ rolling = {length}, step = 2, name = "{length}" }}' for length in PUBLISHED_ROLLING
    )
    outcomes = run_pairs(
        tmp_path, 240, ROLLING_PAIRS, f"lags = [2]\nwindows = [{entries}]", seed=12
    )
    outcomes = outcomes[outcomes["lags"] == 2]
    for length, (any_window, mean_share) in PUBLISHED_ROLLING.items():
        rows = outcomes[outcomes["window_name"] == str(length)]
        shares = (
            (rows["p_value"] <= LEVEL)
            .groupby([rows["finding"], rows["direction"]], observed=True)
            .mean()
        )
        assert len(shares) == 2 * ROLLING_PAIRS
        allowed = margin(any_window, len(shares), PUBLISHED_ROLLING_REPLICATIONS)
        assert abs(float((shares > 0).mean()) - any_window) < allowed, length
        # Windows of one sample overlap: the error is that of the spread between samples.
        spread = float(shares.std())
        error = 3.5 * spread * np.sqrt(1 / len(shares) + 1 / PUBLISHED_ROLLING_REPLICATIONS)
        assert abs(float(shares.mean()) - mean_share) < error, length
