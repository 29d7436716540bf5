"""Lag orders that information criteria choose, against R and a printed table.

Orders are integers, so they are compared exactly.  The criteria are computed on the common
sample of the largest order, in the vector autoregression of all series of the finding.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import published_plans as plans
import pytest
from scipy.stats import chi2

CRITERIA = {"AIC": "aic_withdet", "BIC": "bic_withdet", "HQ": "hq_withdet", "FPE": "fpe"}


EQUATION = ("AIC", "BIC", "HQ")


@pytest.fixture(scope="module", params=plans.CASES)
def chosen(
    request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory
) -> tuple[dict[str, Any], pd.DataFrame]:
    """Run a case with every rule as a lag choice; rows by rule and deterministic terms."""
    case = plans.reference()["cases"][request.param]
    maximum = case["criteria_system"][0]["maximum"]
    dets = [block["det"] for block in case["criteria_system"]]
    rules = [plans.criterion(rule, maximum) for rule in (*CRITERIA, "sequential LR")]
    rules += [
        plans.criterion(rule, maximum, scope="equation", name=f"{rule} of the equation")
        for rule in EQUATION
    ]
    axes = {
        "lags": [1, *rules],
        "deterministics": [plans.DETERMINISTICS[det] for det in dets],
    }
    folder = tmp_path_factory.mktemp(request.param)
    outcomes = plans.run_plan(folder, plans.case_plan(folder, case, axes))
    return case, outcomes.set_index(["lags_choice", "deterministics"])


def best_from_one(block: dict[str, Any], column: str) -> int:
    """Return R's order; where R takes 0, the best order from 1 upwards."""
    rows = plans.table(block["table"])
    rows = rows[rows["lag"] >= 1]
    return int(rows.loc[rows[column].idxmin(), "lag"])


def test_system_criteria(chosen: tuple[dict[str, Any], pd.DataFrame]) -> None:
    case, outcomes = chosen
    for block in case["criteria_system"]:
        for rule, column in CRITERIA.items():
            row = outcomes.loc[(rule, block["det"])]
            assert int(row["lags"]) == best_from_one(block, column), (rule, block["det"])
            # The chosen order is then estimated on all rows that it can use.
            assert int(row["observations"]) == case["n"] - int(row["lags"])


def test_equation_criteria(chosen: tuple[dict[str, Any], pd.DataFrame]) -> None:
    """With ``scope = "equation"`` the effect's own equation decides."""
    case, outcomes = chosen
    for block in case["criteria_equation"]:
        for rule in EQUATION:
            row = outcomes.loc[(f"{rule} of the equation", block["det"])]
            assert int(row["lags"]) == block["chosen"][rule.lower()], (rule, block)


def likelihood_ratio_order(block: dict[str, Any], series: int) -> int:
    """General to specific at 5% on R's log-determinants, T(ln|Σ_p-1| - ln|Σ_p|) on χ²(K²)."""
    rows = plans.table(block["table"]).set_index("lag")
    for order in range(int(rows.index.max()), 1, -1):
        change = rows.loc[order - 1, "logdet_ml"] - rows.loc[order, "logdet_ml"]
        if chi2.sf(rows.loc[order, "nobs"] * change, series**2) <= 0.05:
            return order
    return 1


def test_sequential_likelihood_ratio(chosen: tuple[dict[str, Any], pd.DataFrame]) -> None:
    case, outcomes = chosen
    for block in case["criteria_system"]:
        row = outcomes.loc[("sequential LR", block["det"])]
        assert int(row["lags"]) == likelihood_ratio_order(block, len(case["transforms"]))


# Lütkepohl (2005), tables 4.4 and 4.5: investment, income and consumption in West Germany,
# orders 0 to 4; m = pK² in his criteria.  Rounded as printed there.
PRINTED_E1 = {
    "fpe": [2.691e-11, 2.500e-11, 2.272e-11, 2.748e-11, 2.910e-11],
    "aic": [-24.423, -24.497, -24.594, -24.408, -24.357],
    "hq": [-24.423, -24.383, -24.366, -24.065, -23.901],
    "bic": [-24.423, -24.210, -24.021, -23.547, -23.210],
}


def test_reference_equals_the_printed_table() -> None:
    """R's table less its deterministic terms is the printed one, to its last digit."""
    block = plans.reference()["luetkepohl_e1_criteria"]
    rows = plans.table(block["table"])
    sample = rows["nobs"]
    constants = 3.0  # one constant in each of three equations
    penalty = {"aic": 2.0, "hq": 2 * np.log(np.log(sample)), "bic": np.log(sample)}
    for name, weight in penalty.items():
        book = rows[f"{name}_withdet"] - weight * constants / sample
        np.testing.assert_allclose(book, PRINTED_E1[name], atol=5.01e-4)
    np.testing.assert_allclose(rows["fpe"], PRINTED_E1["fpe"], atol=5.01e-15)


def test_luetkepohl_e1_orders(tmp_path: Path) -> None:
    """AIC and FPE take 2; HQ and BIC would take 0 and here take the best from 1 upwards.

    The printed likelihood ratios 24.90 (1 against 2), 4.76 and 14.44 against the 5% point
    16.92 of chi-square(9) make the sequence stop at 2.
    """
    case = plans.reference()["cases"]["e1_inc_inv_cons"]
    choices = [plans.criterion(rule, 4) for rule in (*CRITERIA, "sequential LR")]
    axes = {"lags": [1, *choices]}
    outcomes = plans.run_plan(tmp_path, plans.case_plan(tmp_path, case, axes))
    orders = outcomes.set_index("lags_choice")["lags"].astype(int)
    expected = {"AIC": 2, "FPE": 2, "HQ": 1, "BIC": 1, "sequential LR": 2}
    assert {rule: int(orders[rule]) for rule in expected} == expected
