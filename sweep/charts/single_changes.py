"""Single changes: what happens to the baseline's p-value after each change of one choice."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import pandas as pd

from sweep.verdicts.flips import single_sentence
from sweep.verdicts.words import counted, missing, number, p_text, reason_text

from . import marks
from .arrangement import Arrangement, Row, arrange, by_axis, label_room
from .context import Context, baseline_record
from .layout import shortened, text_width
from .marks import Layers, Scale, Specification
from .theme import ABSENT, BASELINE, FAILS, HAIRLINE, INK, PALE, QUIET, SURVIVES, WIDTHS

__all__ = ["NAME", "NEEDS", "QUESTION", "build", "describe"]

NAME = "single changes"
QUESTION = "Which single change away from the baseline turns the finding?"
NEEDS = ("single_changes", "baseline")

_LABEL = {"narrow": 96.0, "wide": 210.0}
_WORDS = {"narrow": 106.0, "wide": 176.0}
_TOP = 40.0
_NONE = "No choice differs from the baseline on one axis only."

# Values below the edge are gathered at one place left of it.
_EDGE, _GATHERED, _END = 0.001, 0.00062, 0.0004

_TIPS = {
    "axis": "axis",
    "choice": "choice",
    "p": "p-value after the change",
    "baseline_p": "p-value at the baseline",
    "z": "change in z",
    "counts": "outcome",
    "reason": "status",
}


def _placed(p_value: Any) -> float | None:
    """Return where a p-value is drawn: itself, or the gathering place at the edge."""
    if missing(p_value):
        return None
    return _GATHERED if float(p_value) < _EDGE else float(p_value)


def _outcome(record: Mapping[str, Any], width: str) -> str:
    """Return the words at the right of a row: the p-value and what became of the finding."""
    if missing(record["p_value"]):
        text = reason_text(record["status"], record["reason"])
        return text if width == "wide" else str(record["status"])
    words = p_text(record["p_value"])
    flips, rows = int(record["flips"]), int(record["admissible"])
    if int(record["positions"]) > 1:
        if not rows:
            return f"{words}, screened out"
        turns = f"{flips:,} of {rows:,} turn"
        return f"median {words}; {turns}" if width == "wide" else f"{words}; {turns}"
    if not rows:
        return f"{words}, screened out"
    if flips:
        return f"{words} {'restores' if record['survived'] else 'breaks'}"
    return words


def _record(row: Row, width: str) -> dict[str, Any]:
    record = row.record
    rows = int(record["admissible"])
    many = int(record["positions"]) > 1
    kept = int(record["survived"])
    return {
        "y": row.middle,
        "axis": str(record["axis"]),
        "choice": str(record["choice"]),
        "place": _placed(record["p_value"]),
        "low": _placed(record["p_low"]) if many else None,
        "high": _placed(record["p_high"]) if many else None,
        "from": _placed(record["baseline_p_value"]),
        "p": p_text(record["p_value"]),
        "baseline_p": p_text(record["baseline_p_value"]),
        "z": number(record["z_change"], 3),
        "counts": f"{kept:,} of {rows:,} survive" if rows else "not admissible",
        "reason": reason_text(record["status"], record["reason"]),
        "text": _outcome(record, width),
        "turns": int(record["flips"]) > 0,
        "rows": rows,
        "kept": 2 * kept >= rows if rows else None,
    }


def _subtitle(context: Context, baseline: Mapping[str, Any], arranged: Arrangement) -> str:
    words = [context.lead]
    if missing(baseline["p_value"]):
        why = reason_text(baseline["status"], baseline["reason"])
        words.append(f"The baseline has no p-value ({why}); marks stand alone.")
    else:
        words.append(
            f"Diamond and upright line: the baseline's p-value, {p_text(baseline['p_value'])}. "
            "Each stroke leads to the p-value (cause to effect) after one choice is changed and "
            "all others are kept (log scale); heavy strokes and bold words: the finding turns."
        )
    words.append(
        "Disc: survives; square: does not; grey ring: screened out; small dot: not run. Moving "
        "windows: median position, band over all positions."
    )
    words.append(f"{counted(arranged.total, 'choice')} changed one at a time. {context.losses}")
    words.append(arranged.thinned)
    return " ".join(word for word in words if word)


def build(
    frames: Mapping[str, pd.DataFrame], context: Context, width: str = "wide"
) -> Specification:
    """Draw the single changes from the baseline.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        ``single_changes`` in plan order and ``baseline`` of one finding.
    context : Context
        The finding, its level and counts.
    width : str
        ``narrow`` (85 mm) or ``wide`` (175 mm).
    """
    parts = by_axis(frames["single_changes"])
    baseline = baseline_record(frames["baseline"])
    room = label_room(parts, _LABEL[width])
    arranged = arrange(parts, room, lambda record: int(record["flips"]) > 0, _TOP)
    height = max(arranged.height, _TOP + 18) + 4
    drawn = [_record(row, width) for row in arranged.choices]
    across = WIDTHS[width]
    words = min(_WORDS[width], max([text_width(one["text"], bold=True) for one in drawn] + [40.0]))
    track = (room + 16.0, across - words - 12)
    pointed = [
        record | {"y": row.top, "y2": row.bottom}
        for record, row in zip(drawn, arranged.choices, strict=True)
    ]
    return marks.figure(
        [
            *_ground(arranged, height, track, context, across),
            *_labels(arranged, height),
            *_baseline(baseline, height, track),
            *_strokes(drawn, height, track),
            *_nothing(arranged, height),
            *_ends(drawn, height, track),
            *_outcomes(drawn, arranged, height, across, words),
            *marks.hit_rows(pointed, height, across, _TIPS),
        ],
        width,
        height,
        QUESTION,
        _subtitle(context, baseline, arranged),
    )


def _scale(name: str, track: tuple[float, float]) -> Scale:
    return Scale(name, (_END, 1), track, log=True)


def _ground(
    arranged: Arrangement,
    height: float,
    track: tuple[float, float],
    context: Context,
    across: float,
) -> Layers:
    """Draw ticks, the edge where small values are gathered, the level and the group names."""
    x = _scale("p", track)
    bottom = arranged.height
    edge = [{"y": _TOP - 6, "y2": bottom, "p": _END, "to": _EDGE}]
    layers = marks.areas(edge, height, x, "to", colour=PALE)
    ticks: list[dict[str, Any]] = [
        {"y": _TOP - 6, "y2": bottom, "p": p, "text": f"{p:g}"} for p in (0.001, 0.01, 0.1, 1.0)
    ]
    layers += marks.strokes(ticks[1:], height, x, colour="#E3E6E6", tall=True)
    marked = [tick for tick in ticks if abs(tick["p"] - context.significance) > 1e-12]
    named = [
        {"y": _TOP - 13, "p": _GATHERED, "text": "<0.001"},
        *({"y": _TOP - 13, "p": tick["p"], "text": tick["text"]} for tick in marked[1:]),
    ]
    layers += marks.texts(named, height, x, align="center", colour=QUIET)
    level = [{"y": _TOP - 20, "y2": bottom, "p": context.significance}]
    layers += marks.strokes(level, height, x, colour=INK, width=1, dash=[4, 2.5], tall=True)
    layers += marks.texts(
        [{"y": _TOP - 26, "p": context.significance, "text": f"level {context.level}"}],
        height,
        x,
        align="center",
    )
    heads = [{"y": group.middle, "text": group.text} for group in arranged.groups]
    layers += marks.texts(heads, height, 0, bold=True)
    lines = [{"y": group.bottom - 1} for group in arranged.groups]
    return layers + marks.strokes(lines, height, 1, across - 1, colour=HAIRLINE, width=0.6)


def _labels(arranged: Arrangement, height: float) -> Layers:
    names = [line for row in arranged.choices for line in row.label_rows()]
    others = [line for row in arranged.rows if row.hidden for line in row.label_rows()]
    return marks.texts(names, height, 4) + marks.texts(others, height, 4, colour=QUIET)


def _baseline(
    baseline: Mapping[str, Any], height: float, track: tuple[float, float]
) -> Layers:
    place = _placed(baseline["p_value"])
    if place is None:
        return []
    x = _scale("p", track)
    line = [{"y": _TOP - 6, "y2": height - 4, "p": place}]
    layers = marks.strokes(line, height, x, colour=INK, width=0.9, tall=True)
    mark = [{"y": _TOP - 6, "p": place}]
    return layers + marks.dots(mark, height, x, colour=BASELINE, shape="diamond", area=60)


def _strokes(
    drawn: list[dict[str, Any]], height: float, track: tuple[float, float]
) -> Layers:
    """Draw the bands of moving windows and the strokes, heavy where the finding turns."""
    bands = [
        {"y": one["y"] - 3, "y2": one["y"] + 3, "low": one["low"], "high": one["high"]}
        for one in drawn
        if one["low"] is not None
    ]
    layers = marks.areas(bands, height, _scale("low", track), "high", colour="#D9DEDE")
    x = _scale("from", track)
    moved = [one for one in drawn if one["place"] is not None and one["from"] is not None]
    for turns, kept, colour, weight in (
        (False, None, "#98A1A5", 0.9),
        (True, True, SURVIVES, 2.2),
        (True, False, FAILS, 2.2),
    ):
        rows = [
            {"y": one["y"], "from": one["from"], "place": one["place"]}
            for one in moved
            if one["turns"] == turns and (kept is None or bool(one["kept"]) == kept)
        ]
        layers += marks.strokes(rows, height, x, "place", colour=colour, width=weight)
    return layers


def _ends(
    drawn: list[dict[str, Any]], height: float, track: tuple[float, float]
) -> Layers:
    """Draw the mark at the end of each stroke; its shape says what became of the finding."""
    x = _scale("place", track)
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


def _nothing(arranged: Arrangement, height: float) -> Layers:
    """Say so where no choice differs from the baseline on one axis only."""
    if arranged.total:
        return []
    return marks.texts([{"y": _TOP + 10, "text": _NONE}], height, 4, colour=QUIET)


def _outcomes(
    drawn: list[dict[str, Any]],
    arranged: Arrangement,
    height: float,
    across: float,
    words: float,
) -> Layers:
    head = [{"y": _TOP - 13, "text": "p-value"}]
    layers = marks.texts(head, height, across - words, colour=QUIET)
    for turns in (False, True):
        rows = [
            {"y": one["y"], "text": shortened(one["text"], words, bold=turns)}
            for one in drawn
            if one["turns"] == turns
        ]
        layers += marks.texts(rows, height, across - words, bold=turns)
    rest = [
        {
            "y": row.middle,
            "text": f"{sum(int(one['flips']) > 0 for one in row.hidden):,} turn",
        }
        for row in arranged.rows
        if row.hidden
    ]
    return layers + marks.texts(rest, height, across - words, colour=QUIET)


def describe(frames: Mapping[str, pd.DataFrame], context: Context) -> str:
    """Say in words what the figure shows."""
    changes = frames["single_changes"]
    baseline = baseline_record(frames["baseline"])
    state = baseline["survives"]
    words = [
        f"Single changes from the baseline. {context.lead}",
        f"The baseline's p-value is {p_text(baseline['p_value'])}.",
        single_sentence(changes, state, limit=20),
    ]
    return " ".join(words)
