"""One specification by statsmodels, on rows that pandas built: for `verify`.

Shares with the fast path the reading of the data file and of the plan, nothing else.
"""

from __future__ import annotations

import warnings
from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from sweep.engine.outside_rows import (
    CONSTANT,
    OutsideChoices,
    Panel,
    Rows,
    dates_there,
    panel_of,
    rows_of,
    term_frame,
)
from sweep.engine.prepare import Prepared
from sweep.engine.reasons import Reason
from sweep.kernels.longrun import chosen_bandwidth, kernel_weights
from sweep.plan.choices import LagChoice, ProcedureChoice
from sweep.plan.model import scale_of

__all__ = ["OutsideDirection", "obstacles", "outside"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

FREEDOM = 20
"""Degrees of freedom that a criterion's largest order leaves, as the README says."""
RANK = 1e-6
"""A smallest singular value of unit columns below it confirms that they are collinear.

Regressions are refused at a pivot of 1e-9, which is no smaller than the singular value."""
EXACT = 1e-6
FULL = 1.0 - 1e-6
SINGULAR = 1e-6
RECIPROCAL = ("HC2", "HC3")
"""Covariances that divide by 1 − h."""
NO_PART = 1e-22
"""Share of the cause's lags in fitting a row below which the row says nothing of them."""


@dataclass(frozen=True, slots=True)
class OutsideDirection:
    """Numbers of one direction, units as in the store.

    Attributes
    ----------
    order, observations, df_num : int
    df_den : int or None
    statistic, p_value : float
    coefficient_sum, coefficient_sum_error : float
    partial_r2 : float
        Unsigned.
    standardised_sum : float
    lag_values, lag_errors : ndarray, shape (q,)
    """

    order: int
    observations: int
    df_num: int
    df_den: int | None
    statistic: float
    p_value: float
    coefficient_sum: float
    coefficient_sum_error: float
    partial_r2: float
    standardised_sum: float
    lag_values: Floats
    lag_errors: Floats


def outside(prepared: Prepared, chosen: OutsideChoices) -> dict[bool, OutsideDirection | None]:
    """Estimate both directions of a specification.

    Returns
    -------
    mapping of bool to OutsideDirection or None
        False for cause to effect, True for the reverse; None where no order can be chosen or
        there are no more rows than regressors.
    """
    panel = panel_of(prepared, chosen)
    found: dict[bool, OutsideDirection | None] = {}
    orders: tuple[int, int, int] | None = None
    for reverse in (False, True):
        if not reverse or chosen.lags.scope == "equation":
            orders = _orders(prepared, chosen, panel, reverse=reverse)
        found[reverse] = None
        if orders is None:
            continue
        rows = rows_of(prepared, chosen, panel, orders, reverse=reverse)
        if len(rows.effect) > rows.regressors:
            found[reverse] = _estimate(rows, chosen.procedure)
    return found


def obstacles(prepared: Prepared, chosen: OutsideChoices, *, reverse: bool) -> set[Reason]:
    """Return every reason why a direction cannot have a number, as its rows show."""
    dates = dates_there(prepared, chosen)
    if not dates:
        return {Reason.NO_DATES}
    panel = panel_of(prepared, chosen)
    found = {Reason.FILTER_EPISODE} if panel.filtered_across else set()
    if chosen.window.length > dates:
        found.add(Reason.LONGER_THAN_SAMPLE)
    scales = {scale_of(chosen.scale, role, chosen.columns[role]) for role in chosen.series}
    if chosen.procedure.extra_lags and not scales <= {"level", "log"}:
        found.add(Reason.AUGMENTED_SCALE)
    orders = _orders(prepared, chosen, panel, reverse=reverse)
    if orders is None:
        orders = (1, 1, 1)
        found.add(Reason.SHORT_FOR_CRITERION)
    rows = rows_of(prepared, chosen, panel, orders, reverse=reverse)
    if len(rows.effect) <= rows.regressors:
        return found | {Reason.TOO_FEW_ROWS}
    if _idle(rows.terms.to_numpy(), constant=rows.constant) or (
        chosen.lags.criterion and _idle_terms(prepared, chosen, panel)
    ):
        found.add(Reason.TERM)
    if (np.ptp(panel.values.loc[rows.effect.index], axis=0) == 0).any():
        found.add(Reason.CONSTANT_SERIES)
    design = _standard(rows.right_hand_side(), constant=rows.constant)
    if _smallest(design) < RANK:
        return found | {Reason.COLLINEAR}
    left = np.linalg.qr(design)[0]
    effect = rows.effect.to_numpy()
    effect = effect - effect.mean() if rows.constant else effect
    residual = effect - left @ (left.T @ effect)
    if np.linalg.norm(residual) < EXACT * np.linalg.norm(effect):
        found.add(Reason.EXACT_FIT)
    if chosen.procedure.covariance != "classical":
        own = (left[:, -rows.cause.shape[1] :] ** 2).sum(axis=1)
        part = NO_PART if chosen.procedure.covariance in RECIPROCAL else RANK
        if ((left**2).sum(axis=1) > FULL)[own > part].any():
            found.add(Reason.LEVERAGE)
        # A long-run covariance is as good as singular where White's is, or by its weights.
        if chosen.procedure.covariance == "HAC" or _singular(
            left[:, -rows.cause.shape[1] :], residual
        ):
            found.add(Reason.NO_COVARIANCE)
    return found


def _singular(basis: Floats, residual: Floats) -> bool:
    """Say whether the sandwich of the cause's lags, in an orthonormal basis, has no inverse."""
    middle = (basis * (residual**2)[:, None]).T @ basis
    length = np.sqrt(np.diag(middle))
    if (length == 0).any():
        return True
    return bool(np.linalg.eigvalsh(middle / np.outer(length, length))[0] < SINGULAR)


def _length(columns: Floats) -> Floats:
    size = np.sqrt((columns**2).sum(axis=0))
    return np.where(size > 0, size, 1.0)


def _idle(terms: Floats, *, constant: bool) -> bool:
    """Say whether a term adds nothing to the others and a constant."""
    if not constant:
        terms = np.column_stack([np.ones(len(terms)), terms])
    return _smallest(terms) < RANK


def _smallest(columns: Floats) -> float:
    """Return the smallest singular value of the columns at unit length, 1 for none."""
    if not columns.shape[1]:
        return 1.0
    return float(np.linalg.svd(columns / _length(columns), compute_uv=False)[-1])


# -- the order ------------------------------------------------------------------------------


def _orders(
    prepared: Prepared, chosen: OutsideChoices, panel: Panel, *, reverse: bool
) -> tuple[int, int, int] | None:
    """Return the lags of effect, cause and given series, None where a criterion finds none."""
    choice = chosen.lags
    if not choice.criterion:
        return choice.own, choice.cause, choice.given
    found = _largest(prepared, chosen, panel)
    if found is None:
        return None
    series = chosen.series
    equations = [series[1 if reverse else 0]] if choice.scope == "equation" else series
    order = _best(choice, *found, equations)
    return order, order, order


def _largest(
    prepared: Prepared, chosen: OutsideChoices, panel: Panel
) -> tuple[pd.DataFrame, dict[int, pd.DataFrame], int] | None:
    """Return the regressors beside the lags, the lags, and the largest order considered."""
    for maximum in range(chosen.lags.maximum, 0, -1):
        fixed, lags = _criterion_rows(prepared, chosen, panel, maximum)
        if len(fixed) - fixed.shape[1] - maximum * len(chosen.series) >= FREEDOM:
            return fixed, lags, maximum
    return None


def _idle_terms(prepared: Prepared, chosen: OutsideChoices, panel: Panel) -> bool:
    """Say whether the deterministic terms are collinear on the rows of a criterion."""
    width = term_frame(prepared, chosen, panel.values.index).shape[1]
    found = _largest(prepared, chosen, panel)
    widest, _ = _criterion_rows(prepared, chosen, panel, chosen.lags.maximum)
    frames = [widest, *([found[0]] if found else [])]
    return any(_smallest(frame.to_numpy()[:, :width]) < RANK for frame in frames)


def _criterion_rows(
    prepared: Prepared, chosen: OutsideChoices, panel: Panel, maximum: int
) -> tuple[pd.DataFrame, dict[int, pd.DataFrame]]:
    """Return the regressors beside the lags, and all series by lag, on an order's rows."""
    deepest = max(maximum, chosen.lags.common)
    lags = {lag: panel.values[chosen.series].shift(lag) for lag in range(deepest + 1)}
    unmodelled = {
        (item.series, lag): panel.values[item.series].shift(lag)
        for item in chosen.finding.exogenous
        for lag in range(item.lags + 1)
    }
    terms = term_frame(prepared, chosen, panel.values.index)
    fixed = pd.concat([terms, pd.DataFrame(unmodelled, index=terms.index)], axis=1)
    complete = fixed.notna().all(axis=1)
    for frame in lags.values():
        complete &= frame.notna().all(axis=1)
    complete &= panel.begun(max([deepest, *(item.lags for item in chosen.finding.exogenous)]))
    return fixed[complete], {lag: frame[complete] for lag, frame in lags.items()}


def _best(
    choice: LagChoice,
    fixed: pd.DataFrame,
    lags: dict[int, pd.DataFrame],
    maximum: int,
    equations: list[str],
) -> int:
    """Choose among 1…maximum by determinants of OLS residuals."""
    from scipy import stats

    determinant = [_log_determinant(fixed, lags, equations, p) for p in range(maximum + 1)]
    count, width, many = len(fixed), lags[0].shape[1], len(equations)
    if choice.criterion == "sequential LR":
        for order in range(maximum, 1, -1):
            statistic = count * (determinant[order - 1] - determinant[order])
            if stats.chi2.sf(statistic, width * many) <= choice.level:
                return order
        return 1
    penalty = {"AIC": 2.0, "BIC": np.log(count), "HQ": 2.0 * np.log(np.log(count))}
    value = {}
    for order in range(1, maximum + 1):
        each = fixed.shape[1] + width * order
        if choice.criterion == "FPE":
            value[order] = determinant[order] + many * np.log((count + each) / (count - each))
        else:
            value[order] = determinant[order] + penalty[choice.criterion] * many * each / count
    return min(value, key=lambda order: float(value[order]))


def _log_determinant(
    fixed: pd.DataFrame, lags: dict[int, pd.DataFrame], equations: list[str], order: int
) -> float:
    import statsmodels.api as sm

    current: Floats = lags[0][equations].to_numpy()
    design = np.column_stack([fixed, *(lags[lag] for lag in range(1, order + 1))])
    constant = CONSTANT in fixed
    residual = current - current.mean(axis=0) if constant else current
    if design.shape[1]:
        # One fit for all equations: the effect may have several columns.
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            residual = sm.OLS(residual, _standard(design, constant=constant)).fit().resid
    residual = np.reshape(residual, current.shape)
    return float(np.linalg.slogdet(residual.T @ residual / len(current))[1])


# -- the regression -------------------------------------------------------------------------


def _standard(columns: Floats, *, constant: bool) -> Floats:
    """Scale columns to unit length, centred where a constant spans the same space."""
    if constant:
        moved = columns - columns.mean(axis=0)
        still = np.ptp(columns, axis=0) == 0
        columns = np.where(still, columns, moved)
    return columns / _length(columns)


def _estimate(rows: Rows, procedure: ProcedureChoice) -> OutsideDirection:
    """Fit with and without the cause's lags, and test them as the entry says."""
    q, k = rows.cause.shape[1], rows.regressors
    columns = rows.right_hand_side()
    design = _standard(columns, constant=rows.constant)
    effect: Floats = np.asarray(rows.effect - rows.effect.mean() * rows.constant)
    with warnings.catch_warnings():
        # statsmodels warns of poor conditioning, which comparing the numbers finds out.
        warnings.simplefilter("ignore")
        full, restricted = _fits(effect, design, procedure, q)
        covariance = _over_time(full, columns[:, rows.terms.shape[1] :], rows.times, procedure)
        statistic, p_value, df_den = _tested(full, restricted, procedure, q, covariance)
        # Back to raw units: a coefficient of a column divided by the column's length.
        size = _length(columns - columns.mean(axis=0) if rows.constant else columns)[k - q :]
        weights = np.zeros((q, k))
        weights[np.arange(q), k - q + np.arange(q)] = 1.0 / size
        total = full.t_test(weights.sum(axis=0), cov_p=covariance)
        single = full.t_test(weights, cov_p=covariance)
    s0 = float(restricted @ restricted)
    spread = rows.current.std(ddof=0)
    coefficient_sum = float(np.squeeze(total.effect))
    return OutsideDirection(
        q, len(effect), q, df_den, statistic, p_value, coefficient_sum,
        float(np.squeeze(total.sd)), (s0 - float(full.ssr)) / s0,
        coefficient_sum * float(spread.iloc[0] / spread.iloc[1]),
        np.reshape(np.asarray(single.effect, dtype=np.float64), q),
        np.reshape(np.asarray(single.sd, dtype=np.float64), q),
    )  # fmt: skip


def _fits(
    effect: Floats, design: Floats, procedure: ProcedureChoice, q: int
) -> tuple[Any, Floats]:
    """Return the unrestricted fit, and the residuals of the restricted one."""
    import statsmodels.api as sm

    own = procedure.covariance in ("classical", "HAC")  # HAC takes gaps in time: see below
    kind = "nonrobust" if own else procedure.covariance
    kept = _spared(design, q) if kind in RECIPROCAL else np.ones(len(effect), bool)
    full = sm.OLS(effect[kept], design[kept]).fit(cov_type=kind, use_t=True)
    if design.shape[1] == q:
        return full, effect
    return full, np.asarray(sm.OLS(effect, design[:, :-q]).fit().resid)


def _spared(design: Floats, q: int) -> NDArray[np.bool_]:
    """Say which rows to keep: those of a pulse, where 1 − h is zero and so is e, say nothing.

    What is left has one row and one rank less for each, so the same degrees of freedom.
    """
    left = np.linalg.qr(design)[0]
    own, whole = (left[:, -q:] ** 2).sum(axis=1), (left**2).sum(axis=1)
    return np.asarray((whole < 1.0 - 1e-10) | (own > NO_PART))


def _over_time(
    full: Any, columns: Floats, times: Ints, procedure: ProcedureChoice
) -> Floats | None:
    """Return the autocorrelation-robust covariance by statsmodels' sums over lags.

    Rows that are missing stand in the scores as zeros, so that no gap closes up.
    """
    how = procedure.sandwich
    if isinstance(how, str):
        return None
    from statsmodels.stats.sandwich_covariance import S_hac_simple

    residuals, design = np.asarray(full.resid), full.model.exog
    weights = kernel_weights(
        how.kernel, chosen_bandwidth(how, columns, residuals, times), int(np.ptp(times)) + 1
    )
    # The sums are of what each row adds to the estimate, (X′X)⁻¹x_t e_t, not of x_t e_t: the
    # inverse is then not taken twice, which costs digits.
    parts = np.zeros((int(np.ptp(times)) + 1, design.shape[1]))
    parts[times - times[0]] = np.asarray(full.model.pinv_wexog).T * residuals[:, None]
    every = np.concatenate([[1.0], weights])
    found = S_hac_simple(parts, nlags=weights.size, weights_func=lambda _: every)
    return np.asarray(found * (full.nobs / full.df_resid if how.small_sample else 1.0))


def _tested(
    full: Any, restricted: Floats, procedure: ProcedureChoice, q: int, covariance: Floats | None
) -> tuple[float, float, int | None]:
    """Return statistic, p-value and denominator degrees of freedom by statsmodels' own tests."""
    import statsmodels.api as sm
    from scipy import stats

    count, freedom, k = int(full.nobs), int(full.df_resid), full.model.exog.shape[1]
    block = np.eye(k)[k - q :]
    statistic = procedure.form or procedure.statistic
    if statistic == "F":
        found = full.f_test(block, cov_p=covariance)
        return float(np.squeeze(found.fvalue)), float(found.pvalue), freedom
    if statistic == "Wald" and procedure.divisor != "T":
        found = full.wald_test(block, cov_p=covariance, use_f=False, scalar=True)
        return float(found.statistic), float(found.pvalue), None
    if statistic == "LM":
        # T times the uncentred R² of the restricted residuals on all regressors.
        value = count * float(sm.OLS(restricted, full.model.exog).fit().rsquared)
    elif statistic == "LR":
        # Twice the difference of two Gaussian log-likelihoods, s0/T and s1/T their variances.
        spread = float(restricted @ restricted) / count
        value = 2.0 * float(full.llf) + count * (np.log(2.0 * np.pi * spread) + 1.0)
    else:
        value = float(full.f_test(block).fvalue) * q * count / freedom
    return value, float(stats.chi2.sf(value, q)), None
