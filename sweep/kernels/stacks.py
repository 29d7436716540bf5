"""Regressions of a whole stack of windows by one factor each.

The columns of a regression are ordered [terms, own and conditioning lags | lags of the
cause | effects].  With the unit-diagonal Gram G = L Lᵀ of that order,

    s1 = squared rows of the last block of L,      (unrestricted sum of squares)
    s0 = s1 + |L_yc|²                              (restricted: lags of the cause left out)

so one factor answers the hypothesis for every effect that shares the right-hand side, and
s0 − s1 is never a difference of nearly equal numbers (Golub & Van Loan 2013, section 5.3,
for least squares by an orthogonal factor; the Cholesky factor is its transpose up to sign).
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum

import numpy as np

from sweep.kernels.layout import Floats, Gram, Ints, Layout, Moments

__all__ = [
    "Factor",
    "Flag",
    "Regression",
    "Solver",
    "StackFit",
    "factorise",
    "fit_stack",
    "forward",
]

EPSILON = float(np.finfo(np.float64).eps)
QR_TRIGGER = 1e-11
"""Bound on ε·ρ/π past which a window is redone by QR (see :func:`_needs_qr`)."""
COLLINEAR = 1e-9
"""Smallest pivot of the unit-diagonal triangular factor that counts as full rank."""


class Flag(IntEnum):
    """Why a window of a stack has no numbers."""

    FINE = 0
    TOO_FEW_ROWS = 1
    CONSTANT_SERIES = 2
    COLLINEAR = 3
    EXACT_FIT = 4


class Solver(IntEnum):
    """Which factorisation a number comes from."""

    NONE = 0
    CHOLESKY = 1
    QR = 2


@dataclass(frozen=True, slots=True)
class Regression:
    """Which columns of a layout stand where.

    Attributes
    ----------
    nuisance : ndarray of int
        Terms, own lags, conditioning lags, exogenous terms.
    restricted : ndarray of int, shape (q,)
        Lags of the cause, in order of lag.
    effects : ndarray of int, shape (e,)
        Current values of the effects.
    cause : int
        Current value of the cause (for its spread over the rows).
    """

    nuisance: Ints
    restricted: Ints
    effects: Ints
    cause: int

    @property
    def order(self) -> Ints:
        """Columns in the order of the factor."""
        return np.concatenate([self.nuisance, self.restricted, self.effects])

    @property
    def regressors(self) -> int:
        """Regressors k of the unrestricted equation."""
        return int(self.nuisance.size + self.restricted.size)


@dataclass(frozen=True, slots=True)
class StackFit:
    """Sums of squares and coefficient sums of a stack.

    Attributes
    ----------
    explained : ndarray, shape (w, e)
        s0 − s1, standardised units of the moments squared.
    residual : ndarray, shape (w, e)
        s1 in the same units.
    observations : ndarray of int, shape (w,)
        Regression rows T.
    regressors, restrictions : int
        k and q.
    coefficient_sum : ndarray, shape (w, e)
        Sum S of the lag coefficients of the cause, standardised units of the moments.
    coefficient_sum_error : ndarray, shape (w, e)
        Its classical standard error, with s1/(T − k).
    spread_ratio : ndarray, shape (w, e)
        Standard deviation of the cause over that of the effect on the regression rows.
    lower : ndarray, shape (w, k + e, k + e)
        Lower factor of the ordered products, NaN where flagged.
    solver : ndarray of int, shape (w,)
        :class:`Solver` of each window.
    flag : ndarray of int, shape (w, e)
        :class:`Flag` of each window and effect.
    """

    explained: Floats
    residual: Floats
    observations: Ints
    regressors: int
    restrictions: int
    coefficient_sum: Floats
    coefficient_sum_error: Floats
    spread_ratio: Floats
    lower: Floats
    solver: Ints
    flag: Ints

    def lag_coefficients(self, effect: int) -> tuple[Floats, Floats]:
        """Return the cause's lag coefficients of one effect and their classical errors.

        Parameters
        ----------
        effect : int
            Position on the axis e.

        Returns
        -------
        values, errors : ndarray, shape (w, q)
            Standardised units; b = L_cc⁻ᵀ l_yc and se_j² = s1/(T−k) · (L_cc⁻ᵀ L_cc⁻¹)_jj.
        """
        k, q = self.regressors, self.restrictions
        fine = self.flag[:, effect] == Flag.FINE
        inverse = _inverse(self.lower[:, k - q : k, k - q : k], fine)
        values = np.einsum("wij,wi->wj", inverse, self.lower[:, k + effect, k - q : k])
        freedom = np.maximum(self.observations - k, 1)
        variance = self.residual[:, effect] / freedom
        return values, np.sqrt(variance[:, None] * (inverse**2).sum(axis=1))


def fit_stack(
    moments: Moments, gram: Gram, select: Ints, layout: Layout, start: int, regression: Regression
) -> StackFit:
    """Fit one right-hand side in every selected window.

    Parameters
    ----------
    moments : Moments
        Source of the rows for windows that need QR.
    gram : Gram
        Cross products of ``layout`` for the selected windows.
    select : ndarray of int, shape (w,)
        Windows of ``moments``.
    layout : Layout
        Columns of ``gram``.
    start : int
        Rows left out after the first usable one.
    regression : Regression
        Which columns stand where.

    Returns
    -------
    StackFit
        NaN in every number of a window and effect whose flag is not ``FINE``.
    """
    k = regression.regressors
    enough = gram.observations > k
    factor = factorise(
        moments, gram, select, layout, start, regression.order, enough,
        effects=regression.effects.size,
    )  # fmt: skip
    lower, solver = factor.lower, factor.solver
    flag = np.where(factor.pivots[:, k:] > COLLINEAR, Flag.FINE, Flag.EXACT_FIT).astype(np.int64)
    flag[~(factor.pivots[:, :k].min(axis=1) > COLLINEAR)] = Flag.COLLINEAR
    bad = flag != Flag.FINE
    if bad.any():
        flag[bad & _constant_series(gram, layout)[:, None]] = Flag.CONSTANT_SERIES
        flag[~enough] = Flag.TOO_FEW_ROWS
        nothing = bad.all(axis=1)
        lower[nothing], solver[nothing] = np.nan, Solver.NONE
    return _read_factor(gram, regression, lower, solver, flag)


@dataclass(frozen=True, slots=True)
class Factor:
    """Lower factors of a stack.

    Attributes
    ----------
    lower : ndarray, shape (w, c, c)
        Factor of the ordered products, NaN where it was not asked for.
    pivots : ndarray, shape (w, c)
        Pivots of the factor of unit-length columns, NaN likewise; of an effect, what is left
        of it given the regressors alone.
    solver : ndarray of int, shape (w,)
        :class:`Solver` of each window.
    """

    lower: Floats
    pivots: Floats
    solver: Ints


def factorise(
    moments: Moments,
    gram: Gram,
    select: Ints,
    layout: Layout,
    start: int,
    order: Ints,
    usable: np.ndarray,
    effects: int = 0,
) -> Factor:
    """Factor the ordered columns of every usable window, by QR where the trigger says.

    Parameters
    ----------
    moments, gram, select, layout, start
        As for :func:`fit_stack`.
    order : ndarray of int, shape (c,)
        Columns of the layout in the order of the factor.
    usable : ndarray of bool, shape (w,)
        Windows with enough rows.
    effects : int
        How many of the last columns are effects of regressions of their own.

    Returns
    -------
    Factor
    """
    # Picking columns may turn an array's memory about, and with it the order of later sums.
    products = np.ascontiguousarray(gram.products[:, order[:, None], order])
    norms = np.sqrt(np.maximum(np.einsum("wcc->wc", products), 0.0))
    lower = _cholesky(products, usable)
    with np.errstate(divide="ignore", invalid="ignore"):
        pivots = _lengths(lower, effects) / norms
    solver = np.where(usable, Solver.CHOLESKY, Solver.NONE).astype(np.int64)
    redo = usable & _needs_qr(pivots, gram.cancellation[:, order])
    if redo.any():
        members = np.flatnonzero(redo)
        _redo_by_qr(moments, select, layout, start, order, members, lower, pivots, effects)
        solver[redo] = Solver.QR
    return Factor(lower, pivots, solver)


def _lengths(lower: Floats, effects: int) -> Floats:
    """Return what each column adds to those before it, shape (w, c); effects do not count."""
    lengths: Floats = np.einsum("wcc->wc", lower).copy()
    if effects > 1:  # the first effect has nothing but regressors before it
        block = lower[:, -effects:, -effects:]
        lengths[:, -effects:] = np.sqrt(np.einsum("wef,wef->we", block, block))
    return lengths


def _cholesky(products: Floats, usable: np.ndarray) -> Floats:
    """Return lower factors, NaN where there is none."""
    if usable.all():
        try:
            return np.asarray(np.linalg.cholesky(products), dtype=np.float64)
        except np.linalg.LinAlgError:
            pass
    lower = np.full_like(products, np.nan)
    _factor_into(products, lower, np.flatnonzero(usable))
    return lower


def _factor_into(products: Floats, lower: Floats, members: np.ndarray) -> None:
    """Factor the members of a stack, halving it around those that have no factor."""
    if not members.size:
        return
    try:
        lower[members] = np.linalg.cholesky(products[members])
    except np.linalg.LinAlgError:
        if members.size == 1:
            return
        half = members.size // 2
        _factor_into(products, lower, members[:half])
        _factor_into(products, lower, members[half:])


def _needs_qr(pivots: Floats, cancellation: Floats) -> np.ndarray:
    """Say where ε·ρ/π exceeds the trigger.

    ρ is the largest ratio of a running sum's diagonal to the window's, π the smallest
    squared pivot of the unit-diagonal factor.  The factor's condition alone does not see
    cancellation.
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        bound = EPSILON * cancellation.max(axis=1) / pivots.min(axis=1) ** 2
    return np.asarray(~(bound <= QR_TRIGGER))


