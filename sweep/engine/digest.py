"""The digest of a computation: equal where two specifications computed the same number."""

from __future__ import annotations

from hashlib import blake2b

import numpy as np

from sweep.engine.fits import Equation, Fitted
from sweep.engine.task import Scale, Task
from sweep.kernels.layout import Ints
from sweep.kernels.words import Words, mix, row_word, row_words
from sweep.panel.transforms import TRANSFORMS
from sweep.plan.canonical import canonical_json
from sweep.plan.choices import ProcedureChoice

__all__ = ["Digests"]

FOURIER = 0x5851F42D4C957F2D
REVERSE = np.uint64(0x2545F4914F6CDD1D)


class Digests:
    """Digests of the computations of a task.

    A computation is two tests on their rows: the regression of each direction, its
    restriction, its statistic and the values it reads.  How it was asked for is left aside: a
    criterion that chose four lags and a fixed four lags, two windows that leave the same rows,
    an episode that no row reaches, two columns of the same values, two transformations that
    coincide, and the level and the linearly detrended series beside a linear trend, which span
    the same regressors, are one computation each.

    Parameters
    ----------
    task : Task
    """

    def __init__(self, task: Task) -> None:
        self._task = task
        self._supports: dict[int, Words] = {}

    def of(
        self,
        forward: tuple[Equation, Fitted],
        backward: tuple[Equation, Fitted],
        choice: ProcedureChoice,
        windows: Ints,
    ) -> Words:
        """Digest the computation of one statistic in some windows.

        Parameters
        ----------
        forward, backward : (Equation, Fitted)
            Both directions, orders resolved, and what they were fitted on.
        choice : ProcedureChoice
        windows : ndarray of int, shape (s,)

        Returns
        -------
        ndarray of uint64, shape (s,)
        """
        task, term = self._task, forward[0].term
        terms = task.terms[term]
        meaning = [
            *(self._equation(equation) for equation, _ in (forward, backward)),
            sorted([item.kind, item.number] for item in terms),
            [choice.form or choice.statistic, str(choice.sandwich), choice.divisor],
        ]
        words = mix(forward[1].rows[windows] ^ np.uint64(_word(canonical_json(meaning))))
        with np.errstate(over="ignore"):
            words = mix(words + mix(backward[1].rows[windows] ^ REVERSE))
            if any(item.kind == "sine" for item in terms):
                length = (task.last - task.first)[windows].astype(np.uint64)
                words = mix(words + mix(length + np.uint64(FOURIER)))
            for column in self._taken_inside(forward[0]):
                words = mix(words + self._support(column)[windows])
        return words

    def _equation(self, equation: Equation) -> list[object]:
        name = [self._column(column, equation.term) for column in range(len(self._task.scales))]
        return [
            name[equation.effect], name[equation.cause], sorted(name[c] for c in equation.modelled),
            sorted([name[c], lags] for c, lags in equation.exogenous), list(equation.orders),
            *([equation.extra] if equation.extra else []),
        ]  # fmt: skip

    def _column(self, column: int, term: int) -> str:
        """Name the values of a column, up to what the deterministic terms take out of them."""
        scale = _canonical(self._task.scales[column], self._task.frequency)
        name = scale.name
        if name == "linearly detrended" and _has_line(self._task, term):
            name = "level"
        return f"{self._task.tokens[column]} {name} {scale.smoothing} {scale.horizon}"

    def _taken_inside(self, equation: Equation) -> list[int]:
        """Return the columns whose values depend on the window they are taken in, in fixed order.

        The line that a linear trend takes out anyway does not count.
        """
        line = _has_line(self._task, equation.term)
        used = {*equation.modelled, *(column for column, _ in equation.exogenous)}
        inside = [
            column
            for column in used
            if TRANSFORMS[self._task.scales[column].name].kind == "window"
            and not (line and self._task.scales[column].name == "linearly detrended")
        ]
        return sorted(inside, key=lambda column: self._column(column, equation.term))

    def _support(self, column: int) -> Words:
        """Digest the raw values that a transformation inside each window is estimated from."""
        if column not in self._supports:
            task = self._task
            exists = np.isfinite(task.values[:, column])
            rows = np.flatnonzero(exists)
            first, last = np.maximum(task.first, rows[0]), np.minimum(task.last, rows[-1])
            words = row_words(first, last)
            for w, episodes in enumerate(task.episodes):
                if episodes:
                    there = exists[first[w] : last[w] + 1].copy()
                    for start, end in episodes:
                        there[max(start - first[w], 0) : max(end + 1 - first[w], 0)] = False
                    words[w] = row_word(np.flatnonzero(there) + first[w])
            self._supports[column] = mix(words)
        return self._supports[column]


def _has_line(task: Task, term: int) -> bool:
    """Say whether the deterministic terms hold a constant and a linear trend."""
    kinds = {(item.kind, item.number) for item in task.terms[term]}
    return {("constant", 0), ("trend", 1)} <= kinds


def _word(text: str) -> int:
    return int.from_bytes(blake2b(text.encode(), digest_size=8).digest(), "big")


def _canonical(scale: Scale, frequency: str) -> Scale:
    """Return the plainest transformation that gives the same numbers, its settings if it has any.

    A year of annual data is one period, so yearly growth is the log difference there.
    """
    transform = TRANSFORMS[TRANSFORMS[scale.name].equals(frequency) or scale.name]
    smoothing = scale.smoothing if transform.needs_smoothing else 0.0
    horizon = scale.horizon if transform.name == "Hamilton cycle" else 0
    return Scale(transform.name, smoothing, horizon)
