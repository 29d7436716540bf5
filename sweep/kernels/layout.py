"""Which columns a cross-product matrix holds, and where.

Letters of the array axes, everywhere in this package:

==== =======================================================
w    windows of one stack
t    rows (periods) of one window
c    columns of a layout: terms first, then each series by lag
d    deterministic terms
m    series of a panel
q    lags of the cause that a hypothesis restricts
e    effects that share one regression's right-hand side
==== =======================================================
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

__all__ = ["Floats", "Gram", "Ints", "Layout", "Moments"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Layout:
    """Columns of a stack: ``terms`` deterministic ones, then series with lags 0…reach.

    Attributes
    ----------
    terms : int
        Number of deterministic columns; column 0 is always the constant.
    columns : tuple of int
        Panel columns that are held, in order.
    reach : tuple of int
        Largest lag held of each, in periods.
    """

    terms: int
    columns: tuple[int, ...]
    reach: tuple[int, ...]

    @property
    def size(self) -> int:
        """Number of columns."""
        return self.terms + sum(lag + 1 for lag in self.reach)

    @property
    def depth(self) -> int:
        """Largest lag of any series."""
        return max(self.reach, default=0)

    def at(self, column: int, lag: int) -> int:
        """Return the position of one series at one lag.

        Raises
        ------
        KeyError
            If the layout does not hold that lag of that series.
        """
        position = self.terms
        for held, reach in zip(self.columns, self.reach, strict=True):
            if held == column:
                if lag > reach:
                    break
                return position + lag
            position += reach + 1
        raise KeyError((column, lag))

    def series(self) -> list[tuple[int, int]]:
        """Return (panel column, lag) of every column behind the terms."""
        return [
            (column, lag)
            for column, reach in zip(self.columns, self.reach, strict=True)
            for lag in range(reach + 1)
        ]


@dataclass(frozen=True, slots=True)
class Gram:
    """Cross products of a stack of windows.

    Attributes
    ----------
    products : ndarray, shape (w, c, c)
        Sums over regression rows of column times column, standardised units.
    cancellation : ndarray, shape (w, c)
        Running sum's diagonal over the window's: 1 where nothing cancels.
    observations : ndarray, shape (w,)
        Regression rows T.
    rows : ndarray of uint64, shape (w,)
        Digest of the calendar rows that were summed over, equal where they are the same.
    """

    products: Floats
    cancellation: Floats
    observations: Ints
    rows: NDArray[np.uint64]

    def part(self, inside: Ints) -> Gram:
        """Return some of the windows."""
        return Gram(
            self.products[inside], self.cancellation[inside], self.observations[inside],
            self.rows[inside],
        )  # fmt: skip


class Moments(Protocol):
    """What the stacks need of a source of cross products."""

    terms: int
    scale: Floats
    """Shape (w, m): standard deviation by which each series was divided, raw units."""

    def usable(self, columns: tuple[int, ...]) -> tuple[Ints, Ints]:
        """Return first and last row, each (w,), at which all the series exist."""
        ...

    def observations(self, select: Ints, layout: Layout, start: int) -> Ints:
        """Return the regression rows T of each selected window, shape (w,)."""
        ...

    def gram(self, select: Ints, layout: Layout, start: int) -> Gram:
        """Return the cross products over rows ``first + start`` … ``last``."""
        ...

    def design(self, select: Ints, layout: Layout, start: int) -> list[tuple[Ints, Floats]]:
        """Return (positions in ``select``, rows (w, t, c)) in groups of equal length."""
        ...

    def times(self, select: Ints, layout: Layout, start: int) -> list[Ints]:
        """Return the period of every row of the design, one array a selected window."""
        ...
