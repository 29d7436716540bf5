"""F, Wald, LR, LM and the sandwich forms against R, ten systems, both directions.

Tolerances, each with its reason:

- statistics 1e-8 relative: what the store promises of every statistic (agreement with QR on
  the rows), and R's 15 printed digits leave room to spare; besides 1e-13 absolute, because R
  subtracts two sums of squares: where F is 1.4e-6 (the bill rate's reverse direction, one lag,
  trend, common sample) exact fractions give 1.42516098214e-6, R 1.42516099903e-6;
- p-values 1e-6 relative: a tail probability magnifies the relative error of its statistic by
  about half the degrees of freedom, and the smallest here are near 1e-30;
- sums of coefficients 1e-8 of the largest sum of the case: a sum may all but cancel.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pandas as pd
import published_plans as plans
import pytest

STATISTIC = 1e-8
R_SUBTRACTS = 1e-13
P_VALUE = 1e-6
COMMON = 8

HC = ("HC0", "HC1", "HC2", "HC3")

# Name of the procedure: choice in the plan, column of the statistic, column of the p-value.
CLASSICAL: dict[str, tuple[Any, str, str]] = {
    "F": (plans.procedure("F"), "F", "p_F"),
    "Wald": (plans.procedure("Wald"), "q_F", "p_chi2_wald_dfadj"),
    "Wald T": (plans.procedure("Wald", divisor="T"), "chi2_wald_ml", "p_chi2_wald_ml"),
    "LR": (plans.procedure("LR"), "lr", "p_lr"),
    "LM": (plans.procedure("LM"), "lm", "p_lm"),
}
ROBUST: dict[str, tuple[Any, str, str]] = {
    **{f"F {hc}": (plans.procedure("F", hc), f"{hc}_F", f"{hc}_p_F") for hc in HC},
    **{f"Wald {hc}": (plans.procedure("Wald", hc), f"{hc}_chi2", f"{hc}_p_chi2") for hc in HC},
}


def expected(case: dict[str, Any], direction: str, sample: str) -> pd.DataFrame:
    """Read a block of the reference, with q·F and HC/q, which R's file leaves out."""
    frame = plans.table(case[direction][sample])
    frame["q_F"] = frame["lag"] * frame["F"]
    for hc in HC:
        if f"{hc}_chi2" in frame:
            frame[f"{hc}_F"] = frame[f"{hc}_chi2"] / frame["lag"]
    return frame


@pytest.fixture(scope="module", params=plans.CASES)
def swept(
    request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory
) -> tuple[dict[str, Any], pd.DataFrame]:
    """Run one system once, over every order, deterministic term and procedure."""
    case = plans.reference()["cases"][request.param]
    dets = sorted(set(plans.table(case["cause_to_effect"]["own_sample"])["det"]))
    own = list(range(1, COMMON + 1))
    common = [{"order": order, "sample": {"common": COMMON}} for order in own[:-1]]
    axes = {
        "lags": [*own, *common],
        "deterministics": [plans.DETERMINISTICS[det] for det in dets],
        "tests": [choice for choice, _, _ in (CLASSICAL | ROBUST).values()],
    }
    folder = tmp_path_factory.mktemp(request.param)
    outcomes = plans.run_plan(folder, plans.case_plan(folder, case, axes))
    outcomes["det"] = outcomes["deterministics"].astype(str)
    assert set(outcomes["det"]) == set(dets)
    return case, outcomes


def joined(
    swept: tuple[dict[str, Any], pd.DataFrame], label: str, direction: str, sample: str
) -> pd.DataFrame:
    """Put the outcomes of one procedure beside the reference, one row a regression."""
    case, outcomes = swept
    frame = expected(case, direction, sample)
    rows = outcomes[outcomes["test"] == label].copy()
    rows[["lags", "observations"]] = rows[["lags", "observations"]].astype(int)
    both = frame.merge(
        rows, left_on=["lag", "det", "nobs"], right_on=["lags", "det", "observations"], how="left"
    )
    assert len(both) == len(frame)
    return both


def compare(both: pd.DataFrame, direction: str, statistic: str, p_value: str) -> None:
    prefix = "" if direction == "cause_to_effect" else "reverse_"
    status = both["status" if not prefix else "reverse_status"]
    assert (status == "ok").all()
    np.testing.assert_allclose(
        both[f"{prefix}statistic"], both[statistic], rtol=STATISTIC, atol=R_SUBTRACTS
    )
    np.testing.assert_allclose(both[f"{prefix}p_value"], both[p_value], rtol=P_VALUE)
    np.testing.assert_allclose(
        both[f"{prefix}coefficient_sum"],
        both["sum_coef_cause"],
        rtol=STATISTIC,
        atol=STATISTIC * both["sum_coef_cause"].abs().max(),
    )


DIRECTIONS = ("cause_to_effect", "effect_to_cause")


@pytest.mark.parametrize("direction", DIRECTIONS)
@pytest.mark.parametrize("label", [*CLASSICAL, *ROBUST])
def test_own_sample(swept: tuple[dict[str, Any], pd.DataFrame], label: str, direction: str) -> None:
    _, statistic, p_value = (CLASSICAL | ROBUST)[label]
    compare(joined(swept, label, direction, "own_sample"), direction, statistic, p_value)


@pytest.mark.parametrize("direction", DIRECTIONS)
@pytest.mark.parametrize("label", CLASSICAL)
def test_common_sample(
    swept: tuple[dict[str, Any], pd.DataFrame], label: str, direction: str
) -> None:
    _, statistic, p_value = CLASSICAL[label]
    compare(joined(swept, label, direction, "common_sample"), direction, statistic, p_value)


def test_degrees_of_freedom(swept: tuple[dict[str, Any], pd.DataFrame]) -> None:
    for label, chi_square in (("F", False), ("F HC3", False), ("Wald", True), ("LR", True)):
        both = joined(swept, label, "cause_to_effect", "own_sample")
        assert (both["df_num"] == both["lag"]).all()
        if chi_square:
            assert both["df_den"].isna().all()
        else:
            assert (both["df_den"] == both["nobs"] - both["k"]).all()


def test_window_is_the_case_sample(swept: tuple[dict[str, Any], pd.DataFrame]) -> None:
    """The longest regression has every row of R's sample but the first lag."""
    case, outcomes = swept
    assert int(outcomes["observations"].max()) == case["n"] - 1
