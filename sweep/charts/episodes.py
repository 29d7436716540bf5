"""Episodes: when a finding holds under each moving window, all windows on one time axis."""

from __future__ import annotations

import itertools
from collections.abc import Mapping
from typing import Any

import pandas as pd

from sweep.verdicts.rolling import BASES, episodes
from sweep.verdicts.words import counted, joined, p_text

from . import marks
from .context import Context
from .layout import shortened, spread_evenly, text_width
from .marks import Layers, Scale, Specification
from .strips import day_number, year_ticks
from .theme import ABSENT, FAILS, INK, QUIET, SMALL, SURVIVES, WASH, WIDTHS

__all__ = ["NAME", "NEEDS", "QUESTION", "absent", "build", "describe"]

NAME = "episodes"
QUESTION = "When does the finding hold under each moving window?"
NEEDS = ("window_paths",)

# Pixels: a window's heading, its two rows of episodes, and the room after them.
_TOP, _HEAD, _ROW, _BAR, _AFTER = 4.0, 15.0, 15.0, 9.0, 9.0
_LEFT = {"narrow": 78.0, "wide": 150.0}
_TICKS = {"narrow": 5, "wide": 9}
_MOST = 12
_SHORT = {
    BASES[0]: {"narrow": "baseline path", "wide": "baseline's other choices"},
    BASES[1]: {"narrow": "half of all rows", "wide": "at least half of the rows"},
}
_FILLS = {"holds": SURVIVES, "does not hold": FAILS, "not admissible": WASH}
_TIPS = {"window": "window", "basis": "what counts", "state": "the finding", "dates": "last dates",
         "size": "positions", "p": "p-values"}  # fmt: skip
_NONE = "The sweep has no moving windows."


def _names(frame: pd.DataFrame) -> list[str]:
    every = list(dict.fromkeys(frame["window_name"].astype(str)))
    return [every[place] for place in spread_evenly(len(every), _MOST)]


