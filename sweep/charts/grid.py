"""The grid of the two-axis map: which choices stand where, and what each cell holds."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from sweep.verdicts.words import missing

from .arrangement import Arrangement, Record, arrange, label_room
from .layout import spread_evenly, text_width, wrapped
from .theme import SMALL, WIDTHS

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["Cell", "Column", "Grid", "place_grid"]

_INDENT = 12.0
_LABEL = {"narrow": 92.0, "wide": 170.0}
_HEAD = 17.0  # what an arrangement takes for the name of its axis
_LEGEND = 30.0
_ROWS = 40
_MARK = 13.0  # room for the mark of a cell that departs
_WIDEST = 92.0
_TURNED = 104.0  # longest label that is set upward
_LINE = SMALL * 1.22


@dataclass(frozen=True, slots=True)
class Cell:
    """What is counted where a row and a column meet.

    Attributes
    ----------
    admissible, survived, screened_out : int
        Rows of the sweep.
    weight : float
        Sum of the weights of the admissible rows.
    share, expected : float or None
        Weighted share and the share that row and column alone would give; None where nothing is
        admissible, ``expected`` also where several choices are summed.
    """

    admissible: int
    survived: int
    screened_out: int
    weight: float
    share: float | None
    expected: float | None

    @property
    def departs(self) -> float:
        """Return the share less the expected one; 0 where there is none."""
        return 0.0 if self.share is None or self.expected is None else self.share - self.expected


@dataclass(frozen=True, slots=True)
class Column:
    """One column: its choices (several where it closes the others), label and place."""

    choices: tuple[str, ...]
    lines: tuple[str, ...]
    baseline: bool
    left: float
    right: float
    closing: bool

    @property
    def middle(self) -> float:
        """Pixels from the left."""
        return (self.left + self.right) / 2


@dataclass(frozen=True, slots=True)
class Grid:
    """Rows, columns and cells of one pair of axes.

    Attributes
    ----------
    rows_axis, columns_axis : str
        The longer axis makes the rows.
    arranged : Arrangement
        The rows.
    columns : tuple of Column
    top : float
        Pixels above the first row.
    turned, stacked : bool
        Whether column labels are set upward, and counts on two lines.
    hidden : int
        Choices that the closing column stands for.
    """

    rows_axis: str
    columns_axis: str
    arranged: Arrangement
    columns: tuple[Column, ...]
    top: float
    turned: bool
    stacked: bool
    hidden: int
    cells: Mapping[tuple[str, str], Cell]

    @property
    def right(self) -> float:
        """Where the last column ends."""
        return self.columns[-1].right

    def cell(self, rows: Iterable[str], columns: Iterable[str]) -> Cell | None:
        """Return the cell of some choices, summed where there are several; None if unplanned."""
        across = list(columns)
        return _summed([self.cells.get((row, column)) for row in rows for column in across])


def _summed(cells: Sequence[Cell | None]) -> Cell | None:
    """Return several cells as one; None where none was planned."""
    found = [one for one in cells if one is not None]
    if len(found) < 2:
        return found[0] if found else None
    weight = sum(one.weight for one in found)
    return Cell(
        sum(one.admissible for one in found),
        sum(one.survived for one in found),
        sum(one.screened_out for one in found),
        weight,
        sum(one.weight * (one.share or 0.0) for one in found) / weight if weight else None,
        None,
    )


def _number(value: Any) -> float | None:
    return None if missing(value) else float(value)


def place_grid(frame: pd.DataFrame, width: str) -> Grid:
    """Place rows and columns of one pair.

    Parameters
    ----------
    frame : DataFrame
        The rows of the store's frame ``pair_cells`` that belong to the pair.
    width : str
        ``narrow`` or ``wide``.
    """
    sides = [_side(frame, "row"), _side(frame, "column")]
    order = ("column", "row") if len(sides[1]) > len(sides[0]) else ("row", "column")
    rows, columns = (sides[0 if side == "row" else 1] for side in order)
    cells = {
        (str(one[f"{order[0]}_choice"]), str(one[f"{order[1]}_choice"])): Cell(
            int(one["admissible"]), int(one["survived"]), int(one["screened_out"]),
            float(one["weight"]), _number(one["share"]), _number(one["expected"]),
        )
        for one in frame.to_dict("records")
    }  # fmt: skip
    name = str(frame[f"{order[0]}_axis"].iloc[0])
    room = max(label_room([(name, rows)], _LABEL[width], _ROWS), text_width(name, bold=True))
    start = _INDENT + room + 10
    margin = text_width("100%") + 14
    available = WIDTHS[width] - start - margin
    stacked, across, chosen = _fitting(cells, rows, columns, available)
    lines, turned = _column_labels(chosen, across)
    deep = max(map(_length, lines)) if turned else max(map(len, lines)) * _LINE
    top = _LEGEND + deep + (13 if turned else 10)
    placed = tuple(
        Column(
            tuple(one["choice"] for one in group), tuple(label),
            any(one["baseline"] for one in group), start + number * across,
            start + (number + 1) * across, _closes(group),
        )
        for number, (group, label) in enumerate(zip(chosen, lines, strict=True))
    )  # fmt: skip
    arranged = arrange(
        [(name, rows)], room,
        lambda record: bool(record["baseline"]), top - _HEAD, _ROWS,
        least=2 * _LINE + 3 if stacked else 0,
    )  # fmt: skip
    hidden = sum(one["pooled"] for group in chosen if _closes(group) for one in group)
    return Grid(
        name, str(frame[f"{order[1]}_axis"].iloc[0]), arranged, placed,
        top, turned, stacked, hidden, cells,
    )  # fmt: skip


def _closes(group: list[Record]) -> bool:
    """Say whether a column sums up the choices that have none of their own."""
    return len(group) > 1 or group[0]["pooled"] > 1


def _length(label: list[str]) -> float:
    return max(text_width(line) for line in label)


def _side(frame: pd.DataFrame, side: str) -> list[Record]:
    """Return the choices of one side in plan order."""
    names = [f"{side}_{name}" for name in ("pooled", "position", "choice", "is_baseline")]
    # What pools several choices comes last.
    own = frame[names].drop_duplicates(names[2]).sort_values(by=names[:2])
    return [
        {"choice": str(choice), "baseline": bool(baseline), "pooled": int(pooled)}
        for pooled, _, choice, baseline in own.itertuples(index=False)
    ]


def _fitting(
    cells: Mapping[tuple[str, str], Cell], rows: list[Record], columns: list[Record],
    available: float,
) -> tuple[bool, float, list[list[Record]]]:  # fmt: skip
    """Return whether counts are stacked, a column's width, and the choices of each column.

    Counts stand on one line if all columns fit so, else on two; where these do not fit either,
    columns are thinned and the last one sums up the others.
    """
    alone = [[one] for one in columns]
    for stacked in (False, True):
        needed = _needed(cells.values(), stacked=stacked)
        if len(columns) * needed <= available:
            return stacked, min(max(needed, _WIDEST), available / len(columns)), alone
    single = sum(one["pooled"] == 1 for one in columns)
    must = [place for place, one in enumerate(columns) if one["baseline"]]
    most = max(int(available / needed), 2)
    while True:
        kept = spread_evenly(single, most - 1, must)
        rest = [one for place, one in enumerate(columns) if place not in set(kept)]
        closing = [
            _summed([cells.get((row["choice"], one["choice"])) for one in rest]) for row in rows
        ]
        if most == 2 or most * _needed([*cells.values(), *closing], stacked=True) <= available:
            return True, available / most, [*([columns[place]] for place in kept), rest]
        most -= 1


def _needed(cells: Iterable[Cell | None], *, stacked: bool) -> float:
    """Return the width of a column that holds all counts beside their mark."""
    counted = [one for one in cells if one is not None and one.admissible]
    lower = [f"of {one.admissible:,}" for one in counted]
    if not stacked:
        lower = [f"{one.survived:,} {words}" for one, words in zip(counted, lower, strict=True)]
    widths = [text_width(words) for words in lower]
    return max(widths, default=8.0) + _MARK + 3


def _column_labels(
    chosen: list[list[Record]], across: float
) -> tuple[list[list[str]], bool]:
    """Return the lines of each column's label, and whether they are set upward."""
    words = [
        f"{sum(one['pooled'] for one in group):,} other choices" if _closes(group)
        else group[0]["choice"]
        for group in chosen
    ]  # fmt: skip
    flat = [wrapped(text, across - 6) for text in words]
    whole = all(
        text_width(word) <= across - 6 for text in words for word in text.split()
    )
    if whole and max(map(len, flat)) <= 3:
        return flat, False
    lines = max(int((across - 4) / _LINE), 1)
    return [wrapped(text, _TURNED, SMALL, lines=min(lines, 3)) for text in words], True
