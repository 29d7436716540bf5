"""Lag orders by criterion, all orders of a window from one factor.

The columns are ordered [terms and exogenous | lag 1 of all | … | lag m of all | current
values], so the residual cross products of every order are partial sums of squares of the
last block's rows: S_p = L_yy L_yyᵀ + Σ_{columns past lag p} ℓ ℓᵀ, added up from the largest
order down, where nothing cancels.

With Σ_p = S_p/T on the common sample, m_p = p·K² + K·d coefficients (Lütkepohl 2005,
section 4.3, who leaves d out; the choice is the same):

    AIC ln|Σ_p| + 2 m_p/T      HQ ln|Σ_p| + 2 m_p ln ln T / T      BIC ln|Σ_p| + m_p ln T / T
    FPE ((T + n)/(T − n))^K |Σ_p|, n = K p + d
    sequential LR: from m down, T(ln|Σ_{p−1}| − ln|Σ_p|) on χ²(K²), the first that rejects

With ``equations = 1`` the same formulas hold for the effect's equation alone.
"""

from __future__ import annotations

import numpy as np

from sweep.kernels.layout import Floats, Ints
from sweep.kernels.tails import chi_square_tail

__all__ = ["CRITERIA", "choose_order", "criterion_table", "log_determinants"]

CRITERIA = ("AIC", "BIC", "HQ", "FPE", "sequential LR")


def log_determinants(lower: Floats, fixed: int, equations: int, maximum: int) -> Floats:
    """Return ln|S_p| of the residual cross products, p = 0…maximum.

    Parameters
    ----------
    lower : ndarray, shape (w, c, c)
        Lower factor of the Gram ordered as in the module's text, unit diagonal.
    fixed : int
        Columns before the first lag.
    equations : int
        Equations K (columns of the last block).
    maximum : int
        Largest order m.

    Returns
    -------
    ndarray, shape (w, maximum + 1)
        Up to a constant of the window that all orders share; NaN where the factor is NaN.
    """
    width = (lower.shape[1] - fixed - equations) // maximum
    block = lower[:, -equations:]
    corner = block[:, :, -equations:]
    products = corner @ corner.transpose(0, 2, 1)
    result = np.empty((lower.shape[0], maximum + 1))
    for order in range(maximum, -1, -1):
        result[:, order] = _log_determinant(products)
        if order:
            lag = block[:, :, fixed + (order - 1) * width : fixed + order * width]
            products = products + lag @ lag.transpose(0, 2, 1)
    return result


def _log_determinant(products: Floats) -> Floats:
    with np.errstate(invalid="ignore"):  # windows without a factor are NaN throughout
        sign, value = np.linalg.slogdet(products)
    return np.where(sign > 0, value, np.nan)


def criterion_table(
    log_determinant: Floats,
    observations: Ints,
    fixed: int,
    width: int,
    equations: int,
    criterion: str,
) -> Floats:
    """Return the criterion of every order (column p is order p; smaller is better).

    Parameters
    ----------
    log_determinant : ndarray, shape (w, m + 1)
        ln|Σ_p| up to a constant of the window.
    observations : ndarray of int, shape (w,)
        Rows T of the common sample.
    fixed : int
        Deterministic and exogenous regressors d of each equation.
    width : int
        Regressors that each lag adds to an equation.
    equations : int
        Equations K: all of the system, or 1 for the effect's equation alone.
    criterion : str
        ``AIC``, ``BIC``, ``HQ`` or ``FPE`` (the logarithm of FPE).

    Returns
    -------
    ndarray, shape (w, m + 1)
    """
    orders = np.arange(log_determinant.shape[1])
    rows = observations[:, None].astype(float)
    regressors = width * orders + fixed
    if criterion == "FPE":
        with np.errstate(divide="ignore", invalid="ignore"):
            penalty = equations * np.log((rows + regressors) / (rows - regressors))
        return np.asarray(log_determinant + penalty)
    weight = {"AIC": 2.0, "BIC": np.log(rows), "HQ": 2.0 * np.log(np.log(rows))}[criterion]
    return np.asarray(log_determinant + weight * equations * regressors / rows)


def choose_order(
    log_determinant: Floats,
    observations: Ints,
    fixed: int,
    width: int,
    equations: int,
    criterion: str,
    level: float = 0.05,
) -> Ints:
    """Return the chosen order of each window, among 1…m (never 0).

    Parameters
    ----------
    log_determinant, observations, fixed, width, equations, criterion
        As for :func:`criterion_table`; also ``sequential LR``.
    level : float
        Level of the sequential test.

    Returns
    -------
    ndarray of int, shape (w,)
        0 where the window has no factor.
    """
    if criterion == "sequential LR":
        chosen = _general_to_specific(log_determinant, observations, width * equations, level)
    else:
        table = criterion_table(log_determinant, observations, fixed, width, equations, criterion)[
            :, 1:
        ]
        table = np.where(np.isfinite(table), table, np.inf)
        chosen = table.argmin(axis=1) + 1
    return np.where(np.isfinite(log_determinant).all(axis=1), chosen, 0).astype(np.int64)


def _general_to_specific(log_determinant: Floats, rows: Ints, df: int, level: float) -> Ints:
    statistic = rows[:, None] * (log_determinant[:, :-1] - log_determinant[:, 1:])
    rejects = chi_square_tail(np.maximum(statistic, 0.0), float(df)) <= level
    orders = np.arange(1, rejects.shape[1] + 1)
    return np.asarray(np.where(rejects, orders, 1).max(axis=1), dtype=np.int64)
