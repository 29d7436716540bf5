"""Sample windows: from what the plan says to rows of the calendar."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sweep.panel.calendar import Calendar

__all__ = ["WINDOW_FAMILIES", "Positions", "WindowRequest", "resolve_window"]

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


@dataclass(frozen=True, slots=True)
class Positions:
    """Rows of every position of one window choice.

    Attributes
    ----------
    first, last : ndarray of int, shape (w,)
        First and last calendar row of each position, before lags are taken.
    episodes : tuple of (int, int)
        First and last row of each episode left out.
    """

    first: Ints
    last: Ints
    episodes: tuple[tuple[int, int], ...]

    @property
    def count(self) -> int:
        """Number of positions."""
        return int(self.first.size)


def resolve_window(request: WindowRequest, span: tuple[int, int], calendar: Calendar) -> Positions:
    """Return the rows of a window choice for a finding observed over ``span``.

    Parameters
    ----------
    request : WindowRequest
    span : (int, int)
        First and last row at which every series of the finding exists.
    calendar : Calendar

    Raises
    ------
    ValueError
        In plain words: dates outside the sample, an episode that leaves nothing, a window
        longer than the sample.
    """
    low, high = span
    if request.first:
        low = max(low, _row(calendar, request.first, "first", span))
    if request.last:
        high = min(high, _row(calendar, request.last, "last", span))
    if low > high:
        raise ValueError("leaves no date of the sample")
    size = high - low + 1
    low, high = low + int(request.drop_first * size), high - int(request.drop_last * size)
    episodes = []
    for start, end in request.without:
        first, last = _row(calendar, start, "first", span), _row(calendar, end, "last", span)
        if first <= low and last >= high:
            raise ValueError(f"the episode {start} to {end} leaves no date of the window")
        if last < low or first > high:
            raise ValueError(f"the episode {start} to {end} lies outside the window")
        episodes.append((first, last))
    if request.moving and request.length > high - low + 1:
        raise ValueError(
            f"a window of {request.length} periods is longer than the sample "
            f"({high - low + 1} periods, {calendar.label(low)} to {calendar.label(high)})"
        )
    first_rows, last_rows = WINDOW_FAMILIES[request.moving](low, high, request.length, request.step)
    return Positions(first_rows, last_rows, tuple(episodes))


def _row(calendar: Calendar, label: str, side: str, span: tuple[int, int]) -> int:
    row = calendar.find(label, "first" if side == "first" else "last")
    if not span[0] <= row <= span[1]:
        raise ValueError(
            f"{label} lies outside the dates at which all series exist "
            f"({calendar.label(span[0])} to {calendar.label(span[1])})"
        )
    return row


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
