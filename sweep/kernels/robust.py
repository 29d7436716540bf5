"""Wald statistics of a stack with sandwich covariances.

With the orthonormal columns Q of a regression's factor, the estimate of the restricted
block is b = L_cc⁻ᵀ Q_cᵀy and its sandwich (White 1980; MacKinnon & White 1985) is
L_cc⁻ᵀ M L_cc⁻¹ with M = Q_cᵀ diag(ω e²) Q_c, so that

    b′V⁻¹b = (Q_cᵀy)′ M⁻¹ (Q_cᵀy).

ω is 1 (HC0), T/(T−k) (HC1), 1/(1−h) (HC2), 1/(1−h)² (HC3), h the leverage in the whole
regression.  Under autocorrelation M is the long-run covariance of the scores Q_cᵀe of
:mod:`sweep.kernels.longrun`, on the grid of time.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from sweep.kernels.layout import Floats, Ints, Layout, Moments
from sweep.kernels.longrun import (
    LongRun,
    chosen_bandwidth,
    kernel_weights,
    long_run,
    on_time_grid,
)
from sweep.kernels.stacks import Flag, Regression, Solver, StackFit, forward

__all__ = ["COVARIANCES", "RobustFit", "Sandwich", "robust_stack"]

Sandwich = str | LongRun

COVARIANCES = ("HC0", "HC1", "HC2", "HC3")
FULL_LEVERAGE = 1e-10
"""1 − h below which an observation counts as fitted exactly."""
ROUNDING = 1e-8
"""Share of the leverage below which e² times the restricted block's part in a row is nothing."""
NO_PART = 1e-20
"""The same where e² is divided by (1 − h)²: the square of what 1e-11 in the factor leaves of a
share that is zero, and so small that a row a million deviations off its prediction adds nothing."""
SINGULAR = 1e-5
"""Smallest pivot of the unit-diagonal sandwich that still gives digits: its square over ε."""


@dataclass(frozen=True, slots=True)
class RobustFit:
    """One covariance's Wald statistics.

    Attributes
    ----------
    wald : ndarray, shape (w, e)
        b′V⁻¹b, NaN where it does not exist.
    coefficient_sum_error : ndarray, shape (w, e)
        Standard error of the coefficient sum, standardised units.
    lag_errors : ndarray, shape (w, e, q)
        Standard errors of the single lag coefficients, standardised units.
    exact_row : ndarray of bool, shape (w,)
        Where the covariance does not exist because an observation is fitted exactly.
    """

    wald: Floats
    coefficient_sum_error: Floats
    lag_errors: Floats
    exact_row: np.ndarray


def robust_stack(
    moments: Moments,
    select: Ints,
    layout: Layout,
    start: int,
    regression: Regression,
    fit: StackFit,
    covariances: Sequence[Sandwich],
    effects: Sequence[int] | None = None,
) -> dict[Sandwich, RobustFit]:
    """Return Wald statistics for every sandwich covariance asked for.

    Parameters
    ----------
    moments, select, layout, start, regression
        As for :func:`sweep.kernels.stacks.fit_stack`.
    fit : StackFit
        Its result; windows flagged there stay NaN.
    covariances : sequence of str or LongRun
        Members of :data:`COVARIANCES`, or autocorrelation-robust ones.
    effects : sequence of int or None
        Positions on the axis e that are wanted, the others stay NaN; None for all.

    Returns
    -------
    dict of str or LongRun to RobustFit
    """
    count = select.size, regression.effects.size
    results: dict[Sandwich, RobustFit] = {
        name: RobustFit(
            np.full(count, np.nan),
            np.full(count, np.nan),
            np.full((*count, regression.restricted.size), np.nan),
            np.zeros(select.size, bool),
        )
        for name in covariances
    }
    wanted = range(regression.effects.size) if effects is None else effects
    fine = np.flatnonzero((fit.flag == Flag.FINE).any(axis=1))
    order = regression.order
    in_time = any(isinstance(name, LongRun) for name in covariances)
    times = moments.times(select, layout, start) if in_time else []
    stochastic = np.flatnonzero(order[: regression.regressors] >= layout.terms)
    for inside, rows in moments.design(select[fine], layout, start) if fine.size else []:
        members = fine[inside]
        for part in np.array_split(np.arange(members.size), _pieces(rows, members.size)):
            matrix = np.ascontiguousarray(rows[part][:, :, order])
            held = [times[w] for w in members[part].tolist()] if in_time else []
            _fill(matrix, fit, members[part], regression, results, wanted, held, stochastic)
    return results


