"""Flips: the changes of one or two choices under which the finding turns."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import pandas as pd

from sweep.verdicts.flips import pair_sentence, positions, step_words, turned_by
from sweep.verdicts.words import counted, missing, number, p_text

from . import marks, p_track
from .arrangement import Arrangement, Record, Row, arrange, label_room
from .context import Context, baseline_record
from .layout import shortened, text_width
from .marks import Layers, Specification
from .p_track import TOP
from .theme import HAIRLINE, INK, QUIET, WIDTHS

__all__ = ["NAME", "NEEDS", "QUESTION", "build", "describe"]

NAME = "flips"
QUESTION = "How few changed choices turn the finding, and which?"
NEEDS = ("flips", "flip_counts", "baseline")

# Most rows of a figure, of all kinds and of a kind that says least, and its tallest rows.
_LIMIT, _LEAST, _TALLEST = 32, 8, 800.0
_SAY_LEAST = ("two changes, one turns alone", "two changes, one cannot be judged alone")
_LABEL = {"narrow": 112.0, "wide": 250.0}
_WORDS = {"narrow": 92.0, "wide": 226.0}
_HEAD = {"narrow": "p-value", "wide": "p-value; change in z"}
_NONE = "No change of one or two choices turns the finding."

_TIPS = {
    "choice": "changes",
    "p": "p-value after the changes",
    "baseline_p": "p-value at the baseline",
    "z": "change in z",
    "reverse_p": "reverse p-value",
    "turned": "turned by",
    "counts": "positions that turn",
    "alone": "p-values after each change alone",
    "windows": "windows that turn",
}


def _lines(record: Record) -> tuple[str, ...]:
    """Return the label: one line for each changed choice, its new value alone."""
    steps = [f"{record['first_axis']}: {record['first_to']}"]
    if not missing(record["second_axis"]):
        steps.append(f"{record['second_axis']}: {record['second_to']}")
    return tuple(steps)


def _groups(frame: pd.DataFrame) -> list[tuple[str, list[Record]]]:
    groups: dict[str, list[Record]] = {}
    for one in frame.to_dict("records"):
        lines = _lines(one)
        groups.setdefault(str(one["kind"]), []).append(
            one | {"lines": lines, "choice": "; ".join(lines)}
        )
    return list(groups.items())


def _words(record: Record, width: str) -> str:
    """Return the words at the right: the p-value, the change in z, the positions that turn."""
    text = p_track.outcome(record, width)
    if width == "narrow" or missing(record["z_change"]):
        return text
    name = "reverse_z_change" if p_track.by_reverse(record) else "z_change"
    change = number(record[name], 2)
    sign = "" if change.startswith("−") else "+"
    return f"{text}; z {sign}{change}"


def _record(row: Row, context: Context, width: str) -> dict[str, Any]:
    record = row.record
    dates = [context.period(record["window_start"]), context.period(record["window_end"])]
    alone = [record["first_p_value"], record["second_p_value"]]
    return p_track.track_row(record, row.middle) | {
        "choice": str(record["choice"]),
        "p": p_text(record["p_value"]),
        "baseline_p": p_text(record["baseline_p_value"]),
        "z": number(record["z_change"], 3),
        "reverse_p": p_text(record["reverse_p_value"]),
        "turned": turned_by(record, context.claim),
        "counts": f"{int(record['flips']):,} of {int(record['admissible']):,}",
        "alone": " and ".join(p_text(p) for p in alone) if int(record["changes"]) > 1 else "–",
        "windows": f"from {dates[0]} to {dates[1]}",
        "singles": [p_track.placed(p) for p in alone if not missing(p)],
        "text": _words(record, width),
    }


def _subtitle(context: Context, frames: Mapping[str, pd.DataFrame], arranged: Arrangement) -> str:
    baseline = baseline_record(frames["baseline"])
    words = [
        context.lead,
        p_track.baseline_words(baseline, context, "after the changes named at the left"),
        "Disc: survives then; square: does not. Small ticks: each change of a pair alone. Moving "
        "windows: median over the admissible positions, mark for what most of them do; of a pair "
        "they stand where neither turns alone if that is so in a position.",
        _counts(frames["flip_counts"], baseline, context.design),
        context.losses,
    ]
    if arranged.shown < arranged.total:
        words.append(
            f"Shown are {arranged.shown:,} of {counted(arranged.total, 'set')} of changes that "
            "turn the finding: of each kind those that turn (jointly) in the largest part of "
            "their positions, then those that moved p furthest."
        )
    return " ".join(word for word in words if word)


def _counts(frame: pd.DataFrame, baseline: Mapping[str, Any], design: str) -> str:
    """Say how many changes were tried and how many turn."""
    state = baseline["survives"] if baseline["admissible"] else None
    if missing(state):
        return "The baseline is not admissible, so no change can turn it."
    verb = "break" if state else "restore"
    singles = frame[frame["changes"] == 1].to_dict("records")
    sentences = [
        f"{int(one['turning']):,} of {counted(int(one['admissible']), 'single change')} "
        f"{verb}{'s' if int(one['turning']) == 1 else ''} the finding."
        for one in singles
    ]
    return " ".join([*sentences, pair_sentence(frame, state, design)]).strip()


def build(
    frames: Mapping[str, pd.DataFrame], context: Context, width: str = "wide"
) -> Specification:
    """Draw the changes of one or two choices that turn the finding.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        ``flips``, ``flip_counts`` and ``baseline`` of one finding.
    context : Context
        The finding, its level and counts.
    width : str
        ``narrow`` (85 mm) or ``wide`` (175 mm).
    """
    groups = _groups(frames["flips"])
    baseline = baseline_record(frames["baseline"])
    room = label_room(groups, _LABEL[width])
    arranged = _arranged(groups, room)
    height = max(arranged.height, TOP + 18) + 4
    drawn = [_record(row, context, width) for row in arranged.choices]
    across = WIDTHS[width]
    texts = [_HEAD[width], *(one["text"] for one in drawn)]
    widest = max(text_width(text, bold=True) for text in texts)
    words = min(_WORDS[width], widest)
    track = (room + 16.0, across - words - 12)
    pointed = [
        record | {"y": row.top, "y2": row.bottom}
        for record, row in zip(drawn, arranged.choices, strict=True)
    ]
    return marks.figure(
        [
            *p_track.ground(arranged.height, height, track, context),
            *p_track.baseline_marks(baseline, context, arranged.height, height, track),
            *_labels(arranged, height, across),
            *p_track.strokes(drawn, height, track),
            *_singles(drawn, height, track),
            *p_track.ends(drawn, height, track),
            *_texts(drawn, arranged, height, width, words),
            *marks.hit_rows(_plain(pointed), height, across, _TIPS),
        ],
        width,
        height,
        QUESTION,
        _subtitle(context, frames, arranged),
    )


def _arranged(groups: list[tuple[str, list[Record]]], room: float) -> Arrangement:
    """Place the first flips of each kind, fewer where labels need many lines."""
    limit = _LIMIT
    while True:
        # Pairs that hold a flip of one change already say least; others share the rest alike.
        rooms = [min(limit, _LEAST) if kind in _SAY_LEAST else limit // 2 for kind, _ in groups]
        arranged = arrange(groups, room, lambda _: False, TOP, rooms=rooms, noun="flip")
        if arranged.height <= _TALLEST or limit <= 4:
            return arranged
        limit -= 2


def _plain(drawn: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Return the records without what is no single value."""
    return [{name: v for name, v in one.items() if name != "singles"} for one in drawn]


