"""Deterministic terms of a regression, as columns on the calendar.

The tests of a finding depend only on the space that the terms span, so trends are scaled to
the rows they are used on and a Fourier pair may start at any phase.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

__all__ = ["CONSTANT", "TERM_FAMILIES", "Term", "TermContext", "term_columns"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True, slots=True, order=True)
class Term:
    """One deterministic column.

    Attributes
    ----------
    kind : str
        Key of :data:`TERM_FAMILIES`.
    number : int
        Power of a trend, season, calendar row of a step or pulse, frequency of a sine.
    """

    kind: str
    number: int = 0


CONSTANT = Term("constant")


@dataclass(frozen=True, slots=True)
class TermContext:
    """What a term needs to know.

    Attributes
    ----------
    rows : ndarray of int, shape (n,)
        Calendar rows.
    season : ndarray of int, shape (n,)
        Season of each row, from 0.
    seasons : int
        Seasons a cycle.
    middle, half : float
        Centre and half length of the rows, to which trends are scaled.
    period : float
        Period of the first Fourier frequency, in rows: the window's length.
    """

    rows: Ints
    season: Ints
    seasons: int
    middle: float
    half: float
    period: float


def _constant(number: int, context: TermContext) -> Floats:
    return np.ones(context.rows.size)


def _trend(number: int, context: TermContext) -> Floats:
    return np.asarray(((context.rows - context.middle) / context.half) ** number)


def _season(number: int, context: TermContext) -> Floats:
    """Centred dummy: one in its season, minus one over the seasons everywhere."""
    return np.asarray((context.season == number) - 1.0 / context.seasons)


def _step(number: int, context: TermContext) -> Floats:
    return np.asarray(context.rows >= number, dtype=np.float64)


def _pulse(number: int, context: TermContext) -> Floats:
    return np.asarray(context.rows == number, dtype=np.float64)


def _sine(number: int, context: TermContext) -> Floats:
    return np.asarray(np.sin(2 * np.pi * number * context.rows / context.period))


def _cosine(number: int, context: TermContext) -> Floats:
    return np.asarray(np.cos(2 * np.pi * number * context.rows / context.period))


TERM_FAMILIES: dict[str, Callable[[int, TermContext], Floats]] = {
    "constant": _constant,
    "trend": _trend,
    "season": _season,
    "step": _step,
    "pulse": _pulse,
    "sine": _sine,
    "cosine": _cosine,
}


def term_columns(terms: Sequence[Term], context: TermContext) -> Floats:
    """Return the columns of some terms.

    Parameters
    ----------
    terms : sequence of Term
    context : TermContext
        Its ``rows`` say where.

    Returns
    -------
    ndarray, shape (n, d)
    """
    if not terms:
        return np.empty((context.rows.size, 0))
    return np.column_stack(
        [TERM_FAMILIES[term.kind](term.number, context).astype(float) for term in terms]
    )
