"""Results against statsmodels on drawn data: its Granger test, its OLS and its VAR.

Tolerances: statistics 1e-8 relative (what the store promises),
p-values 1e-6 relative (tails magnify), chosen orders exactly.
"""

from __future__ import annotations

import warnings
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import published_plans as plans
import pytest
from drawn_series import PERIODS, ROWS, Array, agree, by_ols, drawn, lagged, sweep_drawn


@pytest.fixture(scope="module")
def series() -> dict[str, Array]:
    return drawn()


def test_granger_test_of_two_series(series: dict[str, Array], tmp_path: Path) -> None:
    """Its four statistics: F on F, T-divisor Wald and LR on chi-square; both directions."""
    from statsmodels.tsa.stattools import grangercausalitytests

    procedures = [
        plans.procedure("F"),
        plans.procedure("Wald", divisor="T"),
        plans.procedure("LR"),
    ]
    keys = ["ssr_ftest", "ssr_chi2test", "lrtest"]
    axes = {"lags": [1, 2, 3, 4, 6], "tests": procedures}
    outcomes = sweep_drawn(tmp_path, series, axes).set_index(["test", "lags"])
    for prefix, columns in (("", ("y", "x")), ("reverse_", ("x", "y"))):
        data = np.column_stack([series[name] for name in columns])
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", FutureWarning)
            theirs = grangercausalitytests(data, maxlag=6)
        for lag in axes["lags"]:
            for procedure, key in zip(procedures, keys, strict=True):
                row = outcomes.loc[(procedure["name"], lag)]
                statistic, p_value = theirs[lag][0][key][:2]
                assert row[f"{prefix}statistic"] == pytest.approx(statistic, rel=1e-8)
                assert row[f"{prefix}p_value"] == pytest.approx(p_value, rel=1e-6)


@pytest.mark.parametrize("covariance", ["classical", "HC0", "HC1", "HC2", "HC3"])
def test_given_and_exogenous(series: dict[str, Array], tmp_path: Path, covariance: str) -> None:
    """OLS with a modelled third series and an exogenous one."""
    entry = plans.procedure("F", covariance)
    finding = {"given": ["z"], "exogenous": [{"series": "w", "lags": 2}]}
    outcomes = sweep_drawn(
        tmp_path, series, {"lags": [3], "tests": [entry]}, finding, {"test": entry}
    )
    row = outcomes[outcomes["lags"] == 3].iloc[0]
    rows = np.arange(3, ROWS)
    columns = {
        "cause": lagged(series["x"], 3, rows),
        "own": lagged(series["y"], 3, rows),
        "given": lagged(series["z"], 3, rows),
        "exogenous": plans.exogenous_columns(series["w"], 2, rows),
    }
    kind = "nonrobust" if covariance == "classical" else covariance
    agree(row, *by_ols(series["y"], columns, [np.ones(len(rows))], rows, kind))


@pytest.mark.parametrize(("own", "cause"), [(4, 2), (1, 3), (6, 1)])
def test_own_and_cause_orders(
    series: dict[str, Array], tmp_path: Path, own: int, cause: int
) -> None:
    axes = {
        "lags": [{"own": own, "cause": cause, "name": "unequal"}],
        "tests": [plans.procedure("F"), plans.procedure("F", "HC3")],
    }
    outcomes = sweep_drawn(tmp_path, series, axes)
    longest = max(own, cause)
    rows = np.arange(longest, ROWS)
    columns = {"cause": lagged(series["x"], cause, rows), "own": lagged(series["y"], own, rows)}
    unequal = outcomes[outcomes["lags_choice"] == "unequal"]
    assert len(unequal) == 2
    for _, row in unequal.iterrows():
        kind = "HC3" if "HC3" in row["test"] else "nonrobust"
        assert int(row["observations"]) == len(rows)
        agree(row, *by_ols(series["y"], columns, [np.ones(len(rows))], rows, kind))


