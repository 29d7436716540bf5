"""Directions: which way the link runs, one row a choice, verdicts in a fixed order."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import pandas as pd

from sweep.verdicts.directions import VERDICTS, sentence, totals
from sweep.verdicts.survival import OVERALL
from sweep.verdicts.words import percent

from . import marks
from .arrangement import Arrangement, Row, arrange, by_axis, held_fixed, label_room
from .context import Context
from .layout import apart, text_width
from .marks import Layers, Scale, Specification
from .theme import (
    ABSENT,
    BASELINE,
    BOTH_WAYS,
    HAIRLINE,
    INK,
    NEITHER,
    ONE_WAY,
    QUIET,
    REVERSE,
    UNDETERMINED,
    WIDTHS,
)

__all__ = ["NAME", "NEEDS", "QUESTION", "build", "describe"]

NAME = "directions"
QUESTION = "Which way does the link run?"
NEEDS = ("directions", "survival")

_INDENT = 12.0
_LABEL = {"narrow": 112.0, "wide": 210.0}
_NAMES, _COUNTS, _OVERALL, _TOP = 7.0, 18.0, 48.0, 60.0
_FOOT = 13.0

# Fill of each verdict, and the ink that can be read on it.
_FILLS = {
    "one way": (ONE_WAY, "white"),
    "reverse": (REVERSE, INK),
    "both ways": (BOTH_WAYS, "white"),
    "neither rejected": (NEITHER, INK),
    "undetermined": (UNDETERMINED, INK),
}

_TIPS = {
    "axis": "axis",
    "choice": "choice",
    "rows": "admissible rows",
    **{verdict.replace(" ", "_"): verdict for verdict in VERDICTS},
}

Verdicts = dict[str, int]
Rows = list[dict[str, Any]]


def _verdicts(directions: pd.DataFrame) -> dict[tuple[str, str], Verdicts]:
    """Return the counts of each axis and choice, every verdict named."""
    found: dict[tuple[str, str], Verdicts] = {}
    for row in directions.to_dict("records"):
        own = found.setdefault((str(row["axis"]), str(row["choice"])), dict.fromkeys(VERDICTS, 0))
        own[str(row["verdict"])] += int(row["rows"])
    return found


def _segments(
    counts: Verdicts, y: float, half: float, track: tuple[float, float], *, written: bool = True
) -> Rows:
    """Return the pieces of one bar with their counts, where these are written and fit."""
    total = sum(counts.values())
    found, left = [], 0.0
    for verdict, rows in counts.items():
        if not rows:
            continue
        fill, ink = _FILLS[verdict]
        part = rows / total
        text = f"{rows:,}"
        room = part * (track[1] - track[0]) - 5
        if room > text_width(f"{text} ({percent(part)})"):
            text = f"{text} ({percent(part)})"
        found.append(
            {
                "y": y - half, "y2": y + half, "share": left, "to": left + part, "fill": fill,
                "verdict": verdict, "ink": ink, "middle": left + part / 2,
                "text": text if written and room > text_width(text) else "",
                "count": f"{rows:,} ({percent(part)})",
            }
        )  # fmt: skip
        left += part
    return found


def _subtitle(context: Context, arranged: Arrangement, fixed: str) -> str:
    words = [
        context.lead,
        "Bars: shares of the admissible rows with that choice, by which of the two tests is "
        "significant, signs and the claim aside; counts in the bars where they fit, all rows at "
        "the right. One way: only cause to effect; reverse: only effect to cause. Failing to "
        "reject both ways is not evidence of independence.",
        context.losses,
        "Diamond: the baseline's choice.",
        arranged.thinned,
        fixed,
    ]
    return " ".join(word for word in words if word)


def build(
    frames: Mapping[str, pd.DataFrame], context: Context, width: str = "wide"
) -> Specification:
    """Draw the direction verdicts by choice.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        ``directions`` and ``survival`` (choices in plan order) of one finding.
    context : Context
        The finding, its level and counts.
    width : str
        ``narrow`` (85 mm) or ``wide`` (175 mm).
    """
    verdicts = _verdicts(frames["directions"])
    survival = frames["survival"]
    parts, fixed = held_fixed(by_axis(survival[survival["axis"] != OVERALL]))
    room = max(label_room(parts, _LABEL[width]), text_width("all choices", bold=True))
    arranged = arrange(parts, room, lambda record: bool(record["is_baseline"]), _TOP)
    height, across = arranged.height + _FOOT, float(WIDTHS[width])
    whole = totals(frames["directions"])
    rows = sum(whole.values())
    edge = max(text_width(f"{rows:,}"), text_width("rows")) + 12
    track = (_INDENT + room + 12, across - edge)
    every = [(row, _counted(row, verdicts)) for row in arranged.rows]
    bars = [
        piece
        for row, counts in every
        if sum(counts.values())
        for piece in _segments(
            counts, row.middle, 2.5 if row.hidden else 5.2, track, written=not row.hidden
        )
    ]
    top = _segments(whole, _OVERALL, 5.2, track, written=False) if rows else []
    return marks.figure(
        [
            *_ground(arranged, height, track, across),
            *_bars([*top, *bars], every, height, track),
            *_names(top, height, track, across),
            *_labels(arranged, height),
            *_totals(every, rows, height, across),
            *marks.hit_rows(_pointed(every), height, across, _TIPS),
        ],
        width,
        height,
        QUESTION,
        _subtitle(context, arranged, fixed),
    )


def _counted(row: Row, verdicts: Mapping[tuple[str, str], Verdicts]) -> Verdicts:
    """Return a row's counts; a closing row sums those of the choices that it stands for."""
    summed = dict.fromkeys(VERDICTS, 0)
    for record in row.hidden or (row.record,):
        own = verdicts.get((str(record["axis"]), str(record["choice"])), {})
        for verdict, count in own.items():
            summed[verdict] += count
    return summed


