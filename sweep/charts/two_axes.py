"""Two axes: survival where each choice of one axis meets each choice of another."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

import pandas as pd

from sweep.verdicts.survival import OVERALL, counts_of
from sweep.verdicts.words import counted, percent, share_text

from . import marks
from .arrangement import Row
from .context import Context
from .grid import Cell, Column, Grid, place_grid
from .layout import text_width
from .legend import tint_legend
from .marks import Layers, Scale, Specification
from .pairs import chosen_pair, strength_words
from .theme import ABSENT, BASELINE, HAIRLINE, INK, QUIET, SCREENED, SMALL, WIDTHS, tint

__all__ = ["NAME", "NEEDS", "OPTIONS", "QUESTION", "absent", "build", "describe", "numbers"]

NAME = "two axes"
QUESTION = "Do two choices act together?"
NEEDS = ("pair_cells", "survival")
OPTIONS = ("axes",)

# A cell is marked where its share is this far from what its row and column alone would give.
_FAR = 0.10
_FARTHEST = 3

# Shares above it are tinted so dark that text on them is white.
_DARK = 0.7

_LINE = SMALL * 1.22
_FOOT = 20.0
_NEVER = (
    "The sweep changes one choice at a time, so it cannot show whether two of them act together."
)
_NONE = "Fewer than two axes of this finding have several choices."

_TIPS = {
    "row": "row",
    "column": "column",
    "counts": "survived of admissible",
    "weighted": "weighted share",
    "alone": "from row and column alone",
}


def _subtitle(context: Context, words: str, grid: Grid) -> str:
    grey = any(cell.screened_out and not cell.admissible for cell in grid.cells.values())
    far = [cell for cell in grid.cells.values() if abs(cell.departs) >= _FAR]
    marked = (
        f"▲, ▼: at least {percent(_FAR).removesuffix('%')} points above or below what row and "
        f"column alone would give ({len(far):,} of {counted(len(grid.cells), 'cell')})."
    )
    said = [
        context.lead,
        words,
        "Tint: weighted share of the admissible specifications with both choices in which the "
        "finding survives; counts are unweighted rows; last row and column: weighted share of one "
        "choice alone."
        if context.counts.pooled
        else "Tint: share of the admissible rows with both choices in which the finding survives; "
        "last row and column: share of one choice alone. The sweep changes few choices at a time, "
        "so rows have no weights and there is no pooled share.",
        "Small dot: none admissible; empty: not planned together."
        + (" Grey: all screened out." if grey else ""),
        marked if far else "",
        context.losses,
        "Diamonds: the baseline's choices.",
    ]
    arranged = grid.arranged
    if arranged.shown < arranged.total:
        said.append(
            f"Of {grid.rows_axis}, {arranged.shown:,} of {arranged.total:,} choices have a row."
        )
    if grid.hidden:
        shown = len(grid.columns) - 1
        said.append(
            f"Of {grid.columns_axis}, {shown:,} of {shown + grid.hidden:,} choices have a column."
        )
    return " ".join(one for one in said if one)


def absent(frames: Mapping[str, pd.DataFrame]) -> str:
    """Say that there is nothing to draw where two choices are never changed at a time."""
    cells = frames["pair_cells"]
    if cells.empty:
        return _NONE
    together = ~cells["row_is_baseline"].astype(bool) & ~cells["column_is_baseline"].astype(bool)
    return "" if together.any() else _NEVER


def build(
    frames: Mapping[str, pd.DataFrame],
    context: Context,
    width: str = "wide",
    axes: Sequence[str] | None = None,
) -> Specification:
    """Draw survival by two axes at once.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        ``pair_cells`` and ``survival`` of one finding.
    context : Context
        The finding, its level and counts.
    width : str
        ``narrow`` (85 mm) or ``wide`` (175 mm).
    axes : sequence of str, optional
        Names of two axes; the pair that acts together most where none are given.

    Raises
    ------
    InputFault
        If the axes asked for are no pair of this finding.
    """
    nothing = absent(frames)
    if nothing:
        said = f"{context.lead} {context.losses}"
        return marks.without_marks(nothing, width, QUESTION, said)
    own, pair, order = chosen_pair(frames["pair_cells"], axes)
    grid = place_grid(own, width)
    height, across = grid.arranged.height + _FOOT, float(WIDTHS[width])
    drawn = list(_drawn(grid))
    return marks.figure(
        [
            *tint_legend(height, across),
            *_heads(grid, height),
            *_cells(grid, drawn, height),
            *_labels(grid, height),
            *_margins(grid, frames["survival"], height, across, pooled=context.counts.pooled),
            *_pointed(grid, drawn, height),
        ],
        width,
        height,
        QUESTION,
        _subtitle(context, strength_words(pair, order), grid),
    )


def _drawn(grid: Grid) -> Iterator[tuple[Row, Column, Cell]]:
    """Yield every cell that was planned with its row and column."""
    for row in grid.arranged.rows:
        names = [str(record["choice"]) for record in row.hidden or (row.record,)]
        for column in grid.columns:
            cell = grid.cell(names, column.choices)
            if cell is not None:
                yield row, column, cell


def _scale(grid: Grid, name: str) -> Scale:
    """Return pixels across as a scale, so that all cells are one layer."""
    ends = (grid.columns[0].left, grid.right)
    return Scale(name, ends, ends)


def _heads(grid: Grid, height: float) -> Layers:
    """Write the names of both axes and the labels of the columns."""
    start = grid.columns[0].left
    shown = sum(not column.closing for column in grid.columns)
    name = grid.columns_axis
    if grid.hidden:
        name += f" ({shown:,} of {shown + grid.hidden:,} choices)"
    layers = marks.texts([{"y": 21, "text": name}], height, start, bold=True)
    flat, turned = [], []
    for column in grid.columns:
        middle = (len(column.lines) - 1) / 2
        for number, text in enumerate(column.lines):
            if grid.turned:
                place = column.middle + (number - middle) * _LINE
                turned.append({"y": grid.top - 9, "at": place, "text": text})
            else:
                y = grid.top - 7 - (len(column.lines) - 1 - number) * _LINE
                flat.append({"y": y, "at": column.middle, "text": text})
    x = _scale(grid, "at")
    layers += marks.texts(flat, height, x, align="center")
    layers += marks.texts(turned, height, x, angle=270)
    head = [{"y": group.middle, "text": grid.rows_axis} for group in grid.arranged.groups]
    return layers + marks.texts(head, height, 0, bold=True)


def _cells(grid: Grid, drawn: list[tuple[Row, Column, Cell]], height: float) -> Layers:
    """Draw the cells: tint and counts, grey where screened out, a dot where nothing could run."""
    tinted, grey, empty, words = [], [], [], []
    for row, column, cell in drawn:
        box = {"y": row.top, "y2": row.bottom, "at": column.left, "to": column.right}
        if cell.share is not None:
            tinted.append(box | {"fill": tint(cell.share)})
            words += _counts(row, column, cell, stacked=grid.stacked)
        else:
            empty.append({"y": row.middle, "at": column.middle})
            if cell.screened_out:
                grey.append(box)
    x = _scale(grid, "at")
    return [
        *marks.areas(tinted, height, x, "to", line="white"),
        *marks.areas(grey, height, x, "to", colour=SCREENED, line="white"),
        *marks.texts(words, height, x, align="center", colour=None),
        *marks.dots(empty, height, x, colour=ABSENT, area=7),
        *_departures(drawn, x, height),
    ]


def _ink(cell: Cell) -> str:
    return "white" if cell.share is not None and cell.share > _DARK else INK


def _counts(row: Row, column: Column, cell: Cell, *, stacked: bool) -> list[dict[str, Any]]:
    """Return a cell's counts, on one line or two."""
    lines = [f"{cell.survived:,}", f"of {cell.admissible:,}"]
    if not stacked:
        lines = [" ".join(lines)]
    first = row.middle - (len(lines) - 1) * _LINE / 2
    return [
        {"y": first + number * _LINE, "at": column.middle + 3, "text": text, "ink": _ink(cell)}
        for number, text in enumerate(lines)
    ]


