"""Sizes of effects and single coefficients against statsmodels: every stored number of a row.

Tolerances: 1e-8 relative for what the store promises (statistics, sums, errors, coefficients in
units of their error), 1e-6 for tail probabilities.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import published_plans as plans
import pytest
from drawn_series import PERIODS, ROWS, Array, agree, by_ols, drawn, lagged, sweep_drawn

import sweep

COVARIANCES = ("classical", "HC0", "HC1", "HC2", "HC3")


@pytest.fixture(scope="module")
def series() -> dict[str, Array]:
    return drawn()


@dataclass(frozen=True)
class Regression:
    """A regression by statsmodels: lags of the cause first, in order of lag."""

    fitted: Any
    restricted: float
    order: int
    current: tuple[Array, Array]

    @classmethod
    def of(
        cls,
        data: dict[str, Array],
        roles: tuple[str, str, tuple[str, ...]],
        order: int,
        rows: Array,
        terms: list[Array],
        covariance: str = "classical",
    ) -> Regression:
        """Fit the effect on lags of cause, effect and given series and on some terms."""
        import statsmodels.api as sm

        cause, effect, given = roles
        names = (cause, effect, *given)
        columns = [column for name in names for column in lagged(data[name], order, rows)]
        design = np.column_stack([*columns, *terms])
        kind = "nonrobust" if covariance == "classical" else covariance
        fitted = sm.OLS(data[effect][rows], design).fit(cov_type=kind, use_t=True)
        without = sm.OLS(data[effect][rows], design[:, order:]).fit()
        return cls(fitted, float(without.ssr), order, (data[cause][rows], data[effect][rows]))

    @property
    def sum_and_error(self) -> tuple[float, float]:
        """The sum of the cause's lag coefficients and its standard error."""
        ones = np.r_[np.ones(self.order), np.zeros(len(self.fitted.params) - self.order)]
        found = self.fitted.t_test(ones)
        return float(np.squeeze(found.effect)), float(np.squeeze(found.sd))

    @property
    def signed_partial_r2(self) -> float:
        """(s0 − s1)/s0 with the sign of the sum."""
        size = 1 - float(self.fitted.ssr) / self.restricted
        return float(np.copysign(size, self.sum_and_error[0]))

    @property
    def standardised_sum(self) -> float:
        """The sum in standard deviations, of the rows of the regression."""
        cause, effect = self.current
        return self.sum_and_error[0] * float(np.std(cause) / np.std(effect))


def sizes_agree(row: pd.Series[Any], found: Regression, reverse: Regression) -> None:
    total, error = found.sum_and_error
    assert float(row["coefficient_sum"]) == pytest.approx(total, rel=1e-8, abs=1e-8 * error)
    assert float(row["coefficient_sum_se"]) == pytest.approx(error, rel=1e-8)
    assert float(row["signed_partial_r2"]) == pytest.approx(found.signed_partial_r2, rel=1e-8)
    assert float(row["standardised_sum"]) == pytest.approx(found.standardised_sum, rel=1e-7)
    back, back_error = reverse.sum_and_error
    assert float(row["reverse_coefficient_sum"]) == pytest.approx(
        back, rel=1e-8, abs=1e-8 * back_error
    )


@pytest.mark.parametrize("trend", ["none", "constant", "linear trend"])
@pytest.mark.parametrize("order", [1, 4])
def test_sizes_of_effects(
    series: dict[str, Array], tmp_path: Path, trend: str, order: int
) -> None:
    """Sum, its error, partial R² and standardised sum, classical and robust, with a given z."""
    entries = [plans.procedure("F", covariance) for covariance in COVARIANCES]
    outcomes = sweep_drawn(
        tmp_path, series, {"tests": entries}, {"given": ["z"]},
        {"lags": order, "deterministics": trend},
    )  # fmt: skip
    rows = np.arange(order, ROWS)
    one, time = np.ones(len(rows)), rows / ROWS
    terms = {"none": [], "constant": [one], "linear trend": [one, time]}[trend]
    for entry, covariance in zip(entries, COVARIANCES, strict=True):
        row = outcomes[outcomes["test"] == entry["name"]].iloc[0]
        roles = ("x", "y", ("z",)), ("y", "x", ("z",))
        ahead, back = (
            Regression.of(series, one_way, order, rows, terms, covariance) for one_way in roles
        )
        sizes_agree(row, ahead, back)


