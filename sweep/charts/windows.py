"""Windows: when the finding holds, by the dates that each window covers."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import pandas as pd

from sweep.verdicts.words import counted, missing, p_text, percent, share_text

from . import marks
from .context import Context
from .layout import shortened, text_width
from .legend import tint_legend
from .marks import Layers, Scale, Specification
from .strips import Strip, place_strips, year_ticks
from .theme import ABSENT, BODY, INK, QUIET, SMALL, WASH, WIDTHS, tint

__all__ = ["NAME", "NEEDS", "QUESTION", "build", "describe"]

NAME = "windows"
QUESTION = "When does the finding hold?"
NEEDS = ("windows",)

_LEFT, _RIGHT = 40.0, 22.0
_TOP = 30.0
_TICKS = {"narrow": 5, "wide": 9}
_MOST_DOTS = 80
_HATCH = 2.9  # pixels across for one stroke of a hatch

_TIPS = {
    "window": "window",
    "first": "first date",
    "last": "last date",
    "counts": "survived of admissible",
    "median": "median p-value",
    "quartiles": "quartiles of p",
    "pooled": "positions pooled",
}


def _cells(strip: Strip, context: Context) -> list[dict[str, Any]]:
    """Return the tinted cells of a strip with the words of their tooltips."""
    found = []
    for row, (start, end) in zip(strip.records, strip.spans, strict=True):
        if missing(row["share"]):
            continue
        found.append(
            {
                "y": strip.top,
                "y2": strip.bottom,
                "day": start,
                "to": end,
                "fill": tint(float(row["share"])),
                "window": strip.name,
                "first": context.period(row["window_start"]),
                "last": context.period(row["window_end"]),
                "counts": share_text(int(row["survived"]), int(row["admissible"])),
                "median": p_text(row["median_p"]),
                "quartiles": f"{p_text(row['p_low'])} to {p_text(row['p_high'])}",
                "pooled": str(int(row.get("pooled", 1) or 1)),
            }
        )
    return found


def _empty(strip: Strip) -> list[dict[str, Any]]:
    """Return a small dot for positions without an admissible specification."""
    places = [
        (start + end) / 2
        for row, (start, end) in zip(strip.records, strip.spans, strict=True)
        if missing(row["share"])
    ]
    step = max(1, -(-len(places) // _MOST_DOTS))
    return [{"y": (strip.top + strip.bottom) / 2, "day": place} for place in places[::step]]


def _subtitle(context: Context, strips: list[Strip], total: int) -> str:
    moving = any(strip.moving for strip in strips)
    words = [
        context.lead,
        "Tint: share of the admissible specifications of that window in which the finding "
        "survives (counts are unweighted rows); small dots: none admissible.",
    ]
    if moving:
        words.append(
            "Moving windows: a cell ends at the window's last date (shrinking windows: starts at "
            "the first); below, the median p-value across specifications with its quartiles, on a "
            "log scale, dashed line at the level. Neighbouring windows share most of their data."
        )
    if any(not strip.moving for strip in strips):
        words.append("Fixed windows: a bar from the first to the last date.")
    if any(strip.episodes for strip in strips):
        words.append("Hatched: an episode that the window leaves out.")
    words.append(context.losses)
    if len(strips) < total:
        words.append(f"Shown are {len(strips):,} of {total:,} window entries, thinned evenly.")
    pooled = max((int(row.get("pooled", 1) or 1) for s in strips for row in s.records), default=1)
    if pooled > 1:
        words.append(f"Up to {pooled:,} neighbouring positions are pooled in a cell.")
    return " ".join(words)


def build(
    frames: Mapping[str, pd.DataFrame], context: Context, width: str = "wide"
) -> Specification:
    """Draw survival over time.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        ``windows`` of one finding: one row a window entry and position; where there is a column
        ``episodes``, it holds the episodes left out, ``from/to`` in ISO days, joined by ";".
    context : Context
        The finding, its level and counts.
    width : str
        ``narrow`` (85 mm) or ``wide`` (175 mm).
    """
    frame = frames["windows"]
    strips, bottom = place_strips(frame, _TOP)
    total = int(frame["window_name"].nunique())
    height = bottom + 30
    across = WIDTHS[width]
    track = (_LEFT, across - _RIGHT)
    return marks.figure(
        [
            *tint_legend(height, across),
            *_ground(strips, height, track, width),
            *_strips(strips, height, track, context),
            *_left_out(strips, height, track),
            *_names(strips, height, across),
            *_values(strips, height, track, context),
        ],
        width,
        height,
        QUESTION,
        _subtitle(context, strips, total),
    )


def _scale(name: str, strips: list[Strip], track: tuple[float, float]) -> Scale:
    spans = [span for strip in strips for span in strip.spans]
    low = min((start for start, _ in spans), default=0.0)
    high = max((end for _, end in spans), default=1.0)
    return Scale(name, (low, high), track)


def _ground(
    strips: list[Strip], height: float, track: tuple[float, float], width: str
) -> Layers:
    """Draw the years and what stands behind the strips."""
    x = _scale("day", strips, track)
    spans = [span for strip in strips for span in strip.spans]
    layers: Layers = []
    if spans:
        low, high = min(s for s, _ in spans), max(e for _, e in spans)
        ticks = year_ticks(low, high, _TICKS[width])
        lines = [
            {"y": strip.top, "y2": strip.panel[1] if strip.panel else strip.bottom + 3, "day": day}
            for strip in strips
            for day, _ in ticks
        ]
        lines += [{"y": height - 28, "y2": height - 24, "day": day} for day, _ in ticks]
        layers += marks.strokes(lines, height, x, colour="#E3E6E6", tall=True)
        names = [{"y": height - 17, "day": day, "text": text} for day, text in ticks]
        layers += marks.texts(names, height, x, align="center", colour=QUIET)
        axis = "last date of the window" if any(strip.moving for strip in strips) else "date"
        layers += marks.texts(
            [{"y": height - 5, "text": axis}], height, sum(track) / 2, align="center", colour=QUIET
        )
    ground = [
        {"y": s.top, "y2": s.bottom, "day": s.spans[0][0], "to": s.spans[-1][1]}
        for s in strips
        if s.moving
    ]
    return layers + marks.areas(ground, height, x, "to", colour=WASH)


def _strips(
    strips: list[Strip], height: float, track: tuple[float, float], context: Context
) -> Layers:
    x = _scale("day", strips, track)
    cells = [cell for strip in strips for cell in _cells(strip, context)]
    empty = [dot for strip in strips for dot in _empty(strip)]
    outline = [
        {"y": s.bottom, "day": s.spans[0][0], "to": s.spans[-1][1]} for s in strips if s.spans
    ]
    return [
        *marks.areas(cells, height, x, "to", tips=_TIPS),
        *marks.dots(empty, height, x, colour=ABSENT, area=7),
        *marks.strokes(outline, height, x, "to", colour=QUIET, width=0.5),
    ]


def _left_out(strips: list[Strip], height: float, track: tuple[float, float]) -> Layers:
    """Hatch the episodes that a window leaves out."""
    spans = [span for strip in strips for span in strip.spans]
    if not spans:
        return []
    x = _scale("day", strips, track)
    whole = max(max(e for _, e in spans) - min(s for s, _ in spans), 1.0)
    gaps, hatches = [], []
    for strip in strips:
        for start, end in strip.episodes:
            gaps.append({"y": strip.top, "y2": strip.bottom, "day": start, "to": end})
            wide = (end - start) / whole * (track[1] - track[0])
            hatches.append(
                {
                    "y": (strip.top + strip.bottom) / 2,
                    "day": (start + end) / 2,
                    "text": "/" * max(1, int(wide / _HATCH)),
                }
            )
    return [
        *marks.areas(gaps, height, x, "to", colour="white"),
        *marks.texts(hatches, height, x, align="center", colour=QUIET),
    ]


def _names(strips: list[Strip], height: float, across: float) -> Layers:
    """Write each window entry's name above its strip, with its counts at the right."""
    names, numbers = [], []
    for strip in strips:
        words = _numbers(strip)
        room = across - text_width(words) - 16
        names.append({"y": strip.top - 8, "text": shortened(strip.name, room, SMALL, bold=True)})
        numbers.append({"y": strip.top - 8, "text": words})
    return [
        *marks.texts(names, height, 0, bold=True),
        *marks.texts(numbers, height, across, align="right", colour=QUIET),
    ]


