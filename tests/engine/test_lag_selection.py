"""The table of lag orders against statsmodels' own selection and its autoregression."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
import small_plans
from scipy import stats
from statsmodels.tsa.api import VAR

import sweep
from sweep.errors import InputFault
from sweep.results import Results

# Both are least squares by orthogonal factors on the same rows; log-determinants of some units
# then differ by rounding alone.
CLOSE = {"rtol": 1e-9, "atol": 1e-9}
TREND = {"none": "n", "constant": "c", "linear trend": "ct", "quadratic trend": "ctt"}


def ran(folder: Path, baseline: str, axes: str = "", finding: str = "") -> Results:
    """Run a plan whose baseline has these keys beside ``lags`` and ``transformation``."""
    path = small_plans.write_plan(folder, f"{baseline}\n{axes}", finding)
    return sweep.run(path, jobs=1)


def data(folder: Path) -> pd.DataFrame:
    frame = pd.read_csv(folder / "small.csv")
    return frame[["x", "y", "z"]]


def frame_of(results: Results) -> pd.DataFrame:
    """The numbers of the table as a frame."""
    table = results.table("lag selection").only("data")
    return pd.DataFrame(table.rows, columns=[column.field for column in table.columns])


@pytest.mark.parametrize("trend", TREND)
def test_criteria_are_those_of_statsmodels(tmp_path: Path, trend: str) -> None:
    results = ran(tmp_path, f'deterministics = "{trend}"')
    found = frame_of(results)
    selected = VAR(data(tmp_path).to_numpy()).select_order(12, trend=TREND[trend])
    assert found["order"].tolist() == list(range(1, 13))
    # It also has order 0, except without any term; ours begins at 1.
    ics = {name: values[-12:] for name, values in selected.ics.items()}
    for name in ("aic", "bic"):
        np.testing.assert_allclose(found[name], ics[name], **CLOSE)
    np.testing.assert_allclose(found["hq"], ics["hqic"], **CLOSE)
    # FPE is no logarithm: the same rounding shows as a relative difference.
    np.testing.assert_allclose(found["fpe"], ics["fpe"], rtol=1e-8)
    chosen = {
        rule: int(found.loc[found["chosen_by"].str.split(", ").map(lambda n, r=rule: r in n),
                            "order"].iloc[0])
        for rule in ("AIC", "BIC", "HQ", "FPE")
    }  # fmt: skip
    best = {
        rule: 1 + int(np.argmin(ics[name]))
        for rule, name in (("AIC", "aic"), ("BIC", "bic"), ("HQ", "hqic"), ("FPE", "fpe"))
    }
    assert chosen == best


def test_likelihoods_and_ratios_are_those_of_the_fitted_systems(tmp_path: Path) -> None:
    results = ran(tmp_path, "")
    found = frame_of(results)
    values = data(tmp_path).to_numpy()
    likelihoods = []
    for order in range(13):
        # The common sample: rows that the largest order leaves.
        model = VAR(values[12 - order :])
        fit = model.fit(order, trend="c") if order else model.fit(0, trend="c")
        residuals = np.asarray(fit.resid)
        rows = len(residuals)
        assert rows == 148
        determinant = np.linalg.slogdet(residuals.T @ residuals / rows)[1]
        likelihoods.append(-0.5 * rows * (3 * (1 + np.log(2 * np.pi)) + determinant))
        if order:
            np.testing.assert_allclose(likelihoods[-1], fit.llf, rtol=1e-10)
    np.testing.assert_allclose(found["log_likelihood"], likelihoods[1:], rtol=1e-10)
    ratio = 2 * np.diff(likelihoods)
    # A small difference of large numbers: eight digits are left of them.
    np.testing.assert_allclose(found["lr_statistic"], ratio, rtol=1e-7)
    np.testing.assert_allclose(found["lr_p_value"], stats.chi2.sf(ratio, 9), rtol=1e-6)
    rejected = [order for order in range(12, 0, -1) if stats.chi2.sf(ratio[order - 1], 9) <= 0.05]
    expected = rejected[0] if rejected else 1
    rule = found["chosen_by"].str.contains("sequential LR")
    assert found.loc[rule, "order"].tolist() == [expected]


@pytest.mark.parametrize("rule", ["AIC", "BIC", "HQ", "FPE", "sequential LR"])
def test_the_rule_of_the_baseline_chooses_as_the_sweep_did(tmp_path: Path, rule: str) -> None:
    """The order that the fast path stored is the one marked here."""
    plan = small_plans.write_plan(tmp_path, "[axes]\nlags = [2]")
    text = plan.read_text(encoding="utf-8")
    maximum = f'{{ criterion = "{rule}", maximum = 6 }}'
    plan.write_text(text.replace("lags = 2", f"lags = {maximum}"), encoding="utf-8")
    results = sweep.run(plan, jobs=1)
    stored = int(results.specification("baseline")["lags"])
    found = frame_of(results)
    assert len(found) == 6
    assert found.loc[found["used"], "order"].tolist() == [stored]
    assert rule in found.loc[found["used"], "chosen_by"].iloc[0]


def test_the_system_is_the_baselines(tmp_path: Path) -> None:
    """Window, conditioning, transformation and unmodelled series count as in the baseline."""
    results = ran(
        tmp_path,
        'window = { from = "1992-01" }\nconditioning = "pairwise"',
        finding='exogenous = [{ series = "w", lags = 1 }]',
    )
    table = results.table("lag selection")
    found = frame_of(results)
    raw = pd.read_csv(tmp_path / "small.csv").iloc[24:]
    spare = raw["w"].to_numpy()
    extra = np.column_stack([spare[12:], spare[11:-1]])
    for order in (1, 5, 12):
        values = raw[["x", "y"]].to_numpy()[12 - order :]
        beside = np.vstack([np.zeros((order, 2)), extra])
        fit = VAR(values, exog=beside).fit(order, trend="c")
        row = found[found["order"] == order].iloc[0]
        assert row["log_likelihood"] == pytest.approx(fit.llf, rel=1e-9)
    notes = " ".join(table.notes)
    assert "2 equations" in notes
    assert "124 rows, 1993-01 to 2003-04" in notes


def test_a_short_window_lowers_the_largest_order(tmp_path: Path) -> None:
    results = ran(tmp_path, 'window = { until = "1993-12" }')
    table = results.table("lag selection")
    assert len(table.rows) < 12
    assert f"Orders up to 12 were meant; the window has observations for {len(table.rows)}." in (
        " ".join(table.notes)
    )


def test_no_order_at_all_is_a_fault(tmp_path: Path) -> None:
    results = ran(tmp_path, 'window = { until = "1991-06" }')
    with pytest.raises(InputFault, match="no order leaves 20 degrees of freedom"):
        results.table("lag selection")


def test_data_that_are_gone_or_changed_are_told(tmp_path: Path) -> None:
    results = ran(tmp_path, "")
    file = tmp_path / "small.csv"
    kept = file.read_text(encoding="utf-8")
    moved = tmp_path / "elsewhere.csv"
    moved.write_text(kept, encoding="utf-8")
    file.unlink()
    with pytest.raises(InputFault, match=r"the data file is not there.*--data FILE"):
        results.table("lag selection")
    assert len(results.table("lag selection", data=moved).rows) == 12
    file.write_text(kept.replace("1990-02,", "1990-02,9", 1), encoding="utf-8")
    with pytest.raises(InputFault, match="the data have changed"):
        results.table("lag selection")
