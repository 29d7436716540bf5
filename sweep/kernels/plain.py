"""The slow, obvious twin of every kernel: one window, one regression, its rows, least squares.

Nothing here is shared with the fast kernels, so that agreement means something.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy import special

from sweep.kernels.layout import Floats, Ints
from sweep.kernels.longrun import LongRun, chosen_bandwidth, kernel_weights

__all__ = [
    "PlainFit", "plain_design", "plain_fit", "plain_long_run", "plain_order", "plain_orders",
    "plain_robust",
]  # fmt: skip


@dataclass(frozen=True, slots=True)
class PlainFit:
    """One regression by least squares on its rows.

    Attributes
    ----------
    restricted_squares, unrestricted_squares : float
        s0 and s1 in the effect's units squared.
    observations, regressors, restrictions : int
        T, k, q.
    coefficients : ndarray, shape (k,)
        Nuisance coefficients first, then the cause's lags in order.
    covariance : ndarray, shape (k, k)
        Classical covariance with s1/(T − k).
    design : ndarray, shape (t, k)
    residuals : ndarray, shape (t,)
    """

    restricted_squares: float
    unrestricted_squares: float
    observations: int
    regressors: int
    restrictions: int
    coefficients: Floats
    covariance: Floats
    design: Floats
    residuals: Floats

    @property
    def lag_coefficients(self) -> Floats:
        """Coefficients of the cause's lags, shape (q,)."""
        return self.coefficients[-self.restrictions :]

    @property
    def coefficient_sum(self) -> float:
        """Sum of the coefficients of the cause's lags."""
        return float(self.lag_coefficients.sum())

    @property
    def coefficient_sum_error(self) -> float:
        """Classical standard error of that sum."""
        q = self.restrictions
        return float(np.sqrt(self.covariance[-q:, -q:].sum()))


def plain_design(
    series: list[tuple[Floats, int, int]], terms: Floats, first: int, last: int, start: int
) -> tuple[Floats, np.ndarray]:
    """Stack the columns of a regression, row by row.

    Parameters
    ----------
    series : list of (values, from lag, to lag)
        Values are of shape (n,), on the window's own rows, NaN where they must not be used.
    terms : ndarray, shape (n, d)
        Deterministic columns.
    first, last : int
        Rows between which all series exist.
    start : int
        Rows left out after ``first``.

    Returns
    -------
    rows : ndarray, shape (t, d + lags)
        Complete rows only.
    which : ndarray of int, shape (t,)
        Their row numbers.
    """
    rows, which = [], []
    for t in range(first + start, last + 1):
        row = list(terms[t])
        for values, low, high in series:
            row.extend(values[t - lag] for lag in range(low, high + 1))
        if all(np.isfinite(row)):
            rows.append(row)
            which.append(t)
    return np.array(rows), np.array(which, dtype=np.int64)


def plain_fit(effect: Floats, nuisance: Floats, restricted: Floats) -> PlainFit:
    """Fit one equation with and without the cause's lags.

    Parameters
    ----------
    effect : ndarray, shape (t,)
    nuisance : ndarray, shape (t, k − q)
    restricted : ndarray, shape (t, q)

    Raises
    ------
    ValueError
        If the regressors are not of full rank on these rows.
    """
    design = np.column_stack([nuisance, restricted])
    size = np.sqrt((design**2).sum(axis=0))
    size[size == 0] = 1.0
    left, singular, right = np.linalg.svd(design / size, full_matrices=False)
    if singular[-1] < 1e-12 * singular[0] or design.shape[0] <= design.shape[1]:
        raise ValueError("the regressors are not of full rank on these rows")
    coefficients = (right.T @ ((left.T @ effect) / singular)) / size
    residuals = effect - design @ coefficients
    inverse = (right.T / singular**2) @ right / np.outer(size, size)
    s1 = float(residuals @ residuals)
    if nuisance.shape[1]:
        column = np.sqrt((nuisance**2).sum(axis=0))
        below = nuisance / np.where(column == 0, 1.0, column)
        without = effect - below @ np.linalg.lstsq(below, effect, rcond=None)[0]
    else:
        without = effect
    t, k = design.shape
    return PlainFit(
        float(without @ without), s1, t, k, restricted.shape[1], coefficients,
        inverse * (s1 / (t - k)), design, residuals,
    )  # fmt: skip


def plain_robust(fit: PlainFit, covariance: str) -> Floats:
    """Return the sandwich covariance of the cause's lag coefficients, shape (q, q).

    White (1980); MacKinnon & White (1985): HC0, HC1, HC2, HC3.  An observation that the
    nuisance regressors alone fit exactly, such as that of a pulse, says nothing of the
    cause's lags and is left out of the sum.

    Raises
    ------
    ValueError
        If the covariance does not exist because the cause's lags take part in fitting an
        observation exactly.
    """
    t, k, q = fit.observations, fit.regressors, fit.restrictions
    design = fit.design / np.sqrt((fit.design**2).sum(axis=0))
    left, singular, right = np.linalg.svd(design, full_matrices=False)
    estimator = ((right.T / singular) @ left.T)[-q:]
    estimator /= np.sqrt((fit.design**2).sum(axis=0))[-q:, None]
    leverage = (left**2).sum(axis=1)
    exact = leverage > 1 - 1e-10
    own = (np.linalg.qr(design)[0][:, k - q :] ** 2).sum(axis=1)
    if own[exact].max(initial=0.0) > (1e-8 if covariance in ("HC0", "HC1") else 1e-20):
        raise ValueError("an observation is fitted exactly")
    room = 1 - np.where(exact, 0.0, leverage)
    weight = {
        "HC0": np.ones(t),
        "HC1": np.full(t, t / (t - k)),
        "HC2": 1 / room,
        "HC3": 1 / room**2,
    }[covariance]
    weight[exact] = 0.0
    return np.asarray((estimator * (weight * fit.residuals**2)) @ estimator.T)