def _scale(name: str, track: tuple[float, float]) -> Scale:
    return Scale(name, (0, 1), track)


def _ground(
    arranged: Arrangement, height: float, track: tuple[float, float], across: float
) -> Layers:
    heads = [{"y": group.middle, "text": group.text} for group in arranged.groups]
    lines = [{"y": group.bottom - 1} for group in arranged.groups]
    ticks = [
        {"y": _OVERALL + 7, "y2": arranged.height + 2, "share": share, "text": percent(share)}
        for share in (0.0, 0.5, 1.0)
    ]
    named = [tick | {"y": arranged.height + 8} for tick in ticks]
    return [
        *marks.texts(named, height, _scale("share", track), align="center", colour=QUIET),
        *marks.strokes(ticks, height, _scale("share", track), colour="#E3E6E6", tall=True),
        *marks.texts(heads, height, 0, bold=True),
        *marks.strokes(lines, height, 1, across - 1, colour=HAIRLINE, width=0.6),
        *marks.texts([{"y": _OVERALL, "text": "all choices"}], height, 0, bold=True),
    ]


def _bars(
    pieces: Rows, every: Sequence[tuple[Row, Verdicts]], height: float, track: tuple[float, float]
) -> Layers:
    """Draw the bars with their counts; a small dot where nothing is admissible."""
    filled = [one for one in pieces if one["fill"] != UNDETERMINED]
    hollow = [one for one in pieces if one["fill"] == UNDETERMINED]
    written = [
        {"y": (one["y"] + one["y2"]) / 2, "middle": one["middle"], "text": one["text"],
         "ink": one["ink"]}
        for one in pieces
        if one["text"]
    ]  # fmt: skip
    empty = [{"y": row.middle} for row, counts in every if not sum(counts.values())]
    return [
        *marks.areas(filled, height, _scale("share", track), "to", line="white"),
        *marks.areas(hollow, height, _scale("share", track), "to", line=ABSENT),
        *marks.texts(
            written, height, _scale("middle", track), align="center", colour=None
        ),
        *marks.dots(empty, height, track[0], colour=ABSENT, area=7),
    ]


