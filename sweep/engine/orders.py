"""Lag orders of a task: fixed ones as they are, the others by their criterion."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sweep.engine.feasible import FREEDOM_FOR_CRITERION
from sweep.engine.panel import TaskPanel
from sweep.engine.reasons import Reason
from sweep.engine.task import System
from sweep.kernels.criteria import choose_order, log_determinants
from sweep.kernels.layout import Layout, Moments
from sweep.kernels.stacks import factorise
from sweep.plan.choices import LagChoice

__all__ = ["OrderBook", "Orders", "term_space"]

Ints = NDArray[np.int64]

@dataclass(frozen=True, slots=True)
class Orders:
    """Orders of one lag choice in every window of a task.

    Attributes
    ----------
    own, cause, given : ndarray of int, shape (w,)
        0 where there is none; ``given`` is ``own`` in a system without given series.
    start : ndarray of int, shape (w,)
        Rows left out after the first usable one.
    reason : ndarray of int, shape (w,)
        :class:`Reason` where there is no order.
    """

    own: Ints
    cause: Ints
    given: Ints
    start: Ints
    reason: Ints


class OrderBook:
    """Resolves lag choices, each criterion once for all that share its regression.

    Parameters
    ----------
    panel : TaskPanel
    """

    def __init__(self, panel: TaskPanel) -> None:
        self._panel = panel
        self._tables: dict[
            object, tuple[Ints, dict[int, tuple[Ints, NDArray[np.float64], Ints]]]
        ] = {}

    def resolve(self, system: System, choice: LagChoice, term: int, windows: Ints) -> Orders:
        """Return the orders of a choice for the equation of ``system.effect``.

        Parameters
        ----------
        system : System
        choice : LagChoice
        term : int
            Choice of deterministic terms.
        windows : ndarray of int
            Windows that are needed; others stay without an order.
        """
        count = self._panel.task.first.size
        own, cause, given = (np.zeros(count, np.int64) for _ in range(3))
        reason = np.zeros(count, np.int64)
        unmodelled = max((lags for _, lags in system.exogenous), default=0)
        lacking = self._panel.task.lacking[windows]
        reason[windows] = lacking
        windows = windows[lacking == 0]
        if choice.criterion:
            chosen, reason[windows] = self._choose(system, choice, term, windows)
            own[windows] = cause[windows] = given[windows] = chosen
        else:
            own[windows], cause[windows] = choice.own, choice.cause
            # Lags of series that are not there cost no rows and make no difference.
            given[windows] = choice.given if system.given else choice.own
        start = np.maximum(np.maximum(own, cause), np.maximum(given, unmodelled))
        return Orders(own, cause, given, np.maximum(start, choice.common), reason)

    def _choose(
        self, system: System, choice: LagChoice, term: int, windows: Ints
    ) -> tuple[Ints, Ints]:
        moments, columns = self._panel.moments(term)
        maximum, tables = self._table(system, choice, term, windows, moments, columns)
        chosen = np.zeros(windows.size, np.int64)
        reason = np.where(maximum == 0, Reason.SHORT_FOR_CRITERION, Reason.NONE).astype(np.int64)
        width = len(system.modelled)
        fixed = columns.size + sum(lags + 1 for _, lags in system.exogenous)
        equations = width if choice.scope == "system" else 1
        for members, determinant, rows in tables.values():
            chosen[members] = choose_order(
                determinant, rows, fixed, width, equations, choice.criterion, choice.level
            )
        failed = (chosen == 0) & (reason == Reason.NONE)
        if failed.any():
            layout, start = self._layout(system, moments.terms, choice.maximum, choice.common)
            select = windows[failed]
            gram = moments.gram(select, layout, start)
            singular = ~term_space(gram.products[:, columns[:, None], columns])
            reason[failed] = np.where(singular, Reason.TERM, Reason.COLLINEAR)
        # A filter that meets an episode leaves no values; that is the reason, not the length.
        series = [*system.modelled, *(column for column, _ in system.exogenous)]
        blocked = self._panel.blocked[windows][:, series].any(axis=1)
        reason[blocked] = Reason.FILTER_EPISODE
        return np.where(blocked, 0, chosen), reason

    def _layout(self, system: System, terms: int, order: int, common: int) -> tuple[Layout, int]:
        """Return the columns of an order's regressions and the rows left out at the start."""
        held = {column: max(order, common) for column in system.modelled}
        held |= dict(system.exogenous)
        columns = tuple(sorted(held))
        layout = Layout(terms, columns, tuple(held[column] for column in columns))
        return layout, layout.depth

    def _table(
        self,
        system: System,
        choice: LagChoice,
        term: int,
        windows: Ints,
        moments: Moments,
        columns: Ints,
    ) -> tuple[Ints, dict[int, tuple[Ints, NDArray[np.float64], Ints]]]:
        """Return each window's largest order, and log-determinants by largest order."""
        effect = system.effect if choice.scope == "equation" else -1
        key = (
            system.modelled, system.exogenous, effect, choice.maximum, choice.common, term,
            windows.tobytes(),
        )  # fmt: skip
        if key in self._tables:
            return self._tables[key]
        maximum = self._largest(system, choice, windows, moments, columns.size)
        tables = {}
        for order in np.unique(maximum[maximum > 0]):
            members = np.flatnonzero(maximum == order)
            tables[int(order)] = (
                members,
                *self._determinants(
                    system, windows[members], moments, columns, int(order), effect, choice.common
                ),
            )
        self._tables[key] = maximum, tables
        return self._tables[key]

    def _largest(
        self, system: System, choice: LagChoice, windows: Ints, moments: Moments, terms: int
    ) -> Ints:
        """Lower the largest order until it leaves twenty degrees of freedom; 0 if none does."""
        width = len(system.modelled)
        fixed = terms + sum(lags + 1 for _, lags in system.exogenous)
        largest = np.zeros(windows.size, np.int64)
        for order in range(choice.maximum, 0, -1):
            open_ = np.flatnonzero(largest == 0)
            if not open_.size:
                break
            layout, start = self._layout(system, moments.terms, order, choice.common)
            rows = moments.observations(windows[open_], layout, start)
            enough = rows - (fixed + width * order) >= FREEDOM_FOR_CRITERION
            largest[open_[enough]] = order
        return largest

    def _determinants(
        self,
        system: System,
        windows: Ints,
        moments: Moments,
        columns: Ints,
        maximum: int,
        effect: int,
        common: int,
    ) -> tuple[NDArray[np.float64], Ints]:
        layout, start = self._layout(system, moments.terms, maximum, common)
        gram = moments.gram(windows, layout, start)
        exogenous = [layout.at(c, lag) for c, lags in system.exogenous for lag in range(lags + 1)]
        lagged = [layout.at(c, lag) for lag in range(1, maximum + 1) for c in system.modelled]
        equations = system.modelled if effect < 0 else (effect,)
        current = [layout.at(c, 0) for c in equations]
        order = np.concatenate([columns, np.array([*exogenous, *lagged, *current], np.int64)])
        factor = factorise(
            moments, gram, windows, layout, start, order, np.ones(windows.size, bool)
        )
        lower = np.where(factor.pivots.min(axis=1)[:, None, None] > 1e-9, factor.lower, np.nan)
        fixed = columns.size + len(exogenous)
        return log_determinants(lower, fixed, len(current), maximum), gram.observations


def term_space(products: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Say in which windows the deterministic terms are linearly independent.

    Parameters
    ----------
    products : ndarray, shape (w, d, d)
        Cross products of the terms over the regression's rows.

    Returns
    -------
    ndarray of bool, shape (w,)
    """
    if not products.shape[1]:
        return np.ones(products.shape[0], bool)
    size = np.sqrt(np.maximum(np.einsum("wdd->wd", products), 0.0))
    safe = np.where(size > 0, size, 1.0)
    unit = products / (safe[:, :, None] * safe[:, None, :])
    smallest = np.linalg.eigvalsh(unit)[:, 0]
    return np.asarray((size > 1e-9).all(axis=1) & (smallest > 1e-10))
