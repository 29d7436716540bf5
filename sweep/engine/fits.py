"""The regressions of a task: every right-hand side fitted once, whoever asks for it."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from sweep.engine.orders import term_space
from sweep.engine.panel import TaskPanel
from sweep.engine.reasons import FLAG_REASON, Reason
from sweep.engine.task import System
from sweep.kernels.layout import Gram, Layout, Moments
from sweep.kernels.robust import RobustFit, Sandwich, robust_stack
from sweep.kernels.stacks import Flag, Regression, StackFit, fit_stack
from sweep.kernels.words import Words

__all__ = ["Equation", "FitBook", "Fitted"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

_REASON_OF_FLAG = np.array([FLAG_REASON[flag] for flag in Flag], dtype=np.int64)
# Terms that can be constant or collinear inside a window; trends never are.
_SPECIAL_TERMS = ("season", "step", "pulse", "sine", "cosine")


@dataclass(frozen=True, slots=True)
class Equation:
    """One equation: effect on its own lags, the given series and the cause.

    Attributes
    ----------
    effect, cause : int
        Panel columns.
    modelled : tuple of int
        All series of the system.
    exogenous : tuple of (column, lags)
    orders : (int, int, int)
        Lags of the effect, of the cause, of the given series.
    start : int
        Rows left out after the first usable one.
    term : int
        Choice of deterministic terms.
    extra : int
        Further lags of every modelled series, which no hypothesis is about.
    """

    effect: int
    cause: int
    modelled: tuple[int, ...]
    exogenous: tuple[tuple[int, int], ...]
    orders: tuple[int, int, int]
    start: int
    term: int
    extra: int = 0

    @classmethod
    def of(
        cls,
        system: System,
        orders: tuple[int, int, int],
        start: int,
        term: int,
        extra: int = 0,
        *,
        reverse: bool,
    ) -> Equation:
        """Return the finding's equation, or that of the reverse direction."""
        effect, cause = system.effect, system.cause
        if reverse:
            effect, cause = cause, effect
        # Rows begin where the longest lag exists, that of series that are there.
        longest = max(orders[:2] if not system.given else orders)
        start = max(start, longest + extra)
        return cls(effect, cause, system.modelled, system.exogenous, orders, start, term, extra)

    @property
    def effects(self) -> tuple[int, ...]:
        """Series whose equations have these regressors: all but the cause if lags are alike."""
        own, _, given = self.orders
        if own != given:
            return (self.effect,)
        return tuple(column for column in self.modelled if column != self.cause)

    @property
    def right_hand_side(self) -> tuple[object, ...]:
        """What equations with the same regressors have in common."""
        return (
            self.cause,
            self.modelled,
            self.exogenous,
            self.orders,
            self.start,
            self.term,
            self.extra,
            self.effects,
        )

    def reach(self) -> dict[int, int]:
        """Return the largest lag of every series."""
        own, cause, given = self.orders
        held = dict.fromkeys(self.modelled, given + self.extra)
        held[self.effect], held[self.cause] = own + self.extra, cause + self.extra
        return held | dict(self.exogenous)

    def sample_reach(self) -> dict[int, int]:
        """Return the largest lag that a row must have of every series.

        A common sample holds the rows that its order would use, also beside an episode
        left out, so its lags must exist whether or not they are regressors.
        """
        reach = self.reach()
        if self.start > max(reach.values()):
            reach |= dict.fromkeys(self.modelled, self.start)
        return reach


@dataclass(frozen=True, slots=True)
class Fitted:
    """Numbers of one equation in the windows of a task, raw units.

    Attributes
    ----------
    explained, residual : ndarray, shape (w,)
        s0 − s1 and s1 in standardised units (their ratio is what counts).
    observations : ndarray of int, shape (w,)
    regressors, restrictions : int
    coefficient_sum : ndarray, shape (w,)
        Units of the effect over units of the cause, as transformed.
    errors : mapping of covariance to ndarray, shape (w,)
        Standard error of the coefficient sum.
    robust_wald : mapping of covariance to ndarray, shape (w,)
    standardised_sum : ndarray, shape (w,)
        Coefficient sum times sd(cause)/sd(effect) on the regression's rows.
    solver, reason : ndarray of int, shape (w,)
    exact_row : ndarray of bool, shape (w,)
    rows : ndarray of uint64, shape (w,)
        Digest of the rows that were used.
    lag_values : ndarray, shape (w, q), or (w, 0) where single lags were not asked for
    lag_errors : mapping of covariance to ndarray, shape (w, q)
    """

    explained: Floats
    residual: Floats
    observations: Ints
    regressors: int
    restrictions: int
    coefficient_sum: Floats
    errors: dict[Sandwich, Floats]
    robust_wald: dict[Sandwich, Floats]
    standardised_sum: Floats
    solver: Ints
    reason: Ints
    exact_row: NDArray[np.bool_]
    rows: Words
    lag_values: Floats
    lag_errors: dict[Sandwich, Floats]