def _numbers(strip: Strip) -> str:
    survived = sum(int(row["survived"]) for row in strip.records)
    admissible = sum(int(row["admissible"]) for row in strip.records)
    words = share_text(survived, admissible)
    if strip.moving:
        words += f" in {counted(strip.positions, 'position')}"
    return words


def _values(
    strips: list[Strip], height: float, track: tuple[float, float], context: Context
) -> Layers:
    """Draw the median p-value and its quartiles below the strips that have room for them."""
    panels = [strip for strip in strips if strip.panel]
    x = _scale("day", strips, track)
    bands, lines, levels, edges = [], [], [], []
    ticks: list[dict[str, Any]] = []
    for number, strip in enumerate(panels):
        run = 0
        for row, span in zip(strip.records, strip.spans, strict=True):
            if missing(row["median_p"]):
                run += 1
                continue
            path, day = f"{number}.{run}", strip.day(span)
            bands.append(
                {"path": path, "day": day, "y": strip.y(row["p_low"]), "y2": strip.y(row["p_high"])}
            )
            lines.append({"path": path, "day": day, "y": strip.y(row["median_p"])})
        levels.append({"y": strip.y(context.significance)})
        edges.append({"y": strip.y(0.001), "y2": strip.y(0.0)})
        ticks += [
            {"y": strip.y(p), "text": f"{p:g}" if p else "<0.001"} for p in (1.0, 0.1, 0.01, 0.0)
        ]
    named = [{"y": level["y"], "text": context.level} for level in levels]
    return [
        *marks.areas(edges, height, track[0], track[1], colour="#EFF1F0"),
        *marks.paths(bands, height, x, colour="#CBD3D4", band=True),
        *marks.strokes(levels, height, track[0], track[1], colour=INK, dash=[4, 2.5]),
        *marks.paths(lines, height, x, colour=INK),
        *marks.texts(ticks, height, _LEFT - 4, align="right", colour=QUIET, size=BODY * 0.9),
        *marks.texts(named, height, track[1] + 3, size=BODY * 0.9),
    ]


