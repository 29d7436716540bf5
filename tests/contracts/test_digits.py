"""A specification's digits depend on its meaning, its data and the numerics, on nothing else.

Rows are shared between sweeps and computed again where they are missing, so a number must come
out the same to the last digit whatever else its plan asks for.
"""

from __future__ import annotations

from pathlib import Path

import pandas as pd
import pytest
import small_plans

import sweep

BASE = {
    "lags": '1, 2, { own = 3, cause = 2 }, "AIC"',
    "deterministics": '"constant", "linear trend"',
    "windows": '"full sample", { rolling = 80, step = 7 }, { expanding = 70, step = 9 }, '
    '{ shrinking = 90, step = 9 }, { without = ["1995-01", "1995-04"] }',
    "transformations": '"level", "difference", "Hodrick-Prescott cycle"',
    "tests": '"F", "LR", { test = "F", covariance = "HC3" }',
    "conditioning": '"given"',
}
MORE = {
    "lags": '12, "HQ", { order = 1, sample = { common = 8 } }',
    "deterministics": '{ trend = "constant", fourier = 2 }, "none", "quadratic trend", '
    '{ trend = "constant", seasonal = true }',
    "windows": '{ rolling = 60, step = 5 }, { from = "1992-01" }',
    "transformations": '"log"',
    "tests": '{ test = "Wald", covariance = "HC1" }',
    "conditioning": '"pairwise"',
}
FINDINGS = """
[[findings]]
name = "x leads z"
cause = "x"
effect = "z"
given = ["y"]
[[findings]]
name = "z leads y"
cause = "z"
effect = "y"
given = ["x"]
"""


def rows(folder: Path, name: str, axes: dict[str, str], findings: str = "") -> pd.DataFrame:
    """Run a plan into a store of its own and return the first finding's rows by specification."""
    tail = "\n".join(["[axes]", *(f"{axis} = [{held}]" for axis, held in axes.items())])
    plan = small_plans.write_plan(folder, tail, findings, f"{name}.toml")
    frame = sweep.run(plan, jobs=1).outcomes(where="finding_number = 0")
    told = ["sweep", "finding_number", "weight"]  # belong to the sweep, not to the row
    return frame.drop(columns=told).set_index("specification").sort_index().astype(object)


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("digits")


@pytest.fixture(scope="module")
def base(folder: Path) -> pd.DataFrame:
    return rows(folder, "base", BASE)


@pytest.mark.parametrize("axis", [*BASE, "findings"])
def test_what_else_is_asked_leaves_the_digits_alone(
    folder: Path, base: pd.DataFrame, axis: str
) -> None:
    axes = BASE | ({axis: f"{BASE[axis]}, {MORE[axis]}"} if axis in MORE else {})
    wider = rows(folder, axis, axes, "" if axis in MORE else FINDINGS)
    assert axis == "findings" or len(wider) > len(base)
    pd.testing.assert_frame_equal(wider.loc[base.index], base, check_exact=True)


def test_one_effect_that_is_fitted_exactly_leaves_the_others_alone(folder: Path) -> None:
    """z is y two months late, so x, y and z fit z exactly and y as well as ever."""
    data = pd.read_csv(small_plans.write_data(folder))
    own = folder / "late"
    own.mkdir()
    data.assign(z=data["y"].shift(2)).iloc[2:].to_csv(own / "small.csv", index=False)
    tail = "[axes]\nlags = [1, 2]\n"
    plan = small_plans.write_plan(own, tail, FINDINGS)
    frame = sweep.run(plan, jobs=1).outcomes().set_index(["finding", "lags_choice"])
    assert frame.loc[("x leads z", "2"), "reason"] == "the regression fits the effect exactly"
    assert frame.loc[("x leads y", "2"), "status"] == "ok"
    assert frame.loc[("x leads z", "1"), "status"] == "ok"
    alone = sweep.run(small_plans.write_plan(own, tail, name="alone.toml"), jobs=1).outcomes()
    same = frame.loc["x leads y", "p_value"]
    assert same.tolist() == alone.set_index("lags_choice").loc[same.index, "p_value"].tolist()