def _departures(drawn: list[tuple[Row, Column, Cell]], x: Scale, height: float) -> Layers:
    """Mark the cells that are far from what row and column alone would give."""
    layers: Layers = []
    for shape, sign in (("triangle-up", 1), ("triangle-down", -1)):
        for ink in (INK, "white"):
            rows = [
                {"y": row.middle, "at": column.left + 6}
                for row, column, cell in drawn
                if sign * cell.departs >= _FAR and _ink(cell) == ink
            ]
            layers += marks.dots(rows, height, x, colour=ink, shape=shape, area=34)
    return layers


def _labels(grid: Grid, height: float) -> Layers:
    arranged = grid.arranged
    names = [line for row in arranged.choices for line in row.label_rows()]
    others = [line for row in arranged.rows if row.hidden for line in row.label_rows()]
    rows = [{"y": row.middle} for row in arranged.choices if row.record["baseline"]]
    columns = [
        {
            "y": grid.top - 4 if grid.turned else grid.top - 7 - _LINE * len(column.lines),
            "at": column.middle,
        }
        for column in grid.columns
        if column.baseline and not column.closing
    ]
    return [
        *marks.texts(names, height, 12),
        *marks.texts(others, height, 12, colour=QUIET),
        *marks.dots(rows, height, 5, colour=BASELINE, shape="diamond", area=46),
        *marks.dots(columns, height, _scale(grid, "at"), colour=BASELINE, shape="diamond",
                    area=46 if not grid.turned else 28),
    ]  # fmt: skip


