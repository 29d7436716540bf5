"""Attrition: from the planned rows to those that survive, each loss with its reasons."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import pandas as pd

from sweep.verdicts.attrition import Loss, Stage, sentences, stages
from sweep.verdicts.words import counted, percent

from . import marks
from .context import Context
from .layout import text_width, wrapped
from .marks import Layers, Scale, Specification
from .theme import ABSENT, FAILS, HAIRLINE, INK, PALE, QUIET, SCREENED, SMALL, SURVIVES, WIDTHS

__all__ = ["NAME", "NEEDS", "QUESTION", "build", "describe", "numbers"]

NAME = "attrition"
QUESTION = "What was planned, what was counted, and where was the rest lost?"
NEEDS = ("attrition",)

_TOP = 34.0
_LABEL = {"narrow": 142.0, "wide": 300.0}
_INDENT = 12.0
_LINE = SMALL * 1.22
_STAGE, _LOSS, _AFTER = 8.0, 4.0, 7.0
_BETWEEN = 14.0

# Reasons that are listed for one loss; the others are summed up in a closing line.
_MOST = 6
_PLENTY = 12

_TIPS = {"name": "step", "reason": "reason", "rows": "rows", "share": "of planned rows"}


@dataclass(frozen=True, slots=True)
class _Line:
    """A stage or a loss with its place."""

    item: Stage | Loss
    lines: tuple[str, ...]
    top: float
    bottom: float

    @property
    def middle(self) -> float:
        return (self.top + self.bottom) / 2

    @property
    def stage(self) -> bool:
        return isinstance(self.item, Stage)


def _lines(steps: list[Stage], room: float) -> list[_Line]:
    """Place the stages and the losses between them below each other."""
    found, top = [], _TOP
    # Reasons are written out unless they are so many that the figure would leave its page.
    long = 4 if sum(len(_few(step.losses)) for step in steps) <= _PLENTY else 2
    for step in steps:
        items: list[Stage | Loss] = [step, *_few(step.losses)]
        for item in items:
            stage = isinstance(item, Stage)
            words = item.name if isinstance(item, Stage) else item.words
            inner = room - (0 if stage else _INDENT)
            lines = wrapped(words, inner, SMALL, lines=long, bold=stage)
            bottom = top + len(lines) * _LINE + (_STAGE if stage else _LOSS)
            found.append(_Line(item, tuple(lines), top, bottom))
            top = bottom
        top += _AFTER
    return found


def _few(losses: tuple[Loss, ...]) -> list[Loss]:
    """Return the losses, the small ones beyond a handful summed up in a last one."""
    if len(losses) <= _MOST:
        return list(losses)
    rest = losses[_MOST - 1 :]
    kinds = {loss.name for loss in rest}
    name = kinds.pop() if len(kinds) == 1 else "left out"
    rows = sum(loss.rows for loss in rest)
    summed = Loss(name, f"{len(rest):,} other reasons", rows, rest[0].start, False)
    return [*losses[: _MOST - 1], summed]


def _subtitle(context: Context, steps: list[Stage]) -> str:
    words = [
        context.lead,
        "Bars: rows left after each step; between them, at their place on the same scale, the rows "
        "that were lost, with the reason. Teal: survives; ochre: admissible and does not survive; "
        "grey: screened out; thin strokes: could not be run.",
    ]
    if any(loss.ruled for step in steps for loss in step.losses):
        words.append("Heavy strokes: ruled out by the plan's author.")
    words.append(context.losses)
    return " ".join(words)


def build(
    frames: Mapping[str, pd.DataFrame], context: Context, width: str = "wide"
) -> Specification:
    """Draw the attrition of one finding.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        ``attrition`` of one finding.
    context : Context
        The finding, its level and counts.
    width : str
        ``narrow`` (85 mm) or ``wide`` (175 mm).
    """
    steps = stages(frames["attrition"], context.counts, context.level)
    across = WIDTHS[width]
    words = [text_width(step.name, bold=True) for step in steps]
    words += [_INDENT + text_width(loss.words) for step in steps for loss in step.losses]
    room = min(_LABEL[width], max(words) + 2)
    placed = _lines(steps, room)
    height = placed[-1].bottom + 4
    said = [_numbers(line.item, context.counts.planned) for line in placed]
    heads = ("rows", "of planned" if width == "wide" else "planned")
    shares = max(text_width(text) for text in (heads[1], *(share for _, share in said)))
    counts = max(text_width(text, bold=True) for text in (heads[0], *(count for count, _ in said)))
    edge = across - shares - _BETWEEN
    right = edge - counts - _BETWEEN
    scale = Scale("rows", (0, max(context.counts.planned, 1)), (room + 12, right))
    return marks.figure(
        [
            *_ground(placed, height, scale, across),
            *_bars(placed, context, height, scale),
            *_losses(placed, height, scale),
            *_words(placed, height),
            *_columns(placed, said, height, (edge, across), width),
            *_pointed(placed, said, height, across),
        ],
        width,
        height,
        QUESTION,
        _subtitle(context, steps),
    )


def _numbers(item: Stage | Loss, planned: int) -> tuple[str, str]:
    """Return the count and its share of the planned rows."""
    sign = "" if isinstance(item, Stage) else "−"
    return f"{sign}{item.rows:,}", percent(item.rows / planned if planned else None)


def _ground(placed: list[_Line], height: float, scale: Scale, across: float) -> Layers:
    """Draw where planned rows begin and end, and a hairline above each stage."""
    ends = [{"rows": place, "y": _TOP - 6, "y2": placed[-1].bottom} for place in scale.domain]
    lines = [{"y": line.top - 2} for line in placed if line.stage and line.top > _TOP]
    return [
        *marks.strokes(ends, height, scale, colour="#E3E6E6", tall=True),
        *marks.strokes(lines, height, 1, across - 1, colour=HAIRLINE, width=0.6),
    ]


def _bars(placed: list[_Line], context: Context, height: float, scale: Scale) -> Layers:
    """Draw what is left after each stage; the last one is split by survival."""
    hollow: list[dict[str, float]] = []
    teal: list[dict[str, float]] = []
    for line in placed:
        if not isinstance(line.item, Stage) or not line.item.rows:
            continue
        bar = {"y": line.middle - 5, "y2": line.middle + 5, "rows": 0, "to": line.item.rows}
        (teal if line.item.last else hollow).append(bar)
    ochre = [
        {"y": line.middle - 3, "y2": line.middle + 3, "rows": line.item.start,
         "to": line.item.start + line.item.rows}
        for line in placed
        if isinstance(line.item, Loss) and line.item.counted and line.item.rows
    ]  # fmt: skip
    return [
        *marks.areas(hollow, height, scale, "to", colour=PALE, line=QUIET),
        *marks.areas(teal, height, scale, "to", colour=SURVIVES),
        *marks.areas(ochre, height, scale, "to", colour=FAILS),
    ]


def _losses(placed: list[_Line], height: float, scale: Scale) -> Layers:
    """Draw what could not be run as a stroke with a small dot, what was screened out in grey."""
    grey, points = [], []
    strokes: dict[bool, list[dict[str, float]]] = {True: [], False: []}
    for line in placed:
        loss = line.item
        if isinstance(loss, Stage) or loss.counted:
            continue
        piece = {"y": line.middle, "rows": loss.start, "to": loss.start + loss.rows}
        if loss.screened:
            grey.append(piece | {"y": line.middle - 3, "y2": line.middle + 3})
        else:
            strokes[loss.ruled].append(piece)
            points.append({"y": line.middle, "rows": loss.start + loss.rows / 2})
    return [
        *marks.areas(grey, height, scale, "to", colour=SCREENED, line=ABSENT),
        *marks.strokes(strokes[False], height, scale, "to", colour=ABSENT, width=1),
        *marks.strokes(strokes[True], height, scale, "to", colour=INK, width=2.4),
        *marks.dots(points, height, scale, colour=ABSENT, area=9),
    ]


def _words(placed: list[_Line], height: float) -> Layers:
    names: dict[bool, list[dict[str, Any]]] = {True: [], False: []}
    for line in placed:
        first = line.middle - (len(line.lines) - 1) * _LINE / 2
        names[line.stage] += [
            {"y": first + number * _LINE, "text": text} for number, text in enumerate(line.lines)
        ]
    return [
        *marks.texts(names[True], height, 0, bold=True),
        *marks.texts(names[False], height, _INDENT, colour=QUIET),
    ]


def _columns(
    placed: list[_Line], said: list[tuple[str, str]], height: float, edges: tuple[float, float],
    width: str,
) -> Layers:  # fmt: skip
    """Write counts and shares flush with two right edges."""
    layers: Layers = []
    for stage in (True, False):
        own = [
            (line.middle, *texts)
            for line, texts in zip(placed, said, strict=True)
            if line.stage == stage
        ]
        colour = INK if stage else QUIET
        counts = [{"y": y, "text": count} for y, count, _ in own]
        shares = [{"y": y, "text": share} for y, _, share in own]
        layers += marks.texts(
            counts, height, edges[0], align="right", colour=colour, bold=stage
        )
        layers += marks.texts(shares, height, edges[1], align="right", colour=colour)
    head = [{"y": _TOP - 13, "text": "rows"}]
    other = [{"y": _TOP - 13, "text": "of planned"}]
    if width == "narrow":
        other = [{"y": _TOP - 24, "text": "of"}, {"y": _TOP - 13, "text": "planned"}]
    layers += marks.texts(head, height, edges[0], align="right", colour=QUIET)
    return layers + marks.texts(other, height, edges[1], align="right", colour=QUIET)


def _pointed(
    placed: list[_Line], said: list[tuple[str, str]], height: float, across: float
) -> Layers:
    rows = [
        {
            "y": line.top,
            "y2": line.bottom,
            "name": line.item.name,
            "reason": "" if isinstance(line.item, Stage) else line.item.reason,
            "rows": count,
            "share": share,
        }
        for line, (count, share) in zip(placed, said, strict=True)
    ]
    return marks.hit_rows(rows, height, across, _TIPS)


def numbers(frames: Mapping[str, pd.DataFrame], context: Context) -> pd.DataFrame:
    """Return the stages and losses that are drawn, every reason on a line of its own.

    Returns
    -------
    pandas.DataFrame
        ``step`` (planned, applicable, run, admissible, survived), ``kind`` (left, lost),
        ``name, reason, rows, ruled`` (True where the plan's author ruled it out).
    """
    rows: list[dict[str, Any]] = []
    for step in stages(frames["attrition"], context.counts, context.level):
        rows.append(
            {"step": step.name, "kind": "left", "name": step.name, "reason": "",
             "rows": step.rows, "ruled": False}
        )  # fmt: skip
        rows += [
            {"step": step.name, "kind": "lost", "name": loss.name, "reason": loss.reason,
             "rows": loss.rows, "ruled": loss.ruled}
            for loss in step.losses
        ]  # fmt: skip
    return pd.DataFrame(rows)


def describe(frames: Mapping[str, pd.DataFrame], context: Context) -> str:
    """Say in words what the figure shows."""
    steps = stages(frames["attrition"], context.counts, context.level)
    return " ".join(
        [
            f"Attrition of {counted(context.counts.planned, 'planned row')}. {context.lead}",
            *sentences(steps),
        ]
    )