def _step(days: list[float]) -> float:
    """Return the usual distance between neighbouring last dates, in days."""
    gaps = sorted(b - a for a, b in itertools.pairwise(days) if b > a)
    return gaps[len(gaps) // 2] if gaps else 30.0


def _ends(row: Any, context: Context) -> str:
    return f"{context.period(row['first_end'])} to {context.period(row['last_end'])}"


def _bars(
    frame: pd.DataFrame, runs: pd.DataFrame, names: list[str], context: Context
) -> list[dict[str, Any]]:
    """Return the drawn episodes, from the step before the first last date to the last one."""
    bars = []
    for number, name in enumerate(names):
        days = [day_number(d) for d in frame.loc[frame["window_name"] == name, "window_end"]]
        step = _step(sorted(days))
        top = _TOP + number * (_HEAD + 2 * _ROW + _AFTER) + _HEAD
        for row in runs[runs["window_name"] == name].to_dict("records"):
            place = top + BASES.index(row["basis"]) * _ROW
            # What does not hold is drawn thin, so that height says it as well as colour.
            held = row["state"] == "holds"
            inset = (_ROW - _BAR) / 2 if held else (_ROW - 3) / 2
            bars.append(
                {
                    "day": day_number(row["first_end"]) - step, "to": day_number(row["last_end"]),
                    "y": place + inset, "y2": place + _ROW - inset,
                    "fill": _FILLS[row["state"]], "window": name, "basis": row["basis"],
                    "state": row["state"],
                    "dates": _ends(row, context),
                    "size": f"{row['positions']:,}",
                    "p": f"{p_text(row['lowest_p'])} to {p_text(row['highest_p'])}",
                }
            )  # fmt: skip
    return bars


def absent(frames: Mapping[str, pd.DataFrame]) -> str:
    """Say that there is nothing to draw where no window moves."""
    return _NONE if frames["window_paths"].empty else ""


def build(
    frames: Mapping[str, pd.DataFrame], context: Context, width: str = "wide"
) -> Specification:
    """Draw the episodes of every moving window on one axis of last dates.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        ``window_paths`` of one finding.
    context : Context
        The finding, its level and counts.
    width : str
        ``narrow`` (85 mm) or ``wide`` (175 mm).
    """
    frame = frames["window_paths"]
    if frame.empty:
        said = f"{context.lead} {context.losses}"
        return marks.without_marks(_NONE, width, QUESTION, said)
    names = _names(frame)
    runs = episodes(frame)
    bars = _bars(frame, runs, names, context)
    across = WIDTHS[width]
    track = (_LEFT[width], across - 4.0)
    height = _TOP + len(names) * (_HEAD + 2 * _ROW + _AFTER) + 30
    low, high = min(bar["day"] for bar in bars), max(bar["to"] for bar in bars)
    x = Scale("day", (low, high), track)
    absent = [
        {"y": (bar["y"] + bar["y2"]) / 2, "day": (bar["day"] + bar["to"]) / 2}
        for bar in bars
        if bar["state"] == "not admissible"
    ]
    layers = [
        *_ground(names, height, x, (low, high), width),
        *marks.areas(bars, height, x, "to", tips=_TIPS),
        *marks.dots(absent, height, x, colour=ABSENT, area=7),
        *_labels(names, runs, height, across, width),
    ]
    return marks.figure(layers, width, height, QUESTION, _subtitle(context, frame, names))


def _subtitle(context: Context, frame: pd.DataFrame, names: list[str]) -> str:
    words = [
        context.lead,
        "Thick teal: windows ending then in which the finding holds; thin ochre: it does not; "
        "small dot: not admissible. Upper row of each window: the specification with the "
        "baseline's other choices; lower row: at least half of all admissible specifications. "
        "Neighbouring windows share most of their data.",
    ]
    total = int(frame["window_name"].nunique())
    if total > len(names):
        words.append(f"{len(names)} of {counted(total, 'window')} are drawn, evenly chosen.")
    words.append(context.losses)
    return " ".join(words)


def _ground(
    names: list[str], height: float, x: Scale, span: tuple[float, float], width: str
) -> Layers:
    ticks = year_ticks(*span, _TICKS[width])
    lines = [{"y": _TOP + _HEAD, "y2": height - 24, "day": day} for day, _ in ticks]
    layers = marks.strokes(lines, height, x, colour="#E3E6E6", tall=True)
    years = [{"y": height - 17, "day": day, "text": text} for day, text in ticks]
    layers += marks.texts(years, height, x, align="center", colour=QUIET)
    middle = (x.track[0] + x.track[1]) / 2
    axis = [{"y": height - 5, "text": "last date of the window"}]
    layers += marks.texts(axis, height, middle, align="center", colour=QUIET)
    grounds = [
        {
            "y": _TOP + number * (_HEAD + 2 * _ROW + _AFTER) + _HEAD + place * _ROW + 1,
            "y2": _TOP + number * (_HEAD + 2 * _ROW + _AFTER) + _HEAD + (place + 1) * _ROW - 1,
        }
        for number in range(len(names))
        for place in range(2)
    ]
    return layers + marks.areas(grounds, height, x.track[0], x.track[1], colour=WASH)


def _labels(
    names: list[str], runs: pd.DataFrame, height: float, across: float, width: str
) -> Layers:
    heads, numbers, rows = [], [], []
    for number, name in enumerate(names):
        top = _TOP + number * (_HEAD + 2 * _ROW + _AFTER)
        own = runs[(runs["window_name"] == name) & (runs["state"] == "holds")]
        count = int((own["basis"] == BASES[0]).sum())
        words = f"{counted(count, 'episode')} on the baseline path"
        room = across - text_width(words) - 12
        heads.append({"y": top + 7, "text": shortened(name, room, SMALL, bold=True)})
        numbers.append({"y": top + 7, "text": words})
        rows += [
            {"y": top + _HEAD + (place + 0.5) * _ROW, "text": _SHORT[basis][width]}
            for place, basis in enumerate(BASES)
        ]
    return [
        *marks.texts(heads, height, 0, bold=True),
        *marks.texts(numbers, height, across, align="right", colour=QUIET),
        *marks.texts(rows, height, 4, colour=INK),
    ]


def describe(frames: Mapping[str, pd.DataFrame], context: Context) -> str:
    """Say in words what the figure shows."""
    frame = frames["window_paths"]
    if frame.empty:
        return f"Episodes. {context.lead} {_NONE}"
    runs = episodes(frame)
    words = [f"Episodes in which the finding holds, by window. {context.lead}"]
    for name, own in runs.groupby("window_name", sort=False):
        for basis in BASES:
            held = own[(own["basis"] == basis) & (own["state"] == "holds")]
            spans = [
                _ends(row, context)
                for row in held.head(8).to_dict("records")
            ]
            more = f" and {len(held) - 8} more" if len(held) > 8 else ""
            said = f"in windows ending {joined(spans)}{more}" if spans else "at no end date"
            words.append(f"{name}, {basis}: it holds {said}.")
    return " ".join(words)