def describe(frames: Mapping[str, pd.DataFrame], context: Context) -> str:
    """Say in words what the figure shows."""
    frame = frames["windows"]
    words = [f"Survival by window. {context.lead}"]
    for name in frame["window_name"].drop_duplicates():
        rows = frame[frame["window_name"] == name]
        good = rows[rows["admissible"] > 0]
        counts = share_text(int(rows["survived"].sum()), int(rows["admissible"].sum()))
        if rows["entry_kind"].iloc[0] == "fixed" or good.empty:
            words.append(f"{name}: {counts}.")
            continue
        best = good.loc[good["share"].astype(float).idxmax()]
        worst = good.loc[good["share"].astype(float).idxmin()]
        low = int((good["median_p"].astype(float) <= context.significance).sum())
        words.append(
            f"{name}: {counts} in {counted(len(rows), 'position')}; the share runs from "
            f"{percent(float(worst['share']))} (window {_dates(worst, context)}) to "
            f"{percent(float(best['share']))} (window {_dates(best, context)}); the median p-value "
            f"is at or below the level in {low:,} of {counted(len(good), 'position')}."
        )
    return " ".join(words)


def _dates(row: Any, context: Context) -> str:
    return f"{context.period(row['window_start'])} to {context.period(row['window_end'])}"
