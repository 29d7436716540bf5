"""The track of p-values that figures of changes share: scale, ground, baseline, strokes, ends.

A row of such a figure leads from the baseline's p-value to the one after a change.  Where a
claim looks at both directions and only the reverse one made the finding turn, the row shows the
reverse p-values, from the hollow diamond, with a dashed stroke: what is drawn is what turned.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Any

from sweep.verdicts.flips import TWO_WAY
from sweep.verdicts.words import missing, p_text, reason_text

from . import marks
from .context import Context
from .layout import text_width
from .marks import Layers, Scale
from .theme import ABSENT, BASELINE, FAILS, INK, PALE, QUIET, SURVIVES

__all__ = [
    "TOP",
    "baseline_marks",
    "baseline_sentence",
    "baseline_words",
    "by_reverse",
    "ends",
    "ground",
    "outcome",
    "placed",
    "scale",
    "strokes",
    "track_row",
]

# Room above the rows for ticks, level and diamonds.
TOP = 40.0

# Values below the edge are gathered at one place left of it.
_EDGE, _GATHERED, _END = 0.001, 0.00062, 0.0004

Track = tuple[float, float]
Drawn = Sequence[Mapping[str, Any]]


def placed(p_value: Any) -> float | None:
    """Return where a p-value is drawn: itself, or the gathering place at the edge."""
    if missing(p_value):
        return None
    return _GATHERED if float(p_value) < _EDGE else float(p_value)


def scale(name: str, track: Track) -> Scale:
    """Return the log scale of p-values over a track of pixels."""
    return Scale(name, (_END, 1), track, log=True)


def by_reverse(record: Mapping[Any, Any]) -> bool:
    """Say whether only the reverse direction made a row turn."""
    return int(record["flips_reverse"]) > 0 and not (
        int(record["flips_forward"]) or int(record["flips_sign"])
    )


def track_row(record: Mapping[Any, Any], middle: float) -> dict[str, Any]:
    """Return what the track draws of one change.

    Parameters
    ----------
    record : mapping
        A row of the store's ``single_changes`` or ``flips``.
    middle : float
        Its place, in pixels from the top.
    """
    rows, kept = int(record["admissible"]), int(record["survived"])
    reverse = by_reverse(record)
    side = "reverse_p_value" if reverse else "p_value"
    many = int(record["positions"]) > 1 and not reverse
    return {
        "y": middle,
        "place": placed(record[side]),
        "from": placed(record[f"baseline_{side}"]),
        "low": placed(record["p_low"]) if many else None,
        "high": placed(record["p_high"]) if many else None,
        "turns": int(record["flips"]) > 0,
        "reverse": reverse,
        "rows": rows,
        "kept": 2 * kept >= rows if rows else None,
    }


def outcome(record: Mapping[Any, Any], width: str) -> str:
    """Return the words at the right of a row: the p-value and what became of the finding."""
    if missing(record["p_value"]):
        if "status" not in record:
            return ""
        text = reason_text(record["status"], record["reason"])
        return text if width == "wide" else str(record["status"])
    words = p_text(record["p_value"])
    flips, rows = int(record["flips"]), int(record["admissible"])
    if not rows:
        return f"{words}, screened out"
    if flips:
        words = _turned_p(record, width)
    if int(record["positions"]) > 1:
        turns = f"{flips:,} of {rows:,} turn"
        joint = int(record.get("joint", 0))
        if 0 < joint < flips:
            # A pair that stands among those of which neither change turns alone.
            together = f"{joint:,} jointly"
            turns = f"{turns}, {together}" if width == "wide" else f"{joint:,} of {rows:,} jointly"
        if width == "wide":
            return f"median {words}; {turns}"
        return f"{words}; {turns.removesuffix(' turn') if by_reverse(record) else turns}"
    if flips:
        sign = " (sign)" if int(record["flips_sign"]) else ""
        return f"{words} {'restores' if record['survived'] else 'breaks'}{sign}"
    return words


def _turned_p(record: Mapping[Any, Any], width: str) -> str:
    """Return the p-value of the direction that turned; both where both did."""
    forward, reverse = p_text(record["p_value"]), p_text(record["reverse_p_value"])
    short = "rev. " if width == "narrow" else "reverse "
    if by_reverse(record):
        return f"{short}{reverse}"
    if int(record["flips_reverse"]) and width == "wide":
        return f"{forward}, {short}{reverse}"
    return forward


def ground(bottom: float, height: float, track: Track, context: Context) -> Layers:
    """Draw ticks, the edge where small values are gathered, and the level."""
    x = scale("p", track)
    edge = [{"y": TOP - 6, "y2": bottom, "p": _END, "to": _EDGE}]
    layers = marks.areas(edge, height, x, "to", colour=PALE)
    ticks: list[dict[str, Any]] = [
        {"y": TOP - 6, "y2": bottom, "p": p, "text": f"{p:g}"} for p in (0.001, 0.01, 0.1, 1.0)
    ]
    layers += marks.strokes(ticks[1:], height, x, colour="#E3E6E6", tall=True)
    decade = (track[1] - track[0]) / -math.log10(_END)
    # A tick under the line of the level would be struck through; the line has its own label.
    marked = [
        tick
        for tick in ticks
        if abs(math.log10(tick["p"] / context.significance)) * decade
        > text_width(tick["text"]) / 2 + 2
    ]
    named = [
        {"y": TOP - 13, "p": _GATHERED, "text": "<0.001"},
        *(tick | {"y": TOP - 13} for tick in marked if tick["p"] > _EDGE),
    ]
    layers += marks.texts(named, height, x, align="center", colour=QUIET)
    level = [{"y": TOP - 20, "y2": bottom, "p": context.significance}]
    layers += marks.strokes(level, height, x, colour=INK, width=1, dash=[4, 2.5], tall=True)
    words = [{"y": TOP - 26, "p": context.significance, "text": f"level {context.level}"}]
    return layers + marks.texts(words, height, x, align="center")


def baseline_marks(
    baseline: Mapping[str, Any], context: Context, bottom: float, height: float, track: Track
) -> Layers:
    """Draw the baseline's p-value down to the last row; the reverse one too if claimed."""
    bottom = max(bottom, TOP - 4)
    layers: Layers = []
    x = scale("p", track)
    forward, reverse = placed(baseline["p_value"]), placed(baseline["reverse_p_value"])
    if context.claim in TWO_WAY and reverse is not None:
        line = [{"y": TOP - 6, "y2": bottom, "p": reverse}]
        layers += marks.strokes(line, height, x, colour=INK, width=0.7, dash=[1.5, 2], tall=True)
        layers += marks.dots(
            line, height, x, colour=BASELINE, shape="diamond", area=48, filled=False
        )
    if forward is not None:
        line = [{"y": TOP - 6, "y2": bottom, "p": forward}]
        layers += marks.strokes(line, height, x, colour=INK, width=0.9, tall=True)
        layers += marks.dots(line, height, x, colour=BASELINE, shape="diamond", area=60)
    return layers


