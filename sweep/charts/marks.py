"""The few marks that all figures are drawn with.

A figure is one layered view.  Its y positions are pixels from the top, computed where the
text is wrapped, so that rows, group names and counts line up at any number of choices; its
x positions are data on a real scale, or pixels for columns of text.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any, Literal, cast

import altair as alt
import pandas as pd

from .layout import wrapped
from .theme import BODY, EDGE, INK, SMALL, TITLE, WIDTHS, configure

__all__ = ["Rows", "areas", "dots", "figure", "hit_rows", "paths", "strokes", "texts"]

Rows = Sequence[Mapping[str, Any]]


def _frame(rows: Rows) -> pd.DataFrame:
    return pd.DataFrame([dict(row) for row in rows])


def _y(height: float, name: str = "y") -> alt.Y:
    scale = alt.Scale(domain=[0, height], range=[0, height], nice=False, zero=False)
    return alt.Y(f"{name}:Q", scale=scale, axis=None)


def _x(x: alt.X | float) -> Any:
    return alt.value(x) if isinstance(x, int | float) else x


def _tips(tips: Mapping[str, str] | None) -> Any:
    if not tips:
        return alt.Undefined
    return [alt.Tooltip(f"{name}:N", title=title) for name, title in tips.items()]


def texts(
    rows: Rows,
    height: float,
    x: alt.X | float,
    *,
    align: Literal["left", "center", "right"] = "left",
    size: float = SMALL,
    colour: str = INK,
    bold: bool = False,
    dx: float = 0,
) -> list[alt.Chart]:
    """Draw a column of text from rows with ``y`` and ``text``; nothing where there is no row."""
    if not rows:
        return []
    mark = alt.Chart(_frame(rows)).mark_text(
        align=align,
        baseline="middle",
        fontSize=size,
        color=colour,
        fontWeight="bold" if bold else "normal",
        dx=dx,
        limit=0,
    )
    return [mark.encode(x=_x(x), y=_y(height), text=alt.Text("text:N"))]


def dots(
    rows: Rows,
    height: float,
    x: alt.X | float,
    *,
    colour: str,
    shape: str = "circle",
    area: float = 42,
    filled: bool = True,
    tips: Mapping[str, str] | None = None,
) -> list[alt.Chart]:
    """Draw one mark for each row with ``y``."""
    if not rows:
        return []
    mark = alt.Chart(_frame(rows)).mark_point(
        shape=shape,
        size=area,
        filled=filled,
        color=colour,
        opacity=1,
        strokeWidth=0 if filled else 1.2,
    )
    encoding = {"x": _x(x), "y": _y(height), "tooltip": _tips(tips)}
    return [mark.encode(**encoding)]


def strokes(
    rows: Rows,
    height: float,
    x: alt.X | float,
    x2: str | float | None = None,
    *,
    colour: str,
    width: float = 1,
    dash: Sequence[float] | None = None,
    tall: bool = False,
) -> list[alt.Chart]:
    """Draw horizontal strokes from x to x2 or, when tall, upright ones from y to y2."""
    if not rows:
        return []
    dashes: Any = list(dash) if dash else alt.Undefined
    mark = alt.Chart(_frame(rows)).mark_rule(color=colour, strokeWidth=width, strokeDash=dashes)
    encoding: dict[str, Any] = {"x": _x(x), "y": _y(height)}
    if tall:
        encoding["y2"] = alt.Y2("y2:Q")
    else:
        encoding["x2"] = alt.X2(f"{x2}:Q") if isinstance(x2, str) else alt.value(x2)
    return [mark.encode(**encoding)]


def areas(
    rows: Rows,
    height: float,
    x: alt.X | float,
    x2: str | float,
    *,
    colour: str | None = None,
    tips: Mapping[str, str] | None = None,
) -> list[alt.Chart]:
    """Draw rectangles from (x, y) to (x2, y2); without a colour, each row has its ``fill``."""
    if not rows:
        return []
    mark = alt.Chart(_frame(rows)).mark_rect(strokeWidth=0, color=colour or alt.Undefined)
    encoding: dict[str, Any] = {
        "x": _x(x),
        "x2": alt.X2(x2) if isinstance(x2, str) else alt.value(x2),
        "y": _y(height),
        "y2": alt.Y2("y2:Q"),
        "tooltip": _tips(tips),
    }
    if colour is None:
        encoding["fill"] = alt.Fill("fill:N", scale=None, legend=None)
    return [mark.encode(**encoding)]


def paths(
    rows: Rows, height: float, x: alt.X, *, colour: str, width: float = 1.4, band: bool = False
) -> list[alt.Chart]:
    """Join rows of the same ``path`` by a line through ``y`` or a band from ``y`` to ``y2``."""
    if not rows:
        return []
    base = alt.Chart(_frame(rows))
    if band:
        return [
            base.mark_area(color=colour, opacity=1).encode(
                x=x, y=_y(height), y2=alt.Y2("y2:Q"), detail="path:N"
            )
        ]
    mark = base.mark_line(color=colour, strokeWidth=width, strokeJoin="round")
    return [mark.encode(x=x, y=_y(height), detail="path:N")]


def hit_rows(rows: Rows, height: float, width: float, tips: Mapping[str, str]) -> list[alt.Chart]:
    """Lay an unseen area over each row (``y`` to ``y2``) that shows its numbers when pointed at."""
    if not rows:
        return []
    mark = alt.Chart(_frame(rows)).mark_rect(opacity=0, strokeWidth=0)
    return [
        mark.encode(
            x=alt.value(0),
            x2=alt.value(width),
            y=_y(height),
            y2=alt.Y2("y2:Q"),
            tooltip=_tips(tips),
        )
    ]


def figure(
    layers: Sequence[alt.Chart],
    width: str,
    height: float,
    title: str,
    subtitle: str,
) -> alt.LayerChart:
    """Put layers into one view of a named print width, with its question as title."""
    across = WIDTHS[width]
    chart = alt.layer(*layers).properties(
        width=across,
        height=height,
        padding=EDGE,
        title=alt.TitleParams(
            text=wrapped(title, across, TITLE, bold=True),
            subtitle=wrapped(subtitle, across, BODY),
        ),
    )
    return cast(alt.LayerChart, chart.configure(**configure()))
