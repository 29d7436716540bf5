"""Single numbers from print and from other programs, on the United States data.

Growth of real consumption and real output (log differences, 1959-Q2 to 2009-Q3), a constant,
each order on all rows it can use.  All were computed with statsmodels or R and printed to the
digits that stand here; the tolerance is half a unit of the last of them.
"""

from __future__ import annotations

from pathlib import Path
from typing import NamedTuple

import pandas as pd
import published_plans as plans
import pytest


class Printed(NamedTuple):
    """One printed value: procedure, order, column of the outcomes, value."""

    procedure: str
    order: int
    column: str
    value: str


# Consumption to output, two series.
PRINTED = [
    Printed("F", 1, "statistic", "28.996971"),
    Printed("F", 2, "statistic", "19.035318"),
    Printed("F", 4, "statistic", "11.007021"),
    Printed("F", 2, "p_value", "2.8076e-08"),
    Printed("F", 4, "p_value", "4.797e-08"),
    Printed("Wald T", 1, "statistic", "29.436319"),
    Printed("Wald T", 2, "statistic", "39.046805"),
    Printed("Wald T", 4, "statistic", "46.124660"),
    Printed("LR", 1, "statistic", "27.470598"),
    Printed("LR", 2, "statistic", "35.668401"),
    Printed("LR", 4, "statistic", "41.463569"),
    Printed("Wald HC0", 2, "statistic", "32.742781"),
    Printed("Wald HC3", 2, "statistic", "30.096587"),
]
# Three series: cause, given, order, F (a vector autoregression's Wald over q).
PRINTED_GIVEN = [
    ("cons", "inv", 2, "16.971939"),
    ("inv", "cons", 2, "0.811221"),
    ("inv", "cons", 1, "5.224170"),
]


def half_a_digit(text: str) -> float:
    """Return half a unit of the last printed digit.

    >>> half_a_digit("28.996971")
    5e-07
    """
    mantissa, _, exponent = text.partition("e")
    digits = len(mantissa.partition(".")[2])
    return float(f"5e{-digits - 1 + int(exponent or 0)}")


@pytest.fixture(scope="module")
def growth(tmp_path_factory: pytest.TempPathFactory) -> pd.DataFrame:
    folder = tmp_path_factory.mktemp("growth")
    case = plans.reference()["cases"]["macro_gdp_cons"]
    procedures = [plans.procedure(statistic) for statistic in ("F", "Wald", "LR", "LM")]
    procedures += [plans.procedure("Wald", divisor="T")]
    procedures += [plans.procedure("Wald", f"HC{number}") for number in range(4)]
    axes = {"lags": [1, 2, 4], "tests": procedures}
    outcomes = plans.run_plan(folder, plans.case_plan(folder, case, axes))
    return outcomes.set_index(["test", "lags"])


@pytest.mark.parametrize("printed", PRINTED, ids=lambda p: f"{p.column}-{p.order}-{p.value}")
def test_printed_value(growth: pd.DataFrame, printed: Printed) -> None:
    row = growth.loc[(printed.procedure, printed.order)]
    found = float(row[printed.column])
    assert found == pytest.approx(float(printed.value), abs=1.01 * half_a_digit(printed.value))


@pytest.mark.parametrize(("cause", "given", "order", "value"), PRINTED_GIVEN)
def test_printed_value_given(
    tmp_path: Path, cause: str, given: str, order: int, value: str
) -> None:
    case = plans.reference()["cases"]["macro_gdp_cons_inv"]
    case = case | {"cause": cause, "conditioning": [given]}
    outcomes = plans.run_plan(tmp_path, plans.case_plan(tmp_path, case, {"lags": [order]}))
    row = outcomes[outcomes["lags"] == order].iloc[0]
    assert float(row["statistic"]) == pytest.approx(float(value), abs=1.01 * half_a_digit(value))


def test_orderings(growth: pd.DataFrame) -> None:
    """LM < LR < Wald (T), Wald = qF, F = t² of the sum for one lag, HC0 ≥ HC2 ≥ HC3."""
    for order in (1, 2, 4):
        value = growth.xs(order, level="lags")["statistic"].astype(float)
        assert value["LM"] < value["LR"] < value["Wald T"]
        assert value["Wald"] == pytest.approx(order * value["F"], rel=1e-12)
        assert value["Wald HC0"] >= value["Wald HC2"] >= value["Wald HC3"]
    one = growth.loc[("F", 1)]
    t = float(one["coefficient_sum"]) / float(one["coefficient_sum_se"])
    assert float(one["statistic"]) == pytest.approx(t**2, rel=1e-8)