def _redo_by_qr(
    moments: Moments,
    select: Ints,
    layout: Layout,
    start: int,
    order: Ints,
    members: np.ndarray,
    lower: Floats,
    pivots: Floats,
    effects: int,
) -> None:
    """Replace the factors of some windows by QR on their rows, in place."""
    for inside, rows in moments.design(select[members], layout, start):
        matrix = np.ascontiguousarray(rows[:, :, order])
        upper: Floats = np.asarray(np.linalg.qr(matrix, mode="r"))
        # Several effects may leave fewer rows than columns; the rows that lack are zero.
        lacking = max(matrix.shape[2] - matrix.shape[1], 0)
        upper = np.pad(upper, ((0, 0), (0, lacking), (0, 0)))
        diagonal = np.einsum("wcc->wc", upper)
        norms = np.sqrt((matrix**2).sum(axis=1))
        upward = upper * np.where(diagonal < 0, -1.0, 1.0)[:, :, None]
        lower[members[inside]] = upward.transpose(0, 2, 1)
        pivots[members[inside]] = _lengths(lower[members[inside]], effects) / np.where(
            norms > 0, norms, 1.0
        )


def _constant_series(gram: Gram, layout: Layout) -> np.ndarray:
    """Say in which windows some series does not move over the regression's rows."""
    current = [layout.at(column, 0) for column in layout.columns]
    count = np.maximum(gram.observations, 1)[:, None]
    mean = gram.products[:, 0, current] / count
    square = np.einsum("wcc->wc", gram.products)[:, current] / count
    spread = square - mean**2
    tolerance = 64 * EPSILON * gram.cancellation[:, current] * square
    return np.asarray((spread <= tolerance).any(axis=1))


