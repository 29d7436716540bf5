"""The batched kernels against their plain twins, on data that make cancellation bite."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from sweep.kernels.criteria import CRITERIA, choose_order, log_determinants
from sweep.kernels.lagproducts import RunningMoments
from sweep.kernels.layout import Floats, Ints, Layout, Moments
from sweep.kernels.plain import plain_design, plain_fit, plain_order, plain_orders, plain_robust
from sweep.kernels.robust import COVARIANCES, robust_stack
from sweep.kernels.rowmoments import RowMoments, WindowRows
from sweep.kernels.stacks import Flag, Regression, Solver, factorise, fit_stack
from sweep.kernels.tails import chi_square_tail, f_tail, normal_tail_inverse, student_tail
from sweep.kernels.together import JoinedMoments

LENGTH, LAGS = 60, 6


def _series(kind: str, rows: int = 150) -> Floats:
    rng = np.random.default_rng(5)
    values = rng.standard_normal((rows, 3)).cumsum(axis=0)
    if kind == "level break":
        values[rows // 2 :] += 1e6
    elif kind == "smooth":
        values = np.sin(np.arange(rows)[:, None] / np.array([9.0, 13.0, 17.0])) * 50 + values * 1e-3
    elif kind == "variance break":
        values[: rows // 2] *= 1e5
    return values


def _terms(rows: int) -> Floats:
    time = np.linspace(-1, 1, rows)
    return np.column_stack([np.ones(rows), time, time**2])


def _windows(rows: int) -> tuple[Ints, Ints]:
    first = np.arange(0, rows - LENGTH + 1, 3, dtype=np.int64)
    return first, first + LENGTH - 1


def _running(values: Floats, terms: Floats, first: Ints, last: Ints) -> RunningMoments:
    span = (int(first.min()), int(last.max()))
    return RunningMoments(values, terms, first, last, span, LAGS, centre=True)


def _by_rows(values: Floats, terms: Floats, first: Ints, last: Ints) -> RowMoments:
    windows = [
        WindowRows(values[a : b + 1], terms[a : b + 1], np.ones((b - a + 1, 3), bool), a)
        for a, b in zip(first.tolist(), last.tolist(), strict=True)
    ]
    return RowMoments(windows, centre=True)


def _joined(values: Floats, terms: Floats, first: Ints, last: Ints) -> JoinedMoments:
    half = first.size // 2
    return JoinedMoments(
        [
            (_by_rows(values, terms, first[:half], last[:half]), np.arange(half)),
            (_running(values, terms, first[half:], last[half:]), np.arange(half, first.size)),
        ]
    )


SOURCES = {"running": _running, "rows": _by_rows, "joined": _joined}


def _regression(layout: Layout, order: int) -> Regression:
    nuisance = [0, 1, 2, *(layout.at(j, lag) for j in (1, 2) for lag in range(1, order + 1))]
    return Regression(
        np.array(nuisance),
        np.array([layout.at(0, lag) for lag in range(1, order + 1)]),
        np.array([layout.at(1, 0), layout.at(2, 0)]),
        layout.at(0, 0),
    )


def _design(values: Floats, terms: Floats, a: int, b: int, order: int) -> Floats:
    series = [(values[:, j], 1, order) for j in (1, 2, 0)] + [(values[:, j], 0, 0) for j in (1, 2)]
    rows, _ = plain_design(series, terms, a, b, order)
    return rows


@pytest.mark.parametrize("source", SOURCES)
@pytest.mark.parametrize("kind", ["walk", "level break", "smooth", "variance break"])
@pytest.mark.parametrize("order", [1, 4, 6])
def test_statistics_agree_with_rows(source: str, kind: str, order: int) -> None:
    """Relative 1e-8, the promise of design section 5; the trigger sends the rest to QR."""
    values, terms = _series(kind), _terms(150)
    first, last = _windows(150)
    moments: Moments = SOURCES[source](values, terms, first, last)
    select = np.arange(first.size)
    layout = Layout(3, (0, 1, 2), (order, order, order))
    gram = moments.gram(select, layout, order)
    regression = _regression(layout, order)
    fit = fit_stack(moments, gram, select, layout, order, regression)
    robust = robust_stack(moments, select, layout, order, regression, fit, COVARIANCES)
    assert (fit.flag == Flag.FINE).all()
    k, q = regression.regressors, order
    for w in range(0, first.size, 5):
        rows = _design(values, terms, int(first[w]), int(last[w]), order)
        for effect in range(2):
            slow = plain_fit(rows[:, k + effect], rows[:, : k - q], rows[:, k - q : k])
            gap = slow.restricted_squares / slow.unrestricted_squares - 1
            assert fit.explained[w, effect] / fit.residual[w, effect] == pytest.approx(
                gap, rel=1e-8, abs=1e-10  # s0/s1 − 1 by the slow path cancels below 1e-10
            )
            unit = moments.scale[w, effect + 1] / moments.scale[w, 0]
            error = fit.coefficient_sum_error[w, effect] * unit
            assert error == pytest.approx(slow.coefficient_sum_error, rel=1e-8)
            assert fit.coefficient_sum[w, effect] * unit == pytest.approx(
                slow.coefficient_sum, rel=1e-8, abs=1e-8 * slow.coefficient_sum_error
            )
            left = np.linalg.qr(slow.design / np.sqrt((slow.design**2).sum(axis=0)))[0]
            room = 1 - (left**2).sum(axis=1).max()
            for name in COVARIANCES:
                found = robust[name].wald[w, effect]
                if room < 1e-10:  # a row is fitted exactly
                    assert np.isnan(found) == robust[name].exact_row[w]
                    assert np.isnan(found) or name in ("HC0", "HC1")
                    continue
                block = plain_robust(slow, name)
                if np.isnan(found):
                    size = np.sqrt(np.diag(block))
                    assert np.linalg.cond(block / np.outer(size, size)) > 1e8
                    continue
                b = slow.lag_coefficients
                wald = float(b @ np.linalg.solve(block, b))
                # 1 − h carries an absolute error of some ε, so HC2 and HC3 of a row that nearly
                # fits itself carry a relative one of some ε/(1 − h), in either path.
                lost = 2e-14 / room if name in ("HC2", "HC3") else 0.0
                assert found == pytest.approx(wald, rel=1e-7 + lost)


def test_the_trigger_fires_where_sums_cancel_and_only_there() -> None:
    first, last = _windows(150)
    select, layout = np.arange(first.size), Layout(3, (0, 1, 2), (2, 2, 2))
    shares = {}
    for kind in ("walk", "variance break"):
        moments = _running(_series(kind), _terms(150), first, last)
        gram = moments.gram(select, layout, 2)
        fit = fit_stack(moments, gram, select, layout, 2, _regression(layout, 2))
        shares[kind] = float((fit.solver == Solver.QR).mean())
    assert shares["walk"] == 0.0
    assert shares["variance break"] > 0.2


def test_robust_statistics_are_ordered() -> None:
    """HC0 ≥ HC2 ≥ HC3 since the covariances are ordered the other way; HC1 is HC0·(T−k)/T."""
    first, last = _windows(150)
    select, layout = np.arange(first.size), Layout(3, (0, 1, 2), (3, 3, 3))
    moments = _running(_series("walk"), _terms(150), first, last)
    gram, regression = moments.gram(select, layout, 3), _regression(layout, 3)
    fit = fit_stack(moments, gram, select, layout, 3, regression)
    found = robust_stack(moments, select, layout, 3, regression, fit, COVARIANCES)
    assert (found["HC0"].wald >= found["HC2"].wald).all()
    assert (found["HC2"].wald >= found["HC3"].wald).all()
    rows = fit.observations[:, None]
    np.testing.assert_allclose(
        found["HC1"].wald, found["HC0"].wald * (rows - fit.regressors) / rows, rtol=1e-10
    )


@pytest.mark.parametrize("source", SOURCES)
def test_a_row_of_its_own_term_does_not_count(source: str) -> None:
    """A pulse leaves HC2 and HC3 as the plain twin has them; its weight never matters."""
    first, last = _windows(150)
    values, terms = _series("walk"), _terms(150)
    terms[:, 2] = np.arange(150) == 75
    inside = (first + 4 <= 75) & (last >= 75)
    moments = SOURCES[source](values, terms, first[inside], last[inside])
    select, layout = np.arange(inside.sum()), Layout(3, (0, 1, 2), (4, 4, 4))
    gram, regression = moments.gram(select, layout, 4), _regression(layout, 4)
    fit = fit_stack(moments, gram, select, layout, 4, regression)
    robust = robust_stack(moments, select, layout, 4, regression, fit, COVARIANCES)
    k = regression.regressors
    for w, (a, b) in enumerate(zip(first[inside].tolist(), last[inside].tolist(), strict=True)):
        rows = _design(values, terms, a, b, 4)
        slow = plain_fit(rows[:, k], rows[:, : k - 4], rows[:, k - 4 : k])
        rest = rows[rows[:, 2] == 0]
        # Without the row and its pulse: the same coefficients, residuals and leverages.
        short = plain_fit(rest[:, k], rest[:, [0, 1, *range(3, k - 4)]], rest[:, k - 4 : k])
        for name in ("HC0", "HC2", "HC3"):
            lags = slow.lag_coefficients
            wald = float(lags @ np.linalg.solve(plain_robust(slow, name), lags))
            assert robust[name].wald[w, 0] == pytest.approx(wald, rel=1e-7)
            np.testing.assert_allclose(plain_robust(short, name), plain_robust(slow, name), 1e-7)


def test_units_and_origins_do_not_matter() -> None:
    first, last = _windows(150)
    select, layout = np.arange(first.size), Layout(3, (0, 1, 2), (2, 2, 2))
    ratio = []
    for values in (_series("walk"), _series("walk") * [1e3, 1e-3, 5.0] + [7.0, -4.0, 100.0]):
        moments = _running(values, _terms(150), first, last)
        fit = fit_stack(
            moments, moments.gram(select, layout, 2), select, layout, 2, _regression(layout, 2)
        )
        ratio.append(fit.explained / fit.residual)
    np.testing.assert_allclose(ratio[0], ratio[1], rtol=1e-9)


@pytest.mark.parametrize("criterion", CRITERIA)
@pytest.mark.parametrize("whole", [True, False])
def test_criteria_choose_what_the_plain_twin_chooses(criterion: str, whole: bool) -> None:
    values, terms = _series("walk", 300), _terms(300)
    first = np.arange(0, 240, 4, dtype=np.int64)
    last = first + LENGTH - 1
    moments = _running(values, terms, first, last)
    select, layout = np.arange(first.size), Layout(3, (0, 1, 2), (LAGS,) * 3)
    gram = moments.gram(select, layout, LAGS)
    lagged = [layout.at(j, lag) for lag in range(1, LAGS + 1) for j in range(3)]
    current = [layout.at(j, 0) for j in (range(3) if whole else (1,))]
    order = np.array([0, 1, 2, *lagged, *current])
    fine = np.ones(first.size, bool)
    factor = factorise(moments, gram, select, layout, LAGS, order, fine)
    determinant = log_determinants(factor.lower, 3, len(current), LAGS)
    chosen = choose_order(determinant, gram.observations, 3, 3, len(current), criterion)
    for w in range(first.size):
        inside = slice(int(first[w]), int(last[w]) + 1)
        table, rows = plain_orders(
            values[inside], [], terms[inside], (0, LENGTH - 1), LAGS, effect=None if whole else 1
        )
        assert chosen[w] == plain_order(table, rows, 3, 3, len(current), criterion, 0.05)
        np.testing.assert_allclose(
            determinant[w] - determinant[w, 0], table - table[0], rtol=1e-8, atol=1e-9
        )
    if criterion == "AIC":
        assert np.unique(chosen).size > 1


def test_flags() -> None:
    """Too few rows, a series that stands still and collinear ones are told apart."""
    values = np.random.default_rng(1).standard_normal((150, 3))
    values[0:70, 0] = 2.5
    values[80:, 2] = 3 * values[80:, 0] + 1
    first = np.array([0, 88, 40, 75], dtype=np.int64)
    last = np.array([59, 147, 48, 149], dtype=np.int64)
    moments = _by_rows(values, _terms(150), first, last)
    select, layout = np.arange(4), Layout(3, (0, 1, 2), (2, 2, 2))
    regression = _regression(layout, 2)
    fit = fit_stack(moments, moments.gram(select, layout, 2), select, layout, 2, regression)
    for effect in range(2):
        assert fit.flag[:, effect].tolist() == [
            Flag.CONSTANT_SERIES, Flag.COLLINEAR, Flag.TOO_FEW_ROWS, Flag.FINE,
        ]  # fmt: skip
    assert np.isnan(fit.explained[:3]).all()
    assert np.isfinite(fit.explained[3]).all()


@pytest.mark.parametrize("rows", [18, 19, 20])
def test_one_degree_of_freedom_is_enough_for_each_of_two_effects(rows: int) -> None:
    """T = k + 1 rows hold one effect's residual each, though not both effects at once."""
    values, terms = _series("walk"), _terms(150)
    first, last = np.array([40], dtype=np.int64), np.array([40 + rows - 1], dtype=np.int64)
    layout, select = Layout(3, (0, 1, 2), (4, 4, 4)), np.arange(1)
    for source in (_running, _by_rows):
        moments = source(values, terms, first, last)
        regression, gram = _regression(layout, 4), moments.gram(select, layout, 4)
        fit = fit_stack(moments, gram, select, layout, 4, regression)
        k = regression.regressors
        assert (gram.observations[0], k) == (rows - 4, 15)
        for effect in range(2):
            if rows - 4 <= k:
                assert fit.flag[0, effect] == Flag.TOO_FEW_ROWS
                continue
            design = _design(values, terms, 40, 40 + rows - 1, 4)
            slow = plain_fit(design[:, k + effect], design[:, : k - 4], design[:, k - 4 : k])
            ratio = fit.explained[0, effect] / fit.residual[0, effect]
            wanted = slow.restricted_squares / slow.unrestricted_squares - 1
            assert ratio == pytest.approx(wanted, rel=1e-7)


def test_tails_follow_scipy_deep_into_the_tail() -> None:
    """Relative 1e-9 down to 1e-250; two independent codings of the incomplete beta and gamma."""
    statistic = np.array([0.0, 1e-8, 0.5, 3.0, 40.0, 300.0])
    np.testing.assert_allclose(
        f_tail(statistic, 4.0, 90.0), stats.f.sf(statistic, 4, 90), rtol=1e-9
    )
    np.testing.assert_allclose(
        chi_square_tail(statistic * 3, 5.0), stats.chi2.sf(statistic * 3, 5), rtol=1e-9
    )
    np.testing.assert_allclose(
        student_tail(statistic[:5], 60.0), 2 * stats.t.sf(statistic[:5], 60), rtol=1e-9
    )
    p = np.array([0.5, 1e-3, 1e-200, 0.0, 1.0])
    np.testing.assert_allclose(normal_tail_inverse(p)[:3], stats.norm.isf(p[:3]), rtol=1e-9)
    assert normal_tail_inverse(p)[3:].tolist() == [37.0, -37.0]
