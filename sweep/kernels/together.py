"""Windows from several sources of moments as one stack."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence

import numpy as np

from sweep.kernels.layout import Floats, Gram, Ints, Layout, Moments

__all__ = ["JoinedMoments"]


class JoinedMoments:
    """Moments whose windows come from several sources.

    Neighbouring windows keep their own running sums and fixed samples their own rows, yet
    all of them are factored together.

    Parameters
    ----------
    parts : sequence of (Moments, ndarray of int)
        Each source, and the window numbers that its windows have in the whole; together
        they are 0 … w − 1, each once.
    """

    def __init__(self, parts: Sequence[tuple[Moments, Ints]]) -> None:
        self._parts = list(parts)
        self.terms = parts[0][0].terms
        count = sum(numbers.size for _, numbers in parts)
        self._source = np.empty(count, dtype=np.int64)
        self._local = np.empty(count, dtype=np.int64)
        self.scale: Floats = np.empty((count, parts[0][0].scale.shape[1]))
        for source, (moments, numbers) in enumerate(parts):
            self._source[numbers] = source
            self._local[numbers] = np.arange(numbers.size)
            self.scale[numbers] = moments.scale

    def _members(self, select: Ints) -> list[tuple[Moments, Ints, Ints]]:
        """Return each source, the places of its windows in ``select``, and their own numbers."""
        source = self._source[select]
        found = []
        for number, (moments, _) in enumerate(self._parts):
            places = np.flatnonzero(source == number)
            if places.size:
                found.append((moments, places, self._local[select[places]]))
        return found

    def usable(self, columns: tuple[int, ...]) -> tuple[Ints, Ints]:
        """Return first and last row, each (w,), at which all the series exist."""
        first, last = np.empty_like(self._local), np.empty_like(self._local)
        for moments, numbers in self._parts:
            first[numbers], last[numbers] = moments.usable(columns)
        return first, last

    def observations(self, select: Ints, layout: Layout, start: int) -> Ints:
        """Return the regression rows T of each selected window, shape (w,)."""
        result = np.empty(select.size, dtype=np.int64)
        for moments, places, local in self._members(select):
            result[places] = moments.observations(local, layout, start)
        return result

    def gram(self, select: Ints, layout: Layout, start: int) -> Gram:
        """Return the cross products over rows ``first + start`` … ``last``."""
        members = self._members(select)
        if len(members) == 1:
            moments, _, local = members[0]
            return moments.gram(local, layout, start)
        products = np.empty((select.size, layout.size, layout.size))
        cancellation = np.empty((select.size, layout.size))
        observations = np.empty(select.size, dtype=np.int64)
        words = np.empty(select.size, dtype=np.uint64)
        for moments, places, local in members:
            part = moments.gram(local, layout, start)
            products[places] = part.products
            cancellation[places] = part.cancellation
            observations[places] = part.observations
            words[places] = part.rows
        return Gram(products, cancellation, observations, words)

    def times(self, select: Ints, layout: Layout, start: int) -> list[Ints]:
        """Return the period of every row of the design, one array a selected window."""
        found: list[Ints] = [np.empty(0, np.int64)] * select.size
        for moments, places, local in self._members(select):
            for place, rows in zip(places, moments.times(local, layout, start), strict=True):
                found[int(place)] = rows
        return found

    def design(self, select: Ints, layout: Layout, start: int) -> list[tuple[Ints, Floats]]:
        """Return (positions in ``select``, rows (w, t, c)) in groups of equal length."""
        groups: dict[int, list[tuple[Ints, Floats]]] = defaultdict(list)
        for moments, places, local in self._members(select):
            for inside, rows in moments.design(local, layout, start):
                groups[rows.shape[1]].append((places[inside], rows))
        return [
            (np.concatenate([p for p, _ in parts]), np.concatenate([r for _, r in parts]))
            for _, parts in sorted(groups.items())
        ]
