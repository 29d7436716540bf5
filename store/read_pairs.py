"""Pairs of axes: the cells of each, and how far they depart from an additive fit."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from store.database import Database
from store.schema import AXES, query

__all__ = ["additive_fit", "departure", "pair_cells"]

_COUNTS = ("planned", "not_applicable", "screened_out", "admissible", "survived")
_COLUMNS = (
    "row_axis", "column_axis", "row_choice", "column_choice", "row_position", "column_position",
    "row_is_baseline", "column_is_baseline", *_COUNTS, "weight", "share", "expected", "departure",
    "row_pooled", "column_pooled",
)  # fmt: skip


def additive_fit(
    rows: NDArray[np.intp],
    columns: NDArray[np.intp],
    weight: NDArray[np.float64],
    share: NDArray[np.float64],
) -> NDArray[np.float64]:
    """Fit a_row + b_column to the shares of a table's cells by weighted least squares.

    Parameters
    ----------
    rows, columns : array of int, shape (n,)
        Row and column of each cell, from 0.
    weight : array, shape (n,)
        Weight of each cell, positive: the sum of the weights of its admissible rows.
    share : array, shape (n,)
        Shares in [0, 1].

    Returns
    -------
    array, shape (n,)
        Fitted shares, which may lie outside [0, 1].  They solve the normal equations of the
        two-way model without interaction; where cells are missing, row and column effects are
        separated as in any unbalanced two-way layout (Yates 1934).

    Examples
    --------
    >>> rows, columns = np.array([0, 0, 1, 1]), np.array([0, 1, 0, 1])
    >>> share = np.array([0.1, 0.3, 0.4, 0.6])
    >>> bool(np.allclose(additive_fit(rows, columns, np.ones(4), share), share))
    True
    """
    if not rows.size:
        return np.empty(0)
    tall, wide = int(rows.max()) + 1, int(columns.max()) + 1
    table = np.zeros((tall, wide))
    np.add.at(table, (rows, columns), weight)
    left = np.block([[np.diag(table.sum(1)), table], [table.T, np.diag(table.sum(0))]])
    right = np.concatenate(
        [np.bincount(rows, weight * share, tall), np.bincount(columns, weight * share, wide)]
    )
    # Only sums of a row's and a column's effect are determined; the shortest solution has them.
    effects = np.linalg.lstsq(left, right, rcond=None)[0]
    fitted: NDArray[np.float64] = effects[rows] + effects[tall + columns]
    return fitted


def departure(
    weight: NDArray[np.float64], share: NDArray[np.float64], expected: NDArray[np.float64]
) -> float:
    """Return how far cells depart from an additive fit: the weighted root mean square.

    Two axes act together as far as the share of a cell is not its row's part plus its column's;
    this is the only measure of it.  0 where every cell is on the fit, in the unit of shares.

    Parameters
    ----------
    weight, share, expected : array, shape (n,)
        Weight, share and fitted share of each cell.

    Examples
    --------
    >>> share = np.array([1.0, 0.0, 0.0, 1.0])
    >>> departure(np.ones(4), share, np.full(4, 0.5))
    0.5
    """
    total = float(weight.sum())
    if not total:
        return 0.0
    return float(np.sqrt((weight * (share - expected) ** 2).sum() / total))


def pair_cells(db: Database, sweep: int, finding: int, cells: int = 5000) -> pd.DataFrame:
    """Return the cells of every pair of axes that both have several choices.

    Parameters
    ----------
    db : Database
        An open store.
    sweep, finding : int
        Numbers of the sweep and the finding.
    cells : int
        Most rows to return; beyond it choices of the long axes are pooled.

    Returns
    -------
    pandas.DataFrame
        One row a cell that was planned, pairs in plan order: ``row_axis, column_axis`` (the
        earlier axis of the two first), ``row_choice, column_choice, row_position,
        column_position, row_is_baseline, column_is_baseline, planned, not_applicable,
        screened_out, admissible, survived, weight`` (sum of the weights of admissible rows; of a
        design without weights, their number),
        ``share`` (weighted), ``expected`` (:func:`additive_fit` over the pair's cells, held to
        [0, 1]),
        ``departure`` (:func:`departure` of the pair, the same in all its cells), ``row_pooled,
        column_pooled`` (choices that the row or column stands for: 1, or more where pooled).
        Shares are in [0, 1] and missing where nothing is admissible.  Fit and departure are
        those of the cells before any pooling; a pooled cell has no ``expected``.
    """
    parameters = {"sweep": sweep, "finding": finding}
    choices = db.frame(
        "SELECT axis, code, label AS choice, position, is_baseline FROM sweep_choice "
        "WHERE sweep = $sweep AND finding = $finding ORDER BY position, code",
        parameters,
    )
    own = {axis: part for axis in AXES if len(part := choices[choices["axis"] == axis]) > 1}
    pairs = list(itertools.combinations(own, 2))
    if not pairs:
        return pd.DataFrame(columns=list(_COLUMNS))
    table = db.frame(query("pair_cells"), parameters)
    most = _most_choices([len(part) for part in own.values()], cells)
    sides = {axis: _Side.of(part, table[axis], most) for axis, part in own.items()}
    numbers = {name: table[name].to_numpy(float) for name in (*_COUNTS, "weight", "share")}
    parts = [_pair(numbers, rows, columns, sides) for rows, columns in pairs]
    frame = pd.DataFrame(
        {name: np.concatenate([part[name] for part in parts]) for name in parts[0]}
    )
    if max(len(part) for part in own.values()) > most:
        frame = _pooled(frame)
    return frame[list(_COLUMNS)].astype(dict.fromkeys(_COUNTS, "int64"))


@dataclass(frozen=True, slots=True)
class _Side:
    """One axis of the table: each row's choice, and what is known of the choices by place.

    Attributes
    ----------
    at : array of int, shape (rows of the table,)
        Number of the row's choice in plan order; -1 where the pair does not hold the axis.
    known : dict of str to array, shape (choices,)
        ``choice, position, is_baseline, place`` (the same where pooled), ``pooled``.
    """

    at: NDArray[np.intp]
    known: dict[str, NDArray[Any]]

    @classmethod
    def of(cls, choices: pd.DataFrame, codes: pd.Series, most: int) -> _Side:
        """Return the side of an axis; beyond the limit choices between spread ones are pooled."""
        lookup = np.full(int(choices["code"].max()) + 2, -1, dtype=np.intp)
        lookup[choices["code"].to_numpy(int)] = np.arange(len(choices))
        known: dict[str, NDArray[Any]] = {
            name: choices[name].to_numpy() for name in ("choice", "position", "is_baseline")
        }
        # The last entry of the lookup is none, which -1 finds.
        at = lookup[codes.astype("Int64").fillna(-1).to_numpy(int)]
        return cls(at, known | _places(known["is_baseline"].astype(bool), most))


def _most_choices(sizes: Sequence[int], cells: int) -> int:
    """Return how many choices of an axis may stand alone so that all pairs fit in the limit."""
    most = max(sizes)
    while most > 2:
        held = [min(size, most) for size in sizes]
        if sum(a * b for a, b in itertools.combinations(held, 2)) <= cells:
            break
        most -= max(1, most // 20)
    return most


def _places(baseline: NDArray[np.bool_], most: int) -> dict[str, NDArray[Any]]:
    """Give each choice a place; beyond the limit those between evenly spread ones share the last.

    The baseline's choice always stands alone.
    """
    count = baseline.size
    kept = np.arange(count)
    if count > most:
        kept = np.unique(np.round(np.linspace(0, count - 1, max(most - 2, 0))).astype(int))
        kept = np.union1d(kept, np.flatnonzero(baseline))
    place = np.full(count, kept.size)
    place[kept] = np.arange(kept.size)
    return {"place": place, "pooled": np.where(place < kept.size, 1, count - kept.size)}


def _pair(
    numbers: dict[str, NDArray[np.float64]], rows: str, columns: str, sides: dict[str, _Side]
) -> dict[str, NDArray[Any]]:
    """Return the cells of one pair in plan order with their additive fit."""
    tall, wide = sides[rows].at, sides[columns].at
    held = np.flatnonzero((tall >= 0) & (wide >= 0))
    held = held[np.lexsort((wide[held], tall[held]))]
    own = {name: values[held] for name, values in numbers.items()}
    counted = own["admissible"] > 0
    weight, share = own["weight"][counted], own["share"][counted]
    fitted = additive_fit(tall[held][counted], wide[held][counted], weight, share)
    # No cell can be expected below 0 or above 1: an end that is reached is no acting together.
    fitted = np.clip(fitted, 0.0, 1.0)
    expected = np.full(held.size, np.nan)
    expected[counted] = fitted
    found = own | {
        "expected": expected,
        "departure": np.full(held.size, departure(weight, share, fitted)),
    }
    for side, axis in (("row", rows), ("column", columns)):
        found[f"{side}_axis"] = np.full(held.size, axis, dtype=object)
        for name, values in sides[axis].known.items():
            found[f"{side}_{name}"] = values[sides[axis].at[held]]
    return found


def _pooled(frame: pd.DataFrame) -> pd.DataFrame:
    """Sum the cells that share a place."""
    keys = ["row_axis", "column_axis", "row_place", "column_place"]
    frame = frame.assign(weighted=frame["weight"] * frame["share"].fillna(0.0))
    summed = frame.groupby(keys, sort=False, as_index=False).agg(
        dict.fromkeys([*_COUNTS, "weight", "weighted"], "sum")
        | {name: "first" for name in _COLUMNS if name not in (*keys, *_COUNTS, "weight")}
    )
    several = {side: summed[f"{side}_pooled"] > 1 for side in ("row", "column")}
    for side, pooled in several.items():
        words = summed[f"{side}_pooled"].astype(str) + " other choices"
        summed[f"{side}_choice"] = summed[f"{side}_choice"].where(~pooled, words)
    joined = several["row"] | several["column"]
    shares = (summed["weighted"] / summed["weight"]).where(summed["admissible"] > 0)
    summed["share"] = summed["share"].where(~joined, shares)
    summed["expected"] = summed["expected"].where(~joined)
    places = [summed[name] for name in keys[2:]]
    order = summed.assign(pair=summed.groupby(keys[:2], sort=False).ngroup(), a=places[0],
                          b=places[1])  # fmt: skip
    return order.sort_values(["pair", "a", "b"], ignore_index=True)