def test_sizes_of_a_negative_effect_and_of_an_inverted_measure(
    series: dict[str, Array], tmp_path: Path
) -> None:
    """What is stored is the column's own; the view of effects turns the sign, not the row."""
    data = series | {"idle": 40 - 2 * series["y"] + 0.02 * series["w"]}
    measures = {"y": ["y", {"series": "idle", "inverted": True}]}
    finding = {"cause": "y", "effect": "x", "given": ["z"]}
    outcomes = sweep_drawn(tmp_path, data, {"measures": measures}, finding, {"lags": 2})
    rows = np.arange(2, ROWS)
    for name, sign in (("y", 1), ("idle", -1)):
        row = outcomes[outcomes["measures"].astype(str) == name].iloc[0]
        ahead, back = (
            Regression.of(data, roles, 2, rows, [np.ones(len(rows))])
            for roles in ((name, "x", ("z",)), ("x", name, ("z",)))
        )
        sizes_agree(row, ahead, back)
        assert np.sign(float(row["coefficient_sum"])) == sign


@pytest.mark.parametrize("covariance", COVARIANCES)
def test_single_lag_coefficients(
    series: dict[str, Array], tmp_path: Path, covariance: str
) -> None:
    """Every number of the details: value, error by the row's covariance, p on t(T − k)."""
    plans.write_data(tmp_path / "drawn.csv", PERIODS, series)
    axes = {"windows": ["full sample", {"rolling": 100, "step": 40}]}
    text = plans.plan_text(
        "drawn.csv", [{"name": "x leads y", "cause": "x", "effect": "y", "given": ["z"]}], axes,
        {"lags": 3, "test": plans.procedure("F", covariance)}, frequency="monthly",
    )  # fmt: skip
    path = tmp_path / "plan.toml"
    path.write_text(f'{text}[sweep]\ncoefficients = "all"\n', encoding="utf-8")
    results = sweep.run(path, jobs=1)
    outcomes = results.outcomes()
    assert len(outcomes) == 4
    for _, row in outcomes.iterrows():
        first, last = (
            PERIODS.index(f"{date:%Y-%m}") for date in (row["window_start"], row["window_end"])
        )
        rows = np.arange(first + 3, last + 1)
        details = results.details(str(row["specification"])).set_index(["kind", "position"])
        assert len(details) == 6
        for kind, roles in (
            ("lag coefficient", ("x", "y", ("z",))), ("reverse lag coefficient", ("y", "x", ("z",)))
        ):  # fmt: skip
            fitted = Regression.of(series, roles, 3, rows, [np.ones(len(rows))], covariance).fitted
            for lag in (1, 2, 3):
                stored = details.loc[(kind, lag)]
                error = float(fitted.bse[lag - 1])
                assert stored["value"] == pytest.approx(fitted.params[lag - 1], abs=1e-8 * error)
                assert stored["standard_error"] == pytest.approx(error, rel=1e-8)
                assert stored["p_value"] == pytest.approx(fitted.pvalues[lag - 1], rel=1e-6)


