"""Transformations against plain twins, statsmodels and the printed numbers."""

from __future__ import annotations

import math

import numpy as np
import pytest
import statsmodels.api as sm

from sweep.panel.calendar import FREQUENCIES
from sweep.panel.transforms import TRANSFORMS

GENERATOR = np.random.default_rng(20260401)


@pytest.fixture(scope="module")
def log_gdp():
    """Logs of US real GDP, 1959-Q1 to 2009-Q3, as statsmodels carries them."""
    return np.log(sm.datasets.macrodata.load_pandas().data["realgdp"].to_numpy())


# -- plain twins: one series, one value at a time -----------------------------------------


def back(y, t, distance):
    return y[t - distance] if t >= distance else math.nan


def log(value):
    return math.log(value) if value > 0 else math.nan


def plain_local(name, y, frequency):
    year, season = frequency.year, frequency.seasons
    rules = {
        "level": lambda t: y[t],
        "log": lambda t: log(y[t]),
        "difference": lambda t: y[t] - back(y, t, 1),
        "log difference": lambda t: log(y[t]) - log(back(y, t, 1)),
        "yearly growth": lambda t: log(y[t]) - log(back(y, t, year)),
        "seasonal difference": lambda t: y[t] - back(y, t, season),
        "inverse hyperbolic sine": lambda t: math.asinh(y[t]),
    }
    return np.array([rules[name](t) for t in range(len(y))])


def plain_detrended(y):
    rows = np.flatnonzero(np.isfinite(y))
    out = np.full(len(y), np.nan)
    if len(rows) > 2:
        X = np.column_stack([np.ones(len(rows)), rows])
        out[rows] = y[rows] - X @ np.linalg.lstsq(X, y[rows], rcond=None)[0]
    return out


def plain_hodrick_prescott(y, smoothing):
    rows = np.flatnonzero(np.isfinite(y))
    out = np.full(len(y), np.nan)
    if len(rows) < 3 or rows[-1] - rows[0] + 1 != len(rows):
        return out
    D = np.diff(np.eye(len(rows)), n=2, axis=0)
    out[rows] = y[rows] - np.linalg.solve(np.eye(len(rows)) + smoothing * D.T @ D, y[rows])
    return out


def plain_hamilton(y, horizon, p):
    out = np.full(len(y), np.nan)
    rows = [
        t
        for t in range(horizon + p - 1, len(y))
        if np.isfinite([y[t], *(y[t - horizon - j] for j in range(p))]).all()
    ]
    if len(rows) > p + 1:
        X = np.array([[1.0, *(y[t - horizon - j] for j in range(p))] for t in rows])
        out[rows] = y[rows] - X @ np.linalg.lstsq(X, y[rows], rcond=None)[0]
    return out


def plain(name, y, frequency):
    if name == "linearly detrended":
        return plain_detrended(y)
    if name == "Hodrick-Prescott cycle":
        return plain_hodrick_prescott(y, frequency.smoothing)
    if name == "Hamilton cycle":
        return plain_hamilton(y, frequency.hamilton_horizon, frequency.seasons)
    return plain_local(name, y, frequency)


