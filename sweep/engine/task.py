"""What goes to a worker and what comes back: arrays in frozen records."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from sweep.panel.deterministics import Term
from sweep.plan.choices import LagChoice, ProcedureChoice

__all__ = ["ROW_FIELDS", "LagCoefficients", "Outcome", "Scale", "System", "Task"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Scale:
    """Transformation of one panel column."""

    name: str
    smoothing: float
    horizon: int


@dataclass(frozen=True, slots=True)
class System:
    """One finding under one conditioning choice, as panel columns.

    Attributes
    ----------
    effect, cause : int
    given : tuple of int
    exogenous : tuple of (column, lags)
    """

    effect: int
    cause: int
    given: tuple[int, ...]
    exogenous: tuple[tuple[int, int], ...]

    @property
    def modelled(self) -> tuple[int, ...]:
        """Columns of the autoregression, sorted."""
        return tuple(sorted({self.effect, self.cause, *self.given}))

    def turned(self) -> System:
        """Return the system of the reverse direction."""
        return System(self.cause, self.effect, self.given, self.exogenous)


@dataclass(frozen=True, slots=True)
class Task:
    """One panel, a block of windows, and the specifications to compute there.

    Attributes
    ----------
    values : ndarray, shape (n, m)
        Raw series on the calendar, NaN where missing.
    scales : tuple of Scale, length m
    frequency : str
    season : ndarray of int, shape (n,)
    seasons : int
    first, last : ndarray of int, shape (w,)
        Calendar rows of the windows.
    episodes : tuple of tuple of (int, int), length w
        Episodes left out of each window.
    block : ndarray of int, shape (w,)
        Which running sums serve the window, -1 where its own rows do.
    unequal : ndarray of bool, shape (w,)
        Windows of an expanding or shrinking entry, which differ in length.
    lacking : ndarray of int, shape (w,)
        Reason why a window cannot be run, 0 for none.
    spans : mapping of block to (int, int)
        Calendar rows that each block's running sums cover.
    systems, lags, terms, procedures : tuple
        What the row codes point into.
    row : ndarray of int64, shape (s,)
        Row numbers in the plan's table.
    system, lag, term, procedure, window : ndarray of int, shape (s,)
        Codes of each row.
    coefficients : ndarray of bool, shape (s,)
        Rows whose single lag coefficients are wanted.
    tokens : tuple of str, length m
        Digest of each column's raw values, for the digest of a computation.
    cost : float
        Estimated seconds.
    """

    values: Floats
    scales: tuple[Scale, ...]
    frequency: str
    season: Ints
    seasons: int
    first: Ints
    last: Ints
    episodes: tuple[tuple[tuple[int, int], ...], ...]
    block: Ints
    unequal: NDArray[np.bool_]
    lacking: Ints
    spans: dict[int, tuple[int, int]]
    systems: tuple[System, ...]
    lags: tuple[LagChoice, ...]
    terms: tuple[tuple[Term, ...], ...]
    procedures: tuple[ProcedureChoice, ...]
    row: Ints
    system: NDArray[np.int16]
    lag: NDArray[np.int16]
    term: NDArray[np.int16]
    procedure: NDArray[np.int16]
    window: NDArray[np.int32]
    coefficients: NDArray[np.bool_]
    tokens: tuple[str, ...]
    cost: float


@dataclass(frozen=True, slots=True)
class LagCoefficients:
    """Single lag coefficients of the rows that asked for them.

    Attributes
    ----------
    row : ndarray of int64, shape (c,)
        Row number in the plan's table.
    reverse : ndarray of bool, shape (c,)
        True for the reverse equation.
    lag : ndarray of int, shape (c,)
    value, error, p_value : ndarray, shape (c,)
        Raw units of effect over cause; two-sided Student t with T − k degrees of freedom.
    """

    row: Ints
    reverse: NDArray[np.bool_]
    lag: Ints
    value: Floats
    error: Floats
    p_value: Floats


@dataclass(frozen=True, slots=True)
class Outcome:
    """Results of a task, arrays in the order of its rows; names as in the store."""

    row: Ints
    computation: NDArray[np.uint64]
    order_used: NDArray[np.int16]
    observations: NDArray[np.int32]
    statistic: Floats
    df_num: NDArray[np.int16]
    df_den: Floats
    p_value: Floats
    coefficient_sum: Floats
    coefficient_sum_se: Floats
    signed_partial_r2: Floats
    standardised_sum: Floats
    reverse_statistic: Floats
    reverse_p_value: Floats
    reverse_coefficient_sum: Floats
    status: NDArray[np.int8]
    reverse_status: NDArray[np.int8]
    reason: NDArray[np.int16]
    solver: NDArray[np.int8]
    failed_mask: NDArray[np.int32]
    reverse_failed_mask: NDArray[np.int32]
    details: LagCoefficients | None = None


ROW_FIELDS = tuple(field.name for field in fields(Outcome) if field.name not in ("row", "details"))
