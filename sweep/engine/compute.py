"""A worker's whole job: orders, regressions, statistics, and back to specifications."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sweep.engine.digest import Digests
from sweep.engine.fits import Equation, FitBook, Fitted
from sweep.engine.orders import OrderBook, Orders
from sweep.engine.panel import TaskPanel
from sweep.engine.reasons import REASONS, Reason, Status
from sweep.engine.task import LagCoefficients, Outcome, Task
from sweep.kernels.tails import student_tail
from sweep.plan.choices import ProcedureChoice
from sweep.procedures import PROCEDURES, Evidence, Statistic
from sweep.procedures.lag_augmented import SCALES
from sweep.screens import SCREENS

__all__ = ["compute_task"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

NO_NUMBER = -1
"""Stands for a whole number that does not exist; the store has NULL there."""

_STATUS_OF_REASON = np.zeros(max(Reason) + 1, np.int8)
for _reason, (_status, _) in REASONS.items():
    _STATUS_OF_REASON[_reason] = _status


@dataclass(frozen=True, slots=True)
class _Group:
    """Rows of a task that share system, lag choice, deterministic terms and extra lags."""

    members: Ints
    system: int
    lag: int
    term: int
    extra: int
    forward: Orders
    backward: Orders


def compute_task(task: Task) -> Outcome:
    """Compute every specification of a task, both directions.

    Parameters
    ----------
    task : Task

    Returns
    -------
    Outcome
        Arrays in the order of ``task.row``.
    """
    panel = TaskPanel(task)
    orders, fits = OrderBook(panel), FitBook(panel)
    groups = [_group(task, orders, members) for members in _split(task)]
    for group in groups:
        for forward, backward, members in _pieces(task, group):
            windows = np.unique(task.window[members]).astype(np.int64)
            names = {task.procedures[p].sandwich for p in np.unique(task.procedure[members])}
            single = bool(task.coefficients[members].any())
            fits.ask(forward, windows, names, single_lags=single)
            fits.ask(backward, windows, names, single_lags=single)
    fits.fit()
    sheet = _Sheet(task)
    for group in groups:
        sheet.mark(group)
        for forward, backward, members in _pieces(task, group):
            sheet.fill(forward, fits[forward], backward, fits[backward], members)
    return sheet.outcome()


def _split(task: Task) -> list[Ints]:
    """Split the rows by system, lag choice, terms and the extra lags of the procedure."""
    key = (task.system.astype(np.int64) * len(task.lags) + task.lag) * len(task.terms) + task.term
    extra = np.array([choice.extra_lags for choice in task.procedures], dtype=np.int64)
    key = key * (int(extra.max()) + 1) + extra[task.procedure]
    order = np.argsort(key, kind="stable")
    return np.split(order, np.flatnonzero(np.diff(key[order])) + 1)


def _group(task: Task, orders: OrderBook, members: Ints) -> _Group:
    first = members[0]
    system, lag, term = int(task.system[first]), int(task.lag[first]), int(task.term[first])
    windows = np.unique(task.window[members]).astype(np.int64)
    choice = task.lags[lag]
    extra = task.procedures[int(task.procedure[first])].extra_lags
    forward = orders.resolve(task.systems[system], choice, term, windows)
    backward = forward
    if choice.scope == "equation":
        backward = orders.resolve(task.systems[system].turned(), choice, term, windows)
    return _Group(members, system, lag, term, extra, forward, backward)


def _suits(task: Task, group: _Group) -> bool:
    """Say whether the scales of the system's series suit the extra lags, if there are any."""
    modelled = task.systems[group.system].modelled
    return not group.extra or all(task.scales[c].name in SCALES for c in modelled)


def _pieces(task: Task, group: _Group) -> list[tuple[Equation, Equation, Ints]]:
    """Split a group by resolved orders: both equations and the rows that use them."""
    window = task.window[group.members]
    forward, backward = group.forward, group.backward
    usable = (forward.own[window] > 0) & (backward.own[window] > 0)
    if not _suits(task, group):
        return []
    members, window = group.members[usable], window[usable]
    if not members.size:
        return []
    parts = (
        forward.own, forward.cause, forward.given, forward.start,
        backward.own, backward.cause, backward.given, backward.start,
    )  # fmt: skip
    key = np.zeros(window.size, np.int64)
    for part in parts[: 4 if backward is forward else 8]:
        key = key * 128 + part[window]
    _, which, number = np.unique(key, return_index=True, return_inverse=True)
    system = task.systems[group.system]
    pieces = []
    for piece, example in enumerate(window[which].tolist()):
        own, cause, given, start, *turned = (int(part[example]) for part in parts)
        terms = group.term, group.extra
        ahead = Equation.of(system, (own, cause, given), start, *terms, reverse=False)
        own, cause, given, start = turned
        back = Equation.of(system, (own, cause, given), start, *terms, reverse=True)
        pieces.append((ahead, back, members[number.reshape(-1) == piece]))
    return pieces


