"""Cross products of neighbouring windows from running lag-product sums.

Every entry of the cross-product matrix of a window is a difference of two values of a
running sum of x_i(t)·x_j(t−l).  One such sum serves all windows, all lag orders and all
deterministic choices of a block, so a window costs a gather instead of T·c² products.

Differences of running sums cancel; the sums restart with each block and ``Gram`` says by
how much they cancelled, so that the trigger of :mod:`sweep.kernels.stacks` can send a
window to QR.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from sweep.kernels.layout import Floats, Gram, Ints, Layout
from sweep.kernels.words import row_words

__all__ = ["RunningMoments"]


class RunningMoments:
    """Lag-product sums over one block of windows.

    Parameters
    ----------
    values : ndarray, shape (n, m)
        Transformed series on the calendar, NaN where they do not exist.
    terms : ndarray, shape (n, d)
        Deterministic columns on the calendar; column 0 is the constant.
    first, last : ndarray of int, shape (w,)
        First and last calendar row of each window.
    span : (int, int)
        Calendar rows of the whole block, whichever of its windows are asked for, so that
        numbers do not depend on what was computed before.
    lags : int
        Largest lag of any layout that will be asked for.
    centre : bool
        Subtract the block's means; only valid when every regression has a constant.

    Notes
    -----
    Series are divided by their standard deviation in the block.  F, Wald, LR and LM do not
    change under such a change of units (nor, with a constant, of origin); sums of
    coefficients are put back with ``scale``.
    """

    def __init__(
        self,
        values: Floats,
        terms: Floats,
        first: Ints,
        last: Ints,
        span: tuple[int, int],
        lags: int,
        *,
        centre: bool,
    ) -> None:
        self.low, high = span
        block = values[self.low : high + 1]
        self.first, self.last, self.lags, self.terms = first, last, lags, terms.shape[1]
        self._valid = [_bounds(np.isfinite(block[:, j]), self.low) for j in range(block.shape[1])]
        self._rows, spread = _standardise(block, centre=centre)
        self._terms = np.ascontiguousarray(terms[self.low : high + 1])
        self.scale: Floats = np.broadcast_to(spread, (first.size, spread.size))
        self._running = _running_sums(self._rows, self._terms, lags)
        self._addresses: dict[Layout, Ints] = {}

    def usable(self, columns: tuple[int, ...]) -> tuple[Ints, Ints]:
        """Return first and last row, each (w,), at which all the series exist."""
        low = max(self._valid[j][0] for j in columns)
        high = min(self._valid[j][1] for j in columns)
        return np.maximum(self.first, low), np.minimum(self.last, high)

    def observations(self, select: Ints, layout: Layout, start: int) -> Ints:
        """Return the regression rows T of each selected window, shape (w,)."""
        first, last = self.usable(layout.columns)
        count: Ints = np.maximum(last[select] - first[select] - start + 1, 0)
        return count

    def gram(self, select: Ints, layout: Layout, start: int) -> Gram:
        """Return the cross products over rows ``first + start`` … ``last``."""
        first, last = self.usable(layout.columns)
        count = self.observations(select, layout, start)
        last = last[select] + 1 - self.low
        first = last - count
        first, last = np.where(count > 0, first, 0), np.where(count > 0, last, 0)
        address = self._address(layout)
        flat = self._running.reshape(-1)
        upper = flat.take(address + last[:, None, None])
        products = upper - flat.take(address + first[:, None, None])
        diagonal = np.einsum("wcc->wc", products)
        total = np.einsum("wcc->wc", upper)
        ratio = np.divide(total, diagonal, out=np.full_like(total, np.inf), where=diagonal > 0)
        words = row_words(first + self.low, last + self.low - 1)
        return Gram(products, np.maximum(ratio, 1.0), count, words)

    def design(self, select: Ints, layout: Layout, start: int) -> list[tuple[Ints, Floats]]:
        """Return (positions in ``select``, rows (w, t, c)) in groups of equal length."""
        first = self.usable(layout.columns)[0][select] + start - self.low
        count = self.observations(select, layout, start)
        groups = []
        for length in np.unique(count):
            members = np.flatnonzero(count == length)
            rows = first[members][:, None] + np.arange(length)
            parts = [self._terms[rows]]
            for column, reach in zip(layout.columns, layout.reach, strict=True):
                lagged = rows[:, :, None] - np.arange(reach + 1)
                parts.append(self._rows[lagged, column])
            groups.append((members.astype(np.int64), np.concatenate(parts, axis=2)))
        return groups

    def times(self, select: Ints, layout: Layout, start: int) -> list[Ints]:
        """Return the period of every row of the design, one array a selected window."""
        return [np.arange(count) for count in self.observations(select, layout, start).tolist()]

    def _address(self, layout: Layout) -> Ints:
        """Return flat offsets into the running sums, shape (c, c), for the row before ``t``."""
        if layout not in self._addresses:
            self._addresses[layout] = self._make_address(layout)
        return self._addresses[layout]

    def _make_address(self, layout: Layout) -> Ints:
        d, m, depth = self.terms, self._rows.shape[1], self.lags + 1
        held = layout.series()
        sums = np.empty((layout.size, layout.size), dtype=np.int64)
        shift = np.zeros_like(sums)
        sums[:d, :d] = np.arange(d * d).reshape(d, d)
        series = np.array([column for column, _ in held], dtype=np.int64)
        lag = np.array([lag for _, lag in held], dtype=np.int64)
        mixed = d * d + (np.arange(d)[:, None] * m + series) * depth + lag
        sums[:d, d:], sums[d:, :d] = mixed, mixed.T
        later = lag[:, None] <= lag  # the row's series is the more recent one
        recent = np.where(later, series[:, None], series)
        older = np.where(later, series, series[:, None])
        gap = np.abs(lag[:, None] - lag)
        sums[d:, d:] = d * d + d * m * depth + (recent * m + older) * depth + gap
        shift[d:, d:] = np.minimum(lag[:, None], lag)
        address: Ints = sums * self._running.shape[1] - shift
        return address


def _bounds(exists: NDArray[np.bool_], low: int) -> tuple[int, int]:
    """Return the first and last calendar row at which a series exists."""
    where = np.flatnonzero(exists)
    return (low + int(where[0]), low + int(where[-1])) if where.size else (2**40, -1)


def _standardise(block: Floats, *, centre: bool) -> tuple[Floats, Floats]:
    """Return the block in standard units, zero where missing, and the units used (m,)."""
    exists = np.isfinite(block)
    count = np.maximum(exists.sum(axis=0), 1)
    filled = np.where(exists, block, 0.0)
    mean = filled.sum(axis=0) / count
    deviation = np.where(exists, filled - mean, 0.0)
    spread = np.sqrt((deviation**2).sum(axis=0) / count)
    spread = np.where(spread > 0, spread, 1.0)
    return np.ascontiguousarray((deviation if centre else filled) / spread), spread


def _running_sums(rows: Floats, terms: Floats, lags: int) -> Floats:
    """Return running sums, shape (d² + d·m·(L+1) + m²·(L+1), rows + 1)."""
    n, m = rows.shape
    lagged = np.zeros((m, lags + 1, n))
    for lag in range(lags + 1):
        lagged[:, lag, lag:] = rows[: n - lag].T
    columns = rows.T
    products = np.concatenate(
        [
            (terms.T[:, None] * terms.T[None]).reshape(-1, n),
            (terms.T[:, None, None] * lagged[None]).reshape(-1, n),
            (columns[:, None, None] * lagged[None]).reshape(-1, n),
        ]
    )
    running = np.zeros((products.shape[0], n + 1))
    np.cumsum(products, axis=1, out=running[:, 1:])
    return running
