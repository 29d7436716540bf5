"""The quick drawer of stills, held mark by mark against the drawing library."""

from __future__ import annotations

import itertools
import re
from xml.etree import ElementTree

import pytest
import vl_convert

from sweep.charts import marks
from sweep.charts.drawing import NotDrawn, draw
from sweep.charts.render import altair_chart, language_version, svg
from sweep.charts.theme import FAILS, INK, SURVIVES

NUMBER = re.compile(r"-?\d*\.?\d+(?:e-?\d+)?")
SVG = "{http://www.w3.org/2000/svg}"

# The quick drawer writes lengths to a hundredth of a pixel, and the library sets text on whole
# pixels of its baseline; half a pixel is a twentieth of the smallest letter.
TOLERANCE = 0.51


def numbers(text):
    return [float(one) for one in NUMBER.findall(text or "")]


def outlines(path):
    """The corners of each outline of a path; arcs count by their ends."""
    found, x, y = [], 0.0, 0.0
    for letter, rest in re.findall(r"([A-Za-z])([^A-Za-z]*)", path):
        values = numbers(rest)
        size = {"H": 1, "V": 1, "A": 7, "Z": 0}.get(letter.upper(), 2)
        for part in (values[at : at + size] for at in range(0, len(values), max(size, 1))):
            dx = part[5 if size == 7 else 0] if letter.upper() != "V" else None
            dy = part[-1] if letter.upper() != "H" else None
            old = (x, y) if letter.islower() else (0.0, 0.0)
            x = x if dx is None else old[0] + dx
            y = y if dy is None else old[1] + dy
            if letter.upper() == "M":
                found.append([])
            found[-1].append((x, y))
    return found


def shapes(drawing):
    """Everything that can be seen below the title, in order: kind, colour, box and words."""
    root = next(ElementTree.fromstring(drawing).iter(f"{SVG}g"))
    return [one for child in root for one in _walk(child, (0.0, 0.0), 0.0)]


def _walk(node, at, angle):
    name = node.get("class", "")
    if "role-title" in name or node.get("aria-hidden") or node.get("opacity") == "0":
        return
    move, turn = node.get("transform", "").partition("rotate")[::2]
    dx, dy = numbers(move) or (0.0, 0.0)
    at = (at[0] + dx, at[1] + dy)
    angle = numbers(turn)[0] if turn else angle
    tag = node.tag.removeprefix(SVG)
    if tag == "text":
        x, y = float(node.get("x", 0)), float(node.get("y", 0))
        # Turned texts have offsets along and across the line; the library moves the anchor.
        if angle and turn.count(",") > 0:
            x, y = numbers(turn)[-2:]
        if at[1] + y > 0:
            looks = (node.get("text-anchor", "start"), node.get("font-weight", "normal"), angle)
            yield ("text", node.get("fill"), (at[0] + x, at[1] + y), (*looks, node.text or ""))
    elif tag == "line":
        end = (at[0] + float(node.get("x2", 0)), at[1] + float(node.get("y2", 0)))
        yield ("line", node.get("stroke"), (*min(at, end), *max(at, end)), ())
    elif tag == "path":
        for outline in outlines(node.get("d") or ""):
            xs, ys = [x for x, _ in outline], [y for _, y in outline]
            place = (at[0] + min(xs), at[1] + min(ys), at[0] + max(xs), at[1] + max(ys))
            kind = "line" if len(outline) == 2 else "path"
            yield (kind, node.get("fill") or node.get("stroke"), place, ())
    for child in node:
        yield from _walk(child, at, angle)


def by_library(plain):
    return vl_convert.vegalite_to_svg(plain, vl_version=language_version())


def hold_together(plain):
    """Assert that both drawers put the same things at the same places."""
    ours, theirs = shapes(draw(plain)), shapes(by_library(plain))
    assert len(ours) == len(theirs)
    for one, other in zip(ours, theirs, strict=True):
        assert one[:2] == other[:2], (one, other)
        assert one[3] == other[3], (one, other)
        assert len(one[2]) == len(other[2])
        for a, b in zip(one[2], other[2], strict=True):
            assert abs(a - b) < TOLERANCE, (one, other)
    assert ours