def plain_long_run(fit: PlainFit, how: LongRun, times: Ints, terms: int) -> Floats:
    """Return the autocorrelation-robust covariance of the cause's lag coefficients, (q, q).

    Sums over all pairs of rows: Σ_t Σ_s w(|t − s|) a_t a_s′ with a_t = (X′X)⁻¹x_t e_t what a row
    adds to the estimate and w the kernel's weight of the distance in time, 1 at zero; so that
    gaps need no grid.

    Parameters
    ----------
    fit : PlainFit
    how : LongRun
    times : ndarray of int, shape (t,)
        Period of each row.
    terms : int
        Deterministic terms, the first columns of the design.
    """
    t, k, q = fit.observations, fit.regressors, fit.restrictions
    bandwidth = chosen_bandwidth(how, fit.design[:, terms:], fit.residuals, times)
    weights = np.concatenate([[1.0], kernel_weights(how.kernel, bandwidth, int(np.ptp(times)) + 1)])
    distance = np.abs(times[:, None] - times)
    pairs = np.where(distance < weights.size, weights[np.minimum(distance, weights.size - 1)], 0.0)
    size = np.sqrt((fit.design**2).sum(axis=0))
    parts = (np.linalg.pinv(fit.design / size) * fit.residuals / size[:, None])[-q:]
    scale = t / (t - k) if how.small_sample else 1.0
    return np.asarray(parts @ pairs @ parts.T * scale)


def plain_orders(
    values: Floats,
    exogenous: list[tuple[Floats, int]],
    terms: Floats,
    bounds: tuple[int, int],
    maximum: int,
    *,
    effect: int | None = None,
    common: int = 0,
) -> tuple[Floats, int]:
    """Return ln|Σ_p| (T divisor, common sample) of p = 0…maximum and the rows T.

    Parameters
    ----------
    values : ndarray, shape (n, K)
        The equations' series on the window's rows.
    exogenous : list of (values, lags)
        Unmodelled series with terms 0…lags.
    terms : ndarray, shape (n, d)
    bounds : (int, int)
        Rows between which all series exist.
    maximum : int
        Largest order.
    effect : int or None
        The one equation that counts; None for all of them.
    common : int
        Order whose rows are used where it is larger than ``maximum``.
    """
    start = max([common, maximum, *(lags for _, lags in exogenous)])
    extra = [(column, 0, lags) for column, lags in exogenous]
    deepest = max(maximum, common)
    lags = [(values[:, j], 0, deepest) for j in range(values.shape[1])]
    rows, _ = plain_design([*extra, *lags], terms, bounds[0], bounds[1], start)
    fixed = terms.shape[1] + sum(lags + 1 for _, lags in exogenous)
    lagged = rows[:, fixed:].reshape(rows.shape[0], values.shape[1], deepest + 1)
    current = lagged[:, :, 0] if effect is None else lagged[:, [effect], 0]
    result = np.empty(maximum + 1)
    for order in range(maximum + 1):
        design = np.column_stack(
            [rows[:, :fixed], lagged[:, :, 1 : order + 1].reshape(rows.shape[0], -1)]
        )
        residual = current
        if design.shape[1]:
            residual = current - design @ np.linalg.lstsq(design, current, rcond=None)[0]
        result[order] = np.linalg.slogdet(residual.T @ residual / rows.shape[0])[1]
    return result, rows.shape[0]


def plain_order(
    log_determinant: Floats,
    rows: int,
    fixed: int,
    width: int,
    equations: int,
    criterion: str,
    level: float,
) -> int:
    """Choose an order among 1…m, one by one.

    Parameters
    ----------
    log_determinant : ndarray, shape (m + 1,)
    rows : int
        Rows T of the common sample.
    fixed, width : int
        Regressors of an equation beside the lags, and those that each lag adds.
    equations : int
        Equations that the determinant is of.
    criterion : str
    level : float
        Of the sequential test.
    """
    maximum = len(log_determinant) - 1
    if criterion == "sequential LR":
        for order in range(maximum, 1, -1):
            statistic = rows * (log_determinant[order - 1] - log_determinant[order])
            if special.chdtrc(width * equations, statistic) <= level:
                return order
        return 1
    best, chosen = np.inf, 0
    for order in range(1, maximum + 1):
        each = width * order + fixed
        coefficients = equations * each
        value = {
            "AIC": log_determinant[order] + 2 * coefficients / rows,
            "BIC": log_determinant[order] + np.log(rows) * coefficients / rows,
            "HQ": log_determinant[order] + 2 * np.log(np.log(rows)) * coefficients / rows,
            "FPE": log_determinant[order] + equations * np.log((rows + each) / (rows - each)),
        }[criterion]
        if value < best:
            best, chosen = value, order
    return chosen
