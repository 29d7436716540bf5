"""Where text goes: its width, its lines, and which choices fit on one figure.

Widths are those of the metric-compatible sans serif family named in the theme (Arial,
Helvetica and Liberation Sans share them), in thousandths of the type size.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Sequence

from .theme import SMALL

__all__ = ["apart", "shortened", "spread_evenly", "text_width", "wrapped"]

# Advance widths of the characters from space to tilde.
_WIDTHS = (
    278, 278, 355, 556, 556, 889, 667, 191, 333, 333, 389, 584, 278, 333, 278, 278,
    556, 556, 556, 556, 556, 556, 556, 556, 556, 556, 278, 278, 584, 584, 584, 556,
    1015, 667, 667, 722, 722, 667, 611, 778, 722, 278, 500, 667, 556, 833, 722, 778,
    667, 778, 722, 667, 611, 722, 667, 944, 667, 667, 611, 278, 278, 278, 469, 556,
    333, 556, 556, 500, 556, 556, 278, 556, 556, 222, 222, 500, 222, 833, 556, 556,
    556, 556, 333, 500, 278, 556, 500, 722, 500, 500, 500, 334, 260, 334, 584,
)  # fmt: skip

_BOLD = 1.08


def text_width(text: str, size: float = SMALL, bold: bool = False) -> float:
    """Return the width of a line of text.

    Parameters
    ----------
    text : str
        One line.
    size : float
        Type size in pixels.
    bold : bool
        Whether the text is set in bold.

    Returns
    -------
    float
        Pixels; an estimate for characters outside ASCII.
    """
    total = 0
    for character in text:
        code = ord(character)
        if 32 <= code <= 126:
            total += _WIDTHS[code - 32]
        elif unicodedata.combining(character):
            continue
        elif unicodedata.east_asian_width(character) in ("W", "F") or 0x25A0 <= code < 0x2600:
            total += 1000  # ideographs and geometric shapes
        else:
            total += 620
    return total / 1000 * size * (_BOLD if bold else 1.0)


def shortened(text: str, width: float, size: float = SMALL, bold: bool = False) -> str:
    """Cut a line to a width, with an ellipsis where something was cut."""
    if text_width(text, size, bold) <= width:
        return text
    while text and text_width(text.rstrip() + "…", size, bold) > width:
        text = text[:-1]
    return text.rstrip() + "…"


def wrapped(
    text: str, width: float, size: float = SMALL, lines: int = 0, bold: bool = False
) -> list[str]:
    """Break text into lines of at most a width.

    Parameters
    ----------
    text : str
        Any text; runs of white space count as one space.
    width, size : float
        Pixels.
    lines : int
        Most lines to return (the last is then cut with an ellipsis); 0 for no limit.
    bold : bool
        Whether the text is set in bold.

    Returns
    -------
    list of str
        At least one line; words too long for a line are broken.
    """
    found: list[str] = []
    line = ""
    for word in _broken(text.split(), width, size, bold):
        candidate = f"{line} {word}" if line else word
        if line and text_width(candidate, size, bold) > width:
            found.append(line)
            line = word
        else:
            line = candidate
    found.append(line)
    if lines and len(found) > lines:
        rest = " ".join(found[lines - 1 :])
        found = [*found[: lines - 1], shortened(rest, width, size, bold)]
    return found


def _broken(words: Sequence[str], width: float, size: float, bold: bool) -> list[str]:
    """Return the words with those wider than a line cut into pieces, at underscores first."""
    found = []
    for word in words:
        if text_width(word, size, bold) <= width:
            found.append(word)
            continue
        piece = ""
        for character in word:
            if piece and text_width(piece + character, size, bold) > width:
                cut = max(piece.rfind(mark) for mark in "_-/,;:")
                cut = cut + 1 if cut > len(piece) // 2 else len(piece)
                found.append(piece[:cut])
                piece = piece[cut:]
            piece += character
        found.append(piece)
    return found


def spread_evenly(count: int, wanted: int, keep: Sequence[int] = ()) -> list[int]:
    """Choose positions evenly from a sequence, always keeping some of them.

    Parameters
    ----------
    count : int
        Length of the sequence.
    wanted : int
        Most positions to return (at least as many as are kept).
    keep : sequence of int
        Positions that must stay.

    Returns
    -------
    list of int
        Sorted positions, without repeats.

    Examples
    --------
    >>> spread_evenly(10, 4, keep=[7])
    [0, 4, 7, 9]
    >>> spread_evenly(3, 5)
    [0, 1, 2]
    """
    if count <= wanted:
        return list(range(count))
    chosen = set(keep)
    free = wanted - len(chosen)
    others = [position for position in range(count) if position not in chosen]
    if free == 1:
        chosen.add(others[0])
    elif free > 1:
        chosen.update(others[round(step * (len(others) - 1) / (free - 1))] for step in range(free))
    return sorted(chosen)


def apart(
    wished: Sequence[float], sizes: Sequence[float], low: float, high: float, gap: float = 6.0
) -> list[float]:
    """Place labels near where they are wished without letting them touch.

    Labels that would touch form a block, which is centred on the mean of what its members wish;
    blocks are joined until none touch, then pushed inside the ends.

    Parameters
    ----------
    wished : sequence of float
        Wished middles in ascending order, pixels.
    sizes : sequence of float
        Widths of the labels.
    low, high : float
        Ends of the room.
    gap : float
        Least distance between two labels.

    Returns
    -------
    list of float
        Middles, in the same order; they overlap only where the room is too small for all.

    Examples
    --------
    >>> apart([10, 12, 60], [10, 10, 10], 0, 100, gap=2)
    [5.0, 17.0, 60.0]
    """
    blocks: list[list[int]] = []
    for number in range(len(wished)):
        blocks.append([number])
        while len(blocks) > 1 and _touch(blocks[-2], blocks[-1], wished, sizes, low, high, gap):
            last = blocks.pop()
            blocks[-1] += last
    places = [0.0] * len(wished)
    for block in blocks:
        left, _ = _extent(block, wished, sizes, low, high, gap)
        for number in block:
            places[number] = left + sizes[number] / 2
            left += sizes[number] + gap
    return places


def _extent(
    block: Sequence[int], wished: Sequence[float], sizes: Sequence[float], low: float, high: float,
    gap: float,
) -> tuple[float, float]:  # fmt: skip
    """Return the ends of a block of neighbouring labels."""
    whole = sum(sizes[number] for number in block) + gap * (len(block) - 1)
    middle = sum(wished[number] for number in block) / len(block)
    left = max(low, min(middle - whole / 2, high - whole))
    return left, left + whole


def _touch(
    before: Sequence[int], after: Sequence[int], wished: Sequence[float], sizes: Sequence[float],
    low: float, high: float, gap: float,
) -> bool:  # fmt: skip
    _, end = _extent(before, wished, sizes, low, high, gap)
    start, _ = _extent(after, wished, sizes, low, high, gap)
    return start < end + gap
