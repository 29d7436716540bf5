"""Rows grouped by axis: where each choice stands, and what to do when there are too many.

A figure shows at most a page of rows.  Beyond that every axis gives up rows fairly; the
rows that the caller marks have first call on half of the room, the others are thinned evenly
in plan order, and one closing row says how many were left out and what their numbers are.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from sweep.verdicts.words import counted

from .layout import spread_evenly, text_width, wrapped
from .theme import SMALL

if TYPE_CHECKING:
    import pandas as pd

__all__ = [
    "PAGE", "Arrangement", "Group", "Record", "Row", "arrange", "by_axis", "held_fixed",
    "label_room",
]  # fmt: skip

# Rows that fit on one printed page beside title and caption.
PAGE = 44

_LINE = SMALL * 1.22
_GAP = 2.8
_HEAD = SMALL * 1.3 + 5
_BETWEEN = 9.0

Record = Mapping[Any, Any]


@dataclass(frozen=True, slots=True)
class Row:
    """One row of a figure.

    Attributes
    ----------
    record : mapping
        The choice's numbers; empty for a closing row.
    lines : tuple of str
        Its label, wrapped.
    top, middle, bottom : float
        Pixels from the top of the view.
    hidden : tuple of mapping
        The choices that a closing row stands for.
    """

    record: Record
    lines: tuple[str, ...]
    top: float
    middle: float
    bottom: float
    hidden: tuple[Record, ...] = ()

    def label_rows(self) -> list[dict[str, Any]]:
        """Return one record for each line of the label, centred on the row."""
        first = self.middle - (len(self.lines) - 1) * _LINE / 2
        return [
            {"y": first + number * _LINE, "text": line} for number, line in enumerate(self.lines)
        ]


@dataclass(frozen=True, slots=True)
class Group:
    """The name of an axis above its rows, with its place."""

    axis: str
    text: str
    middle: float
    bottom: float


@dataclass(frozen=True, slots=True)
class Arrangement:
    """All rows and group names of a figure.

    Attributes
    ----------
    rows : tuple of Row
        In plan order.
    groups : tuple of Group
        One for each axis.
    height : float
        Pixels from the top of the view to the end of the last row.
    shown, total : int
        Choices drawn and choices there are.
    """

    rows: tuple[Row, ...]
    groups: tuple[Group, ...]
    height: float
    shown: int
    total: int

    @property
    def choices(self) -> tuple[Row, ...]:
        """Return the rows that stand for one choice each."""
        return tuple(row for row in self.rows if not row.hidden)

    @property
    def thinned(self) -> str:
        """Return the sentence that says what is not drawn; empty if everything is."""
        if self.shown == self.total:
            return ""
        return (
            f"Shown are {self.shown:,} of {self.total:,} choices, thinned evenly in plan order; "
            "closing rows sum up the others."
        )


def by_axis(frame: pd.DataFrame) -> list[tuple[str, list[Record]]]:
    """Split a frame into records by axis, in the order of the frame."""
    return [
        (str(axis), frame[frame["axis"] == axis].to_dict("records"))
        for axis in frame["axis"].drop_duplicates()
    ]


def held_fixed(
    groups: Sequence[tuple[str, list[Record]]],
) -> tuple[list[tuple[str, list[Record]]], str]:
    """Set aside the axes that hold a single choice, which a figure only needs to name.

    Returns
    -------
    tuple
        The axes that vary (all of them if none does) and a sentence that names the rest.
    """
    varying = [(axis, records) for axis, records in groups if len(records) > 1]
    fixed = [(axis, records[0]["choice"]) for axis, records in groups if len(records) == 1]
    if not varying or not fixed:
        return list(groups), ""
    named = "; ".join(f"{axis}: {choice}" for axis, choice in fixed)
    return varying, f"Held at one choice: {named}."


def label_room(
    groups: Sequence[tuple[str, list[Record]]], most: float, limit: int = PAGE
) -> float:
    """Return the pixels that the labels need, at most ``most`` (they are wrapped beyond).

    Where the choices are more than are drawn, the label of a closing row has room too.
    """
    labels = [
        str(line)
        for _, records in groups
        for record in records
        for line in record.get("lines", (record["choice"],))
    ]
    if sum(len(records) for _, records in groups) > limit:
        labels.append(f"{sum(_stand_for(records) for _, records in groups):,} other choices")
    widest = max((text_width(label) for label in labels), default=0.0)
    return min(most, max(widest + 2, 40.0))


def _shares(sizes: Sequence[int], limit: int) -> list[int]:
    """Divide a limit among axes: the small ones whole, the large ones alike."""
    given = [0] * len(sizes)
    left = limit
    order = sorted(range(len(sizes)), key=lambda position: sizes[position])
    for done, position in enumerate(order):
        given[position] = min(sizes[position], max(3, left // (len(order) - done)))
        left -= given[position]
    return given


def arrange(
    groups: Sequence[tuple[str, list[Record]]],
    label_width: float,
    keep: Callable[[Record], bool],
    top: float,
    limit: int = PAGE,
    *,
    rooms: Sequence[int] | None = None,
    noun: str = "choice",
    least: float = 0,
) -> Arrangement:
    """Place the rows of all axes below each other.

    Parameters
    ----------
    groups : sequence of (axis, records)
        Choices by axis in plan order; a record has the key ``choice``, and may have ``lines``
        (a tuple of str, each to stand on a line of its own).
    label_width : float
        Pixels for a label, which is wrapped to at most two lines.
    keep : callable
        Says of a record whether it is to be drawn before others.
    top : float
        Pixels above the first group.
    limit : int
        Most choices to draw in all.
    rooms : sequence of int or None
        Most rows of each group, of which the first are drawn; None to share the limit among
        the groups and thin them evenly.
    noun : str
        What a row stands for.
    least : float
        Least height of a row, pixels.

    Returns
    -------
    Arrangement
        Rows and group names with their places.
    """
    rows: list[Row] = []
    heads: list[Group] = []
    height = top
    given = rooms or _shares([len(records) for _, records in groups], limit)
    shown = 0
    for (axis, records), room in zip(groups, given, strict=True):
        chosen = _chosen(records, room, keep)
        if rooms:
            chosen = list(range(min(room, len(records))))
        hidden = tuple(record for place, record in enumerate(records) if place not in set(chosen))
        shown += len(chosen)
        text = axis
        if hidden:
            text = f"{axis} ({len(chosen):,} of {counted(_stand_for(records), noun)})"
        heads.append(Group(axis, text, height + _HEAD / 2 - 1, height + _HEAD))
        height += _HEAD
        for place in chosen:
            label = _label(records[place], label_width)
            rows.append(_row(records[place], label, height, least))
            height = rows[-1].bottom
        if hidden:
            rest = [counted(_stand_for(hidden), f"other {noun}")]
            rows.append(_row({}, rest, height, least, hidden))
            height = rows[-1].bottom
        height += _BETWEEN
    total = sum(_stand_for(records) for _, records in groups)
    return Arrangement(tuple(rows), tuple(heads), height - _BETWEEN, shown, total)


def _label(record: Record, width: float) -> list[str]:
    """Return the lines of a label, each of its texts wrapped to two at the most."""
    found = []
    for text in record.get("lines", (record["choice"],)):
        found += wrapped(str(text), width, SMALL, lines=2)
    return found


def _chosen(records: list[Record], room: int, keep: Callable[[Record], bool]) -> list[int]:
    """Return which records are drawn; those that pool several choices never are."""
    alone = [place for place, record in enumerate(records) if record.get("pooled", 1) == 1]
    must = [number for number, place in enumerate(alone) if keep(records[place])]
    # Marked rows may not crowd out the others, or a figure would only show what is rare.
    must = [must[number] for number in spread_evenly(len(must), max(1, room // 2))]
    return [alone[number] for number in spread_evenly(len(alone), room, must)]


def _stand_for(records: Sequence[Record]) -> int:
    """Return how many choices some records stand for."""
    return sum(int(record.get("pooled", 1)) for record in records)


def _row(
    record: Record, lines: list[str], top: float, least: float, hidden: tuple[Record, ...] = ()
) -> Row:
    bottom = top + max(len(lines) * _LINE + _GAP, least)
    return Row(record, tuple(lines), top, (top + bottom) / 2, bottom, hidden)
