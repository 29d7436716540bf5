"""Distinct computations: one digest where the numbers are one by construction, and nowhere else."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
import small_plans

import sweep

BROAD = """
[axes]
lags = [
  1, 2, { order = 2, sample = { common = 2 } }, { order = 2, sample = { common = 5 } },
  { own = 2, cause = 2, given = 3 }, { own = 3, cause = 1 }, "AIC", "HQ",
  { criterion = "BIC", maximum = 4, scope = "equation" },
]
deterministics = [
  "none", "constant", "linear trend", { trend = "linear trend", seasonal = true },
  { trend = "constant", fourier = 2 }, { trend = "constant", steps = ["1996-01"] },
]
windows = [
  "full sample",
  { from = "1990-02" },
  { until = "1999-12" },
  { from = "1990-03", until = "1999-12" },
  { until = "1999-12", without = ["1990-01", "1990-02"] },
  { without = ["1994-03", "1994-05"] },
  { rolling = 118, step = 1 },
  { expanding = 118, step = 14 },
]
transformations = [
  "level", "difference", "linearly detrended", "Hodrick-Prescott cycle", "Hamilton cycle",
  { default = "difference", series = { z = "linearly detrended" } },
]
tests = ["F", "LR", { test = "F", covariance = "HC3" }]
conditioning = ["given", "pairwise"]
measures = { x = ["x", "copy", { series = "w", inverted = true }] }
[sweep]
design = { sample = 9000 }
coefficients = "none"
"""
NUMBERS = ["statistic", "p_value", "reverse_statistic", "reverse_p_value"]


@pytest.fixture(scope="module")
def broad(tmp_path_factory: pytest.TempPathFactory) -> pd.DataFrame:
    """Return the rows with numbers of a plan that is full of redundant choices."""
    folder = tmp_path_factory.mktemp("broad")
    data = small_plans.write_data(folder)
    frame = pd.read_csv(data)
    frame.assign(copy=frame["x"]).to_csv(data, index=False)
    results = sweep.run(small_plans.write_plan(folder, BROAD), jobs=1)
    return results.outcomes(where="status = 'ok' AND reverse_status = 'ok'")


def test_equal_digests_mean_equal_numbers(broad: pd.DataFrame) -> None:
    """Relative 1e-8, what the store promises; p-values magnify it by their logarithm."""
    groups = broad.groupby("computation")
    assert len(groups) < 0.8 * len(broad)
    for name in NUMBERS:
        high, low = groups[name].max(), groups[name].min()
        tolerance = 1e-8 if "statistic" in name else 1e-6
        assert ((high - low) <= tolerance * high + 1e-14).all(), name


def test_equal_numbers_mean_equal_digests(broad: pd.DataFrame) -> None:
    """Four numbers that agree to nine digits by accident are not to be expected here."""
    known = broad[broad["statistic"] > 1e-6]  # below it nine digits are not promised
    key = pd.Series("", index=known.index)
    for name in NUMBERS:
        key += known[name].map("{:.8e} ".format)
    several = known["computation"].groupby(key).nunique()
    # Rounding at the ninth digit splits some equal numbers; it never joins different ones.
    assert (several == 1).all()


@pytest.mark.parametrize(
    ("axes", "rows", "distinct"),
    [
        ("lags = [2, { own = 2, cause = 2, given = 2 }]", 0, 0),
        ("lags = [2, { order = 2, sample = { common = 2 } }]", 2, 1),
        ('lags = [2, { order = 2, sample = { common = 4 } }]', 2, 2),
        ('windows = ["full sample", { from = "1990-02" }]\ntransformations = ["difference"]', 4, 3),
        ('windows = ["full sample", { without = ["1990-01", "1990-01"] }]', 2, 2),
        ('windows = [{ from = "1990-02" }, { without = ["1990-01", "1990-01"] }]', 3, 2),
        ('measures = { x = ["x", "copy"] }', 2, 1),
        ('measures = { x = ["x", "w"] }', 2, 2),
        ('transformations = ["level", "linearly detrended"]', 2, 2),
        (
            'transformations = ["level", "linearly detrended"]\ndeterministics = ["linear trend"]',
            4, 3,
        ),
        ('conditioning = ["given", "pairwise"]', 2, 2),
        (
            'lags = [2, { own = 2, cause = 2, given = 6 }]\nconditioning = ["given", "pairwise"]',
            4, 3,
        ),
        ('tests = ["F", "Wald", "LR", "LM"]', 4, 4),
    ],
)  # fmt: skip
def test_how_many_are_counted(tmp_path: Path, axes: str, rows: int, distinct: int) -> None:
    data = small_plans.write_data(tmp_path)
    frame = pd.read_csv(data)
    frame.assign(copy=frame["x"]).to_csv(data, index=False)
    plan = small_plans.write_plan(tmp_path, f"[axes]\n{axes}\n")
    if not rows:
        with pytest.raises(sweep.errors.InputFault, match="means the same as"):
            sweep.run(plan, jobs=1)
        return
    whole = sweep.run(plan, jobs=1).survival("all").iloc[0]
    assert (whole["admissible"], whole["distinct"]) == (rows, distinct)


def test_rows_without_an_estimate_hold_nothing(tmp_path: Path) -> None:
    """A step that stands still in the window: NULL everywhere, no zero that looks measured."""
    tail = (
        '[axes]\ndeterministics = ["constant", { steps = ["1991-01"] }]\n'
        'windows = ["full sample", { rolling = 60, step = 10 }]\n'
        '[[rule_out]]\nwhen = { window = [{ rolling = 60, step = 10 }], '
        'deterministics = ["constant"] }\nbecause = "too many"\n'
    )  # fmt: skip
    frame = sweep.run(small_plans.write_plan(tmp_path, tail), jobs=1).outcomes()
    lost = frame[frame["status"] != "ok"]
    assert set(lost["reason"]) == {
        "too many",
        "a step, pulse, seasonal or Fourier term is constant or collinear within the window",
    }
    numbers = ["lags", "observations", "df_num", "df_den", "statistic", "p_value", "computation",
               "coefficient_sum", "standardised_sum", "signed_partial_r2"]  # fmt: skip
    assert lost[numbers].isna().all(axis=None)
    assert frame.loc[frame["status"] == "ok", numbers].notna().all(axis=None)
    assert (lost["solver"] == "none").all()
    assert np.isfinite(frame.loc[frame["status"] == "ok", "observations"].astype(float)).all()
