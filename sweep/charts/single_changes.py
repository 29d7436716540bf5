"""Single changes: what happens to the baseline's p-value after each change of one choice."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import pandas as pd

from sweep.verdicts.flips import TWO_WAY, single_sentence, turned_by
from sweep.verdicts.words import counted, joined, number, p_text, reason_text

from . import marks, p_track
from .arrangement import Arrangement, Row, arrange, by_axis, label_room
from .context import Context, baseline_record
from .layout import shortened, text_width
from .marks import Layers, Specification
from .p_track import TOP
from .theme import HAIRLINE, QUIET, WIDTHS

__all__ = ["NAME", "NEEDS", "QUESTION", "build", "describe"]

NAME = "single changes"
QUESTION = "Which single change away from the baseline turns the finding?"
NEEDS = ("single_changes", "baseline")

_LABEL = {"narrow": 96.0, "wide": 210.0}
_WORDS = {"narrow": 106.0, "wide": 176.0}
_NONE = "No choice differs from the baseline on one axis only."

_TIPS = {
    "axis": "axis",
    "choice": "choice",
    "p": "p-value after the change",
    "baseline_p": "p-value at the baseline",
    "z": "change in z",
    "reverse_p": "reverse p-value",
    "turned": "turned by",
    "counts": "outcome",
    "reason": "status",
}


def _record(row: Row, context: Context, width: str) -> dict[str, Any]:
    record = row.record
    rows, kept = int(record["admissible"]), int(record["survived"])
    return p_track.track_row(record, row.middle) | {
        "axis": str(record["axis"]),
        "choice": str(record["choice"]),
        "p": p_text(record["p_value"]),
        "baseline_p": p_text(record["baseline_p_value"]),
        "z": number(record["z_change"], 3),
        "reverse_p": p_text(record["reverse_p_value"]),
        "turned": turned_by(record, context.claim) or "nothing",
        "counts": f"{kept:,} of {rows:,} survive" if rows else "not admissible",
        "reason": reason_text(record["status"], record["reason"]),
        "text": p_track.outcome(record, width),
    }


def _subtitle(context: Context, baseline: Mapping[str, Any], arranged: Arrangement) -> str:
    words = [context.lead]
    stroke = "after one choice is changed and all others are kept"
    words.append(p_track.baseline_words(baseline, context, stroke))
    words.append(
        "Disc: survives; square: does not; grey ring: screened out; small dot: not run. Moving "
        "windows: median and band over the admissible positions, over all that were run where "
        "none is."
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
    arranged = arrange(parts, room, lambda record: int(record["flips"]) > 0, TOP)
    height = max(arranged.height, TOP + 18) + 4
    drawn = [_record(row, context, width) for row in arranged.choices]
    across = WIDTHS[width]
    words = min(_WORDS[width], max([text_width(one["text"], bold=True) for one in drawn] + [40.0]))
    track = (room + 16.0, across - words - 12)
    pointed = [
        record | {"y": row.top, "y2": row.bottom}
        for record, row in zip(drawn, arranged.choices, strict=True)
    ]
    return marks.figure(
        [
            *p_track.ground(arranged.height, height, track, context),
            *_labels(arranged, height, across),
            *p_track.baseline_marks(baseline, context, arranged.height, height, track),
            *p_track.strokes(drawn, height, track),
            *_nothing(arranged, height),
            *p_track.ends(drawn, height, track),
            *_outcomes(drawn, arranged, height, across, words),
            *marks.hit_rows(pointed, height, across, _TIPS),
        ],
        width,
        height,
        QUESTION,
        _subtitle(context, baseline, arranged),
    )


def _labels(arranged: Arrangement, height: float, across: float) -> Layers:
    heads = [{"y": group.middle, "text": group.text} for group in arranged.groups]
    layers = marks.texts(heads, height, 0, bold=True)
    lines = [{"y": group.bottom - 1} for group in arranged.groups]
    layers += marks.strokes(lines, height, 1, across - 1, colour=HAIRLINE, width=0.6)
    names = [line for row in arranged.choices for line in row.label_rows()]
    others = [line for row in arranged.rows if row.hidden for line in row.label_rows()]
    layers += marks.texts(names, height, 4)
    return layers + marks.texts(others, height, 4, colour=QUIET)


def _nothing(arranged: Arrangement, height: float) -> Layers:
    """Say so where no choice differs from the baseline on one axis only."""
    if arranged.total:
        return []
    return marks.texts([{"y": TOP + 10, "text": _NONE}], height, 4, colour=QUIET)


def _outcomes(
    drawn: list[dict[str, Any]],
    arranged: Arrangement,
    height: float,
    across: float,
    words: float,
) -> Layers:
    head = [{"y": TOP - 13, "text": "p-value"}]
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
    state = baseline["survives"] if baseline["admissible"] else None
    words = [
        f"Single changes from the baseline. {context.lead}",
        p_track.baseline_sentence(baseline, context),
        single_sentence(changes, state, limit=20, design=context.design),
    ]
    if context.claim in TWO_WAY:
        reverse = [one for one in changes.to_dict("records") if p_track.by_reverse(one)]
        if reverse:
            named = joined(
                f"{one['axis']} {one['choice']} (reverse p {p_text(one['reverse_p_value'])})"
                for one in reverse[:10]
            )
            words.append(f"Turned by the reverse direction alone: {named}.")
    return " ".join(words)
