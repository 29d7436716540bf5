"""The moments of a task: transformed series and deterministic terms, by block or by window."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from sweep.engine.task import Task
from sweep.kernels.lagproducts import RunningMoments
from sweep.kernels.layout import Moments
from sweep.kernels.rowmoments import RowMoments, WindowRows
from sweep.kernels.together import JoinedMoments
from sweep.panel.deterministics import CONSTANT, Term, TermContext, term_columns
from sweep.panel.transforms import TRANSFORMS

__all__ = ["TaskPanel", "window_values"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


class TaskPanel:
    """Moments of a task, built once for each of a few kinds of deterministic terms.

    Regressions with a constant may subtract means, those without may not.  Fourier terms have
    the window's length as period, so running sums cannot serve windows of unequal length; the
    other choices of terms keep them.

    Parameters
    ----------
    task : Task
    """

    def __init__(self, task: Task) -> None:
        self.task = task
        extra = max(choice.extra_lags for choice in task.procedures)
        orders = [
            max(max(c.own, c.cause, c.given, c.maximum) + extra, c.common) for c in task.lags
        ]
        exogenous = [lags for system in task.systems for _, lags in system.exogenous]
        self.lags = max([1, *orders, *exogenous])
        self._local: Floats | None = None
        self._built: dict[tuple[bool, bool], tuple[Moments, tuple[Term, ...]]] = {}
        self.blocked = _filter_meets_episode(task)

    def moments(self, term: int) -> tuple[Moments, Ints]:
        """Return the moments for one choice of terms and its columns in their layout."""
        wanted = self.task.terms[term]
        kind = self._kind(wanted)
        if kind not in self._built:
            self._built[kind] = self._build(kind)
        moments, terms = self._built[kind]
        return moments, np.array([terms.index(item) for item in wanted], dtype=np.int64)

    def _kind(self, terms: tuple[Term, ...]) -> tuple[bool, bool]:
        """Say whether there is a constant, and whether unequal windows go through their rows."""
        fourier = any(term.kind == "sine" for term in terms)
        return CONSTANT in terms, fourier and bool(self.task.unequal.any())

    def _build(self, kind: tuple[bool, bool]) -> tuple[Moments, tuple[Term, ...]]:
        task, (centre, by_rows) = self.task, kind
        groups = [terms for terms in task.terms if self._kind(terms) == kind]
        every = sorted({item for terms in groups for item in terms} - {CONSTANT})
        terms = (CONSTANT, *every)  # column 0 is the constant, wanted or not, for the means
        parts: list[tuple[Moments, Ints]] = []
        served = (task.block >= 0) & ~(task.unequal & by_rows)
        for block in np.unique(task.block[served]):
            numbers = np.flatnonzero(served & (task.block == block))
            parts.append((self._running(int(block), numbers, terms, centre), numbers))
        alone = np.flatnonzero(~served)
        if alone.size:
            windows = [self._window(w, terms) for w in alone.tolist()]
            parts.append((RowMoments(windows, centre=centre), alone))
        return JoinedMoments(parts), terms

    def _running(
        self, block: int, numbers: Ints, terms: tuple[Term, ...], centre: bool
    ) -> RunningMoments:
        task = self.task
        span = task.spans[block]
        if self._local is None:
            self._local = _local_values(task)
        period = float(task.last[numbers[0]] - task.first[numbers[0]] + 1)
        columns = _block_terms(task, terms, span, period)
        return RunningMoments(
            self._local, columns, task.first[numbers], task.last[numbers], span, self.lags,
            centre=centre,
        )  # fmt: skip

    def _window(self, w: int, terms: Sequence[Term]) -> WindowRows:
        task = self.task
        values, exists = window_values(task, w)
        rows = np.arange(task.first[w], task.last[w] + 1)
        half = max((rows.size - 1) / 2, 1.0)
        context = TermContext(
            rows, task.season[rows], task.seasons, (rows[0] + rows[-1]) / 2, half, float(rows.size)
        )
        return WindowRows(values, term_columns(terms, context), exists, int(rows[0]))


def _block_terms(task: Task, terms: Sequence[Term], span: tuple[int, int], period: float) -> Floats:
    low, high = span
    context = TermContext(
        np.arange(task.values.shape[0]), task.season, task.seasons, (low + high) / 2,
        max((high - low) / 2, 1.0), period,
    )  # fmt: skip
    return term_columns(terms, context)


def _local_values(task: Task) -> Floats:
    columns = [
        TRANSFORMS[scale.name].apply(
            task.values[:, j], task.frequency, scale.smoothing, scale.horizon
        )
        for j, scale in enumerate(task.scales)
    ]
    return np.column_stack(columns)


def window_values(task: Task, w: int) -> tuple[Floats, NDArray[np.bool_]]:
    """Return one window's transformed series and where they exist.

    Local transformations may read values before the window and are taken on the whole
    series; the others are taken inside it, on values outside the episodes.

    Returns
    -------
    values : ndarray, shape (t, m)
        NaN where a series does not exist or uses a value of an episode left out.
    exists : ndarray of bool, shape (t, m)
        Where it exists, episodes disregarded.
    """
    first, last = int(task.first[w]), int(task.last[w])
    inside = np.zeros(task.values.shape[0], bool)
    for start, end in task.episodes[w]:
        inside[start : end + 1] = True
    values = np.empty((last - first + 1, len(task.scales)))
    exists = np.empty(values.shape, bool)
    for j, scale in enumerate(task.scales):
        transform = TRANSFORMS[scale.name]
        raw = task.values[:, j]
        if transform.kind == "local":
            column = transform.apply(raw, task.frequency, scale.smoothing, scale.horizon)
            exists[:, j] = np.isfinite(column[first : last + 1])
            touched = inside.copy()
            for offset in transform.offsets(task.frequency, scale.horizon):
                if offset:
                    touched[offset:] |= inside[:-offset]
            values[:, j] = np.where(touched, np.nan, column)[first : last + 1]
        else:
            cut = np.where(inside, np.nan, raw)[first : last + 1]
            if inside[first : last + 1].any() and transform.name == "Hodrick-Prescott cycle":
                values[:, j] = np.nan  # the whole window is not applicable
            else:
                values[:, j] = transform.apply(cut, task.frequency, scale.smoothing, scale.horizon)
            exists[:, j] = np.isfinite(values[:, j])
    return values, exists


def _filter_meets_episode(task: Task) -> NDArray[np.bool_]:
    """Say, for each window and series, where a filter of the whole window meets an episode."""
    filters = np.array([scale.name == "Hodrick-Prescott cycle" for scale in task.scales])
    meets = np.array(
        [
            any(start <= last and end >= first for start, end in episodes)
            for episodes, first, last in zip(task.episodes, task.first, task.last, strict=True)
        ]
    )
    return np.asarray(meets[:, None] & filters)
