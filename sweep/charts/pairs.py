"""Which pair of axes a two-axis map shows, and how strongly the two act together."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from typing import TYPE_CHECKING

from sweep.errors import Fault, InputFault
from sweep.plan.suggest import suggestion
from sweep.verdicts.words import joined

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["Axes", "chosen_pair", "strength_words", "strengths"]

Axes = tuple[str, str]

_NOTHING = 0.0005  # a departure that rounds to nothing


def strengths(cells: pd.DataFrame) -> list[tuple[float, Axes]]:
    """Return the pairs and how far each departs from its additive fit, the strongest first."""
    pairs = cells.drop_duplicates(["row_axis", "column_axis"])
    found = [
        (float(row["departure"]), (str(row["row_axis"]), str(row["column_axis"])))
        for row in pairs.to_dict("records")
    ]
    # What differs by rounding only stays in plan order.
    return sorted(found, key=lambda one: -round(one[0], 9))


def chosen_pair(
    cells: pd.DataFrame, axes: Sequence[str] | None
) -> tuple[pd.DataFrame, Axes, list[tuple[float, Axes]]]:
    """Return the cells of the pair that is asked for, or of the one that acts together most.

    Raises
    ------
    InputFault
        If the axes asked for are no pair of this finding.
    """
    order = strengths(cells)
    pair = order[0][1]
    if axes is not None:
        pair = _asked(tuple(axes), [one for _, one in order])
    own = cells[(cells["row_axis"] == pair[0]) & (cells["column_axis"] == pair[1])]
    return own, pair, order


def _asked(axes: tuple[str, ...], pairs: list[Axes]) -> Axes:
    """Return the pair that is meant, whichever axis is named first."""
    varying = list(dict.fromkeys(itertools.chain.from_iterable(pairs)))
    if len(axes) != 2 or axes[0] == axes[1]:
        raise InputFault(
            Fault("axes", "two different axes are needed", f"Choose from {joined(varying)}.")
        )
    unknown = [axis for axis in axes if axis not in varying]
    if unknown:
        raise InputFault(
            *(
                Fault(
                    "axes",
                    f'no axis "{axis}" with several choices' + suggestion(axis, varying),
                )
                for axis in unknown
            )
        )
    return next(pair for pair in pairs if set(pair) == set(axes))


def strength_words(pair: Axes, order: list[tuple[float, Axes]]) -> str:
    """Say how strongly the pair acts together, and where it stands among all pairs."""
    place = next(number for number, (_, one) in enumerate(order, start=1) if one == pair)
    value = order[place - 1][0]
    if order[0][0] < _NOTHING:
        return f"Shown are {_named(pair)}; no pair of axes departs from adding up."
    points = f"{100 * value:.1f} points (weighted root mean square)"
    words = f"Shown are {_named(pair)}, whose cells depart from adding up by {points}"
    if len(order) == 1:
        return f"{words}; no other pair varies."
    if place == 1:
        return (
            f"{words}, the most of {len(order):,} pairs; next: {_named(order[1][1])}, "
            f"{100 * order[1][0]:.1f}."
        )
    return (
        f"{words}, number {place:,} of {len(order):,} pairs; the most: {_named(order[0][1])}, "
        f"{100 * order[0][0]:.1f}."
    )


def _named(pair: Axes) -> str:
    return f"{pair[0]} and {pair[1]}"