def _labels(arranged: Arrangement, height: float, across: float) -> Layers:
    heads = [
        {"y": group.middle, "text": shortened(group.text, across, bold=True)}
        for group in arranged.groups
    ]
    layers: Layers = []
    for group in arranged.groups:
        # The level's line and the baseline's stop for a name that reaches across them.
        ground = [{"y": group.middle - 6, "y2": group.middle + 6}]
        end = text_width(shortened(group.text, across, bold=True), bold=True) + 2
        layers += marks.areas(ground, height, 0, end, colour="white")
    layers += marks.texts(heads, height, 0, bold=True)
    lines = [{"y": group.bottom - 1} for group in arranged.groups]
    layers += marks.strokes(lines, height, 1, across - 1, colour=HAIRLINE, width=0.6)
    names = [line for row in arranged.choices for line in row.label_rows()]
    others = [line for row in arranged.rows if row.hidden for line in row.label_rows()]
    if not arranged.total:
        others = [{"y": TOP + 10, "text": _NONE}]
    layers += marks.texts(names, height, 4)
    return layers + marks.texts(others, height, 4, colour=QUIET)


def _singles(
    drawn: list[dict[str, Any]], height: float, track: tuple[float, float]
) -> Layers:
    """Draw a tick where each change of a pair alone leads."""
    rows = [
        {"y": one["y"] - 4.5, "y2": one["y"] + 4.5, "single": place}
        for one in drawn
        if not one["reverse"]
        for place in one["singles"]
    ]
    x = p_track.scale("single", track)
    return marks.strokes(rows, height, x, colour=INK, width=1.1, tall=True)


def _texts(
    drawn: list[dict[str, Any]],
    arranged: Arrangement,
    height: float,
    width: str,
    words: float,
) -> Layers:
    across = WIDTHS[width]
    head = [{"y": TOP - 13, "text": _HEAD[width]}]
    layers = marks.texts(head, height, across - words, colour=QUIET)
    rows = [{"y": one["y"], "text": shortened(one["text"], words, bold=True)} for one in drawn]
    layers += marks.texts(rows, height, across - words, bold=True)
    rest = [
        {"y": row.middle, "text": "also turn" if len(row.hidden) > 1 else "also turns"}
        for row in arranged.rows
        if row.hidden
    ]
    return layers + marks.texts(rest, height, across - words, colour=QUIET)


def describe(frames: Mapping[str, pd.DataFrame], context: Context) -> str:
    """Say in words what the figure shows."""
    baseline = baseline_record(frames["baseline"])
    words = [
        f"Changes of one or two choices that turn the finding. {context.lead}",
        p_track.baseline_sentence(baseline, context),
        _counts(frames["flip_counts"], baseline, context.design),
    ]
    for kind, records in _groups(frames["flips"]):
        named = [_named(one, context) for one in records[:8]]
        more = f"; and {len(records) - 8:,} more" if len(records) > 8 else ""
        words.append(f"{kind.capitalize()}: {'; '.join(named)}{more}.")
    return " ".join(word for word in words if word)


def _named(record: Record, context: Context) -> str:
    steps = [step_words(record, which) for which in ("first", "second")]
    found = f"p {p_text(record['p_value'])}"
    if int(record["positions"]) > 1:
        found = f"{int(record['flips']):,} of {positions(record)}; median {found}"
    by = turned_by(record, context.claim)
    return f"{' with '.join(step for step in steps if step)} ({found}; by {by})"
