"""The figures of changes: which direction turned, what a pair holds, how many are drawn."""

import re

import pytest

from sweep.charts import chart, p_track
from sweep.charts.context import context_of
from sweep.charts.render import specification, svg

WIDTHS = ("narrow", "wide")


def drawn_of(sweeps, sweep, name, width="wide"):
    frames = sweeps.frames_of(sweep)
    context = context_of(
        sweeps.finding_of(sweep), frames["survival"], significance=0.05, title="A title"
    )
    return frames, context, specification(chart(name).build(frames, context, width))


def rows_of(drawn, mark):
    """The rows of every layer of one kind of mark, with the mark's looks."""
    return [
        row | {"look": layer["mark"]}
        for layer in drawn["layer"]
        if layer["mark"]["type"] == mark
        for row in drawn["datasets"][layer["data"]["name"]]
    ]


@pytest.fixture(scope="module")
def one_way(sweeps):
    """A claim on both directions that some changes break through the reverse one."""
    return sweeps.Sweep(claim="leads one way", centre=3.2, seed=1)


@pytest.mark.parametrize("name", ["single changes", "flips"])
@pytest.mark.parametrize("width", WIDTHS)
def test_a_flip_by_the_reverse_shows_the_reverse_p(sweeps, one_way, name, width):
    frames, context, drawn = drawn_of(sweeps, one_way, name, width)
    table = frames["single_changes" if name == "single changes" else "flips"]
    only = table[(table["flips_reverse"] > 0) & (table["flips_forward"] == 0)]
    assert len(only) >= 3
    dashed = [
        row
        for row in rows_of(drawn, "rule")
        if row["look"].get("strokeDash") == [5, 2.5] and "from" in row
    ]
    base = float(frames["baseline"]["reverse_p_value"].iloc[0])
    assert dashed
    assert {row["from"] for row in dashed} == {base}
    shown = {round(row["place"], 12) for row in dashed}
    # What is drawn dashed is a reverse p-value of such a row, and of no other.
    known = {round(p_track.placed(p), 12) for p in only["reverse_p_value"]}
    assert shown <= known
    words = [row["text"] for row in rows_of(drawn, "text") if row["look"]["fontWeight"] == "bold"]
    short = "reverse" if width == "wide" else "rev."
    assert sum(text.startswith((short, f"median {short}")) for text in words) == len(dashed)
    said = " ".join(drawn["title"]["subtitle"])
    assert "dashed strokes: only the reverse turned" in said
    assert "reverse" in chart(name).describe(frames, context)


@pytest.mark.parametrize("name", ["single changes", "flips"])
def test_one_direction_needs_no_words_on_the_other(sweeps, name):
    _, _, drawn = drawn_of(sweeps, sweeps.Sweep(), name)
    assert "reverse" not in " ".join(drawn["title"]["subtitle"])
    assert not [row for row in rows_of(drawn, "point") if row["look"]["shape"] == "diamond"
                and not row["look"]["filled"]]  # fmt: skip


def test_pairs_show_each_change_alone(sweeps):
    frames, _, drawn = drawn_of(sweeps, sweeps.Sweep(centre=2.4), "flips")
    pairs = frames["flips"].query("changes == 2")
    ticks = [row for row in rows_of(drawn, "rule") if "single" in row]
    expected = {
        p_track.placed(p) for p in [*pairs["first_p_value"], *pairs["second_p_value"]] if p == p
    }
    assert ticks
    assert {row["single"] for row in ticks} <= expected
    for row in ticks:
        assert row["y2"] - row["y"] == pytest.approx(9)


def test_what_is_left_out_is_counted(sweeps):
    frames, _, drawn = drawn_of(sweeps, sweeps.crowded(300), "flips")
    total = len(frames["flips"])
    said = " ".join(drawn["title"]["subtitle"])
    shown, every = re.search(r"Shown are (\d+) of (\d+) sets", said).groups()
    assert int(every) == total > int(shown)
    rest = [row["text"] for row in rows_of(drawn, "text") if "other flip" in row["text"]]
    assert sum(int(re.match(r"\d+", text).group()) for text in rest) == total - int(shown)
    ends = [row for row in rows_of(drawn, "point") if "place" in row]
    assert len(ends) == int(shown)


def test_the_first_pairs_are_drawn_in_the_order_of_the_list(sweeps):
    frames, _, drawn = drawn_of(sweeps, sweeps.crowded(300), "flips")
    joint = frames["flips"].query("kind.str.contains('neither')")
    labels = [row["text"] for row in rows_of(drawn, "text") if row["text"].startswith("lags: ")]
    expected = [f"lags: {to}" for to in joint["first_to"]]
    assert labels[:10] == expected[:10]


@pytest.mark.parametrize("width", WIDTHS)
def test_no_flip_is_said(sweeps, width):
    _, _, drawn = drawn_of(sweeps, sweeps.crowded(4, centre=9.0), "flips", width)
    texts = {row["text"] for row in rows_of(drawn, "text")}
    assert "No change of one or two choices turns the finding." in texts
    assert "None of 17 pairs of changes breaks the finding." in " ".join(
        drawn["title"]["subtitle"]
    )
    assert svg(drawn).count("<text") > 5
