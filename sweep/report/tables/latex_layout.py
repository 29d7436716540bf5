"""Which page, type size and column widths a table needs, from the widths of its letters.

Lengths are TeX's points, 72.27 to the inch.  Letters are those of Computer Modern Roman, the
family that LaTeX sets unless told otherwise; the usual others are narrower.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Sequence
from dataclasses import dataclass

from .latex_text import LONG, TOGETHER, spelt
from .model import Column

__all__ = ["SEPARATION", "Layout", "fit", "heading_lines", "width_of"]

# Blank on each side of a column.
SEPARATION = 4.0

_PORTRAIT, _LANDSCAPE = 455.0, 700.0  # 160 mm and 246 mm
_STYLES = (
    (_PORTRAIT, r"\footnotesize", 8.0),
    (_PORTRAIT, r"\scriptsize", 7.0),
    (_LANDSCAPE, r"\footnotesize", 8.0),
    (_LANDSCAPE, r"\scriptsize", 7.0),
)

# Advance widths of the characters from space to tilde, in thousandths of the type size; signs
# that are set in mathematics have the width of theirs.
_WIDTHS = (
    354, 295, 531, 885, 531, 885, 826, 295, 413, 413, 531, 826, 295, 354, 295, 531,
    531, 531, 531, 531, 531, 531, 531, 531, 531, 531, 295, 295, 826, 826, 826, 502,
    826, 796, 752, 767, 811, 723, 693, 834, 796, 383, 545, 825, 664, 973, 796, 826,
    723, 826, 782, 590, 767, 796, 796, 1091, 796, 796, 649, 295, 531, 295, 531, 560,
    295, 531, 590, 472, 590, 472, 325, 531, 590, 295, 325, 561, 295, 885, 590, 531,
    590, 561, 414, 419, 413, 590, 561, 767, 561, 561, 472, 531, 295, 531, 531,
)  # fmt: skip
# Letters beyond these, and arrows and mathematical signs.
_LETTER, _SIGN = 700, 1060
# Type of seven points is cut a little wider.
_SMALL = 1.075


@dataclass(frozen=True, slots=True)
class Layout:
    """How a table is set.

    Attributes
    ----------
    wide : bool
        Whether it needs a landscape page.
    size : str
        Command of the type size.
    points : float
        The type size in points.
    columns : str
        The argument that says how columns are set.
    widths : tuple of float
        Points of each column, without the blank beside it.
    lines : int
        Lines of its body, roughly.
    """

    wide: bool
    size: str
    points: float
    columns: str
    widths: tuple[float, ...]
    lines: int

    @property
    def width(self) -> float:
        """Points from edge to edge."""
        return sum(self.widths) + 2 * SEPARATION * (len(self.widths) - 1)

    @property
    def inner(self) -> float:
        """Points of a cell over all columns that does not stretch them."""
        return max(0.96 * self.width, 120.0)


def width_of(text: str, points: float) -> float:
    """Return the width of a text in points, set in a type of a number of points."""
    total = 0
    for character in unicodedata.normalize("NFKD", spelt(text)):
        code = ord(character)
        if 32 <= code <= 126:
            total += _WIDTHS[code - 32]
        elif unicodedata.combining(character) or unicodedata.category(character) in ("Cf", "Cc"):
            continue
        else:
            total += _LETTER if unicodedata.category(character)[0] == "L" else _SIGN
    return total / 1000 * points * (_SMALL if points < 8 else 1.0)


def heading_lines(column: Column, width: float, points: float) -> list[str]:
    """Break a heading into lines that fit over its column, words kept whole."""
    words = column.heading.split() or [""]
    room = max(width + 0.1, *(width_of(word, points) for word in words))
    lines = [words[0]]
    for word in words[1:]:
        longer = f"{lines[-1]} {word}"
        if width_of(longer, points) <= room:
            lines[-1] = longer
        else:
            lines.append(word)
    return lines


def fit(columns: Sequence[Column], texts: Sequence[Sequence[str]], groups: int) -> Layout:
    """Choose page and type size, and share the room among the columns of text.

    Parameters
    ----------
    columns : sequence of Column
        The columns that are set.
    texts : sequence of sequence of str
        Their cells as people read them, row by row.
    groups : int
        Lines that name a group.
    """
    cells = [[row[place] for row in texts] for place in range(len(columns))]
    for style in _STYLES:
        room = style[0] - 2 * SEPARATION * (len(columns) - 1)
        needs = [_need(column, own, style[2]) for column, own in zip(columns, cells, strict=True)]
        if sum(good for _, good, _ in needs) <= room:
            widths = _shared([(good, most) for _, good, most in needs], room)
            return _layout(style, columns, cells, widths, groups)
    # Nothing sets such long texts in three lines; they take as many as they need.
    widths = _shared([(least, good) for least, good, _ in needs], room)
    return _layout(style, columns, cells, widths, groups)


def _need(column: Column, cells: Sequence[str], points: float) -> tuple[float, float, float]:
    """Return the least width of a column, a good one and the natural one.

    Text may be broken, well into three lines or so; numbers and dates not at all.
    """
    head = max((width_of(word, points) for word in column.heading.split()), default=0.0)
    cell = max((width_of(text, points) for text in cells), default=0.0)
    natural = max(head, cell)
    if not _breaks(column):
        return natural, natural, natural
    words = {word for text in cells for word in re.split(r"[\s/]+|(?<=_)|(?<=-)", spelt(text))}
    whole = (word if len(word) <= LONG else word[: TOGETHER + 1] for word in words)
    # A little more than the letters need: mathematical signs differ from type to type.
    longest = max((1.02 * width_of(word, points) + 1.0 for word in whole), default=0.0)
    least = max(head, longest)
    return least, max(least, min(natural, max(natural / 3, 9 * points))), natural


def _breaks(column: Column) -> bool:
    """Say whether cells of a column may be broken into lines."""
    return column.kind in ("text", "figure")


def _shared(needs: Sequence[tuple[float, float]], room: float) -> list[float]:
    """Give every column its least width and share the rest by what each still lacks."""
    spare = max(room - sum(low for low, _ in needs), 0.0)
    lack = sum(most - low for low, most in needs)
    part = min(spare / lack, 1.0) if lack else 0.0
    return [low + part * (most - low) for low, most in needs]


def _layout(
    style: tuple[float, str, float],
    columns: Sequence[Column],
    cells: Sequence[Sequence[str]],
    widths: Sequence[float],
    groups: int,
) -> Layout:
    room, size, points = style
    arguments, lines = [], [1] * len(cells[0] if cells else ())
    for column, own, width in zip(columns, cells, widths, strict=True):
        taken = [width_of(text, points) for text in own]
        if _breaks(column) and max(taken, default=0.0) > width + 0.01:
            side = "left" if column.right else "right"
            arguments.append(rf">{{\ragged{side}\arraybackslash}}p{{{width:.0f}pt}}")
            needed = [int(1.1 * one // max(width, 1.0)) + 1 for one in taken]
            lines = [max(pair) for pair in zip(lines, needed, strict=True)]
        else:
            arguments.append("r" if column.right else "l")
    spec = f"@{{}}{''.join(arguments)}@{{}}"
    height = sum(lines) + 2 * groups
    return Layout(room > _PORTRAIT, size, points, spec, tuple(widths), height)
