"""The digest of a computation: equal where two specifications computed the same number."""

from __future__ import annotations

from hashlib import blake2b

import numpy as np
from numpy.typing import NDArray

from sweep.engine.fits import Equation
from sweep.engine.task import Task
from sweep.plan.canonical import canonical_json
from sweep.plan.choices import ProcedureChoice

__all__ = ["computation_digest", "mix", "window_words"]

Words = NDArray[np.uint64]


def mix(words: Words) -> Words:
    """Scramble 64-bit words one to one (the finaliser of SplitMix64, Steele et al. 2014)."""
    with np.errstate(over="ignore"):
        words = (words ^ (words >> np.uint64(30))) * np.uint64(0xBF58476D1CE4E5B9)
        words = (words ^ (words >> np.uint64(27))) * np.uint64(0x94D049BB133111EB)
        return words ^ (words >> np.uint64(31))


def window_words(task: Task) -> Words:
    """Digest the data rows of each window of a task, shape (w,)."""
    first, last = task.first.astype(np.uint64), task.last.astype(np.uint64)
    with np.errstate(over="ignore"):
        words = mix(first + np.uint64(0x9E3779B97F4A7C15))
        words = mix(words + mix(last + np.uint64(0xD1B54A32D192ED03)))
    episodes = np.array([_word(repr(item)) if item else 0 for item in task.episodes], np.uint64)
    return mix(words ^ episodes)


def computation_digest(
    task: Task,
    forward: Equation,
    backward: Equation,
    choice: ProcedureChoice,
    windows: Words,
) -> Words:
    """Digest what was computed: rows of data, orders, terms, restriction, statistic.

    Parameters
    ----------
    task : Task
    forward, backward : Equation
        Both directions, orders resolved.
    choice : ProcedureChoice
    windows : ndarray of uint64, shape (s,)
        Entries of :func:`window_words`.

    Returns
    -------
    ndarray of uint64, shape (s,)
        AIC choosing 4 lags and a fixed 4 lags share a digest.
    """
    meaning = [
        *(_equation(task, equation) for equation in (forward, backward)),
        [[term.kind, term.number] for term in task.terms[forward.term]],
        [choice.statistic, choice.covariance, choice.divisor],
    ]
    return mix(windows ^ np.uint64(_word(canonical_json(meaning))))


def _equation(task: Task, equation: Equation) -> list[object]:
    name = task.tokens
    return [
        name[equation.effect], name[equation.cause], sorted(name[c] for c in equation.modelled),
        sorted([name[c], lags] for c, lags in equation.exogenous), list(equation.orders),
        equation.start,
    ]  # fmt: skip


def _word(text: str) -> int:
    return int.from_bytes(blake2b(text.encode(), digest_size=8).digest(), "big")