@dataclass(slots=True)
class _Request:
    windows: NDArray[np.bool_]
    effects: set[int] = field(default_factory=set)
    covariances: set[Sandwich] = field(default_factory=set)
    equation: Equation | None = None
    single_lags: bool = False


class FitBook:
    """Collects the equations that are asked for, then fits each right-hand side once.

    Parameters
    ----------
    panel : TaskPanel
    """

    def __init__(self, panel: TaskPanel) -> None:
        self._panel = panel
        self._requests: dict[tuple[object, ...], _Request] = {}
        self._fitted: dict[Equation, Fitted] = {}

    def ask(
        self, equation: Equation, windows: Ints, covariances: set[Sandwich], *, single_lags: bool
    ) -> None:
        """Note that an equation is needed in some windows, and with which covariances."""
        key = equation.right_hand_side
        if key not in self._requests:
            count = self._panel.task.first.size
            self._requests[key] = _Request(np.zeros(count, bool), equation=equation)
        request = self._requests[key]
        request.windows[windows] = True
        request.effects.add(equation.effect)
        request.covariances |= covariances
        request.single_lags |= single_lags

    def fit(self) -> None:
        """Fit everything that was asked for, one gather of moments for each sample."""
        samples: dict[tuple[object, ...], list[_Request]] = defaultdict(list)
        for request in self._requests.values():
            equation = request.equation
            assert equation is not None
            moments, _ = self._panel.moments(equation.term)
            reach = tuple(sorted(equation.sample_reach().items()))
            samples[id(moments), reach, equation.start].append(request)
        for requests in samples.values():
            self._fit_sample(requests)

    def __getitem__(self, equation: Equation) -> Fitted:
        return self._fitted[equation]

    def _fit_sample(self, requests: list[_Request]) -> None:
        equation = requests[0].equation
        assert equation is not None
        moments, _ = self._panel.moments(equation.term)
        held = sorted(equation.sample_reach().items())
        layout = Layout(moments.terms, tuple(c for c, _ in held), tuple(lag for _, lag in held))
        union = np.any([request.windows for request in requests], axis=0)
        windows = np.flatnonzero(union)
        gram = moments.gram(windows, layout, equation.start)
        for request in requests:
            inside = np.flatnonzero(request.windows[windows])
            part = gram if inside.size == windows.size else gram.part(inside)
            self._fit_request(request, moments, part, windows[inside], layout)

    def _fit_request(
        self, request: _Request, moments: Moments, gram: Gram, windows: Ints, layout: Layout
    ) -> None:
        equation = request.equation
        assert equation is not None
        # All effects that could share the regressors, asked for or not: the digits of one must
        # not depend on which others are in the task.
        effects = list(equation.effects)
        wanted = [position for position, e in enumerate(effects) if e in request.effects]
        _, columns = self._panel.moments(equation.term)
        regression = _regression(equation, effects, columns, layout)
        fit = fit_stack(moments, gram, windows, layout, equation.start, regression)
        reason = self._reasons(equation, gram, windows, columns, fit)
        robust: dict[Sandwich, RobustFit] = {}
        names = sorted(request.covariances - {"classical"}, key=str)
        if names:
            robust = robust_stack(
                moments, windows, layout, equation.start, regression, fit, names, wanted
            )
        for position in wanted:
            effect = effects[position]
            key = replace(equation, effect=effect)
            unit = moments.scale[windows, effect] / moments.scale[windows, equation.cause]
            self._fitted[key] = self._spread_out(
                fit, robust, position, unit, windows, reason[:, position], gram.rows,
                single_lags=request.single_lags,
            )  # fmt: skip

    def _reasons(
        self, equation: Equation, gram: Gram, windows: Ints, columns: Ints, fit: StackFit
    ) -> Ints:
        """Say why a window has no numbers, (w, e); a filter or a term goes before a poor matrix."""
        reason: Ints = _REASON_OF_FLAG[fit.flag]
        terms = self._panel.task.terms[equation.term]
        if any(term.kind in _SPECIAL_TERMS for term in terms):
            enough = (fit.flag != Flag.TOO_FEW_ROWS).all(axis=1)
            # Beside the constant, which is column 0: a step that never steps is one, wanted or not.
            beside = np.union1d([0], columns)
            idle = enough & ~term_space(gram.products[:, beside[:, None], beside])
            reason[idle] = Reason.TERM
        series = list(equation.reach())
        reason[self._panel.blocked[windows][:, series].any(axis=1)] = Reason.FILTER_EPISODE
        return reason

    def _spread_out(
        self,
        fit: StackFit,
        robust: dict[Sandwich, RobustFit],
        position: int,
        unit: Floats,
        windows: Ints,
        reason: Ints,
        rows: Words,
        *,
        single_lags: bool,
    ) -> Fitted:
        """Put the numbers of one effect into arrays over all windows of the task."""
        count = self._panel.task.first.size

        def wide(values: NDArray[np.generic], empty: float = np.nan) -> NDArray[np.float64]:
            out = np.full((count, *values.shape[1:]), empty)
            out[windows] = values
            return out

        plain = wide(fit.coefficient_sum_error[:, position] * unit)
        errors: dict[Sandwich, Floats] = {"classical": plain}
        exact = np.zeros(count, bool)
        for name, result in robust.items():
            errors[name] = wide(result.coefficient_sum_error[:, position] * unit)
            exact[windows] |= result.exact_row
        words = np.zeros(count, np.uint64)
        words[windows] = rows
        lag_values = np.empty((count, 0))
        lag_errors: dict[Sandwich, Floats] = {}
        if single_lags:
            values, error = fit.lag_coefficients(position)
            lag_values = wide(values * unit[:, None])
            lag_errors["classical"] = wide(error * unit[:, None])
            for name, result in robust.items():
                lag_errors[name] = wide(result.lag_errors[:, position] * unit[:, None])
        return Fitted(
            explained=wide(fit.explained[:, position]),
            residual=wide(fit.residual[:, position]),
            observations=wide(fit.observations, 0).astype(np.int64),
            regressors=fit.regressors,
            restrictions=fit.restrictions,
            coefficient_sum=wide(fit.coefficient_sum[:, position] * unit),
            errors=errors,
            robust_wald={name: wide(result.wald[:, position]) for name, result in robust.items()},
            standardised_sum=wide(fit.coefficient_sum[:, position] * fit.spread_ratio[:, position]),
            solver=wide(fit.solver, 0).astype(np.int64),
            reason=wide(reason, Reason.TOO_FEW_ROWS).astype(np.int64),
            exact_row=exact,
            rows=words,
            lag_values=lag_values,
            lag_errors=lag_errors,
        )


def _regression(
    equation: Equation, effects: list[int], columns: Ints, layout: Layout
) -> Regression:
    own, cause, given = equation.orders
    order = {c: (own if c == equation.effect else given) for c in equation.modelled}
    nuisance = [*columns.tolist()]
    for column, lags in equation.exogenous:
        nuisance += [layout.at(column, lag) for lag in range(lags + 1)]
    extra = equation.extra
    for column in equation.modelled:
        if column != equation.cause:
            nuisance += [layout.at(column, lag) for lag in range(1, order[column] + extra + 1)]
    nuisance += [layout.at(equation.cause, cause + lag) for lag in range(1, extra + 1)]
    return Regression(
        np.array(nuisance, dtype=np.int64),
        np.array([layout.at(equation.cause, lag) for lag in range(1, cause + 1)], dtype=np.int64),
        np.array([layout.at(effect, 0) for effect in effects], dtype=np.int64),
        layout.at(equation.cause, 0),
    )
