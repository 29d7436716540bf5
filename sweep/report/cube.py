"""The cube as plain JSON: what the page counts from when a reader chooses specifications.

Columns of whole numbers are written as one text each, a digit of five bits a character and
small numbers first, or as the number itself where all cells have the same; ``cube.js`` reads
them back.  A page then holds some tens of kilobytes a finding.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from sweep.charts.context import Context
from sweep.charts.strips import day_number, spans, year_ticks
from sweep.charts.theme import TINTS
from sweep.verdicts import directions
from sweep.verdicts.words import level_text

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["NEEDS", "chooser", "packed", "unpacked"]

NEEDS = ("survival", "windows", "cube", "cube_windows")

_AXES = (
    "lags", "deterministics", "window", "transformation", "test", "conditioning", "measures",
)  # fmt: skip

_ALPHABET = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789-_"

# Counts that every cell has, and those that it has at each level.
_COUNTS = (
    "planned", "not_applicable", "infeasible", "failed", "screened_out", "admissible",
    "undetermined",
)  # fmt: skip
_AT_LEVEL = ("survived", "other_sign", "one_way", "reverse", "both_ways")

_MOST_TICKS = 7


def _digits(value: int) -> str:
    """Write one whole number, lowest five bits first; all digits but the last are marked."""
    text = ""
    while value > 31:
        text += _ALPHABET[32 + (value & 31)]
        value >>= 5
    return text + _ALPHABET[value]


def packed(values: Sequence[int]) -> int | str:
    """Write a column of whole numbers, none negative.

    Returns
    -------
    int or str
        The number where all are equal, otherwise one text.

    Examples
    --------
    >>> packed([3, 3, 3]), packed([0, 1, 31, 32, 1000]), packed([])
    (3, 'ABfgBof', 0)
    """
    if not len(values):
        return 0
    known = {value: _digits(value) for value in set(values)}
    if len(known) == 1:
        return int(values[0])
    return "".join([known[value] for value in values])


def unpacked(column: int | str, size: int) -> list[int]:
    """Read a column back, as ``cube.js`` does.

    Examples
    --------
    >>> unpacked("ABfgBof", 5), unpacked(3, 2)
    ([0, 1, 31, 32, 1000], [3, 3])
    """
    if isinstance(column, int):
        return [column] * size
    found, value, shift = [], 0, 0
    for character in column:
        digit = _ALPHABET.index(character)
        value += (digit & 31) << shift
        shift += 5
        if digit < 32:
            found.append(value)
            value, shift = 0, 0
    return found


def chooser(frames: Mapping[str, pd.DataFrame], context: Context) -> dict[str, Any] | None:
    """Return what the page needs to count any selection of one finding's choices.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        ``survival``, ``windows``, ``cube`` and ``cube_windows`` of the finding.
    context : Context
        Its level and design.

    Returns
    -------
    dict or None
        Plain JSON values; None where the sweep has too many choices for any cross of two axes.
        ``axes`` (name, choices, place of the baseline's or -1), ``fixed`` (axes of one choice),
        ``levels`` with the place of the plan's own, ``weights`` from small to large, ``crosses``
        and ``windows``.  In a cross ``cell`` holds the steps from one cell's number to the next,
        the number before the first being -1; the last of its axes counts fastest, and in the
        crosses over time the position counts faster still.
    """
    if frames["cube"].empty:
        return None
    levels, tails = _levels(context.significance)
    choices = dict(_choices(frames["survival"]))
    several = {axis: rows for axis, rows in choices.items() if len(rows) > 1}
    places = {axis: rows["choice_position"].to_numpy() for axis, rows in several.items()}
    weights = np.unique(frames["cube"]["weight"])
    return {
        "axes": [
            {
                "name": axis,
                "choices": rows["choice"].astype(str).tolist(),
                "baseline": _place_of_baseline(rows),
            }
            for axis, rows in several.items()
        ],
        "fixed": [
            [axis, str(rows["choice"].iloc[0])] for axis, rows in choices.items() if len(rows) == 1
        ],
        "levels": levels,
        "level": tails.index(""),
        "pooled": not context.design.endswith(("change", "changes")),
        "sampled": context.design.startswith("sample"),
        "verdicts": [directions.WORDS[name] for name in directions.VERDICTS],
        "weights": weights.tolist(),
        "crosses": [
            _cross(cells, held, places, weights, tails)
            for held, cells in _crosses(frames["cube"], list(places))
        ],
        "windows": _over_time(
            frames["cube_windows"],
            places,
            choices["window"]["choice_position"].to_numpy(),
            choices["window"]["choice"].astype(str).tolist(),
            _left_out(frames["windows"]),
            tails,
            context.period,
        ),
    }


def _levels(significance: float) -> tuple[list[str], list[str]]:
    """Return the levels in words, rising, and how the columns that belong to them end."""
    levels = {"": significance, "_1": 0.01, "_5": 0.05, "_10": 0.10}
    own = [tail for tail, level in levels.items()
           if not tail or not math.isclose(level, significance)]  # fmt: skip
    own.sort(key=lambda tail: levels[tail])
    return [level_text(levels[tail]) for tail in own], own


def _choices(survival: pd.DataFrame) -> Iterator[tuple[str, pd.DataFrame]]:
    """Yield each axis with its rows of the survival frame, in plan order."""
    for axis in _AXES:
        rows = survival[survival["axis"] == axis].sort_values("choice_position")
        if len(rows):
            yield axis, rows


def _place_of_baseline(rows: pd.DataFrame) -> int:
    found = np.flatnonzero(rows["is_baseline"].to_numpy(dtype=bool))
    return int(found[0]) if len(found) else -1


def _crosses(frame: pd.DataFrame, axes: Sequence[str]) -> Iterator[tuple[list[str], pd.DataFrame]]:
    """Yield the crosses of a frame: the axes that its cells do not sum over, and the cells."""
    held = frame[list(axes)].to_numpy() >= 0
    pattern = held @ (1 << np.arange(len(axes)))
    for value in np.unique(pattern):
        rows = np.flatnonzero(pattern == value)
        own = [axis for axis, one in zip(axes, held[rows[0]], strict=True) if one]
        yield own, frame.iloc[rows]


def _number(cells: pd.DataFrame, held: Sequence[str], places: Mapping[str, Any]) -> Any:
    """Return the number of each cell: the axes as digits, the last counting fastest."""
    number = np.zeros(len(cells), dtype=np.int64)
    for axis in held:
        digit = np.searchsorted(places[axis], cells[axis].to_numpy())
        number = number * len(places[axis]) + digit
    return number


def _steps(number: Any) -> int | str:
    return packed(np.diff(number, prepend=-1).tolist())


def _cross(
    cells: pd.DataFrame, held: Sequence[str], places: Mapping[str, Any], weights: Any, tails: Any
) -> dict[str, Any]:
    """Write one cross of the cube."""
    axes = list(places)
    number = _number(cells, held, places)
    order = np.lexsort((cells["weight"], number))
    cells, number = cells.iloc[order], number[order]
    return {
        "axes": [axes.index(axis) for axis in held],
        "size": len(cells),
        "cell": _steps(number),
        "weight": packed(np.searchsorted(weights, cells["weight"].to_numpy()).tolist()),
        "counts": {name: packed(cells[name].tolist()) for name in _COUNTS},
        "at": [{name: packed(cells[name + tail].tolist()) for name in _AT_LEVEL} for tail in tails],
    }


def _over_time(
    frame: pd.DataFrame,
    places: Mapping[str, Any],
    entries: Any,
    names: Sequence[str],
    left_out: Mapping[str, list[list[float]]],
    tails: Sequence[str],
    period: Callable[[Any], str],
) -> dict[str, Any] | None:
    """Write the window entries with their positions, and the crosses of the other axes."""
    if frame.empty:
        return None
    axes = list(places)
    positions = frame.drop_duplicates(["window", "pool"]).sort_values(["window", "pool"])
    drawn = []
    for window in positions["window"].unique().tolist():
        rows = positions[positions["window"] == window]
        choice = int(np.searchsorted(entries, window))
        gaps = left_out.get(names[choice], [])
        drawn.append(_entry(choice, names[choice], gaps, rows.to_dict("records"), period))
    keys = positions["window"].to_numpy() * len(frame) + positions["pool"].to_numpy()
    crosses = []
    for held, cells in _crosses(frame, [axis for axis in axes if axis != "window"]):
        place = np.searchsorted(keys, cells["window"] * len(frame) + cells["pool"])
        number = _number(cells, held, places) * len(keys) + place
        order = np.argsort(number, kind="stable")
        ordered = cells.iloc[order]
        crosses.append(
            {
                "axes": [axes.index(axis) for axis in held],
                "size": len(ordered),
                "cell": _steps(number[order]),
                "admissible": packed(ordered["admissible"].tolist()),
                "survived": [packed(ordered[f"survived{tail}"].tolist()) for tail in tails],
            }
        )
    days = [day for entry in drawn for span in entry["spans"] for day in span]
    low, high = min(days), max(days)
    ticks = [[day, text] for day, text in year_ticks(low, high, _MOST_TICKS)]
    return {
        "from": low,
        "to": high,
        "ticks": ticks,
        "tints": list(TINTS),
        "entries": drawn,
        "crosses": crosses,
    }


def _left_out(windows: pd.DataFrame) -> dict[str, list[list[float]]]:
    """Return the episodes that each window entry leaves out, in days since 1970."""
    if "episodes" not in windows:
        return {}
    rows = windows.drop_duplicates("window_name")
    return {
        str(name): [
            [day_number(end) for end in part.split("/")] for part in str(text).split(";") if part
        ]
        for name, text in zip(rows["window_name"], rows["episodes"], strict=True)
    }


def _entry(
    choice: int, name: str, gaps: list[list[float]], records: list[dict[Any, Any]],
    period: Callable[[Any], str],
) -> dict[str, Any]:  # fmt: skip
    """Write one window entry: its dates, what it covers across, and the gaps of a fixed one."""
    kind = str(records[0]["entry_kind"])
    return {
        "choice": choice,
        "name": name,
        "kind": kind,
        "positions": sum(int(record["pooled"]) for record in records),
        "gaps": gaps if kind == "fixed" else [],
        "spans": [list(span) for span in spans(kind, records)],
        "dates": [
            [period(record["window_start"]), period(record["window_end"])]
            for record in records
        ],
    }
