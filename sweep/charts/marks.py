"""The few marks that all figures are drawn with.

A figure is one layered view in the Vega-Lite language, put together here as plain values.  Its
y positions are pixels from the top, computed where the text is wrapped, so that rows, group
names and counts line up at any number of choices; its x positions are data on a real scale
(:class:`Scale`), or pixels for columns of text.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Literal, Protocol

from sweep.verdicts.words import missing

from .layout import wrapped
from .theme import BODY, EDGE, HAIRLINE, INK, QUIET, SMALL, TITLE, WIDTHS, configure

__all__ = [
    "Layers", "Rows", "Scale", "Specification", "areas", "dots", "figure", "hit_areas",
    "hit_rows", "paths", "strokes", "texts", "without_marks",
]  # fmt: skip

Rows = Sequence[Mapping[str, Any]]
Specification = dict[str, Any]
Layers = list[Specification]


class Encoded(Protocol):
    """Anything that knows its encoding in the chart language."""

    def to_dict(self) -> dict[str, Any]:
        """Return the encoding as plain values."""


@dataclass(frozen=True, slots=True)
class Scale:
    """A field of the rows on a scale from data to pixels across.

    Attributes
    ----------
    field : str
        Name of the field.
    domain : tuple of float
        Data at the left and at the right end.
    track : tuple of float
        Pixels of the two ends.
    log : bool
        Whether the scale is logarithmic.
    """

    field: str
    domain: tuple[float, float]
    track: tuple[float, float]
    log: bool = False

    def to_dict(self) -> dict[str, Any]:
        """Return the encoding as plain values."""
        scale: dict[str, Any] = {
            "domain": list(self.domain), "range": list(self.track), "nice": False,
        }  # fmt: skip
        # A scale that starts at zero or not is a question only where it is linear.
        scale |= {"type": "log"} if self.log else {"zero": False}
        return {"axis": None, "field": self.field, "scale": scale, "type": "quantitative"}


X = Encoded | float


def _plain(value: Any) -> Any:
    """Return a value as JSON has it: Python's own numbers, null where there is none."""
    if value is None or isinstance(value, str | bool):
        return value
    if missing(value):
        return None
    return value.item() if hasattr(value, "item") else value


def _value(name: str, value: Any) -> Any:
    """Return a field's value; places down are pixels, which a hundredth is fine enough for."""
    plain = _plain(value)
    return round(plain, 2) if name in ("y", "y2") and plain is not None else plain


def _layer(mark: dict[str, Any], rows: Rows, encoding: Mapping[str, Any]) -> Layers:
    """Return one layer with the fields of its rows that it reads; nothing without rows."""
    if not rows:
        return []
    drawn = {name: one for name, one in encoding.items() if one is not None}
    read = _fields(drawn)
    values = [{name: _value(name, row[name]) for name in read if name in row} for row in rows]
    return [{"data": {"values": values}, "mark": mark, "encoding": drawn}]


def _fields(encoding: Mapping[str, Any]) -> list[str]:
    """Return the names of the fields that an encoding reads, each once."""
    every = (one for part in encoding.values() for one in (part if isinstance(part, list) else
                                                           [part]))  # fmt: skip
    return list(dict.fromkeys(one["field"] for one in every if "field" in one))


def _y(height: float, name: str = "y") -> dict[str, Any]:
    ends = [0, round(height, 2)]
    scale = {"domain": ends, "range": ends, "nice": False, "zero": False}
    return {"axis": None, "field": name, "scale": scale, "type": "quantitative"}


def _x(x: X) -> dict[str, Any]:
    return {"value": x} if isinstance(x, int | float) else x.to_dict()


def _end(x2: str | float | None) -> dict[str, Any] | None:
    """Return the other end of a stroke or area: a field on the same scale, or pixels."""
    if x2 is None:
        return None
    return {"field": x2} if isinstance(x2, str) else {"value": x2}


def _own(field: str) -> dict[str, Any]:
    """Return the encoding of a colour that each row names itself."""
    return {"field": field, "legend": None, "scale": None, "type": "nominal"}


def _tips(tips: Mapping[str, str] | None) -> list[dict[str, Any]] | None:
    if not tips:
        return None
    return [{"field": name, "title": title, "type": "nominal"} for name, title in tips.items()]


def texts(
    rows: Rows,
    height: float,
    x: X,
    *,
    align: Literal["left", "center", "right"] = "left",
    size: float = SMALL,
    colour: str | None = INK,
    bold: bool = False,
    dx: float = 0,
    angle: float = 0,
) -> Layers:
    """Draw text from rows with ``y`` and ``text``; nothing where there is no row.

    Without a colour, each row has its ``ink``.  The angle is in degrees, clockwise; a text is
    turned about its anchor.
    """
    mark = {
        "type": "text", "align": align, "baseline": "middle", "fontSize": size,
        "fontWeight": "bold" if bold else "normal", "dx": dx, "limit": 0,
    }  # fmt: skip
    if colour is not None:
        mark["color"] = colour
    if angle:
        mark["angle"] = angle
    text = {"field": "text", "type": "nominal"}
    ink = _own("ink") if colour is None else None
    return _layer(mark, rows, {"x": _x(x), "y": _y(height), "text": text, "color": ink})


