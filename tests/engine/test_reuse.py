"""Rows taken over from another sweep of the store: never others than the plan would compute."""

from __future__ import annotations

from pathlib import Path

import pandas as pd
import pytest
import small_plans

import sweep
from sweep.results import Results

AXES = """
[axes]
lags = [1, 2, "AIC"]
deterministics = ["constant", "linear trend"]
windows = ["full sample", { rolling = 70, step = 10 }]
tests = ["F", { test = "F", covariance = "HC3" }]
"""
NUMBERS = ["finding", "specification", "window_start", "window_end", "observations", "statistic",
           "p_value", "reverse_p_value", "coefficient_sum", "computation", "status"]  # fmt: skip


def numbers(results: Results) -> pd.DataFrame:
    """Return what was computed, sorted by specification."""
    frame = results.outcomes(NUMBERS)
    return frame.sort_values(["finding", "specification"]).reset_index(drop=True).astype(object)


def details(results: Results) -> pd.DataFrame:
    """Return every stored lag coefficient, sorted."""
    sql = (
        "SELECT finding, spec_high, spec_low, kind, position, value, standard_error, p_value "
        "FROM details WHERE sweep = $sweep ORDER BY ALL"
    )
    return results.query(sql)


def same_as_fresh(plan: Path, results: Results) -> None:
    """Hold a sweep that took rows over against the same plan run into a store of its own."""
    fresh = sweep.run(plan, store=plan.with_name("fresh.duckdb"), jobs=1)
    pd.testing.assert_frame_equal(numbers(results), numbers(fresh), check_exact=True)
    pd.testing.assert_frame_equal(details(results), details(fresh), check_exact=True)


def measured(*columns: str) -> str:
    """Return axes in which several columns stand for the cause."""
    return AXES + f"measures = {{ x = {list(columns)} }}\n"


def keeping(which: str) -> str:
    """Return axes and which lag coefficients are kept."""
    return AXES + f'[sweep]\ncoefficients = "{which}"\n'


def shorten(data: Path, column: str, rows: int) -> None:
    """Let one series of the data begin later."""
    frame = pd.read_csv(data)
    frame.loc[: rows - 1, column] = None
    frame.to_csv(data, index=False)


def test_measures_of_unequal_length_in_another_order_are_not_mixed_up(tmp_path: Path) -> None:
    """The first measure sets the dates of the windows, so its rows are others."""
    shorten(small_plans.write_data(tmp_path), "w", 25)
    store = tmp_path / "shared.duckdb"
    one = small_plans.write_plan(tmp_path, measured("x", "w"))
    sweep.run(one, store=store, jobs=1)
    turned = small_plans.write_plan(tmp_path, measured("w", "x"), name="turned.toml")
    second = sweep.run(turned, store=store, jobs=1)
    assert second.run_report is not None
    assert second.run_report.reused == 0
    same_as_fresh(turned, second)


def test_measures_of_equal_length_share_rows_in_any_order(tmp_path: Path) -> None:
    store = tmp_path / "shared.duckdb"
    one = small_plans.write_plan(tmp_path, measured("x", "w"))
    sweep.run(one, store=store, jobs=1)
    turned = small_plans.write_plan(tmp_path, measured("w", "x"), name="turned.toml")
    second = sweep.run(turned, store=store, jobs=1)
    assert second.run_report is not None
    assert second.run_report.reused == second.run_report.planned
    same_as_fresh(turned, second)


def test_a_further_measure_takes_over_what_is_there(tmp_path: Path) -> None:
    store = tmp_path / "shared.duckdb"
    first = sweep.run(small_plans.write_plan(tmp_path, AXES), store=store, jobs=1).run_report
    wider = small_plans.write_plan(tmp_path, measured("x", "w"), name="wider.toml")
    second = sweep.run(wider, store=store, jobs=1)
    assert first is not None
    assert second.run_report is not None
    assert second.run_report.planned == 2 * first.planned
    assert second.run_report.reused == first.planned
    same_as_fresh(wider, second)


@pytest.mark.parametrize(
    ("before", "after", "reused"), [("none", "all", 0.0), ("all", "none", 1.0), ("all", "all", 1.0)]
)
def test_lag_coefficients_that_are_wanted_are_there(
    tmp_path: Path, before: str, after: str, reused: float
) -> None:
    store = tmp_path / "shared.duckdb"
    sweep.run(small_plans.write_plan(tmp_path, keeping(before)), store=store, jobs=1)
    plan = small_plans.write_plan(
        tmp_path, keeping(after), 'claim = "leads one way"', "again.toml"
    )
    second = sweep.run(plan, store=store, jobs=1)
    assert second.run_report is not None
    assert second.run_report.reused == reused * second.run_report.planned
    same_as_fresh(plan, second)


def test_lag_coefficients_of_fixed_windows_alone_are_kept_and_taken_over(tmp_path: Path) -> None:
    store = tmp_path / "shared.duckdb"
    fixed = small_plans.write_plan(tmp_path, keeping("fixed windows"))
    first = sweep.run(fixed, store=store, jobs=1)
    plan = small_plans.write_plan(tmp_path, keeping("all"), name="all.toml")
    second = sweep.run(plan, store=store, jobs=1)
    frame = first.outcomes(["window_entry"])
    assert second.run_report is not None
    assert second.run_report.reused == (frame["window_entry"] == "fixed").sum() > 0
    same_as_fresh(plan, second)