def _pieces(rows: Floats, members: int) -> int:
    """Return how many pieces keep a stack's working rows near 16 MB."""
    return int(min(members, max(1, rows.nbytes // 2**24)))


def _fill(
    matrix: Floats,
    fit: StackFit,
    members: np.ndarray,
    regression: Regression,
    results: dict[Sandwich, RobustFit],
    effects: Sequence[int],
    times: list[Ints],
    stochastic: Ints,
) -> None:
    k, q = regression.regressors, regression.restricted.size
    basis = _orthonormal(matrix[:, :, :k], fit.lower[members], fit.solver[members] == Solver.QR, k)
    leverage = (basis**2).sum(axis=2)
    block = np.ascontiguousarray(basis[:, :, k - q :])
    own = (block**2).sum(axis=2)
    inverse = np.linalg.inv(fit.lower[members][:, k - q : k, k - q : k])
    direction = inverse.sum(axis=2)
    observed = matrix[:, :, k:]
    projection = basis.transpose(0, 2, 1) @ observed
    residuals = observed - basis @ projection
    squares = residuals**2
    for name, result in results.items():
        hetero = isinstance(name, str)
        weight, exact = _weight(name if isinstance(name, str) else "HC0", leverage, own, k)
        for effect in effects:
            if hetero:
                weighted = block * (weight * squares[:, :, effect])[:, :, None]
                middle = weighted.transpose(0, 2, 1) @ block
            else:
                assert isinstance(name, LongRun)
                middle = _over_time(
                    name, block, matrix[:, :, stochastic], residuals[:, :, effect], times, k
                )
            wald = _wald(middle, projection[:, k - q :, effect])
            error = np.sqrt((direction[:, None] @ middle @ direction[:, :, None])[:, 0, 0])
            sandwich = inverse.transpose(0, 2, 1) @ middle @ inverse
            lags = np.sqrt(np.einsum("wkk->wk", sandwich))
            without = exact | (fit.flag[members, effect] != Flag.FINE)
            wald[without], error[without], lags[without] = np.nan, np.nan, np.nan
            result.lag_errors[members, effect] = lags
            result.wald[members, effect] = wald
            result.coefficient_sum_error[members, effect] = error
        result.exact_row[members] |= exact


def _over_time(
    how: LongRun, block: Floats, regressors: Floats, residuals: Floats, times: list[Ints], k: int
) -> Floats:
    """Return the long-run covariance of the restricted block's scores, (w, q, q).

    Windows with one bandwidth and no gap go together; NaN where a rule gives no bandwidth.
    """
    count, rows, _ = regressors.shape
    scores = block * residuals[:, :, None]
    bandwidth = np.array(
        [
            chosen_bandwidth(how, regressors[w], residuals[w], times[w])
            for w in range(count)
        ]
        if isinstance(how.bandwidth, str)
        else [float(how.bandwidth)] * count
    )
    gaps = np.array([moments[-1] - moments[0] + 1 > rows for moments in times])
    middle = np.full((count, block.shape[2], block.shape[2]), np.nan)
    for value in np.unique(bandwidth[np.isfinite(bandwidth)]):
        together = np.flatnonzero((bandwidth == value) & ~gaps)
        if together.size:
            weights = kernel_weights(how.kernel, float(value), rows)
            middle[together] = long_run(scores[together], weights)
        for w in np.flatnonzero((bandwidth == value) & gaps).tolist():
            grid = on_time_grid(scores[w], times[w])
            weights = kernel_weights(how.kernel, float(value), grid.shape[0])
            middle[w] = long_run(grid[None], weights)[0]
    if how.small_sample:
        middle *= rows / (rows - k)
    return middle


def _orthonormal(columns: Floats, lower: Floats, by_qr: np.ndarray, k: int) -> Floats:
    """Return the orthonormal columns of each regression, shape (w, t, k)."""
    basis = np.empty_like(columns)
    plain = ~by_qr
    if plain.any():
        inverse = np.linalg.inv(lower[plain][:, :k, :k])
        basis[plain] = columns[plain] @ inverse.transpose(0, 2, 1)
    if by_qr.any():
        unitary, upper = np.linalg.qr(columns[by_qr])
        basis[by_qr] = unitary * np.where(np.einsum("wcc->wc", upper) < 0, -1.0, 1.0)[:, None, :]
    return basis


def _weight(name: str, leverage: Floats, own: Floats, k: int) -> tuple[Floats, np.ndarray]:
    """Return ω, shape (w, t), and where the covariance does not exist, shape (w,).

    Where the restricted block takes part in fitting a row exactly (``own``, its share of the
    leverage, is not zero), the squared residual of that row is rounding and nothing else, and
    HC2 and HC3 divide it by a 1 − h that is rounding too.  Where it takes no part, as in the
    row of a pulse, the row adds ω e² Q_cᵀQ_c = 0 to the sandwich, and ω is put to 1.
    """
    room = 1.0 - leverage
    fitted = room < FULL_LEVERAGE
    if name in ("HC0", "HC1"):
        scale = 1.0 if name == "HC0" else leverage.shape[1] / (leverage.shape[1] - k)
        lost = np.any(fitted & (own > ROUNDING), axis=1)
        return np.full_like(leverage, scale), np.asarray(lost)
    room = np.where(fitted, 1.0, room)
    lost = np.any(fitted & (own > NO_PART), axis=1)
    return room ** (-1.0 if name == "HC2" else -2.0), np.asarray(lost)


def _wald(middle: Floats, projection: Floats) -> Floats:
    """Return b′V⁻¹b, shape (w,), NaN where V is singular or does not exist."""
    wald = np.full(middle.shape[0], np.nan)
    there = np.flatnonzero(np.isfinite(middle).all(axis=(1, 2)))
    if there.size:
        _solve_into(middle, projection, wald, there)
    return wald


def _solve_into(middle: Floats, projection: Floats, wald: Floats, members: np.ndarray) -> None:
    """Solve the members of a stack, halving it around those that are singular."""
    try:
        factor = np.linalg.cholesky(middle[members])
    except np.linalg.LinAlgError:
        if members.size == 1:
            return
        half = members.size // 2
        _solve_into(middle, projection, wald, members[:half])
        _solve_into(middle, projection, wald, members[half:])
        return
    length = np.sqrt(np.einsum("wii->wi", middle[members]))
    pivots = (np.einsum("wii->wi", factor) / length).min(axis=1)
    found = (forward(factor, projection[members]) ** 2).sum(axis=1)
    wald[members] = np.where(pivots > SINGULAR, found, np.nan)
