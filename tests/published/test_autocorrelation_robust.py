"""Autocorrelation-robust Wald statistics and bandwidths against R's sandwich package.

``data/r_newey_west.csv`` holds Wald statistics of ten systems (both directions, lags 1 to 8) that
R 4.2.2 with sandwich 3.0.2 computed on 1 December 2026: NeweyWest(lag = L, prewhite = FALSE),
without and with the factor T/(T − k).  The bandwidths are bwNeweyWest and bwAndrews of the same
package on the scores of one regression, printed to six decimals.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import published_plans as plans
import pytest
import statsmodels.api as sm

from sweep.kernels.longrun import (
    LongRun,
    andrews_bandwidth,
    chosen_bandwidth,
    kernel_weights,
    long_run,
    newey_west_bandwidth,
    on_time_grid,
)

# The store promises 1e-8 against least squares on the rows; R's inverse of X'X costs its own
# side some digits on levels with trend and seasonal terms.
STATISTIC = 2e-8
TABLE = Path(__file__).parent / "data" / "r_newey_west.csv"


@pytest.mark.parametrize("name", plans.CASES)
def test_wald_agrees_with_r(name: str, tmp_path: Path) -> None:
    published = pd.read_csv(TABLE)
    published = published[published["case"] == name]
    case = plans.reference()["cases"][name]
    # R's rule of thumb for the number of lags, so shorter samples have fewer.
    lengths = [float(length) for length in sorted(published["lags_in_time"].unique())]
    entries: list[dict[str, Any]] = [
        {"test": statistic, "covariance": "HAC", "bandwidth": length, "name": f"{name} {length:g}"}
        | options
        for length in lengths
        for name, statistic, options in (
            ("plain", "Wald", {}), ("scaled", "Wald", {"small_sample": True}), ("form", "F", {}),
        )
    ]  # fmt: skip
    dets = sorted(published["det"].unique())
    axes = {
        "lags": sorted(published["lag"].unique().tolist()),
        "deterministics": [plans.DETERMINISTICS[det] for det in dets],
        "tests": [plans.procedure("F"), *entries],
    }
    outcomes = plans.run_plan(tmp_path, plans.case_plan(tmp_path, case, axes))
    outcomes["det"] = outcomes["deterministics"].astype(str)
    wide = outcomes.set_index(["det", "lags", "test"])
    compared = 0
    for row in published.to_dict("records"):
        reverse = "reverse_" if row["direction"] == "effect_to_cause" else ""
        plain = wide.loc[(row["det"], row["lag"], f"plain {row['lags_in_time']}")]
        scaled = wide.loc[(row["det"], row["lag"], f"scaled {row['lags_in_time']}")]
        form = wide.loc[(row["det"], row["lag"], f"form {row['lags_in_time']}")]
        assert plain["observations"] == row["observations"]
        for found, value in (
            (plain[f"{reverse}statistic"], row["wald"]),
            (scaled[f"{reverse}statistic"], row["wald_scaled"]),
            (form[f"{reverse}statistic"] * row["lag"], row["wald"]),
        ):
            np.testing.assert_allclose(found, value, rtol=STATISTIC, err_msg=str(row))
        compared += 1
    assert compared == len(published) > 20


@pytest.fixture(scope="module")
def growth() -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """US GDP growth on a constant and two lags of its own and of consumption's, T = 200."""
    data = sm.datasets.macrodata.load_pandas().data
    both = np.diff(np.log(data[["realgdp", "realcons"]].to_numpy()), axis=0)
    design = np.column_stack(
        [np.ones(200), both[1:-1, 0], both[:-2, 0], both[1:-1, 1], both[:-2, 1]]
    )
    effect = both[2:, 0]
    coefficients = np.linalg.lstsq(design, effect, rcond=None)[0]
    return design, effect - design @ coefficients, coefficients


# Six printed decimals.
BANDWIDTHS = [
    (newey_west_bandwidth, "Bartlett", 2.550702),
    (andrews_bandwidth, "Bartlett", 1.640890),
    (andrews_bandwidth, "quadratic spectral", 1.678899),
]


