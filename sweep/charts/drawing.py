"""A still figure as SVG, drawn straight from the chart's values.

Every place in these figures is known when they are put together, so that a still needs no layout
of its own: it takes some milliseconds, where the general drawer takes a fifth of a second.  What
is understood here is what :mod:`sweep.charts.marks` writes; the tests hold every mark against the
general drawer's.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping
from html import escape
from itertools import groupby
from typing import Any

from .theme import EDGE

__all__ = ["NotDrawn", "draw", "head_height"]

Row = Mapping[str, Any]
Place = Callable[[Row], float | None]

_ANCHOR = {"left": "start", "center": "middle", "right": "end"}
_NO_CONTROL = dict.fromkeys(range(32), " ")

# Below the middle of a line of text stands its baseline, in parts of the type size.
_BASELINE = 0.3


class NotDrawn(ValueError):
    """The chart holds something that this drawer does not know."""


def draw(chart: Mapping[str, Any]) -> str:
    """Draw a chart as SVG text at its print width.

    Parameters
    ----------
    chart : mapping
        What :func:`sweep.charts.marks.figure` returned, or the same after a round trip through
        JSON.

    Raises
    ------
    NotDrawn
        If a mark or an encoding is of another kind.
    """
    config, title = chart["config"], chart["title"]
    head = head_height(chart)
    across, down = chart["width"] + 2 * EDGE, head + chart["height"] + 2 * EDGE
    parts = [
        f'<svg xmlns="http://www.w3.org/2000/svg" version="1.1" width="{_n(across)}" '
        f'height="{_n(down)}" viewBox="0 0 {_n(across)} {_n(down)}">',
        f'<rect width="{_n(across)}" height="{_n(down)}" fill="{config["background"]}"/>',
        f'<g fill="none" font-family="{escape(config["font"])}" '
        f'transform="translate({EDGE},{_n(EDGE + head)})">',
        *_title(title, config["title"], head),
    ]
    for layer in chart["layer"]:
        rows = chart["datasets"][layer["data"]["name"]]
        parts += _layer(layer["mark"], layer["encoding"], rows)
    return "".join([*parts, "</g></svg>"])


def head_height(chart: Mapping[str, Any]) -> float:
    """Return the pixels that title and subtitle take above the view."""
    config, title = chart["config"]["title"], chart["title"]
    return float(
        len(title["text"]) * config["lineHeight"]
        + config["subtitlePadding"]
        + len(title["subtitle"]) * config["subtitleLineHeight"]
        + config["offset"]
    )


def _n(value: float) -> str:
    """Write a length: a hundredth of a pixel is finer than any print."""
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def _words(text: Any) -> str:
    return escape(("" if text is None else str(text)).translate(_NO_CONTROL), quote=False)


def _title(title: Row, config: Row, head: float) -> Iterator[str]:
    y = -head
    for lines, size, step, colour, weight in (
        (title["text"], config["fontSize"], config["lineHeight"], config["color"], "bold"),
        (title["subtitle"], config["subtitleFontSize"], config["subtitleLineHeight"],
         config["subtitleColor"], "normal"),
    ):  # fmt: skip
        for line in lines:
            y += step
            yield (
                f'<text y="{_n(y - 0.25 * step)}" font-size="{_n(size)}px" font-weight="{weight}" '
                f'fill="{colour}">{_words(line)}</text>'
            )
        y += config["subtitlePadding"]


def _layer(mark: Row, encoding: Row, rows: list[Row]) -> list[str]:
    """Draw one layer; what cannot be seen is left out."""
    if mark.get("opacity") == 0:
        return []
    drawers = {
        "text": _texts, "point": _points, "rule": _rules, "rect": _rects, "line": _paths,
        "area": _paths,
    }  # fmt: skip
    if mark["type"] not in drawers:
        raise NotDrawn(f"a mark of type {mark['type']}")
    return [*drawers[mark["type"]](mark, encoding, rows)]


def _placed(encoding: Row, name: str, base: str = "") -> Place:
    """Return the function that gives a row's pixel on one channel.

    A second channel (x2) has the scale of its first (x).
    """
    own = encoding[name]
    if "value" in own:
        fixed = float(own["value"])
        return lambda _: fixed
    field = own["field"]
    scale = encoding[base or name].get("scale")
    if not isinstance(scale, Mapping) or "range" not in scale or "domain" not in scale:
        raise NotDrawn(f"the channel {name} without a scale of its own")
    (low, high), (start, end) = scale["domain"], scale["range"]
    if scale.get("type") == "log":
        low, high = math.log(low), math.log(high)
    elif scale.get("type", "linear") != "linear":
        raise NotDrawn(f"a {scale['type']} scale")
    log = scale.get("type") == "log"

    def place(row: Row) -> float | None:
        value = row.get(field)
        if value is None:
            return None
        part = ((math.log(value) if log else value) - low) / (high - low)
        return float(start + part * (end - start))

    return place


def _points_of(encoding: Row, rows: list[Row], *names: str) -> Iterator[tuple[Row, list[float]]]:
    """Yield each row with its pixels on the named channels, where it has all of them."""
    places = [_placed(encoding, name, name.removesuffix("2")) for name in names]
    for row in rows:
        found = [place(row) for place in places]
        if None not in found:
            yield row, [value for value in found if value is not None]


def _fill(mark: Row, encoding: Row) -> Callable[[Row], str]:
    """Return the function that gives a row's colour."""
    for channel in ("fill", "color"):
        if channel in encoding:
            if encoding[channel].get("scale", "") is not None:
                raise NotDrawn("colours on a scale")
            field = encoding[channel]["field"]
            return lambda row: escape(str(row[field]))
    fixed = mark.get("color")
    if fixed is None:
        raise NotDrawn("a mark without a colour")
    return lambda _: fixed