@pytest.mark.parametrize("entry", ["every subset", "leave one out"])
def test_conditioning_sets(series: dict[str, Array], tmp_path: Path, entry: str) -> None:
    """Every set of given series that an entry means, and no other."""
    given = ("z", "w", "v")
    data = series | {"v": np.roll(series["z"], 5) * 0.5 + drawn(5)["w"]}
    outcomes = sweep_drawn(
        tmp_path, data, {"conditioning": ["given", entry]}, {"given": list(given)}, {"lags": 2}
    )
    kept = {
        "every subset": [set(c) for n in range(4) for c in itertools.combinations(given, n)],
        "leave one out": [set(c) for n in (2, 3) for c in itertools.combinations(given, n)],
    }[entry]
    assert len(outcomes) == len(kept)
    rows = np.arange(2, ROWS)
    for held in kept:
        left_out = sorted(set(given) - held)
        label = f"without {' and '.join(left_out)}" if left_out else "given"
        label = label if held else "pairwise"
        row = outcomes[outcomes["conditioning"] == label].iloc[0]
        columns = {
            "cause": lagged(data["x"], 2, rows),
            "own": lagged(data["y"], 2, rows),
            **{name: lagged(data[name], 2, rows) for name in sorted(held)},
        }
        agree(row, *by_ols(data["y"], columns, [np.ones(len(rows))], rows))


def detrended(values: Array) -> Array:
    from statsmodels.tsa.tsatools import detrend

    return np.asarray(detrend(values, order=1))


def hodrick_prescott(values: Array) -> Array:
    from statsmodels.tsa.filters.hp_filter import hpfilter

    return np.asarray(hpfilter(values, 129600)[0])


def hamilton(values: Array) -> Array:
    """Residual of y(t + 24) on a constant and y(t) … y(t − 11), by OLS."""
    import statsmodels.api as sm

    size = len(values)
    rows = np.arange(35, size)
    design = np.column_stack([values[rows - 24 - lag] for lag in range(12)])
    result = np.full(size, np.nan)
    result[rows] = sm.OLS(values[rows], sm.add_constant(design)).fit().resid
    return result


FILTERS = {
    "linearly detrended": (detrended, 0),
    "Hodrick-Prescott cycle": (hodrick_prescott, 0),
    "Hamilton cycle": (hamilton, 35),
}


@pytest.mark.parametrize("name", FILTERS)
@pytest.mark.parametrize("covariance", ["classical", "HC3"])
def test_regressions_on_what_is_taken_inside_the_window(
    series: dict[str, Array], tmp_path: Path, name: str, covariance: str
) -> None:
    """Filters see the window alone, in every position; then the regression on their output.

    The filters' own arithmetic costs digits: statistics agree to 1e-6 relative.
    """
    change, lost = FILTERS[name]
    entry = plans.procedure("F", covariance)
    axes = {"windows": ["full sample", {"rolling": 110, "step": 35}], "tests": [entry]}
    outcomes = sweep_drawn(
        tmp_path, series, axes, {"given": ["z"]},
        {"lags": 2, "transformation": name, "test": entry},
    )  # fmt: skip
    assert len(outcomes) == 1 + 3
    for _, row in outcomes.iterrows():
        first, last = (
            PERIODS.index(f"{date:%Y-%m}") for date in (row["window_start"], row["window_end"])
        )
        inside = {key: change(values[first : last + 1]) for key, values in series.items()}
        rows = np.arange(lost + 2, last - first + 1)
        ahead, back = (
            Regression.of(inside, roles, 2, rows, [np.ones(len(rows))], covariance)
            for roles in (("x", "y", ("z",)), ("y", "x", ("z",)))
        )
        assert int(row["observations"]) == len(rows)
        for prefix, found in (("", ahead), ("reverse_", back)):
            tested = found.fitted.f_test(np.eye(2, len(found.fitted.params)))
            assert float(row[f"{prefix}statistic"]) == pytest.approx(float(tested.fvalue), rel=1e-6)
            assert float(row[f"{prefix}p_value"]) == pytest.approx(float(tested.pvalue), rel=1e-5)
        assert float(row["signed_partial_r2"]) == pytest.approx(ahead.signed_partial_r2, rel=1e-6)
        assert float(row["standardised_sum"]) == pytest.approx(ahead.standardised_sum, rel=1e-6)