def baseline_words(baseline: Mapping[str, Any], context: Context, stroke: str) -> str:
    """Say in the subtitle what diamonds and strokes are.

    Parameters
    ----------
    baseline : mapping
        The baseline's row.
    context : Context
        The finding.
    stroke : str
        What a stroke leads to, such as ``after one choice is changed``.
    """
    if missing(baseline["p_value"]):
        why = reason_text(baseline["status"], baseline["reason"])
        return f"The baseline has no p-value ({why}); marks stand alone."
    words = (
        f"Diamond and upright line: the baseline's p-value, {p_text(baseline['p_value'])}. "
        f"Each stroke leads to the p-value (cause to effect) {stroke} (log scale); heavy strokes "
        "and bold words: the finding turns."
    )
    if context.claim in TWO_WAY:
        words += (
            " The claim looks at the reverse too. Hollow diamond and dotted line: the baseline's "
            f"reverse p-value, {p_text(baseline['reverse_p_value'])}; dashed strokes: only the "
            "reverse turned, and the row shows the reverse p-values."
        )
    return words


def baseline_sentence(baseline: Mapping[str, Any], context: Context) -> str:
    """Say the baseline's p-value in the text alternative, and the reverse one if claimed."""
    if missing(baseline["p_value"]):
        why = reason_text(baseline["status"], baseline["reason"])
        return f"The baseline has no p-value ({why})."
    reverse = ""
    if context.claim in TWO_WAY:
        reverse = f", its reverse p-value {p_text(baseline['reverse_p_value'])}"
    return f"The baseline's p-value is {p_text(baseline['p_value'])}{reverse}."


def strokes(drawn: Drawn, height: float, track: Track) -> Layers:
    """Draw the bands of moving windows and the strokes, heavy where the finding turns."""
    bands = [
        {"y": one["y"] - 3, "y2": one["y"] + 3, "low": one["low"], "high": one["high"]}
        for one in drawn
        if one["low"] is not None
    ]
    layers = marks.areas(bands, height, scale("low", track), "high", colour="#D9DEDE")
    x = scale("from", track)
    moved = [one for one in drawn if one["place"] is not None and one["from"] is not None]
    for turns, kept, colour, weight in (
        (False, None, "#98A1A5", 0.9),
        (True, True, SURVIVES, 2.2),
        (True, False, FAILS, 2.2),
    ):
        for reverse in (False, True):
            rows = [
                {"y": one["y"], "from": one["from"], "place": one["place"]}
                for one in moved
                if one["turns"] == turns
                and one["reverse"] == reverse
                and (kept is None or bool(one["kept"]) == kept)
            ]
            dash = [5, 2.5] if reverse else None
            layers += marks.strokes(
                rows, height, x, "place", colour=colour, width=weight, dash=dash
            )
    return layers


def ends(drawn: Drawn, height: float, track: Track) -> Layers:
    """Draw the mark at the end of each stroke; its shape says what became of the finding."""
    x = scale("place", track)
    layers: Layers = []
    looks = (
        (True, SURVIVES, "circle", True),
        (False, FAILS, "square", True),
        (None, ABSENT, "circle", False),
    )
    for kept, colour, shape, filled in looks:
        for turns, area in ((False, 30), (True, 58)):
            rows = [
                {"y": one["y"], "place": one["place"]}
                for one in drawn
                if one["kept"] is kept and one["turns"] == turns and one["place"] is not None
            ]
            layers += marks.dots(
                rows, height, x, colour=colour, shape=shape, area=area, filled=filled
            )
    absent = [{"y": one["y"]} for one in drawn if one["place"] is None]
    return layers + marks.dots(absent, height, track[1] + 6, colour=ABSENT, area=7)
