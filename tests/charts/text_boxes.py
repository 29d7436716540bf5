"""Where the texts of a drawing stand, so that tests can say that none is cut or covered."""

from __future__ import annotations

import itertools
import re
from xml.etree import ElementTree

from sweep.charts.layout import text_width

SVG = "{http://www.w3.org/2000/svg}"
NUMBER = re.compile(r"-?\d+(?:\.\d+)?")

# Height of capitals above and of tails below the baseline, in parts of the type size.
ASCENT, DESCENT = 0.72, 0.2


def boxes(drawing):
    """Return each text with its box (left, top, right, bottom) in pixels of the figure."""
    root = ElementTree.fromstring(drawing)
    group = next(root.iter(f"{SVG}g"))
    dx, dy = (float(one) for one in NUMBER.findall(group.get("transform")))
    found = []
    for node in group.iter(f"{SVG}text"):
        size = float(node.get("font-size").removesuffix("px"))
        wide = text_width(node.text or "", size, node.get("font-weight") == "bold")
        x, y = float(node.get("x", 0)), float(node.get("y", 0))
        x -= {"start": 0.0, "middle": wide / 2, "end": wide}[node.get("text-anchor", "start")]
        box = (x, y - ASCENT * size, x + wide, y + DESCENT * size)
        turned = [float(one) for one in NUMBER.findall(node.get("transform") or "")]
        if turned:
            assert turned[2] == 270, "texts stand upright or read upward"
            box = (turned[0] + box[1], turned[1] - box[2], turned[0] + box[3], turned[1] - box[0])
        found.append((node.text or "", (box[0] + dx, box[1] + dy, box[2] + dx, box[3] + dy)))
    size = float(root.get("width")), float(root.get("height"))
    return found, size


def outside(drawing, slack=1.0):
    """Return the texts that reach past the frame."""
    found, (wide, high) = boxes(drawing)
    return [
        (text, box)
        for text, box in found
        if box[0] < -slack or box[1] < -slack or box[2] > wide + slack or box[3] > high + slack
    ]


def overlapping(drawing, slack=1.0):
    """Return the pairs of texts whose boxes share more than a hairline."""
    found, _ = boxes(drawing)
    return [
        (one[0], other[0])
        for one, other in itertools.combinations(found, 2)
        if min(one[1][2], other[1][2]) - max(one[1][0], other[1][0]) > slack
        and min(one[1][3], other[1][3]) - max(one[1][1], other[1][1]) > slack
    ]
