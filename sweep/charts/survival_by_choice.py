"""Survival by choice: all axes in one figure, one row a choice."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Literal

import pandas as pd

from sweep.verdicts.survival import OVERALL, Counts, axis_sentences, counts_of, headline
from sweep.verdicts.words import counted, percent, share_text

from . import marks
from .arrangement import Arrangement, Row, arrange, by_axis, held_fixed, label_room
from .context import Context
from .layout import text_width
from .marks import Layers, Scale, Specification
from .theme import ABSENT, BASELINE, FAILS, HAIRLINE, INK, QUIET, SURVIVES, WIDTHS

__all__ = ["NAME", "NEEDS", "QUESTION", "build", "describe"]

NAME = "survival by choice"
QUESTION = "Which choices does the finding survive?"
NEEDS = ("survival",)

# Pixels: where labels start, and the most that they may take.
_INDENT = 12.0
_LABEL = {"narrow": 112.0, "wide": 210.0}
_BETWEEN = 14.0
_TOP = 44.0
_NEAR = 2.0

_TIPS = {
    "axis": "axis",
    "choice": "choice",
    "counts": "survived of admissible",
    "weighted": "weighted share",
    "levels": "weighted share at 1, 5, 10%",
    "distinct": "distinct computations",
    "losses": "left out",
}


def _losses(counts: Counts) -> str:
    parts = [
        f"{count:,} {name}"
        for count, name in (
            (counts.not_applicable, "not applicable"),
            (counts.infeasible, "infeasible"),
            (counts.failed, "failed"),
            (counts.screened_out, "screened out"),
            (counts.not_run, "not run yet"),
        )
        if count
    ]
    return ", ".join(parts) or "none"


def _record(row: Row) -> dict[str, Any]:
    """Return the drawn numbers of one choice, with the words of its tooltip."""
    counts = counts_of(row.record)
    return {
        "y": row.middle,
        "axis": str(row.record["axis"]),
        "choice": str(row.record["choice"]),
        "share": counts.shown,
        "counts": share_text(counts.survived, counts.admissible),
        "short": share_text(counts.survived, counts.admissible).split(" (")[0],
        "admissible": counts.admissible,
        "weighted": percent(counts.headline),
        "levels": f"{percent(counts.at_1)}, {percent(counts.at_5)}, {percent(counts.at_10)}",
        "distinct": f"{counts.distinct:,}",
        "losses": _losses(counts),
        "left_out": f"{counts.left_out:,}",
        "baseline": bool(row.record["is_baseline"]),
    }


def _hidden(row: Row) -> dict[str, Any]:
    """Return the range and the summed counts of the choices that are not drawn."""
    every = [counts_of(record) for record in row.hidden]
    shares = [counts.shown for counts in every if counts.shown is not None]
    survived = sum(counts.survived for counts in every)
    admissible = sum(counts.admissible for counts in every)
    return {
        "y": row.middle,
        "low": min(shares, default=None),
        "high": max(shares, default=None),
        "weighted": f"{percent(min(shares))}–{percent(max(shares))}" if shares else "–",
        "short": f"{survived:,} of {admissible:,}",
        "left_out": f"{sum(counts.left_out for counts in every):,}",
    }


def _subtitle(context: Context, arranged: Arrangement, fixed: str) -> str:
    counts = context.counts
    words = [
        context.lead,
        "Dot: weighted share of the admissible specifications with that choice in which the "
        "finding survives; counts are unweighted rows."
        if counts.pooled
        else "Dot: share of the admissible rows with that choice in which the finding survives. "
        "The sweep changes few choices at a time, so rows have no weights and there is no pooled "
        "share.",
    ]
    if counts.admissible and counts.pooled:
        words.append(f"Upright line: all choices, {headline(counts, context.design)}.")
    words += [context.losses, "Diamond: the baseline's choice.", arranged.thinned, fixed]
    return " ".join(word for word in words if word)


def _columns(
    rows: list[dict[str, Any]], width: str, *, pooled: bool
) -> list[tuple[float, str, str, str]]:
    """Return right edge, field and two lines of heading of each column of numbers."""
    names = [("short", "survived of", "admissible")]
    if width == "wide":
        names += [("weighted", "weighted", "share")] if pooled else []
        names += [("left_out", "left out", "")]
    edge = float(WIDTHS[width])
    placed = []
    for name, first, second in reversed(names):
        placed.append((edge, name, first, second))
        words = [first, second, *(str(row[name]) for row in rows)]
        edge -= max(text_width(word) for word in words) + _BETWEEN
    return [*reversed(placed), (edge - 4, "", "", "")]


def build(
    frames: Mapping[str, pd.DataFrame], context: Context, width: str = "wide"
) -> Specification:
    """Draw survival by choice.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        ``survival``: the frame of one finding, in plan order.
    context : Context
        The finding, its level and counts.
    width : str
        ``narrow`` (85 mm) or ``wide`` (175 mm).
    """
    frame = frames["survival"]
    across = WIDTHS[width]
    parts, fixed = held_fixed(by_axis(frame[frame["axis"] != OVERALL]))
    room = label_room(parts, _LABEL[width])
    arranged = arrange(parts, room, lambda record: bool(record["is_baseline"]), _TOP)
    height = arranged.height + 4
    drawn = [_record(row) for row in arranged.choices]
    rest = [_hidden(row) for row in arranged.rows if row.hidden]
    *columns, (right, _, _, _) = _columns([*drawn, *rest], width, pooled=context.counts.pooled)
    track = (_INDENT + room + 16, right)
    pointed = [
        record | {"y": row.top, "y2": row.bottom}
        for record, row in zip(drawn, arranged.choices, strict=True)
    ]
    return marks.figure(
        [
            *_ground(arranged, context.counts, height, track, across),
            *_labels(arranged, drawn, height),
            *_shares(drawn, rest, height, track),
            *_counts([*drawn, *rest], height, columns),
            *marks.hit_rows(pointed, height, across, _TIPS),
        ],
        width,
        height,
        QUESTION,
        _subtitle(context, arranged, fixed),
    )


def _scale(name: str, track: tuple[float, float]) -> Scale:
    return Scale(name, (0, 1), track)


def _ground(
    arranged: Arrangement,
    counts: Counts,
    height: float,
    track: tuple[float, float],
    across: float,
) -> Layers:
    """Draw what stands behind the rows: group names, the share's ticks, the overall line."""
    x = _scale("share", track)
    ticks: list[dict[str, Any]] = [
        {"y": _TOP - 8, "y2": arranged.height, "share": share, "text": f"{round(100 * share)}%"}
        for share in (0.0, 0.5, 1.0)
    ]
    layers = marks.strokes(ticks, height, x, colour="#E3E6E6", tall=True)
    named = [
        tick | {"y": _TOP - 15}
        for tick in ticks
        # A tick under the overall line would be struck through; the line has its own label.
        if counts.headline is None
        or abs(tick["share"] - counts.headline) * (track[1] - track[0])
        > text_width(tick["text"]) / 2 + _NEAR
    ]
    layers += marks.texts(named, height, x, align="center", colour=QUIET)
    heads = [{"y": group.middle, "text": group.text} for group in arranged.groups]
    layers += marks.texts(heads, height, 0, bold=True)
    lines = [{"y": group.bottom - 1} for group in arranged.groups]
    layers += marks.strokes(lines, height, 1, across - 1, colour=HAIRLINE, width=0.6)
    if counts.headline is not None:
        line = [{"y": _TOP - 23, "y2": arranged.height, "share": counts.headline}]
        layers += marks.strokes(line, height, x, colour=INK, width=0.9, tall=True)
        words = [{"y": _TOP - 30, "share": counts.headline, "text": _overall(counts)}]
        align: Literal["left", "center", "right"]
        align = "left" if counts.headline < 0.2 else "right" if counts.headline > 0.8 else "center"
        layers += marks.texts(words, height, x, align=align)
    return layers