def test_lags_of_a_given_series_that_is_not_there_cost_no_rows(
    series: dict[str, Array], tmp_path: Path
) -> None:
    """Pairwise, { own = 2, cause = 2, given = 5 } is order 2; with z it starts at row 5."""
    axes = {
        "lags": [2, {"own": 2, "cause": 2, "given": 5, "name": "longer"}],
        "conditioning": ["given", "pairwise"],
    }
    outcomes = sweep_drawn(tmp_path, series, axes, {"given": ["z"]}, {"lags": 2})
    outcomes = outcomes.set_index(["conditioning", "lags_choice"])
    pair = outcomes.loc["pairwise"]
    assert pair["computation"].nunique() == pair["p_value"].nunique() == 1
    for conditioning, start in (("pairwise", 2), ("given", 5)):
        rows = np.arange(start, ROWS)
        columns = {"cause": lagged(series["x"], 2, rows), "own": lagged(series["y"], 2, rows)}
        if conditioning == "given":
            columns["given"] = lagged(series["z"], 5, rows)
        row = outcomes.loc[(conditioning, "longer")]
        assert int(row["observations"]) == len(rows)
        agree(row, *by_ols(series["y"], columns, [np.ones(len(rows))], rows))


def deterministic_terms(rows: Array) -> dict[str, tuple[Any, list[Array]]]:
    """Return choices of deterministic terms and the columns that they mean."""
    one, time = np.ones(len(rows)), rows / ROWS
    month = rows % 12  # the first row is a January
    dummies = [(month == number).astype(float) for number in range(1, 12)]
    step = (rows >= PERIODS.index("1998-05")).astype(float)
    pulse = (rows == PERIODS.index("2001-09")).astype(float)
    waves = [
        turn(2 * np.pi * frequency * rows / ROWS)
        for frequency in (1, 2)
        for turn in (np.sin, np.cos)
    ]
    return {
        "none": ("none", []),
        "quadratic": ("quadratic trend", [one, time, time**2]),
        "seasonal": ({"trend": "linear trend", "seasonal": True}, [one, time, *dummies]),
        "step": ({"trend": "constant", "steps": ["1998-05"]}, [one, step]),
        "pulse": ({"trend": "constant", "pulses": ["2001-09"]}, [one, pulse]),
        "waves": ({"trend": "constant", "fourier": 2}, [one, *waves]),
    }


@pytest.mark.parametrize("name", ["none", "quadratic", "seasonal", "step", "pulse", "waves"])
def test_deterministic_terms(series: dict[str, Array], tmp_path: Path, name: str) -> None:
    rows = np.arange(2, ROWS)
    choice, terms = deterministic_terms(rows)[name]
    outcomes = sweep_drawn(
        tmp_path, series, {"lags": [2]}, {"given": ["z"]}, {"deterministics": choice, "lags": 2}
    )
    assert len(outcomes) == 1
    columns = {
        "cause": lagged(series["x"], 2, rows),
        "own": lagged(series["y"], 2, rows),
        "given": lagged(series["z"], 2, rows),
    }
    agree(outcomes.iloc[0], *by_ols(series["y"], columns, terms, rows))


@pytest.mark.parametrize("covariance", ["HC0", "HC1", "HC2", "HC3"])
def test_a_pulse_is_its_row_left_out(
    series: dict[str, Array], tmp_path: Path, covariance: str
) -> None:
    """A pulse fits its row exactly, so the sandwich is that of the regression without the row.

    statsmodels divides 0 by 0 in that row under HC2 and HC3, so the row is dropped there; HC1
    counts it in T on both sides.
    """
    terms: dict[str, Any] = {"trend": "linear trend", "pulses": ["1996-07", "2001-09"]}
    entry = plans.procedure("Wald", covariance)
    outcomes = sweep_drawn(
        tmp_path, series, {}, {"given": ["z"]},
        {"deterministics": terms, "lags": 3, "test": entry},
    )  # fmt: skip
    every = np.arange(3, ROWS)
    rows = np.array([t for t in every if PERIODS[t] not in terms["pulses"]])
    columns = {
        "cause": lagged(series["x"], 3, rows),
        "own": lagged(series["y"], 3, rows),
        "given": lagged(series["z"], 3, rows),
    }
    terms_there = [np.ones(len(rows)), rows / ROWS]
    wanted, _ = by_ols(series["y"], columns, terms_there, rows, covariance)
    if covariance == "HC1":
        wanted *= (len(rows) / (len(rows) - 11)) / (len(every) / (len(every) - 13))
    row = outcomes.iloc[0]
    assert row["status"] == row["reverse_status"] == "ok"
    assert int(row["observations"]) == len(every)
    assert float(row["statistic"]) == pytest.approx(3 * wanted, rel=1e-8)