def _read_factor(
    gram: Gram, regression: Regression, lower: Floats, solver: Ints, flag: Ints
) -> StackFit:
    k, q = regression.regressors, regression.restricted.size
    across = lower[:, k:, k - q : k]
    explained = np.einsum("weq,weq->we", across, across)
    residual = np.einsum("wef,wef->we", lower[:, k:, k:], lower[:, k:, k:])
    direction = forward(lower[:, k - q : k, k - q : k], np.ones((lower.shape[0], q)))
    total = np.einsum("weq,wq->we", across, direction)
    freedom = np.maximum(gram.observations - k, 1)[:, None]
    error = np.sqrt(residual / freedom * (direction**2).sum(axis=1)[:, None])
    for numbers in (explained, residual, total, error):
        numbers[flag != Flag.FINE] = np.nan
    return StackFit(
        explained, residual, gram.observations, k, q, total, error, _spread(gram, regression),
        lower, solver, flag,
    )  # fmt: skip


def _spread(gram: Gram, regression: Regression) -> Floats:
    """Return sd(cause)/sd(effect) on the regression rows, shape (w, e)."""
    held = np.concatenate([[regression.cause], regression.effects])
    count = np.maximum(gram.observations, 1)[:, None]
    mean = gram.products[:, 0, held] / count
    variance = np.einsum("wcc->wc", gram.products)[:, held] / count - mean**2
    deviation = np.sqrt(np.maximum(variance, 0.0))
    effects = deviation[:, 1:]
    ratio: Floats = np.full_like(effects, np.nan)
    np.divide(deviation[:, :1], effects, out=ratio, where=effects > 0)
    return ratio


def forward(lower: Floats, right: Floats) -> Floats:
    """Solve L u = r for a stack of small lower triangles.

    Parameters
    ----------
    lower : ndarray, shape (w, q, q)
    right : ndarray, shape (w, q)

    Returns
    -------
    ndarray, shape (w, q)
    """
    solution = np.empty_like(right)
    for j in range(right.shape[1]):
        known = np.einsum("wi,wi->w", lower[:, j, :j], solution[:, :j])
        solution[:, j] = (right[:, j] - known) / lower[:, j, j]
    return solution


def _inverse(lower: Floats, fine: np.ndarray) -> Floats:
    """Invert the lower triangles of the windows that have one, NaN elsewhere."""
    inverse = np.full_like(lower, np.nan)
    inverse[fine] = np.linalg.inv(lower[fine])
    return inverse