@pytest.mark.parametrize(("rule", "kernel", "value"), BANDWIDTHS)
def test_bandwidths_agree_with_r(
    growth: tuple[np.ndarray, np.ndarray, np.ndarray], rule: Any, kernel: str, value: float
) -> None:
    design, residuals, _ = growth
    counted = np.array([0.0, 1, 1, 1, 1])  # not the constant
    scores = design * residuals[:, None]
    assert rule(scores, counted, 200, kernel) == pytest.approx(value, abs=6e-7)


def test_the_automatic_statistic_agrees_with_r(
    growth: tuple[np.ndarray, np.ndarray, np.ndarray],
) -> None:
    """R's NeweyWest with its own bandwidth, cut to two lags: Wald 35.60247."""
    design, residuals, coefficients = growth
    lags = float(np.floor(2.550702))
    scores = (design * residuals[:, None])[None]
    middle = long_run(scores, kernel_weights("Bartlett", lags, 200))[0]
    inverse = np.linalg.inv(design.T @ design)
    covariance = (inverse @ middle @ inverse)[3:, 3:]
    tested = coefficients[3:]
    wald = tested @ np.linalg.solve(covariance, tested)
    assert wald == pytest.approx(35.60247, abs=6e-6)


def test_the_chosen_bandwidth_does_not_depend_on_units(
    growth: tuple[np.ndarray, np.ndarray, np.ndarray],
) -> None:
    design, residuals, _ = growth
    times = np.arange(200)
    units = np.array([100, 100, 0.01, 7])
    for rule in ("Newey-West", "Andrews"):
        for kernel in ("Bartlett", "quadratic spectral"):
            how = LongRun(kernel, rule)
            one = chosen_bandwidth(how, design[:, 1:], residuals, times)
            two = chosen_bandwidth(how, design[:, 1:] * units + 5, residuals * 3, times)
            assert one == pytest.approx(two, rel=1e-9)
            assert np.isfinite(one)


def test_a_gap_in_time_never_closes() -> None:
    """Sums over lags with a gap are those over pairs of rows by their distance in time."""
    rng = np.random.default_rng(5)
    times = np.concatenate([np.arange(12), np.arange(15, 30), np.arange(31, 40)])
    scores = rng.standard_normal((times.size, 3))
    for kernel, bandwidth in (("Bartlett", 4.0), ("quadratic spectral", 2.5)):
        weights = kernel_weights(kernel, bandwidth, 40)
        found = long_run(on_time_grid(scores, times)[None], weights)[0]
        expected = np.zeros((3, 3))
        for a, when in enumerate(times):
            for b, other in enumerate(times):
                distance = abs(int(when - other))
                weight = 1.0 if not distance else (
                    weights[distance - 1] if distance <= weights.size else 0.0
                )  # fmt: skip
                expected += weight * np.outer(scores[a], scores[b])
        np.testing.assert_allclose(found, expected, rtol=1e-12, atol=1e-12)


def test_kernel_weights_are_the_published_ones() -> None:
    """Andrews (1991, equation 2.7) at x = 1/2 and 1; Bartlett reaches zero past its lags."""
    weights = kernel_weights("quadratic spectral", 2.0, 50)
    for place, x in ((0, 0.5), (1, 1.0)):
        angle = 6 * np.pi * x / 5
        value = 25 / (12 * np.pi**2 * x**2) * (np.sin(angle) / angle - np.cos(angle))
        assert weights[place] == pytest.approx(value, rel=1e-12)
    assert kernel_weights("Bartlett", 4, 50).tolist() == pytest.approx([0.8, 0.6, 0.4, 0.2])
    assert kernel_weights("Bartlett", 0, 50).size == 0


def test_no_lags_in_time_is_white(tmp_path: Path) -> None:
    case = plans.reference()["cases"]["macro_gdp_cons"]
    axes = {
        "lags": [1, 2, 4],
        "deterministics": [plans.DETERMINISTICS["c"]],
        "tests": [
            plans.procedure("F"),
            {"test": "F", "covariance": "HC0", "name": "white"},
            {"test": "F", "covariance": "HAC", "bandwidth": 0.0, "name": "no lags"},
        ],
    }
    outcomes = plans.run_plan(tmp_path, plans.case_plan(tmp_path, case, axes))
    wide = outcomes.pivot(index="lags", columns="test", values="statistic").astype(float)
    np.testing.assert_allclose(wide["no lags"], wide["white"], rtol=1e-12)