class _Sheet:
    """Arrays of one value a row, filled piece by piece."""

    def __init__(self, task: Task) -> None:
        self.task = task
        count = task.row.size
        self.numbers = {name: np.full(count, np.nan) for name in _NUMBERS}
        self.integers = {name: np.zeros(count, np.int64) for name in _INTEGERS}
        self.computation = np.zeros(count, np.uint64)
        self.digests = Digests(task)
        self.coefficients: list[LagCoefficients] = []

    def mark(self, group: _Group) -> None:
        """Give the rows without an order, or on a scale that does not suit, their reason."""
        if not _suits(self.task, group):
            for name in ("status", "reverse_status"):
                self.integers[name][group.members] = Status.NOT_APPLICABLE
            self.integers["reason"][group.members] = Reason.AUGMENTED_SCALE
            return
        window = self.task.window[group.members]
        for orders, prefix in ((group.backward, "reverse_"), (group.forward, "")):
            reason = orders.reason[window]
            without = reason != Reason.NONE
            rows = group.members[without]
            self.integers[f"{prefix}status"][rows] = _STATUS_OF_REASON[reason[without]]
            self.integers["reason"][rows] = reason[without]
        either = np.maximum(
            self.integers["status"][group.members], self.integers["reverse_status"][group.members]
        )
        for name in ("status", "reverse_status"):
            held = self.integers[name][group.members]
            self.integers[name][group.members] = np.where(held == Status.OK, either, held)

    def fill(
        self, forward: Equation, ahead: Fitted, backward: Equation, back: Fitted, members: Ints
    ) -> None:
        """Fill the rows of one piece, procedure by procedure."""
        task = self.task
        for code in np.unique(task.procedure[members]):
            rows = members[task.procedure[members] == code]
            choice = task.procedures[int(code)]
            window = task.window[rows]
            self._direction(rows, window, choice, back, "reverse_")
            direct = self._direction(rows, window, choice, ahead, "")
            self.numbers["df_den"][rows] = np.nan if direct.df_den is None else direct.df_den
            self.integers["df_num"][rows] = direct.df_num
            self.integers["order_used"][rows] = forward.orders[1]
            self._effect_size(rows, window, choice, ahead)
            self.numbers["reverse_coefficient_sum"][rows] = back.coefficient_sum[window]
            self.computation[rows] = self.digests.of(
                (forward, ahead), (backward, back), choice, window
            )
            wanted = task.coefficients[rows]
            if wanted.any():
                for fitted, turned in ((ahead, False), (back, True)):
                    self._single_lags(rows[wanted], window[wanted], choice, fitted, turned)

    def _direction(
        self, rows: Ints, window: Ints, choice: ProcedureChoice, fitted: Fitted, prefix: str
    ) -> Statistic:
        evidence = Evidence(
            fitted.explained[window], fitted.residual[window], fitted.observations[window],
            fitted.regressors, fitted.restrictions,
            {name: wald[window] for name, wald in fitted.robust_wald.items()},
        )  # fmt: skip
        with np.errstate(invalid="ignore", divide="ignore"):
            statistic = PROCEDURES[choice.statistic].compute(evidence, choice)
        reason = fitted.reason[window].copy()
        missing = (reason == Reason.NONE) & ~np.isfinite(statistic.p_value)
        if missing.any():
            robust = choice.covariance != "classical"
            exact = fitted.exact_row[window]
            singular = Reason.NO_COVARIANCE if robust else Reason.NO_NUMBER
            reason[missing] = np.where(exact, Reason.LEVERAGE, singular)[missing]
        good = reason == Reason.NONE
        self.numbers[f"{prefix}statistic"][rows] = np.where(good, statistic.value, np.nan)
        self.numbers[f"{prefix}p_value"][rows] = np.where(good, statistic.p_value, np.nan)
        self.integers[f"{prefix}status"][rows] = _STATUS_OF_REASON[reason]
        self.integers["reason"][rows] = np.where(good, self.integers["reason"][rows], reason)
        mask = np.zeros(rows.size, np.int64)
        for screen in SCREENS.values():
            passed = screen.passes(evidence.observations, fitted.regressors)
            mask |= np.where(passed, 0, 1 << screen.BIT)
        self.integers[f"{prefix}failed_mask"][rows] = mask
        if not prefix:
            self.integers["observations"][rows] = evidence.observations
            self.integers["solver"][rows] = np.where(good, fitted.solver[window], 0)
        return statistic

    def _effect_size(
        self, rows: Ints, window: Ints, choice: ProcedureChoice, fitted: Fitted
    ) -> None:
        total = fitted.coefficient_sum[window]
        explained, residual = fitted.explained[window], fitted.residual[window]
        with np.errstate(invalid="ignore", divide="ignore"):
            partial = explained / (explained + residual)
        good = self.integers["status"][rows] == Status.OK
        for name, values in (
            ("coefficient_sum", total),
            ("coefficient_sum_se", fitted.errors[choice.sandwich][window]),
            ("signed_partial_r2", np.sign(total) * partial),
            ("standardised_sum", fitted.standardised_sum[window]),
        ):
            self.numbers[name][rows] = np.where(good, values, np.nan)

    def _single_lags(
        self, rows: Ints, window: Ints, choice: ProcedureChoice, fitted: Fitted, turned: bool
    ) -> None:
        good = self.integers["reverse_status" if turned else "status"][rows] == Status.OK
        rows, window = rows[good], window[good]
        count, q = rows.size, fitted.restrictions
        value = fitted.lag_values[window]
        error = fitted.lag_errors[choice.sandwich][window]
        freedom = (fitted.observations[window] - fitted.regressors).astype(float)
        with np.errstate(invalid="ignore", divide="ignore"):
            p_value = student_tail(value / error, freedom[:, None])
        self.coefficients.append(
            LagCoefficients(
                np.repeat(self.task.row[rows], q),
                np.full(count * q, turned),
                np.tile(np.arange(1, q + 1), count),
                value.reshape(-1),
                error.reshape(-1),
                p_value.reshape(-1),
            )
        )

    def outcome(self) -> Outcome:
        """Return the filled arrays in the store's types."""
        bad = self.integers["status"] != Status.OK
        back = self.integers["reverse_status"] != Status.OK
        self.numbers["reverse_coefficient_sum"][back] = np.nan
        self.numbers["df_den"][bad] = np.nan
        self.computation[bad & back] = 0
        integers = self.integers
        for name in ("order_used", "observations", "df_num"):
            integers[name][bad] = NO_NUMBER
        return Outcome(
            row=self.task.row,
            computation=self.computation,
            order_used=integers["order_used"].astype(np.int16),
            observations=integers["observations"].astype(np.int32),
            df_num=integers["df_num"].astype(np.int16),
            status=integers["status"].astype(np.int8),
            reverse_status=integers["reverse_status"].astype(np.int8),
            reason=integers["reason"].astype(np.int16),
            solver=integers["solver"].astype(np.int8),
            failed_mask=integers["failed_mask"].astype(np.int32),
            reverse_failed_mask=integers["reverse_failed_mask"].astype(np.int32),
            details=_joined(self.coefficients),
            **self.numbers,
        )


_NUMBERS = (
    "statistic", "df_den", "p_value", "coefficient_sum", "coefficient_sum_se",
    "signed_partial_r2", "standardised_sum", "reverse_statistic", "reverse_p_value",
    "reverse_coefficient_sum",
)  # fmt: skip
_INTEGERS = (
    "order_used", "observations", "df_num", "status", "reverse_status", "reason", "solver",
    "failed_mask", "reverse_failed_mask",
)  # fmt: skip


def _joined(parts: list[LagCoefficients]) -> LagCoefficients | None:
    if not parts:
        return None
    return LagCoefficients(
        np.concatenate([part.row for part in parts]),
        np.concatenate([part.reverse for part in parts]),
        np.concatenate([part.lag for part in parts]),
        np.concatenate([part.value for part in parts]),
        np.concatenate([part.error for part in parts]),
        np.concatenate([part.p_value for part in parts]),
    )
