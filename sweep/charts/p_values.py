"""p-values of two sweeps against each other, one cell for the rows that fall together."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import pandas as pd

from sweep.verdicts.words import level_text, share_text

from . import marks
from .layout import shortened
from .marks import Layers, Scale, Specification
from .theme import ABSENT, FAILS, HAIRLINE, INK, PALE, QUIET, SURVIVES, WIDTHS

__all__ = ["QUESTION", "build", "describe"]

QUESTION = "How far do the p-values of the two sweeps agree?"

# Cells of the store's query: 20 to a factor of ten, the first for all values below 0.001.
_CELLS, _FIRST = 20, -64
_EDGE = -3.2
_TOP = 26.0
_TIPS = {"p": "p-values", "rows": "specifications", "turned": "answer differs"}


def _ends(cell: int) -> tuple[float, float]:
    """Return where a cell is drawn, in powers of ten."""
    if cell <= _FIRST:
        return _EDGE, -3.0
    low = max((cell - 1) / _CELLS, -3.0)
    return low, max(cell / _CELLS, -3.0)


def _cells(frame: pd.DataFrame) -> list[dict[str, Any]]:
    """Gather what the query counted below 0.001 apart into the edge, and shade by count."""
    gathered: dict[tuple[float, float, float, float], list[int]] = {}
    for row in frame.to_dict("records"):
        mine, theirs = (
            _ends(_FIRST if row[key] <= -3 * _CELLS else int(row[key]))
            for key in ("my_cell", "their_cell")
        )
        counts = gathered.setdefault((*mine, *theirs), [0, 0])
        counts[0] += int(row["rows"])
        counts[1] += int(row["turned"] or 0)
    most = max((counts[0] for counts in gathered.values()), default=1)
    return [
        {
            "ends": ends, "count": rows, "turned": turned, "weight": (rows / most) ** 0.4,
        }
        for ends, (rows, turned) in sorted(gathered.items())
    ]  # fmt: skip


def _size(width: str) -> tuple[float, float, float]:
    """Return the left end of the square, its side, and the height of the view."""
    left = 46.0
    side = min(WIDTHS[width] - left - 70, 330.0)
    return left, side, _TOP + side + 42


def build(
    frames: Mapping[str, pd.DataFrame],
    names: tuple[str, str],
    statement: str,
    significance: tuple[float, float],
    width: str = "wide",
) -> Specification:
    """Draw the p-values of the rows that are admissible in both sweeps.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        ``p_values`` and ``counts`` of one finding.
    names : tuple of str
        How the two sweeps are called.
    statement : str
        The claim as a sentence without its full stop.
    significance : tuple of float
        Level of each sweep.
    width : str
        ``narrow`` (85 mm) or ``wide`` (175 mm).
    """
    left, side, height = _size(width)
    cells = _cells(frames["p_values"])
    track = (left, left + side)
    x = Scale("x", (_EDGE, 0.0), track)

    def down(power: float) -> float:
        return _TOP + side * (0.0 - power) / (0.0 - _EDGE)

    layers = _ground(height, x, down, side, names, significance, width)
    for turned, colour in ((False, SURVIVES), (True, FAILS)):
        rows = [
            {
                "x": cell["ends"][0], "to": cell["ends"][1], "y": down(cell["ends"][3]),
                "y2": down(cell["ends"][2]), "fill": _shade(colour, cell["weight"]),
                "p": f"{_range(cell['ends'][:2])}; {_range(cell['ends'][2:])}",
                "rows": f"{cell['count']:,}", "turned": f"{cell['turned']:,}",
            }
            for cell in cells
            if (2 * cell["turned"] >= cell["count"]) == turned
        ]  # fmt: skip
        layers += marks.areas(rows, height, x, "to", tips=_TIPS)
    layers += _lines(height, x, down, significance)
    return marks.figure(layers, width, height, QUESTION, _subtitle(frames, names, statement))


def _shade(colour: str, weight: float) -> str:
    """Mix a colour with white: the more rows a cell holds, the darker it is."""
    part = 0.25 + 0.75 * weight
    values = (int(colour[at : at + 2], 16) for at in (1, 3, 5))
    return "#" + "".join(f"{round(255 - (255 - value) * part):02x}" for value in values)


def _range(ends: tuple[float, float]) -> str:
    if ends[0] < -3:
        return "below 0.001"
    return f"{10 ** ends[0]:.2g} to {10 ** ends[1]:.2g}"


def _ground(
    height: float,
    x: Scale,
    down: Any,
    side: float,
    names: tuple[str, str],
    significance: tuple[float, float],
    width: str,
) -> Layers:
    """Draw the square, the edge of small values, ticks and the names of both axes."""
    left, right = x.track
    bottom = _TOP + side
    layers = marks.areas(
        [{"y": _TOP, "y2": bottom, "x": _EDGE, "to": -3.0}], height, x, "to", colour=PALE
    )
    layers += marks.areas([{"y": down(-3.0), "y2": bottom}], height, left, right, colour=PALE)
    ticks = [(-3.0, "0.001"), (-2.0, "0.01"), (-1.0, "0.1"), (0.0, "1")]
    upright = [{"x": power, "y": _TOP, "y2": bottom} for power, _ in ticks]
    layers += marks.strokes(upright, height, x, colour=HAIRLINE, width=0.6, tall=True)
    level = [{"y": down(power)} for power, _ in ticks]
    layers += marks.strokes(level, height, left, right, colour=HAIRLINE, width=0.6)
    across = [{"x": power, "y": bottom + 9, "text": text} for power, text in ticks]
    layers += marks.texts(across, height, x, align="center", colour=QUIET)
    upwards = [{"y": down(power), "text": text} for power, text in ticks]
    layers += marks.texts(upwards, height, left - 5, align="right", colour=QUIET)
    room = WIDTHS[width] - left
    below = [{"y": bottom + 24, "text": shortened(f"p in {names[0]} →", room)}]
    layers += marks.texts(below, height, left)
    above = [{"y": _TOP - 16, "text": shortened(f"↑ p in {names[1]}", room)}]
    return layers + marks.texts(above, height, left)


def _lines(height: float, x: Scale, down: Any, significance: tuple[float, float]) -> Layers:
    """Draw the diagonal of equal values and both levels."""
    from math import log10

    left, right = x.track
    diagonal = [
        {"path": "equal", "x": _EDGE, "y": down(_EDGE)}, {"path": "equal", "x": 0.0, "y": down(0.0)}
    ]  # fmt: skip
    layers = marks.paths(diagonal, height, x, colour=ABSENT, width=0.8)
    mine, theirs = (log10(one) for one in significance)
    upright = [{"x": mine, "y": _TOP, "y2": down(_EDGE)}]
    layers += marks.strokes(upright, height, x, colour=INK, dash=[4, 2.5], tall=True)
    layers += marks.strokes(
        [{"y": down(theirs)}], height, left, right, colour=INK, dash=[4, 2.5]
    )
    layers += marks.texts(
        [{"y": down(theirs), "text": f"level {level_text(significance[1])}"}], height, right + 5
    )
    return layers + marks.texts(
        [{"x": mine, "y": _TOP - 5, "text": f"level {level_text(significance[0])}"}],
        height,
        x,
        align="center",
    )


def _subtitle(
    frames: Mapping[str, pd.DataFrame], names: tuple[str, str], statement: str
) -> str:
    counts = frames["counts"].iloc[0]
    both = int(counts["both_admissible"])
    turned = int(counts["only_mine_survive"]) + int(counts["only_theirs_survive"])
    return (
        f"Finding: {statement}. {both:,} specifications admissible in both {names[0]} and "
        f"{names[1]}; the darker a cell, the more of them. Ochre: in at least half of a cell's "
        f"specifications the finding survives in one sweep only ({share_text(turned, both)} in "
        "all). Logarithmic scales; values below 0.001 are gathered at the edge."
    )


def describe(
    frames: Mapping[str, pd.DataFrame], names: tuple[str, str], statement: str
) -> str:
    """Say in words what the figure shows."""
    from sweep.verdicts.comparison import pair_sentences

    return " ".join([f"p-values compared. Finding: {statement}.", *pair_sentences(frames, names)])