def dots(
    rows: Rows,
    height: float,
    x: X,
    *,
    colour: str,
    shape: str = "circle",
    area: float = 42,
    filled: bool = True,
    tips: Mapping[str, str] | None = None,
) -> Layers:
    """Draw one mark for each row with ``y``."""
    mark = {
        "type": "point", "shape": shape, "size": area, "filled": filled, "color": colour,
        "opacity": 1, "strokeWidth": 0 if filled else 1.2,
    }  # fmt: skip
    return _layer(mark, rows, {"x": _x(x), "y": _y(height), "tooltip": _tips(tips)})


def strokes(
    rows: Rows,
    height: float,
    x: X,
    x2: str | float | None = None,
    *,
    colour: str,
    width: float = 1,
    dash: Sequence[float] | None = None,
    tall: bool = False,
) -> Layers:
    """Draw horizontal strokes from x to x2 or, when tall, upright ones from y to y2."""
    mark: dict[str, Any] = {"type": "rule", "color": colour, "strokeWidth": width}
    if dash:
        mark["strokeDash"] = list(dash)
    encoding = {"x": _x(x), "y": _y(height)}
    end = {"y2": {"field": "y2"}} if tall else {"x2": _end(x2)}
    return _layer(mark, rows, encoding | end)


def areas(
    rows: Rows,
    height: float,
    x: X,
    x2: str | float,
    *,
    colour: str | None = None,
    line: str | None = None,
    tips: Mapping[str, str] | None = None,
) -> Layers:
    """Draw rectangles from (x, y) to (x2, y2); without a colour, each row has its ``fill``.

    A ``line`` is the colour of a thin outline.
    """
    mark: dict[str, Any] = {"type": "rect", "strokeWidth": 0}
    if line is not None:
        mark |= {"stroke": line, "strokeWidth": 0.6}
    if colour is not None:
        mark["color"] = colour
    encoding = {
        "x": _x(x), "x2": _end(x2), "y": _y(height), "y2": {"field": "y2"},
        "fill": _own("fill") if colour is None else None, "tooltip": _tips(tips),
    }  # fmt: skip
    return _layer(mark, rows, encoding)


def paths(
    rows: Rows, height: float, x: X, *, colour: str, width: float = 1.4, band: bool = False
) -> Layers:
    """Join rows of the same ``path`` by a line through ``y`` or a band from ``y`` to ``y2``."""
    encoding = {"x": _x(x), "y": _y(height), "detail": {"field": "path", "type": "nominal"}}
    if band:
        return _layer(
            {"type": "area", "color": colour, "opacity": 1}, rows,
            encoding | {"y2": {"field": "y2"}},
        )  # fmt: skip
    mark = {"type": "line", "color": colour, "strokeWidth": width, "strokeJoin": "round"}
    return _layer(mark, rows, encoding)


def hit_areas(
    rows: Rows, height: float, x: X, x2: str | float, tips: Mapping[str, str]
) -> Layers:
    """Lay an unseen area over each row's place that shows its numbers when pointed at."""
    encoding = {
        "x": _x(x), "x2": _end(x2), "y": _y(height), "y2": {"field": "y2"}, "tooltip": _tips(tips),
    }  # fmt: skip
    return _layer({"type": "rect", "opacity": 0, "strokeWidth": 0}, rows, encoding)


def hit_rows(rows: Rows, height: float, width: float, tips: Mapping[str, str]) -> Layers:
    """Lay an unseen area over each row (``y`` to ``y2``) that shows its numbers when pointed at."""
    return hit_areas(rows, height, 0, width, tips)


def without_marks(words: str, width: str, title: str, subtitle: str) -> Specification:
    """Return a figure that only says, in words, why there is nothing to draw."""
    across = WIDTHS[width]
    lines = wrapped(words, across)
    height = 12.0 + 12 * len(lines)
    rows = [{"y": 16.0 + 12 * number, "text": line} for number, line in enumerate(lines)]
    layers = strokes([{"y": 2.0}], height, 1, across - 1, colour=HAIRLINE, width=0.6)
    layers += texts(rows, height, 0, colour=QUIET)
    return figure(layers, width, height, title, subtitle)


def figure(
    layers: Layers, width: str, height: float, title: str, subtitle: str
) -> Specification:
    """Put layers into one view of a named print width, with its question as title.

    Returns
    -------
    dict
        The chart as plain values; :mod:`sweep.charts.render` makes pictures of it.
    """
    across = WIDTHS[width]
    datasets = {f"rows-{number}": one["data"]["values"] for number, one in enumerate(layers)}
    named = [one | {"data": {"name": f"rows-{number}"}} for number, one in enumerate(layers)]
    return {
        "config": configure(),
        "title": {
            "text": wrapped(title, across, TITLE, bold=True),
            "subtitle": wrapped(subtitle, across, BODY),
        },
        "width": across,
        "height": round(height, 2),
        "padding": EDGE,
        "layer": named,
        "datasets": datasets,
    }
