"""Cross products of windows from their own rows.

The route for windows that running sums cannot serve: fixed samples, episodes left out,
transformations taken inside the window, Fourier terms of windows of unequal length.
"""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass

import numpy as np

from sweep.kernels.layout import Floats, Gram, Ints, Layout
from sweep.kernels.words import row_word

__all__ = ["RowMoments", "WindowRows"]


@dataclass(frozen=True, slots=True)
class WindowRows:
    """One window.

    Attributes
    ----------
    values : ndarray, shape (t, m)
        Transformed series, NaN where they do not exist or touch an episode left out.
    terms : ndarray, shape (t, d)
        Deterministic columns; column 0 is the constant.
    exists : ndarray of bool, shape (t, m)
        Where the series exist, episodes disregarded: what bounds the regression's rows.
    first : int
        Calendar row of the first of them.
    """

    values: Floats
    terms: Floats
    exists: np.ndarray
    first: int


class RowMoments:
    """Cross products taken row by row.

    Parameters
    ----------
    windows : list of WindowRows
        One entry a window.
    centre : bool
        Subtract the window's means; only valid when every regression has a constant.
    """

    def __init__(self, windows: list[WindowRows], *, centre: bool) -> None:
        self.terms = windows[0].terms.shape[1]
        self._windows = windows
        self._values: list[Floats] = []
        scales = []
        for window in windows:
            rows, spread = _standardise(window.values, centre=centre)
            self._values.append(rows)
            scales.append(spread)
        self.scale: Floats = np.array(scales)

    def usable(self, columns: tuple[int, ...]) -> tuple[Ints, Ints]:
        """Return first and last row, each (w,), at which all the series exist."""
        bounds = [_common_rows(window.exists[:, list(columns)]) for window in self._windows]
        both = np.array(bounds, dtype=np.int64)
        return both[:, 0], both[:, 1]

    def observations(self, select: Ints, layout: Layout, start: int) -> Ints:
        """Return the regression rows T of each selected window, shape (w,)."""
        rows = self._designs(select, layout, start)
        return np.array([part.shape[0] for part, _ in rows], dtype=np.int64)

    def gram(self, select: Ints, layout: Layout, start: int) -> Gram:
        """Return the cross products over the complete rows ``first + start`` … ``last``."""
        products = np.empty((select.size, layout.size, layout.size))
        observations = np.empty(select.size, dtype=np.int64)
        words = np.empty(select.size, dtype=np.uint64)
        for position, (rows, word) in enumerate(self._designs(select, layout, start)):
            products[position] = _products(rows, self.terms)
            observations[position], words[position] = rows.shape[0], word
        return Gram(products, np.ones((select.size, layout.size)), observations, words)

    def design(self, select: Ints, layout: Layout, start: int) -> list[tuple[Ints, Floats]]:
        """Return (positions in ``select``, rows (w, t, c)) in groups of equal length."""
        groups: dict[int, list[tuple[int, Floats]]] = defaultdict(list)
        for position, (rows, _) in enumerate(self._designs(select, layout, start)):
            groups[rows.shape[0]].append((position, rows))
        return [
            (np.array([p for p, _ in members], dtype=np.int64), np.stack([r for _, r in members]))
            for _, members in sorted(groups.items())
        ]

    def times(self, select: Ints, layout: Layout, start: int) -> list[Ints]:
        """Return the period of every row of the design, one array a selected window."""
        first, last = self.usable(layout.columns)
        found = []
        for w in select.tolist():
            low, high = int(first[w]) + start, int(last[w])
            values = self._values[w]
            parts = [
                np.isfinite(values[low - lag : high - lag + 1, column])
                for column, lag in layout.series()
            ]
            count = max(high - low + 1, 0)
            whole = np.logical_and.reduce(parts) if count and parts else np.ones(count, bool)
            found.append(np.flatnonzero(whole) + low)
        return found

    def _designs(
        self, select: Ints, layout: Layout, start: int
    ) -> list[tuple[Floats, np.uint64]]:
        """Return the complete rows of each window, and the digest that says which they are."""
        first, last = self.usable(layout.columns)
        return [self._design(int(w), layout, int(first[w]) + start, int(last[w])) for w in select]

    def _design(
        self, w: int, layout: Layout, first: int, last: int
    ) -> tuple[Floats, np.uint64]:
        values = self._values[w]
        count = max(last - first + 1, 0)
        rows = np.empty((count, layout.size))
        if not count:
            return rows, np.uint64(0)
        rows[:, : self.terms] = self._windows[w].terms[first : last + 1]
        for position, (column, lag) in enumerate(layout.series(), start=self.terms):
            rows[:, position] = values[first - lag : last - lag + 1, column]
        whole = np.isfinite(rows).all(axis=1)
        return rows[whole], row_word(np.flatnonzero(whole) + first + self._windows[w].first)


def _products(rows: Floats, terms: int) -> Floats:
    """Return the cross products of a design's columns, shape (c, c).

    Terms go one by one, so that a product has the same digits whatever other terms there are.
    """
    columns = np.ascontiguousarray(rows[:, :terms].T)
    series = np.ascontiguousarray(rows[:, terms:])
    products = np.empty((rows.shape[1], rows.shape[1]))
    products[terms:, terms:] = series.T @ series
    for term, column in enumerate(columns):
        products[term, terms:] = products[terms:, term] = column @ series
        products[term, :terms] = (column * columns).sum(axis=1)
    return products


def _common_rows(exists: np.ndarray) -> tuple[int, int]:
    """Return the first and last row at which every series exists, (0, -1) if none."""
    where = np.flatnonzero(exists.all(axis=1))
    return (int(where[0]), int(where[-1])) if where.size else (0, -1)


def _standardise(values: Floats, *, centre: bool) -> tuple[Floats, Floats]:
    """Return the window in standard units, NaN kept, and the units used (m,)."""
    exists = np.isfinite(values)
    count = np.maximum(exists.sum(axis=0), 1)
    mean = np.where(exists, values, 0.0).sum(axis=0) / count
    deviation = values - mean
    spread = np.sqrt((np.where(exists, deviation, 0.0) ** 2).sum(axis=0) / count)
    spread = np.where(spread > 0, spread, 1.0)
    return (deviation if centre else values) / spread, spread