def _texts(mark: Row, encoding: Row, rows: list[Row]) -> Iterator[str]:
    colour, size = _fill(mark, encoding), mark["fontSize"]
    field = encoding["text"]["field"]
    looks = f'font-size="{_n(size)}px"'
    if mark["align"] != "left":
        looks += f' text-anchor="{_ANCHOR[mark["align"]]}"'
    if mark["fontWeight"] != "normal":
        looks += f' font-weight="{mark["fontWeight"]}"'
    right, below = mark.get("dx", 0), round(_BASELINE * size)
    for row, (x, y) in _points_of(encoding, rows, "x", "y"):
        if mark.get("angle"):
            place = (
                f'transform="translate({_n(x)},{_n(y)})rotate({_n(mark["angle"])})" '
                f'x="{_n(right)}" y="{_n(below)}"'
            )
        else:
            place = f'x="{_n(x + right)}" y="{_n(y + below)}"'
        yield f'<text {place} {looks} fill="{colour(row)}">{_words(row.get(field))}</text>'


def _points(mark: Row, encoding: Row, rows: list[Row]) -> Iterator[str]:
    outline = _outline(mark["shape"], mark["size"])
    colour = _fill(mark, encoding)
    for row, (x, y) in _points_of(encoding, rows, "x", "y"):
        looks = (
            f'fill="{colour(row)}"'
            if mark["filled"]
            else f'stroke="{colour(row)}" stroke-width="{_n(mark["strokeWidth"])}"'
        )
        yield f'<path transform="translate({_n(x)},{_n(y)})" d="{outline}" {looks}/>'


def _outline(shape: str, area: float) -> str:
    """Return the outline of a mark about its own middle."""
    side = math.sqrt(area)
    half, tall = _n(side / 2), _n(side / 2 * math.sqrt(3) / 2)
    outlines = {
        "circle": f"M{half},0A{half},{half},0,1,1,-{half},0A{half},{half},0,1,1,{half},0Z",
        "square": f"M-{half},-{half}H{half}V{half}H-{half}Z",
        "diamond": f"M-{half},0L0,-{half}L{half},0L0,{half}Z",
        "triangle-up": f"M0,-{tall}L-{half},{tall}L{half},{tall}Z",
        "triangle-down": f"M0,{tall}L-{half},-{tall}L{half},-{tall}Z",
    }
    if shape not in outlines:
        raise NotDrawn(f"the shape {shape}")
    return outlines[shape]


def _rules(mark: Row, encoding: Row, rows: list[Row]) -> Iterator[str]:
    looks = f'stroke="{mark["color"]}" stroke-width="{_n(mark["strokeWidth"])}"'
    if "strokeDash" in mark:
        looks += f' stroke-dasharray="{",".join(_n(one) for one in mark["strokeDash"])}"'
    end = "y2" if "y2" in encoding else "x2"
    strokes = [
        f"M{_n(x)},{_n(y)}{'V' if end == 'y2' else 'H'}{_n(to)}"
        for _, (x, y, to) in _points_of(encoding, rows, "x", "y", end)
    ]
    if strokes:
        yield f'<path d="{"".join(strokes)}" {looks}/>'


def _rects(mark: Row, encoding: Row, rows: list[Row]) -> Iterator[str]:
    colour = _fill(mark, encoding)
    edge = ""
    if "stroke" in mark:
        edge = f' stroke="{mark["stroke"]}" stroke-width="{_n(mark["strokeWidth"])}"'
    found = [
        (colour(row), f"M{_n(x)},{_n(y)}H{_n(x2)}V{_n(y2)}H{_n(x)}Z")
        for row, (x, x2, y, y2) in _points_of(encoding, rows, "x", "x2", "y", "y2")
    ]
    for fill, group in groupby(found, key=lambda one: one[0]):
        yield f'<path d="{"".join(path for _, path in group)}" fill="{fill}"{edge}/>'


def _paths(mark: Row, encoding: Row, rows: list[Row]) -> Iterator[str]:
    """Draw lines, or bands between two lines, one for each value of ``detail``."""
    band = mark["type"] == "area"
    field = encoding["detail"]["field"]
    together: dict[Any, list[list[float]]] = {}
    for row, place in _points_of(encoding, rows, "x", "y", *(("y2",) if band else ())):
        together.setdefault(row[field], []).append(place)
    for places in together.values():
        places.sort(key=lambda place: place[0])
        there = [f"{_n(place[0])},{_n(place[1])}" for place in places]
        if band:
            back = [f"{_n(place[0])},{_n(place[2])}" for place in reversed(places)]
            yield f'<path d="M{"L".join([*there, *back])}Z" fill="{mark["color"]}"/>'
        else:
            looks = f'stroke="{mark["color"]}" stroke-width="{_n(mark["strokeWidth"])}"'
            yield f'<path d="M{"L".join(there)}" {looks} stroke-linejoin="round"/>'