def _margins(
    grid: Grid, survival: pd.DataFrame, height: float, across: float, *, pooled: bool
) -> Layers:
    """Write the share of every choice alone beside its row and below its column."""
    shares = {
        (str(row["axis"]), str(row["choice"])): counts_of(row).shown
        for row in survival.to_dict("records")
    }
    right = [
        {"y": row.middle, "text": percent(shares.get((grid.rows_axis, str(row.record["choice"]))))}
        for row in grid.arranged.choices
    ]
    y = grid.arranged.height + 11
    below = [
        {"y": y, "at": one.middle, "text": percent(shares.get((grid.columns_axis,
                                                               one.choices[0])))}
        for one in grid.columns
        if not one.closing
    ]  # fmt: skip
    edge = min(grid.right + text_width("100%") + 12, across)
    corner = [{"y": y, "text": percent(shares[(OVERALL, OVERALL)])}] if pooled else []
    line = [{"y": grid.arranged.height + 3}]
    return [
        *marks.strokes(line, height, 1, edge, colour=HAIRLINE, width=0.6),
        *marks.texts([{"y": grid.top - 7, "text": "alone"}], height, edge, align="right",
                     colour=QUIET),
        *marks.texts([{"y": y, "text": "alone"}], height, 12, colour=QUIET),
        *marks.texts(right, height, edge, align="right", colour=QUIET),
        *marks.texts(below, height, _scale(grid, "at"), align="center", colour=QUIET),
        *marks.texts(corner, height, edge, align="right", bold=True),
    ]  # fmt: skip


def _pointed(grid: Grid, drawn: list[tuple[Row, Column, Cell]], height: float) -> Layers:
    rows = [
        {
            "y": row.top,
            "y2": row.bottom,
            "at": column.left,
            "to": column.right,
            "row": f"{grid.rows_axis}: {' '.join(row.lines)}",
            "column": f"{grid.columns_axis}: {' '.join(column.lines)}",
            "counts": share_text(cell.survived, cell.admissible),
            "weighted": percent(cell.share),
            "alone": percent(cell.expected),
        }
        for row, column, cell in drawn
    ]
    return marks.hit_areas(rows, height, _scale(grid, "at"), "to", _TIPS)


def numbers(
    frames: Mapping[str, pd.DataFrame], context: Context, axes: Sequence[str] | None = None
) -> pd.DataFrame:
    """Return the cells of the pair that is drawn, as the store counts them."""
    cells = frames["pair_cells"]
    return cells if cells.empty else chosen_pair(cells, axes)[0].reset_index(drop=True)


def describe(
    frames: Mapping[str, pd.DataFrame], context: Context, axes: Sequence[str] | None = None
) -> str:
    """Say in words what the figure shows."""
    cells = frames["pair_cells"]
    words = [f"Survival by two axes. {context.lead}"]
    nothing = absent(frames)
    if nothing:
        return " ".join([*words, nothing, context.losses])
    own, pair, order = chosen_pair(cells, axes)
    words.append(strength_words(pair, order))
    known = own[own["expected"].notna()]
    gaps = (known["share"].astype(float) - known["expected"].astype(float)).sort_values(
        key=abs, ascending=False, kind="stable"
    )
    for place in gaps.index[gaps.abs() >= _FAR][:_FARTHEST]:
        row = known.loc[place]
        side = "above" if gaps[place] > 0 else "below"
        words.append(
            f"With {row['row_axis']}: {row['row_choice']} and {row['column_axis']}: "
            f"{row['column_choice']}, {share_text(int(row['survived']), int(row['admissible']))}, "
            f"weighted {percent(float(row['share']))}, {100 * abs(gaps[place]):.0f} points {side} "
            "what the two alone would give."
        )
    return " ".join([*words, context.losses])
