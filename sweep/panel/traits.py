"""What a series looks like, for the proposals of a starter plan and nothing else.

Rules of thumb (common practice, no source unless one is named).  They only choose what a
starter plan writes down first; the plan says what was found, and its user decides.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

__all__ = ["Traits", "moves_with", "traits_of"]

Floats = NDArray[np.float64]

PERSISTENT = 0.9
"""First-order autocorrelation, trend taken out, from which a series counts as wandering."""
BIAS = 10.0
"""That autocorrelation is too low by about 10/T in a random walk with trend (the mean of
Dickey & Fuller's 1979 limit is near −10)."""
TRENDING = 0.7
WELL_ABOVE_ZERO = 20.0
"""Index numbers, prices and volumes mostly stay above; rates in per cent do not."""
SEASONAL_LEVEL = 0.001
TOGETHER = 0.9


@dataclass(frozen=True, slots=True)
class Traits:
    """What was found about a series.

    Attributes
    ----------
    positive : bool
        A log of every value exists.
    wanders : bool
        Its level is close to a random walk, so that changes are the usual scale.
    grows : bool
        Positive, and trending or well above zero, so that growth rates are the usual changes.
    seasonal : bool
        Its changes differ between the seasons (F test at 0.1%).
    """

    positive: bool
    wanders: bool
    grows: bool
    seasonal: bool

    @property
    def scale(self) -> str:
        """The transformation that a careful author would start from."""
        if not self.wanders:
            return "level"
        return "log difference" if self.grows else "difference"


def traits_of(values: Floats, season: NDArray[np.int64], seasons: int) -> Traits:
    """Look at one series.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing at either end.
    season : ndarray of int, shape (n,)
        Season of each row.
    seasons : int
        Seasons a cycle; 1 for none.
    """
    known = np.isfinite(values)
    series, season = values[known], season[known]
    positive = bool(series.min() > 0.0)
    time = np.arange(series.size, dtype=np.float64)
    trending = abs(_correlation(series, time)) >= TRENDING
    grows = positive and (trending or bool(series.min() >= WELL_ABOVE_ZERO))
    logged = np.log(series) if grows else series
    return Traits(positive, _wanders(series, time), grows, _seasonal(logged, season, seasons))


def moves_with(first: Floats, second: Floats) -> bool:
    """Say whether the changes of two series are nearly the same: both may measure one thing.

    Parameters
    ----------
    first, second : ndarray, shape (n,)
    """
    changes = np.diff(np.column_stack([first, second]), axis=0)
    changes = changes[np.isfinite(changes).all(axis=1)]
    return len(changes) > 2 and abs(_correlation(changes[:, 0], changes[:, 1])) >= TOGETHER


def _correlation(first: Floats, second: Floats) -> float:
    a, b = first - first.mean(), second - second.mean()
    size = float(np.sqrt((a @ a) * (b @ b)))
    return float(a @ b) / size if size > 0 else 0.0


def _wanders(series: Floats, time: Floats) -> bool:
    centred = time - time.mean()
    left = series - series.mean()
    left = left - centred * (centred @ left) / max(float(centred @ centred), 1.0)
    squares = float(left @ left)
    if squares == 0.0:
        return True  # a line: its changes are what moves, if anything does
    return float(left[1:] @ left[:-1]) / squares + BIAS / series.size >= PERSISTENT


def _seasonal(series: Floats, season: NDArray[np.int64], seasons: int) -> bool:
    """Test whether changes have the same mean in every season."""
    from scipy.special import fdtrc

    changes, season = np.diff(series), season[1:]
    held = np.unique(season)
    freedom = changes.size - held.size
    if seasons < 2 or held.size < 2 or freedom < held.size:
        return False
    within = sum(float(((c := changes[season == s]) - c.mean()) @ (c - c.mean())) for s in held)
    total = float((changes - changes.mean()) @ (changes - changes.mean()))
    if within <= 1e-12 * total:
        return total > 0.0
    statistic = ((total - within) / (held.size - 1)) / (within / freedom)
    return float(fdtrc(held.size - 1, freedom, statistic)) < SEASONAL_LEVEL