def test_without_an_episode(series: dict[str, Array], tmp_path: Path) -> None:
    """No row reaches into the episode, through its own date, a lag or a difference."""
    without = ["1996-01", "1997-06"]
    outcomes = sweep_drawn(
        tmp_path,
        series,
        {"windows": [{"without": without}]},
        baseline={"lags": 3, "transformation": "difference", "window": {"without": without}},
    )
    difference = {name: np.diff(values, prepend=np.nan) for name, values in series.items()}
    first, last = (PERIODS.index(period) for period in without)
    rows = np.array(
        [t for t in range(4, ROWS) if not any(first <= raw <= last for raw in range(t - 4, t + 1))]
    )
    columns = {
        "cause": lagged(difference["x"], 3, rows),
        "own": lagged(difference["y"], 3, rows),
    }
    row = outcomes.iloc[0]
    assert int(row["observations"]) == len(rows)
    agree(row, *by_ols(difference["y"], columns, [np.ones(len(rows))], rows))


@pytest.mark.parametrize(
    ("entry", "bounds"),
    [
        ({"rolling": 90, "step": 30}, [(0, 89), (30, 119), (60, 149), (90, 179)]),
        ({"expanding": 90, "step": 40}, [(0, 89), (0, 129), (0, 169)]),
        ({"shrinking": 90, "step": 40}, [(0, 179), (40, 179), (80, 179)]),
        ({"split": "1998-07"}, [(0, 101), (102, 179)]),
        ({"from": "1992-01", "until": "2001-12"}, [(24, 143)]),
        ({"drop_first": 0.1, "drop_last": 0.2}, [(18, 143)]),
    ],
    ids=lambda value: next(iter(value)) if isinstance(value, dict) else "",
)
def test_windows(
    series: dict[str, Array], tmp_path: Path, entry: dict[str, Any], bounds: list[tuple[int, int]]
) -> None:
    """Every position: first and last row, then the regression inside them."""
    outcomes = sweep_drawn(
        tmp_path, series, {"lags": [3], "windows": [entry]}, {"given": ["z"]}, {"lags": 3}
    )
    outcomes = outcomes[outcomes["window_name"] != "full sample"]
    found = {
        tuple(
            PERIODS.index(f"{date:%Y-%m}") for date in (row["window_start"], row["window_end"])
        ): row
        for _, row in outcomes.iterrows()
    }
    assert sorted(found) == sorted(bounds)
    for (first, last), row in found.items():
        rows = np.arange(first + 3, last + 1)
        columns = {
            "cause": lagged(series["x"], 3, rows),
            "own": lagged(series["y"], 3, rows),
            "given": lagged(series["z"], 3, rows),
        }
        assert int(row["observations"]) == len(rows)
        agree(row, *by_ols(series["y"], columns, [np.ones(len(rows))], rows))


def logarithm(values: Array) -> Array:
    return np.log(values)


def growth(values: Array, periods: int) -> Array:
    result = np.full(len(values), np.nan)
    result[periods:] = np.log(values[periods:]) - np.log(values[:-periods])
    return result


def seasonal_difference(values: Array) -> Array:
    result = np.full(len(values), np.nan)
    result[12:] = values[12:] - values[:-12]
    return result


TRANSFORMATIONS: dict[str, tuple[Any, Any]] = {
    "log": (logarithm, 0),
    "log difference": (lambda values: growth(values, 1), 1),
    "yearly growth": (lambda values: growth(values, 12), 12),
    "seasonal difference": (seasonal_difference, 12),
    "inverse hyperbolic sine": (np.arcsinh, 0),
}


@pytest.mark.parametrize("name", TRANSFORMATIONS)
def test_transformations(series: dict[str, Array], tmp_path: Path, name: str) -> None:
    transform, lost = TRANSFORMATIONS[name]
    positive = {key: np.exp(values / 10) for key, values in series.items()}
    outcomes = sweep_drawn(tmp_path, positive, {}, baseline={"lags": 2, "transformation": name})
    changed = {key: transform(values) for key, values in positive.items()}
    rows = np.arange(lost + 2, ROWS)
    columns = {"cause": lagged(changed["x"], 2, rows), "own": lagged(changed["y"], 2, rows)}
    agree(outcomes.iloc[0], *by_ols(changed["y"], columns, [np.ones(len(rows))], rows))


