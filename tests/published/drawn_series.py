"""Drawn series, their plans, and statsmodels' regressions of them: what its checks share.

The data are drawn with a fixed seed, so that nothing here can have been tuned to a data set
that everyone knows.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import published_plans as plans
import pytest
from numpy.typing import NDArray

Array = NDArray[np.float64]
ROWS = 180
FIRST = "1990-01"
PERIODS = plans.months(FIRST, ROWS)


def drawn(seed: int = 20261201) -> dict[str, Array]:
    """Draw four linked series; w follows its own past only and serves as exogenous."""
    rng = np.random.default_rng(seed)
    shocks = rng.standard_normal((ROWS + 50, 4)) * (1.0, 0.7, 1.3, 1.0)
    shocks *= np.where(np.arange(ROWS + 50) % 40 < 10, 2.0, 1.0)[:, None]  # uneven variance
    first = np.array(
        [
            [0.5, 0.2, 0.0, 0.1],
            [0.1, 0.4, 0.2, 0.3],
            [0.0, -0.2, 0.3, 0.0],
            [0.0, 0.0, 0.0, 0.6],
        ]
    )
    second = np.array(
        [
            [0.1, 0.15, 0.0, 0.0],
            [0.0, 0.1, -0.1, 0.0],
            [0.2, 0.0, 0.1, 0.0],
            [0.0, 0.0, 0.0, 0.0],
        ]
    )
    values = np.zeros((ROWS + 50, 4))
    for t in range(2, ROWS + 50):
        values[t] = first @ values[t - 1] + second @ values[t - 2] + shocks[t]
    return dict(zip("xyzw", values[50:].T + 10.0, strict=True))


def sweep_drawn(
    folder: Path,
    series: dict[str, Array],
    axes: dict[str, Any],
    finding: dict[str, Any] | None = None,
    baseline: dict[str, Any] | None = None,
) -> pd.DataFrame:
    """Run x → y, given nothing unless the finding says so."""
    plans.write_data(folder / "drawn.csv", PERIODS, series)
    findings = [{"name": "x leads y", "cause": "x", "effect": "y", **(finding or {})}]
    text = plans.plan_text("drawn.csv", findings, axes, baseline, frequency="monthly")
    return plans.run_plan(folder, text)


def lagged(values: Array, lags: int, rows: Array) -> list[Array]:
    """Return lags 1..lags of a series at the given rows."""
    return [values[rows - lag] for lag in range(1, lags + 1)]


def by_ols(
    effect: Array,
    columns: dict[str, list[Array]],
    deterministic: list[Array],
    rows: Array,
    covariance: str = "nonrobust",
) -> tuple[float, float]:
    """Test that all columns under "cause" are zero; F and its p-value from statsmodels."""
    import statsmodels.api as sm

    cause = columns["cause"]
    rest = [column for name, group in columns.items() if name != "cause" for column in group]
    design = np.column_stack([*cause, *rest, *deterministic])
    fitted = sm.OLS(effect[rows], design).fit(cov_type=covariance, use_t=True)
    tested = fitted.f_test(np.eye(len(cause), design.shape[1]))
    return float(tested.fvalue), float(tested.pvalue)


def agree(row: pd.Series[Any], statistic: float, p_value: float) -> None:
    assert row["status"] == "ok"
    assert float(row["statistic"]) == pytest.approx(statistic, rel=1e-8)
    assert float(row["p_value"]) == pytest.approx(p_value, rel=1e-6)
