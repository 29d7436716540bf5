"""Specification curve: every estimate in order, and below it the choices behind each.

The form is that of Simonsohn, Simmons & Nelson (2020).  The height must mean the same for all
specifications that share a figure, so over several scales it is the standardised sum of the lag
coefficients; a single scale is drawn in its own units.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import pandas as pd

from sweep.verdicts.survival import OVERALL
from sweep.verdicts.words import counted, level_text, number, p_text, percent

from . import marks
from .arrangement import Arrangement, Record, arrange, by_axis, held_fixed, label_room
from .context import Context
from .curve_points import Curve, bounds_of, curve_of, scale_asked
from .layout import text_width
from .marks import Layers, Scale, Specification
from .theme import BASELINE, FAILS, HAIRLINE, INK, QUIET, SURVIVES, WIDTHS
from .ticks import round_ticks, tick_texts

__all__ = ["NAME", "NEEDS", "OPTIONS", "QUESTION", "absent", "build", "describe", "numbers"]

NAME = "specification curve"
QUESTION = "How does the size of the effect vary?"
NEEDS = ("curve", "survival")
OPTIONS = ("scale",)

_INDENT = 12.0
_LABEL = {"narrow": 96.0, "wide": 180.0}
_MOST = {"narrow": 64, "wide": 150}  # specifications drawn, each at least three pixels wide
_TOP, _PANEL, _STRIP = 16.0, 150.0, 13.0
_ROWS = 30
_TICK = 8.0  # height of a stroke that says what was chosen
_NOTHING = "No admissible specification has an estimate."

_TIPS = {
    "rank": "rank",
    "estimate": "estimate",
    "interval": "interval",
    "p": "p-value",
    "outcome": "finding",
    "choices": "choices",
}

def _subtitle(
    context: Context, curve: Curve, bounds: tuple[float, float], arranged: Arrangement, fixed: str
) -> str:
    share = level_text(1 - curve.level)
    words = [context.lead]
    if curve.scale == OVERALL:
        words.append(
            "Height: standardised sum of the lag coefficients (standard deviations of the effect "
            f"for one of the cause), which compares across the {counted(curve.scales, 'scale')} of "
            f"this finding; upright strokes: normal {share} intervals."
        )
    else:
        words.append(
            f"Height: sum of the lag coefficients on the scale {curve.scale}, in units of the "
            f"effect per unit of the cause; upright strokes: normal {share} intervals."
        )
    words.append(
        "The joint test of all lags decides survival, not the interval. Teal disc: survives; "
        "ochre square: does not; diamond and line: the baseline."
    )
    past = sum(
        row["low"] is not None and (row["low"] < bounds[0] or row["high"] > bounds[1])
        for row in curve.drawn
    )
    if past:
        words.append(f"{counted(past, 'interval')} cut at the frame.")
    if len(curve.drawn) < curve.rows:
        words.append(
            f"Drawn are {len(curve.drawn):,} of {counted(curve.rows, 'specification')}, evenly "
            "spaced in rank from the lowest to the highest; a choice without a stroke is among the "
            "others."
        )
    words.append(_spread(curve))
    elsewhere = context.counts.admissible - curve.admissible
    if elsewhere:
        words.append(f"{elsewhere:,} admissible rows are on other scales.")
    lost = curve.admissible - curve.rows
    if lost:
        words.append(f"{lost:,} admissible rows have no estimate.")
    words += [context.losses, arranged.thinned, fixed]
    return " ".join(word for word in words if word)


def _spread(curve: Curve) -> str:
    positive = percent(curve.positive / curve.rows)
    return (
        f"Median {number(curve.median)}; positive in {curve.positive:,} of {curve.rows:,} "
        f"({positive})."
    )


def absent(frames: Mapping[str, pd.DataFrame]) -> str:
    """Say that there is nothing to draw where nothing has an estimate."""
    return _NOTHING if frames["curve"].empty else ""


def build(
    frames: Mapping[str, pd.DataFrame],
    context: Context,
    width: str = "wide",
    scale: str | None = None,
) -> Specification:
    """Draw the specification curve.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        ``curve`` and ``survival`` (choices in plan order) of one finding.
    context : Context
        The finding, its level and counts.
    width : str
        ``narrow`` (85 mm) or ``wide`` (175 mm).
    scale : str, optional
        Name of one scale, or ``baseline`` for the baseline's, or ``all``; the only scale there is
        or all of them where none is given.

    Raises
    ------
    InputFault
        If the scale asked for is none of the finding's.
    """
    curve = curve_of(frames["curve"], context.significance, scale, _MOST[width])
    if curve is None:
        said = f"{context.lead} {context.losses}"
        return marks.without_marks(_NOTHING, width, QUESTION, said)
    survival = frames["survival"]
    parts, fixed = held_fixed(_choices_of(curve, by_axis(survival[survival["axis"] != OVERALL])))
    bounds = bounds_of(curve)
    ticks = round_ticks(*bounds, 7)
    strips = (f"survives {curve.survived:,}", f"does not {curve.rows - curve.survived:,}")
    room = max(
        label_room(parts, _LABEL[width], _ROWS), *(text_width(text) - _INDENT for text in strips),
        *(text_width(text) - _INDENT for text in tick_texts(ticks)),
    )  # fmt: skip
    top = _TOP + _PANEL + 10 + 2 * _STRIP + 10
    arranged = arrange(parts, room, lambda record: bool(record["is_baseline"]), top, _ROWS)
    across, height = float(WIDTHS[width]), arranged.height + 26
    x = Scale("place", (0, 1), (_INDENT + room + 10, across))

    def y(value: float) -> float:
        part = (min(max(value, bounds[0]), bounds[1]) - bounds[0]) / (bounds[1] - bounds[0])
        return _TOP + _PANEL * (1 - part)

    return marks.figure(
        [
            *_ground(curve, [(tick, y(tick)) for tick in ticks], height, x, y(0.0)),
            *_panel(curve, y, height, x),
            *_outcomes(curve, strips, height, x),
            *_choices(curve, arranged, height, x, across),
            *_baseline(curve, y, arranged, height, x),
            *_pointed(curve, height, x),
        ],
        width,
        height,
        QUESTION,
        _subtitle(context, curve, bounds, arranged, fixed),
    )


def _choices_of(
    curve: Curve, groups: list[tuple[str, list[Record]]]
) -> list[tuple[str, list[Record]]]:
    """Leave out the choices that belong to other scales than the one that is drawn."""
    if curve.scale == OVERALL:
        return groups
    scaling = ("transformation", "measures")
    held = {axis: {str(row[axis]) for row in curve.drawn} for axis in scaling}
    return [
        (axis, [one for one in records if axis not in held or str(one["choice"]) in held[axis]])
        for axis, records in groups
    ]


def _ground(
    curve: Curve, ticks: Sequence[tuple[float, float]], height: float, x: Scale, zero: float
) -> Layers:
    """Draw the round numbers of the height, zero, and what the ranks run from and to."""
    edge = x.track[0] - 6
    names = tick_texts([tick for tick, _ in ticks])
    marked = [{"y": place} for _, place in ticks]
    labels = [{"y": place, "text": text} for (_, place), text in zip(ticks, names, strict=True)]
    foot = [
        {"y": height - 15, "place": 0.0, "text": "1 (lowest)"},
        {"y": height - 15, "place": 1.0, "text": f"{curve.rows:,} (highest)"},
    ]
    middle = [{"y": height - 4, "text": "rank of the specification by its estimate"}]
    return [
        *marks.strokes(marked, height, x.track[0], x.track[1], colour="#E3E6E6"),
        *marks.strokes([{"y": zero}], height, x.track[0], x.track[1], colour=QUIET, width=0.8),
        *marks.texts(labels, height, edge, align="right", colour=QUIET),
        *marks.texts(foot[:1], height, x, colour=QUIET),
        *marks.texts(foot[1:], height, x, align="right", colour=QUIET),
        *marks.texts(middle, height, sum(x.track) / 2, align="center", colour=QUIET),
        *marks.texts([{"y": 5, "text": curve.unit}], height, x.track[0], colour=QUIET),
    ]


def _panel(curve: Curve, y: Any, height: float, x: Scale) -> Layers:
    """Draw the estimates over their intervals."""
    layers: Layers = []
    for kept, colour in ((False, "#E9CC9B"), (True, "#9CC0BF")):
        rows = [
            {"place": row["place"], "y": y(row["high"]), "y2": y(row["low"])}
            for row in curve.drawn
            if bool(row["survives"]) == kept and row["low"] is not None
        ]
        layers += marks.strokes(rows, height, x, colour=colour, width=1.2, tall=True)
    for kept, colour, shape, area in ((False, FAILS, "square", 9), (True, SURVIVES, "circle", 12)):
        rows = [
            {"place": row["place"], "y": y(row["estimate"])}
            for row in curve.drawn
            if bool(row["survives"]) == kept
        ]
        layers += marks.dots(rows, height, x, colour=colour, shape=shape, area=area)
    return layers


def _outcomes(curve: Curve, strips: tuple[str, str], height: float, x: Scale) -> Layers:
    """Draw, on two lines, which of the drawn specifications survive, with the counts of all."""
    layers: Layers = []
    for line, (kept, colour) in enumerate(((True, SURVIVES), (False, FAILS))):
        place = _TOP + _PANEL + 10 + (line + 0.5) * _STRIP
        layers += marks.texts([{"y": place, "text": strips[line]}], height, 0)
        rows = [
            {"place": row["place"], "y": place - _TICK / 2, "y2": place + _TICK / 2}
            for row in curve.drawn
            if bool(row["survives"]) == kept
        ]
        layers += marks.strokes(rows, height, x, colour=colour, width=_stroke(curve, x), tall=True)
    return layers


def _stroke(curve: Curve, x: Scale) -> float:
    """Return the width of a stroke: most of what a specification has, at most four pixels."""
    return min(0.7 * (x.track[1] - x.track[0]) / len(curve.drawn), 4.0)


def _choices(
    curve: Curve, arranged: Arrangement, height: float, x: Scale, across: float
) -> Layers:
    """Draw, on one line a choice, which of the drawn specifications make it."""
    heads = [{"y": group.middle, "text": group.text} for group in arranged.groups]
    lines = [{"y": group.bottom - 1} for group in arranged.groups]
    names = [line for row in arranged.choices for line in row.label_rows()]
    others = [line for row in arranged.rows if row.hidden for line in row.label_rows()]
    baseline = [{"y": row.middle} for row in arranged.choices if row.record["is_baseline"]]
    layers = [
        *marks.texts(heads, height, 0, bold=True),
        *marks.strokes(lines, height, 1, across - 1, colour=HAIRLINE, width=0.6),
        *marks.texts(names, height, _INDENT),
        *marks.texts(others, height, _INDENT, colour=QUIET),
        *marks.dots(baseline, height, 5, colour=BASELINE, shape="diamond", area=46),
    ]
    places = {
        (str(record["axis"]), str(record["choice"])): row.middle
        for row in arranged.rows
        for record in row.hidden or (row.record,)
    }
    axes = list(dict.fromkeys(axis for axis, _ in places))
    for kept, colour in ((False, FAILS), (True, SURVIVES)):
        rows = [
            {"place": row["place"], "y": middle - _TICK / 2, "y2": middle + _TICK / 2}
            for row in curve.drawn
            if bool(row["survives"]) == kept
            for middle in (places[axis, str(row[axis])] for axis in axes)
        ]
        layers += marks.strokes(rows, height, x, colour=colour, width=_stroke(curve, x), tall=True)
    return layers


def _baseline(
    curve: Curve, y: Any, arranged: Arrangement, height: float, x: Scale
) -> Layers:
    """Mark the baseline by its diamond and a line down through its choices."""
    row = curve.baseline
    if row is None:
        return []
    line = [{"place": row["place"], "y": _TOP - 4, "y2": arranged.height}]
    mark = [{"place": row["place"], "y": y(row["estimate"])}]
    return [
        *marks.strokes(line, height, x, colour=INK, width=0.7, tall=True),
        *marks.dots(mark, height, x, colour="white", shape="diamond", area=110),
        *marks.dots(mark, height, x, colour=BASELINE, shape="diamond", area=60),
    ]


def _pointed(curve: Curve, height: float, x: Scale) -> Layers:
    half = 0.5 / len(curve.drawn)
    axes = ("lags", "deterministics", "window", "transformation", "test", "conditioning",
            "measures")  # fmt: skip
    rows = [
        {
            "y": _TOP,
            "y2": _TOP + _PANEL,
            "place": row["place"] - half,
            "to": row["place"] + half,
            "rank": f"{int(row['rank']):,} of {curve.rows:,}",
            "estimate": number(row["estimate"]),
            "interval": "–" if row["low"] is None
            else f"{number(row['low'])} to {number(row['high'])}",
            "p": p_text(row["p_value"]),
            "outcome": "survives" if row["survives"] else "does not survive",
            "choices": "; ".join(str(row[axis]) for axis in axes),
        }
        for row in curve.drawn
    ]  # fmt: skip
    return marks.hit_areas(rows, height, x, "to", _TIPS)


def numbers(
    frames: Mapping[str, pd.DataFrame], context: Context, scale: str | None = None
) -> pd.DataFrame:
    """Return the ranked estimates that are at hand for the scale, at most some hundreds."""
    frame = frames["curve"]
    if frame.empty:
        return frame
    own = frame[frame["scale"] == scale_asked(frame, scale)]
    return own.drop(columns="baseline_scale").reset_index(drop=True)


def describe(
    frames: Mapping[str, pd.DataFrame], context: Context, scale: str | None = None
) -> str:
    """Say in words what the figure shows."""
    curve = curve_of(frames["curve"], context.significance, scale, _MOST["wide"])
    words = [f"Specification curve. {context.lead}"]
    if curve is None:
        return " ".join([*words, _NOTHING, context.losses])
    on = "" if curve.scale == OVERALL else f" on the scale {curve.scale}"
    first, last = curve.drawn[0], curve.drawn[-1]
    words += [
        f"The {curve.unit}{on} runs from {number(first['estimate'])} to "
        f"{number(last['estimate'])} over {counted(curve.rows, 'admissible row')}.",
        _spread(curve),
        f"The finding survives in {curve.survived:,} of them.",
    ]
    own = curve.baseline
    if own is not None:
        words.append(
            f"The baseline's estimate is {number(own['estimate'])}, number {int(own['rank']):,} "
            "from the lowest."
        )
    return " ".join([*words, context.losses])