def test_var_criteria(tmp_path: Path) -> None:
    """The order that minimises each criterion of VAR.select_order from order 1 upwards."""
    from statsmodels.tsa.api import VAR

    trends = {"constant": "c", "linear trend": "ct", "quadratic trend": "ctt"}
    keys = {"AIC": "aic", "BIC": "bic", "HQ": "hqic", "FPE": "fpe"}
    samples = {seed: drawn(seed) for seed in range(8)}
    columns = {
        f"{name}{seed}": values for seed, data in samples.items() for name, values in data.items()
    }
    plans.write_data(tmp_path / "drawn.csv", PERIODS, columns)
    findings = [
        {"name": str(seed), "cause": f"x{seed}", "effect": f"y{seed}", "given": [f"z{seed}"]}
        for seed in samples
    ]
    axes = {
        "lags": [1, *(plans.criterion(name, 10) for name in keys)],
        "deterministics": [{"trend": trend, "name": short} for trend, short in trends.items()],
    }
    text = plans.plan_text("drawn.csv", findings, axes, frequency="monthly")
    outcomes = plans.run_plan(tmp_path, text)
    orders = outcomes.set_index(["effect", "lags_choice", "deterministics"])["lags"].astype(int)
    for seed, data in samples.items():
        model = VAR(np.column_stack([data[name] for name in ("y", "x", "z")]))
        for short in trends.values():
            values = model.select_order(10, trend=short).ics
            for name, key in keys.items():
                theirs = 1 + int(np.argmin(values[key][1:]))
                assert orders.loc[(f"y{seed}", name, short)] == theirs, (seed, name, short)


def test_var_causality_statistic(series: dict[str, Array], tmp_path: Path) -> None:
    """The same F statistic as in a VAR; its reference law has other degrees of freedom."""
    from scipy.stats import f
    from statsmodels.tsa.api import VAR

    outcomes = sweep_drawn(tmp_path, series, {"lags": [1, 2, 5]}, {"given": ["z"]})
    frame = pd.DataFrame({name: series[name] for name in ("y", "x", "z")})
    for _, row in outcomes.iterrows():
        order = int(row["lags"])
        fitted = VAR(frame).fit(order, trend="c")
        forward = fitted.test_causality("y", causing="x", kind="f")
        reverse = fitted.test_causality("x", causing="y", kind="f")
        assert float(row["statistic"]) == pytest.approx(forward.test_statistic, rel=1e-8)
        assert float(row["reverse_statistic"]) == pytest.approx(reverse.test_statistic, rel=1e-8)
        freedom = ROWS - order - (3 * order + 1)
        assert int(row["df_den"]) == freedom
        assert float(row["p_value"]) == pytest.approx(
            f.sf(forward.test_statistic, order, freedom), rel=1e-6
        )
        assert forward.df == (order, 3 * freedom)


def test_shipped_baseline_is_reproduced(tmp_path: Path) -> None:
    """The numbers in configs/us_macro.toml are statsmodels' on the shipped data, to all digits."""
    import tomllib

    import statsmodels.api as sm

    configs = plans.HERE.parents[1] / "configs"
    baseline = tomllib.loads((configs / "us_macro.toml").read_text(encoding="utf-8"))["baseline"]
    assert baseline["transformation"] == "difference"
    data = pd.read_csv(configs / "data" / "us_macro.csv")
    names, order = ["inflation", "unemployment", "bill_rate"], baseline["lags"]
    change = data[names].dropna().diff().dropna().reset_index(drop=True)
    lags = {(n, j): change[n].shift(j) for n in names for j in range(1, order + 1)}
    design = sm.add_constant(pd.DataFrame({f"{n} {j}": v for (n, j), v in lags.items()})[order:])
    fitted = sm.OLS(change["inflation"][order:], design).fit()
    restricted = [int(str(c).startswith("unemployment")) for c in design.columns]
    rows = np.diag(restricted)[np.flatnonzero(restricted)]
    found = fitted.f_test(rows.astype(float))
    reported = baseline["reported"]
    assert reported["statistic"] == pytest.approx(float(found.fvalue), abs=0.0005)
    assert reported["p_value"] == pytest.approx(float(found.pvalue), abs=0.00005)
    assert reported["observations"] == int(fitted.nobs)
