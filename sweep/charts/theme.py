"""The visual language: every colour, size and width of a figure is named here, once.

Colours carry one meaning each, are never the only carrier of it, and are checked in the
tests for viewers with reduced colour vision and for greyscale print.  Lengths are CSS
pixels, 96 to the inch.
"""

from __future__ import annotations

from typing import Any

__all__ = [
    "ABSENT",
    "BASELINE",
    "BODY",
    "BOTH_WAYS",
    "EDGE",
    "FAILS",
    "FONT",
    "HAIRLINE",
    "INK",
    "NEITHER",
    "ONE_WAY",
    "PALE",
    "QUIET",
    "REVERSE",
    "SCREENED",
    "SMALL",
    "SURVIVES",
    "TINTS",
    "TITLE",
    "UNDETERMINED",
    "WASH",
    "WIDTHS",
    "configure",
    "points",
    "tint",
]

SURVIVES = "#0B5A5E"  # deep teal, always filled
FAILS = "#CF8F2A"  # ochre, always filled
SCREENED = "#D4D6D2"  # pale grey
INK = "#1B2225"  # baseline, overall share, text
QUIET = "#59636A"  # secondary text
HAIRLINE = "#C3C8C9"  # tracks and grid
PALE = "#E9EBEA"  # bands that only separate
WASH = "#F5F3EE"  # ground of a strip with nothing in it
BASELINE = INK
ABSENT = "#7D868B"  # the small dot of what does not apply or failed

# Directions of the link, in their own family of hues, so that none is taken for survival.  In the
# order in which they stand, neighbours differ most in lightness.
ONE_WAY = "#4A2E6B"
REVERSE = "#BC93B8"
BOTH_WAYS = "#74569A"
NEITHER = "#E3E2EC"
UNDETERMINED = "#FFFFFF"  # outlined

# Shares as tint run from light to dark in one direction, so that greyscale keeps the order.
TINTS = ("#F6E7C6", "#C9D3B2", "#86B0A2", "#41858A", "#0B5A5E")

FONT = "Liberation Sans, Arial, Helvetica, sans-serif"

_MILLIMETRE = 96 / 25.4

# Blank edge of a figure, so that no glyph is cut; the widths are those inside it.
EDGE = 2
WIDTHS = {
    "narrow": round(85 * _MILLIMETRE) - 2 * EDGE,
    "wide": round(175 * _MILLIMETRE) - 2 * EDGE,
}


def points(size: float) -> float:
    """Return a type size in pixels for one in points.

    Examples
    --------
    >>> points(9)
    12.0
    """
    return size * 96 / 72


TITLE = points(9)
BODY = points(7.5)
SMALL = points(7)


def tint(share: float) -> str:
    """Return the tint of a share in [0, 1], interpolated between the named steps.

    Examples
    --------
    >>> tint(0.0) == TINTS[0].lower(), tint(1.0) == TINTS[-1].lower()
    (True, True)
    """
    place = min(max(share, 0.0), 1.0) * (len(TINTS) - 1)
    low = min(int(place), len(TINTS) - 2)
    part = place - low
    mixed = (
        round(
            (1 - part) * int(TINTS[low][at : at + 2], 16)
            + part * int(TINTS[low + 1][at : at + 2], 16)
        )
        for at in (1, 3, 5)
    )
    return "#" + "".join(f"{value:02x}" for value in mixed)


def configure() -> dict[str, Any]:
    """Return the Vega-Lite configuration shared by all charts."""
    return {
        "background": "white",
        "font": FONT,
        "aria": False,
        "view": {"stroke": None},
        "text": {"color": INK, "fontSize": SMALL, "font": FONT},
        "title": {
            "anchor": "start",
            "frame": "bounds",
            "color": INK,
            "font": FONT,
            "fontSize": TITLE,
            "fontWeight": "bold",
            "lineHeight": TITLE * 1.25,
            "offset": 8,
            "subtitleColor": QUIET,
            "subtitleFont": FONT,
            "subtitleFontSize": BODY,
            "subtitleLineHeight": BODY * 1.3,
            "subtitlePadding": 4,
        },
    }