def ragged_panel(n):
    """Batch of (2, 3) wandering series: whole, late, early, holed, negative, too short."""
    panel = 50.0 + np.cumsum(GENERATOR.standard_normal((2, 3, n)), axis=-1)
    panel[0, 1, :7] = np.nan
    panel[0, 2, -5:] = np.nan
    panel[1, 0, n // 2] = np.nan
    panel[1, 1] -= 50.0
    panel[1, 2, 2:] = np.nan
    return panel


@pytest.mark.parametrize("frequency", FREQUENCIES)
@pytest.mark.parametrize("name", TRANSFORMS)
@pytest.mark.parametrize("n", [5, 140])
def test_the_batch_equals_its_plain_twin(name, frequency, n):
    transform, pace = TRANSFORMS[name], FREQUENCIES[frequency]
    panel = ragged_panel(n)
    if transform.unavailable(pace):
        with pytest.raises(ValueError, match=r"needs|give"):
            transform.apply(panel, pace)
        return
    before = panel.copy()
    got = transform.apply(panel, frequency)
    assert got.shape == panel.shape
    assert np.array_equal(panel, before, equal_nan=True)
    want = np.array([[plain(name, y, pace) for y in block] for block in panel])
    assert np.array_equal(np.isnan(got), np.isnan(want))
    # Local ones differ by the last digit of a log; the twins of the filters solve dense
    # systems whose condition (HP, monthly: 16 x 129600 = 2e6) leaves about 1e-9 of a level of 50.
    tolerance = 1e-14 if transform.kind == "local" else 5e-9
    np.testing.assert_allclose(got, want, rtol=0.0, atol=tolerance * 50.0)


@pytest.mark.parametrize("name", TRANSFORMS)
def test_one_series_equals_its_place_in_a_batch(name):
    panel = ragged_panel(90)
    batch = TRANSFORMS[name].apply(panel, "quarterly")
    alone = TRANSFORMS[name].apply(panel[0, 1], "quarterly")
    assert alone.shape == (90,)
    # LAPACK may add in another order for other batch shapes.
    np.testing.assert_allclose(batch[0, 1], alone, rtol=0.0, atol=1e-12 * 50.0)


@pytest.mark.parametrize("frequency", FREQUENCIES)
@pytest.mark.parametrize("name", [name for name in TRANSFORMS if TRANSFORMS[name].kind == "local"])
def test_offsets_say_which_raw_values_are_used(name, frequency):
    transform = TRANSFORMS[name]
    if transform.unavailable(frequency):
        with pytest.raises(ValueError, match="fixed number"):
            transform.offsets(frequency)
        return
    offsets = transform.offsets(frequency)
    y = 5.0 + GENERATOR.random(900)
    whole, t = transform.apply(y, frequency), 800
    used = []
    for distance in range(800):
        holed = y.copy()
        holed[t - distance] = np.nan
        if np.isnan(transform.apply(holed, frequency)[t]):
            used.append(distance)
    assert np.isfinite(whole[t])
    assert tuple(used) == offsets


@pytest.mark.parametrize("horizon", [0, 3])
def test_hamilton_offsets(horizon):
    h = horizon or 8
    assert TRANSFORMS["Hamilton cycle"].offsets("quarterly", horizon) == (0, h, h + 1, h + 2, h + 3)


@pytest.mark.parametrize("frequency", FREQUENCIES)
@pytest.mark.parametrize("name", TRANSFORMS)
def test_a_transformation_that_equals_another_gives_its_numbers(name, frequency):
    transform = TRANSFORMS[name]
    other = transform.equals(frequency)
    if other is not None:
        y = 5.0 + GENERATOR.random(40)
        expected = TRANSFORMS[other].apply(y, frequency)
        np.testing.assert_array_equal(transform.apply(y, frequency), expected)
        assert transform.offsets(frequency) == TRANSFORMS[other].offsets(frequency)


def test_which_transformations_coincide():
    found = {
        (name, frequency): transform.equals(frequency)
        for name, transform in TRANSFORMS.items()
        for frequency in FREQUENCIES
        if transform.equals(frequency)
    }
    assert found == {
        ("yearly growth", "annual"): "log difference",
        ("seasonal difference", "annual"): "difference",
    }


def test_flags_of_the_family():
    assert {n for n, t in TRANSFORMS.items() if t.two_sided} == {"Hodrick-Prescott cycle"}
    assert {n for n, t in TRANSFORMS.items() if t.needs_positive} == {
        "log", "log difference", "yearly growth",
    }  # fmt: skip
    assert {n for n, t in TRANSFORMS.items() if t.kind == "window"} == {
        "linearly detrended", "Hodrick-Prescott cycle", "Hamilton cycle",
    }  # fmt: skip
    assert all(t.unit_words and t.name == n for n, t in TRANSFORMS.items())


def test_unavailable_says_why():
    assert "business daily" in TRANSFORMS["yearly growth"].unavailable("business daily")
    hodrick_prescott = TRANSFORMS["Hodrick-Prescott cycle"]
    assert "smoothing" in hodrick_prescott.unavailable("weekly")
    assert hodrick_prescott.unavailable("weekly", smoothing=5e7) == ""
    assert np.isfinite(hodrick_prescott.apply(GENERATOR.random(30), "weekly", smoothing=5e7)).all()


# -- outside sources ----------------------------------------------------------------------


@pytest.mark.parametrize("smoothing", [6.25, 100.0, 1600.0, 14400.0, 129600.0])
def test_hodrick_prescott_agrees_with_statsmodels(log_gdp, smoothing):
    cycle = TRANSFORMS["Hodrick-Prescott cycle"].apply(log_gdp, "quarterly", smoothing)
    reference = np.asarray(sm.tsa.filters.hpfilter(log_gdp, smoothing)[0])
    # The reference takes level minus trend from a sparse solve of condition 16λ, which leaves
    # up to 2e6 x 1e-16 of a level of 9.
    np.testing.assert_allclose(cycle, reference, rtol=0.0, atol=5e-9)


def test_hodrick_prescott_printed_numbers(log_gdp):
    cycle = TRANSFORMS["Hodrick-Prescott cycle"].apply(log_gdp, "quarterly")
    # Printed to eight decimals, so half a unit of the last one.
    printed = [0.00867837, 0.02424631, 0.01367375]
    np.testing.assert_allclose(cycle[:3], printed, rtol=0.0, atol=5.1e-9)
    assert cycle[-1] == pytest.approx(-0.02589931, abs=5.1e-9)
    assert cycle.std() == pytest.approx(0.01540096, abs=5.1e-9)  # divisor n


def test_hamilton_printed_numbers(log_gdp):
    cycle = TRANSFORMS["Hamilton cycle"].apply(log_gdp, "quarterly")
    assert np.isfinite(cycle).sum() == 192
    assert np.isnan(cycle[:11]).all()
    assert cycle[-1] == pytest.approx(-0.069832, abs=5.1e-7)  # six decimals printed
    assert np.nanstd(cycle) == pytest.approx(0.031584, abs=5.1e-7)  # divisor n


def test_hamilton_agrees_with_ordinary_least_squares_of_statsmodels(log_gdp):
    X = np.column_stack([log_gdp[3 - j : len(log_gdp) - 8 - j] for j in range(4)])
    fit = sm.OLS(log_gdp[11:], sm.add_constant(X)).fit()
    np.testing.assert_allclose(
        fit.params, [0.314778, 1.232192, -0.281382, -0.261480, 0.282095], rtol=0.0, atol=5.1e-7
    )
    cycle = TRANSFORMS["Hamilton cycle"].apply(log_gdp, "quarterly")
    # Lags of a log level are nearly collinear: condition about 1e4, squared by nobody.
    np.testing.assert_allclose(cycle[11:], fit.resid, rtol=0.0, atol=1e-11)


@pytest.mark.parametrize(("frequency", "h", "p"), [("annual", 2, 1), ("monthly", 24, 12)])
def test_hamilton_takes_two_years_and_the_values_of_one(log_gdp, frequency, h, p):
    """Hamilton (2018): h = 8, p = 4 for quarterly and h = 24, p = 12 for monthly data."""
    X = np.column_stack([log_gdp[p - 1 - j : len(log_gdp) - h - j] for j in range(p)])
    fit = sm.OLS(log_gdp[h + p - 1 :], sm.add_constant(X)).fit()
    cycle = TRANSFORMS["Hamilton cycle"].apply(log_gdp, frequency)
    assert np.isnan(cycle[: h + p - 1]).all()
    np.testing.assert_allclose(cycle[h + p - 1 :], fit.resid, rtol=0.0, atol=1e-11)
    reach = TRANSFORMS["Hamilton cycle"].offsets(frequency)
    assert reach == (0, *range(h, h + p))


def test_inverse_hyperbolic_sine_printed_number():
    value = TRANSFORMS["inverse hyperbolic sine"].apply(np.array([100.0]), "annual")
    assert value[0] == pytest.approx(5.298342, abs=5.1e-7)


# -- edges --------------------------------------------------------------------------------


def test_a_line_has_no_cycle():
    line = 1e6 + 0.37 * np.arange(120)
    for name in ("linearly detrended", "Hodrick-Prescott cycle", "Hamilton cycle"):
        cycle = TRANSFORMS[name].apply(line, "quarterly")
        assert np.nanmax(np.abs(cycle)) < 1e-8  # rounding of a level of a million


def test_a_constant_has_no_cycle():
    for name in ("linearly detrended", "Hodrick-Prescott cycle", "Hamilton cycle"):
        cycle = TRANSFORMS[name].apply(np.full(60, 1e6 / 7), "quarterly")
        assert np.nanmax(np.abs(cycle)) < 1e-9


def test_what_is_not_positive_has_no_log():
    y = np.array([1.0, 0.0, -2.0, 3.0, 4.0])
    assert np.isnan(TRANSFORMS["log"].apply(y, "annual")).tolist() == [0, 1, 1, 0, 0]
    assert np.isnan(TRANSFORMS["log difference"].apply(y, "annual")).tolist() == [1, 1, 1, 1, 0]


def test_filters_keep_digits_under_a_high_level():
    y = np.cumsum(GENERATOR.standard_normal(100))
    for name in ("linearly detrended", "Hodrick-Prescott cycle", "Hamilton cycle"):
        low, high = (TRANSFORMS[name].apply(y + level, "quarterly") for level in (0.0, 1e8))
        # Adding 1e8 itself rounds the data by 1.5e-8.
        np.testing.assert_allclose(low, high, rtol=0.0, atol=2e-7)


def test_hodrick_prescott_does_not_bridge_a_hole():
    y = GENERATOR.random((2, 40))
    y[0, 20] = np.nan
    cycle = TRANSFORMS["Hodrick-Prescott cycle"].apply(y, "quarterly")
    assert np.isnan(cycle[0]).all()
    assert np.isfinite(cycle[1]).all()