def _overall(counts: Counts) -> str:
    return f"overall {percent(counts.headline)}"


def _labels(arranged: Arrangement, drawn: list[dict[str, Any]], height: float) -> Layers:
    names = [line for row in arranged.choices for line in row.label_rows()]
    others = [line for row in arranged.rows if row.hidden for line in row.label_rows()]
    layers = marks.texts(names, height, _INDENT)
    layers += marks.texts(others, height, _INDENT, colour=QUIET)
    baseline = [{"y": record["y"]} for record in drawn if record["baseline"]]
    return layers + marks.dots(baseline, height, 5, colour=BASELINE, shape="diamond", area=46)


def _shares(
    drawn: list[dict[str, Any]],
    rest: list[dict[str, Any]],
    height: float,
    track: tuple[float, float],
) -> Layers:
    """Draw the tracks and the dots: survived to the left of the dot, not survived to its right."""
    counted_rows = [
        {"y": record["y"], "share": record["share"]}
        for record in drawn
        if record["share"] is not None
    ]
    x = _scale("share", track)
    layers = marks.strokes(counted_rows, height, x, track[1], colour=FAILS, width=1.6)
    layers += marks.strokes(counted_rows, height, x, track[0], colour=SURVIVES, width=1.6)
    ranges = [record for record in rest if record["low"] is not None]
    layers += marks.strokes(
        [{"y": one["y"], "low": one["low"], "high": one["high"]} for one in ranges],
        height,
        _scale("low", track),
        "high",
        colour=QUIET,
        width=1.6,
        dash=[2, 2],
    )
    layers += marks.dots(counted_rows, height, x, colour=SURVIVES, area=50)
    absent = [{"y": record["y"]} for record in drawn if record["share"] is None]
    return layers + marks.dots(absent, height, track[0], colour=ABSENT, area=7)


def _counts(
    rows: list[dict[str, Any]], height: float, columns: list[tuple[float, str, str, str]]
) -> Layers:
    """Write the counts at the right, with the names of their columns."""
    layers = []
    for place, name, first, second in columns:
        text = [{"y": row["y"], "text": row[name]} for row in rows]
        layers += marks.texts(text, height, place, align="right")
        head = [{"y": _TOP - 26, "text": first}, {"y": _TOP - 15, "text": second}]
        layers += marks.texts(head, height, place, align="right", colour=QUIET)
    return layers


def describe(frames: Mapping[str, pd.DataFrame], context: Context) -> str:
    """Say in words what the figure shows."""
    frame = frames["survival"]
    choices = int((frame["axis"] != OVERALL).sum())
    parts = [
        f"Survival by choice for {counted(choices, 'choice')}. {context.lead}",
        f"Overall: {headline(context.counts, context.design)}. {context.losses}",
        *axis_sentences(frame),
    ]
    return " ".join(parts)