def test_every_mark_stands_where_the_library_puts_it():
    height = 200.0
    scale = marks.Scale("share", (0.2, 1.2), (30.0, 300.0))
    rows = [{"y": 20.0 + 12 * n, "y2": 28.0 + 12 * n, "share": 0.25 + 0.1 * n, "to": 0.3 + 0.1 * n,
             "text": f"<b> & {n}", "ink": (INK, FAILS)[n % 2], "fill": (SURVIVES, FAILS)[n % 2],
             "path": str(n // 3)} for n in range(8)]  # fmt: skip
    layers = [
        *marks.areas(rows, height, scale, "to"),
        *marks.areas(rows, height, 3, 17.5, colour=FAILS, line=INK),
        *marks.strokes(rows, height, scale, 310, colour=INK, width=1.4, dash=[2, 2]),
        *marks.strokes(rows, height, scale, tall=True, colour=FAILS),
        *(layer for shape in ("circle", "square", "diamond", "triangle-up", "triangle-down")
          for layer in marks.dots(rows, height, scale, colour=SURVIVES, shape=shape, area=77)),
        *marks.dots(rows, height, 44, colour=INK, filled=False),
        *marks.paths(rows, height, scale, colour=INK),
        *marks.paths(rows, height, scale, colour=INK, band=True),
        *marks.hit_rows(rows, height, 300, {"text": "what"}),
        *(layer for align in ("left", "center", "right") for bold in (True, False)
          for layer in marks.texts(rows, height, scale, align=align, bold=bold, dx=4)),
        *marks.texts(rows, height, 50, colour=None),
    ]  # fmt: skip
    plain = marks.figure(layers, "narrow", height, "A question & <more>?", "Some words.")
    altair_chart(plain).to_dict(validate=True)
    hold_together(plain)
    drawn = draw(plain)
    assert "A question &amp; &lt;more&gt;?" in drawn
    assert "Some words." in drawn


def test_logarithmic_places_are_the_librarys():
    scale = marks.Scale("p", (0.0004, 1), (40.0, 300.0), log=True)
    rows = [{"y": 9.0 * n, "p": p} for n, p in enumerate((0.0004, 0.001, 0.03, 0.05, 0.7, 1.0))]
    hold_together(marks.figure(marks.dots(rows, 60, scale, colour=INK), "wide", 60, "Q?", "S."))


def test_turned_text_is_turned_about_its_anchor():
    rows = [{"y": 150.0, "text": "upward"}, {"y": 90.0, "text": "also"}]
    texts = [
        *marks.texts(rows, 200, 100, angle=270),
        *marks.texts(rows, 200, 140, angle=270, align="right", dx=5),
    ]
    plain = marks.figure(texts, "wide", 200, "Q?", "S.")
    pattern = r'<text[^>]*transform="translate\((?:[\d.-]+),(?:[\d.-]+)\)[^>]*rotate\(270'
    assert len(re.findall(pattern, draw(plain))) == 4
    ours = re.findall(
        r'translate\(([\d.]+),([\d.]+)\)rotate\(270\)" x="([\d.-]+)" y="([\d.-]+)"', draw(plain)
    )
    theirs = re.findall(
        r'translate\(([\d.]+),([\d.]+)\) ?rotate\(270\)(?: ?translate\(([\d.-]+),([\d.-]+)\))?',
        by_library(plain),
    )
    assert len(ours) == len(theirs) == 4
    for one, other in zip(ours, theirs, strict=True):
        for a, b in zip(one, other, strict=True):
            assert float(a) == pytest.approx(float(b or 0), abs=TOLERANCE)


def test_missing_places_are_left_out():
    scale = marks.Scale("share", (0, 1), (0, 100))
    rows = [{"y": 5.0, "share": None}, {"y": 9.0, "share": float("nan")}, {"y": 12.0, "share": 0.5}]
    plain = marks.figure(marks.dots(rows, 20, scale, colour=INK), "wide", 20, "Q?", "S.")
    assert [row["share"] for row in plain["datasets"]["rows-0"]] == [None, None, 0.5]
    assert draw(plain).count("<path") == 1


@pytest.mark.parametrize(
    ("change", "message"),
    [
        (lambda layer: layer["mark"].update(type="arc"), "type arc"),
        (lambda layer: layer["mark"].update(shape="star"), "shape star"),
        (lambda layer: layer["mark"].pop("color"), "without a colour"),
        (lambda layer: layer["encoding"]["x"].update(scale={"domain": [0, 1]}), "channel x"),
        (lambda layer: layer["encoding"]["x"]["scale"].update(type="sqrt"), "a sqrt scale"),
        (lambda layer: layer["encoding"].update(color={"field": "y"}), "colours on a scale"),
    ],
)
def test_what_is_not_known_is_refused_and_drawn_by_the_library(change, message):
    scale = marks.Scale("share", (0, 1), (0, 100))
    rows = [{"y": 5.0, "share": 0.1}]
    plain = marks.figure(marks.dots(rows, 20, scale, colour=INK), "wide", 20, "Q?", "S.")
    change(plain["layer"][0])
    with pytest.raises(NotDrawn, match=message):
        draw(plain)
    if message in ("a sqrt scale", "colours on a scale", "channel x"):
        assert "mark-symbol" in svg(plain)


def test_controls_in_texts_leave_the_drawing_readable():
    rows = [{"y": 5.0, "text": "a\x00b\x1bc\nd"}, {"y": 15.0, "text": None}]
    plain = marks.figure(marks.texts(rows, 20, 0), "wide", 20, "Q?", "S.")
    found = [node.text for node in ElementTree.fromstring(draw(plain)).iter(f"{SVG}text")]
    assert found == ["Q?", "S.", "a b c d", None]


def test_corners_of_a_path_are_read_as_drawn():
    assert outlines("M1,2h3v4h-3Z") == outlines("M1,2H4V6H1Z") == [[(1, 2), (4, 2), (4, 6), (1, 6)]]
    assert list(itertools.chain(*outlines("M2,0A2,2,0,1,1,-2,0A2,2,0,1,1,2,0Z"))) == [
        (2, 0), (-2, 0), (2, 0),
    ]  # fmt: skip