def _names(top: Rows, height: float, track: tuple[float, float], across: float) -> Layers:
    """Write the verdicts with their counts above the overall bar, each joined to its piece."""
    wide = track[1] - track[0]
    sizes = [max(text_width(one["verdict"], bold=True), text_width(one["count"])) for one in top]
    places = apart([track[0] + one["middle"] * wide for one in top], sizes, 0, across, gap=9)
    names, counts, leaders = [], [], []
    for number, (one, place) in enumerate(zip(top, places, strict=True)):
        at = (place - track[0]) / wide
        names.append({"y": _NAMES, "middle": at, "text": one["verdict"]})
        counts.append({"y": _COUNTS, "middle": at, "text": one["count"]})
        leaders += [
            {"path": number, "y": _COUNTS + 7, "middle": at},
            {"path": number, "y": one["y"] - 1, "middle": one["middle"]},
        ]
    return [
        *marks.texts(names, height, _scale("middle", track), align="center", bold=True),
        *marks.texts(counts, height, _scale("middle", track), align="center"),
        *marks.paths(leaders, height, _scale("middle", track), colour=ABSENT, width=0.6),
    ]


def _labels(arranged: Arrangement, height: float) -> Layers:
    names = [line for row in arranged.choices for line in row.label_rows()]
    others = [line for row in arranged.rows if row.hidden for line in row.label_rows()]
    baseline = [{"y": row.middle} for row in arranged.choices if row.record["is_baseline"]]
    return [
        *marks.texts(names, height, _INDENT),
        *marks.texts(others, height, _INDENT, colour=QUIET),
        *marks.dots(baseline, height, 5, colour=BASELINE, shape="diamond", area=46),
    ]


def _totals(
    every: Sequence[tuple[Row, Verdicts]], rows: int, height: float, across: float
) -> Layers:
    """Write how many rows each bar stands for."""
    counts = [{"y": row.middle, "text": f"{sum(own.values()):,}"} for row, own in every]
    whole = [{"y": _OVERALL, "text": f"{rows:,}"}]
    return [
        *marks.texts(counts, height, across, align="right"),
        *marks.texts(whole, height, across, align="right", bold=True),
        *marks.texts(
            [{"y": _OVERALL - 15, "text": "rows"}], height, across, align="right", colour=QUIET
        ),
    ]


def _pointed(every: Sequence[tuple[Row, Verdicts]]) -> Rows:
    """Return the rows that show their numbers when pointed at."""
    return [
        {
            "y": row.top,
            "y2": row.bottom,
            "axis": str(row.record["axis"]),
            "choice": str(row.record["choice"]),
            "rows": f"{sum(counts.values()):,}",
            **{verdict.replace(" ", "_"): _share(counts, verdict) for verdict in VERDICTS},
        }
        for row, counts in every
        if not row.hidden
    ]


def _share(counts: Verdicts, verdict: str) -> str:
    total = sum(counts.values())
    return f"{counts[verdict]:,} ({percent(counts[verdict] / total if total else None)})"


def describe(frames: Mapping[str, pd.DataFrame], context: Context) -> str:
    """Say in words what the figure shows."""
    verdicts = _verdicts(frames["directions"])
    words = [f"Direction verdicts by choice. {context.lead}", sentence(frames["directions"])]
    survival = frames["survival"]
    parts, fixed = held_fixed(by_axis(survival[survival["axis"] != OVERALL]))
    for axis, records in parts:
        shares = [
            (own["one way"] / sum(own.values()), str(record["choice"]))
            for record in records
            if (own := verdicts.get((axis, str(record["choice"])))) and sum(own.values())
        ]
        if len(shares) > 1:
            low, high = min(shares), max(shares)
            words.append(
                f"By {axis}: one way in {percent(low[0])} of rows under {low[1]} to "
                f"{percent(high[0])} under {high[1]}."
            )
    return " ".join(word for word in [*words, fixed, context.losses] if word)
