"""Sample windows: from what the plan says to rows of the calendar."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from enum import IntEnum

import numpy as np
from numpy.typing import NDArray

from sweep.panel.calendar import Calendar

__all__ = ["WINDOW_FAMILIES", "Lack", "Positions", "WindowRequest", "resolve_window"]

Ints = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class WindowRequest:
    """What a plan asks for, in words of the calendar.

    Attributes
    ----------
    first, last : str
        Canonical periods, ``""`` where open.
    without : tuple of (str, str)
        Episodes left out, inclusive.
    drop_first, drop_last : float
        Shares of the sample left out at its ends.
    moving : str
        ``""``, ``rolling``, ``expanding`` or ``shrinking``.
    length, step : int
        In periods.
    """

    first: str = ""
    last: str = ""
    without: tuple[tuple[str, str], ...] = ()
    drop_first: float = 0.0
    drop_last: float = 0.0
    moving: str = ""
    length: int = 0
    step: int = 1


class Lack(IntEnum):
    """Why a window cannot be cut from the sample of a finding."""

    NOTHING = 0
    DATES = 1
    LENGTH = 2


@dataclass(frozen=True, slots=True)
class Positions:
    """Rows of every position of one window choice.

    Attributes
    ----------
    first, last : ndarray of int, shape (w,)
        First and last calendar row of each position, before lags are taken.
    episodes : tuple of (int, int)
        First and last row of each episode left out, as far as they meet the window.
    lack : Lack
        What the finding's sample lacks for this window; then there is one position, which
        cannot be run.
    words : str
        The same in words, ``""`` where nothing is lacking.
    idle : tuple of (str, str)
        Episodes of the plan that do not meet the window.
    """

    first: Ints
    last: Ints
    episodes: tuple[tuple[int, int], ...]
    lack: Lack = Lack.NOTHING
    words: str = ""
    idle: tuple[tuple[str, str], ...] = ()

    @property
    def count(self) -> int:
        """Number of positions."""
        return int(self.first.size)


def resolve_window(request: WindowRequest, span: tuple[int, int], calendar: Calendar) -> Positions:
    """Return the rows of a window choice for a finding observed over ``span``.

    A window that reaches beyond the finding's sample, but not beyond the calendar, is cut down
    to it; an episode that does not meet the window leaves it as it is.  What another finding of
    the plan may well have is no fault here but a window that lacks something.

    Parameters
    ----------
    request : WindowRequest
    span : (int, int)
        First and last row at which every series of the finding exists.
    calendar : Calendar

    Raises
    ------
    ValueError
        In plain words: a date outside the calendar.
    """
    opens = calendar.find(request.first, "first") if request.first else 0
    closes = calendar.find(request.last, "last") if request.last else len(calendar) - 1
    low, high = max(opens, span[0]), min(closes, span[1])
    sample = f"{calendar.label(span[0])} to {calendar.label(span[1])}"
    if low > high:
        words = f"leaves no date at which all series exist ({sample})"
        return _lacking(opens, max(opens, closes), Lack.DATES, words)
    size = high - low + 1
    low, high = low + int(request.drop_first * size), high - int(request.drop_last * size)
    episodes, idle = [], []
    for start, end in request.without:
        first, last = calendar.find(start, "first"), calendar.find(end, "last")
        if first <= low and last >= high:
            words = f"the episode {start} to {end} leaves no date of the window"
            return _lacking(low, high, Lack.DATES, words)
        if last < low or first > high or last < first:
            idle.append((start, end))
        else:
            episodes.append((first, last))
    if request.moving and request.length > high - low + 1:
        words = (
            f"a window of {request.length} periods is longer than the sample "
            f"({high - low + 1} periods, {calendar.label(low)} to {calendar.label(high)})"
        )
        return _lacking(low, high, Lack.LENGTH, words)
    first_rows, last_rows = WINDOW_FAMILIES[request.moving](low, high, request.length, request.step)
    return Positions(first_rows, last_rows, tuple(episodes), idle=tuple(idle))


def _lacking(first: int, last: int, lack: Lack, words: str) -> Positions:
    return Positions(
        np.array([first], dtype=np.int64), np.array([last], dtype=np.int64), (), lack, words
    )


def _fixed(low: int, high: int, length: int, step: int) -> tuple[Ints, Ints]:
    return np.array([low], dtype=np.int64), np.array([high], dtype=np.int64)


def _rolling(low: int, high: int, length: int, step: int) -> tuple[Ints, Ints]:
    first = np.arange(low, high - length + 2, step, dtype=np.int64)
    return first, first + length - 1


def _expanding(low: int, high: int, length: int, step: int) -> tuple[Ints, Ints]:
    last = np.arange(low + length - 1, high + 1, step, dtype=np.int64)
    return np.full_like(last, low), last


def _shrinking(low: int, high: int, length: int, step: int) -> tuple[Ints, Ints]:
    first = np.arange(low, high - length + 2, step, dtype=np.int64)
    return first, np.full_like(first, high)


WINDOW_FAMILIES: dict[str, Callable[[int, int, int, int], tuple[Ints, Ints]]] = {
    "": _fixed,
    "rolling": _rolling,
    "expanding": _expanding,
    "shrinking": _shrinking,
}
