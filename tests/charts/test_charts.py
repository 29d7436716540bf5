"""Contract of the family of charts, and what each figure must say."""

import json
import re
import warnings

import pandas as pd
import pytest
import test_drawing
import text_boxes

from sweep.charts import CHARTS, absent, chart
from sweep.charts.arrangement import PAGE, arrange
from sweep.charts.context import baseline_record, claim_sentence, context_of
from sweep.charts.layout import text_width
from sweep.charts.render import altair_chart, pdf, png, svg
from sweep.charts.strips import day_number
from sweep.charts.theme import EDGE, WIDTHS
from sweep.verdicts.words import percent

HOSTILE = "<script>alert(1)</script>\"'</script>&"


def cases(sweeps):
    return {
        "usual": sweeps.Sweep(),
        "three choices": sweeps.crowded(3),
        "ten million rows": sweeps.Sweep(),
        "one change": sweeps.Sweep(changes=1),
        "two changes": sweeps.Sweep(changes=2),
        "one choice": sweeps.Sweep(
            lags=["4"],
            deterministics=["constant"],
            window=["full sample"],
            moving={},
            transformation=["log"],
            test=["F"],
            conditioning=["given"],
        ),
        "thirty choices": sweeps.crowded(30),
        "three hundred choices": sweeps.crowded(300),
        "thirty by thirty": sweeps.Sweep(
            lags=[str(order) for order in range(1, 31)],
            deterministics=["constant"],
            window=[f"from {year}" for year in range(1960, 1990)],
            moving={},
            transformation=["log"],
            test=["F"],
            conditioning=["given"],
            spread=9.0,
        ),
        "nothing survives": sweeps.crowded(4, centre=-3.0, spread=0.0),
        "everything survives": sweeps.crowded(4, centre=9.0),
        "nothing runs": sweeps.crowded(3, not_applicable=("log difference",)),
        "long and hostile names": sweeps.Sweep(
            lags=["4", "1"],
            window=["full sample", "rolling 120"],
            cause=HOSTILE,
            transformation=["log difference", HOSTILE * 3],
            conditioning=["given"],
            deterministics=[
                "constant",
                "constant with step 2009-01 and pulse 2020-04 and so on " * 3,
            ],
        ),
    }


COUNTS = (
    "planned", "not_applicable", "infeasible", "failed", "screened_out", "admissible", "survived",
    "distinct", "rows", "positive",
)  # fmt: skip


def grown(frames, factor):
    """The same frames with every count of rows that many times as large."""
    return {
        name: frame.assign(**{c: frame[c] * factor for c in COUNTS if c in frame and len(frame)})
        for name, frame in frames.items()
    }


CASES = (
    "usual",
    "three choices",
    "ten million rows",
    "one change",
    "two changes",
    "one choice",
    "thirty choices",
    "three hundred choices",
    "thirty by thirty",
    "nothing survives",
    "everything survives",
    "nothing runs",
    "long and hostile names",
)


@pytest.fixture(scope="module", params=CASES)
def case(request, sweeps):
    sweep = cases(sweeps)[request.param]
    frames = sweeps.frames_of(sweep)
    if request.param == "ten million rows":
        frames = grown(frames, 1000)
    design = request.param if request.param.endswith(("change", "changes")) else "full"
    context = context_of(
        sweeps.finding_of(sweep), frames["survival"], significance=0.05, title="A title",
        design=design,
    )  # fmt: skip
    return request.param, frames, context


def texts(drawn):
    """Every text of a drawing with its anchor, place and size, as drawn."""
    found = []
    for match in re.finditer(r"<text ([^>]*)>([^<]*)</text>", drawn):
        attributes = dict(re.findall(r'([\w-]+)="([^"]*)"', match.group(1)))
        found.append((attributes, match.group(2)))
    return found


@pytest.mark.parametrize("width", WIDTHS)
@pytest.mark.parametrize("name", CHARTS)
def test_every_chart_draws_every_case(case, name, width):
    label, frames, context = case
    module = chart(name)
    assert name == module.NAME
    assert module.QUESTION.endswith("?")
    needed = {frame: frames[frame] for frame in module.NEEDS}
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        drawn = module.build(needed, context, width)
    nothing = absent(name, frames)
    if width == "narrow" and not nothing:  # the same marks at both widths
        plain = altair_chart(drawn).to_dict(validate=True)
        # The library adds its schema and, to the configuration, sizes that no view here uses.
        assert plain | {"config": 0} == drawn | {"config": 0, "$schema": plain["$schema"]}
        test_drawing.hold_together(drawn)
    plain = drawn
    assert plain["width"] == WIDTHS[width]
    json.dumps(plain, allow_nan=False)
    rows = max(len(rows) for rows in plain["datasets"].values())
    assert rows <= 5000
    said = " ".join(plain["title"]["subtitle"])
    assert "significance level 5%" in said
    assert f"{context.counts.planned:,} planned row" in said
    assert " ".join(plain["title"]["text"]) == module.QUESTION
    picture = svg(drawn)
    assert picture.count("<text") > (1 if nothing else 5), label
    assert nothing in " ".join(text for _, text in texts(picture))
    assert "NaN" not in picture
    assert "<script" not in picture
    across = float(re.search(r'width="([\d.]+)"', picture).group(1))
    assert across <= WIDTHS[width] + 2 * EDGE, "no mark or label may reach past the print width"
    assert text_boxes.outside(picture) == []
    assert text_boxes.overlapping(picture) == []
    page = 29.7 / 2.54 * 96
    assert float(re.search(r'height="([\d.]+)"', picture).group(1)) < page * 1.05


@pytest.mark.parametrize("name", CHARTS)
def test_every_chart_has_a_text_alternative_from_its_numbers(case, name):
    _, frames, context = case
    words = chart(name).describe(frames, context)
    assert context.statement in words
    assert len(words) > 60
    assert "nan" not in words.replace("finance", "")


def test_files_have_the_print_width(sweeps):
    sweep = sweeps.crowded(2)
    frames = sweeps.frames_of(sweep)
    context = context_of(sweeps.finding_of(sweep), frames["survival"], significance=0.05, title="")
    drawn = chart("survival by choice").build(frames, context, "wide")
    box = re.search(rb"/MediaBox ?\[0 0 ([\d.]+) ", pdf(drawn))
    assert float(box.group(1)) / 72 * 25.4 == pytest.approx(175, abs=0.3)
    picture = png(drawn, dots_per_inch=192)
    assert picture.startswith(b"\x89PNG")
    assert int.from_bytes(picture[16:20]) / 192 * 25.4 == pytest.approx(175, abs=0.3)


@pytest.mark.parametrize("name", CHARTS)
def test_the_same_frames_give_the_same_drawing(sweeps, name):
    sweep = sweeps.Sweep()
    frames = sweeps.frames_of(sweep)
    context = context_of(sweeps.finding_of(sweep), frames["survival"], significance=0.05, title="")
    module = chart(name)
    assert svg(module.build(frames, context)) == svg(module.build(frames, context))


@pytest.fixture(scope="module")
def usual(sweeps):
    sweep = sweeps.Sweep(not_applicable=("yearly growth",))
    frames = sweeps.frames_of(sweep)
    return frames, context_of(
        sweeps.finding_of(sweep), frames["survival"], significance=0.05, title="A title"
    )


def values(drawn):
    return [row for rows in drawn["datasets"].values() for row in rows]


def test_survival_shows_each_share_with_its_counts(usual):
    frames, context = usual
    rows = values(chart("survival by choice").build(frames, context))
    written = {row["text"] for row in rows if "text" in row}
    shares = {round(row["share"], 12) for row in rows if row.get("share") is not None}
    choices = frames["survival"].query("axis not in ('all', 'measures')")
    for choice in choices.to_dict("records"):
        assert choice["choice"] in written
        if choice["admissible"]:
            assert f"{choice['survived']:,} of {choice['admissible']:,}" in written
            assert round(choice["headline_share"], 12) in shares
        else:
            assert "none admissible" in written
    overall = frames["survival"].query("axis == 'all'")["headline_share"].iloc[0]
    assert f"overall {percent(overall)}" in written
    said = " ".join(
        chart("survival by choice").build(frames, context)["title"]["subtitle"]
    )
    assert "Held at one choice: measures: as named." in said


def test_small_p_values_gather_at_the_edge(sweeps):
    sweep = sweeps.Sweep(centre=6.0)
    frames = sweeps.frames_of(sweep)
    context = context_of(sweeps.finding_of(sweep), frames["survival"], significance=0.05, title="")
    drawn = chart("single changes").build(frames, context)
    ends = [
        row["place"]
        for row in values(drawn)
        if row.get("place") is not None and "choice" not in row
    ]
    below = [place for place in ends if place < 0.001]
    assert below
    assert len(set(below)) == 1
    assert "<0.001" in {row.get("text") for row in values(drawn)}


def test_single_changes_that_turn_are_named_in_bold(usual):
    frames, context = usual
    drawn = chart("single changes").build(frames, context)
    bold = [
        row["text"]
        for layer in drawn["layer"]
        if layer["mark"].get("fontWeight") == "bold"
        for row in drawn["datasets"][layer["data"]["name"]]
    ]
    turned = frames["single_changes"].query("flips > 0")
    verb = "breaks" if frames["baseline"]["survives"].iloc[0] else "restores"
    expected = int((turned["positions"] == 1).sum())
    assert sum(verb in text for text in bold) == expected > 0


def test_single_changes_without_a_baseline(sweeps, usual):
    frames, context = usual
    empty = frames["baseline"].iloc[:0]
    record = baseline_record(empty)
    assert record["status"] == "not run yet"
    assert record["p_value"] is None
    changes = frames["single_changes"].assign(
        baseline_p_value=None, flips=0, baseline_survives=None
    )
    drawn = chart("single changes").build({"single_changes": changes, "baseline": empty}, context)
    assert "not run yet" in " ".join(drawn["title"]["subtitle"])


def test_windows_tint_each_position_and_bound_the_median(usual):
    frames, context = usual
    module = chart("windows")
    rows = values(module.build(frames, context))
    cells = [row for row in rows if "fill" in row and "counts" in row]
    assert len(cells) == int((frames["windows"]["admissible"] > 0).sum())
    bands = [row for row in rows if "path" in row and "y2" in row]
    lines = [row for row in rows if "path" in row and "y2" not in row]
    assert len(bands) == len(lines) == 40
    for band, line in zip(bands, lines, strict=True):
        assert band["y2"] <= line["y"] <= band["y"]


def test_no_cell_reaches_past_the_data(usual):
    frames, context = usual
    cells = [r for r in values(chart("windows").build(frames, context)) if "counts" in r]
    for cell in cells:
        if cell["window"] == "rolling 120":
            assert cell["to"] == day_number(cell["last"])
        else:
            assert (cell["day"], cell["to"]) == (
                day_number(cell["first"]),
                day_number(cell["last"]),
            )


def test_shrinking_windows_stand_at_their_first_date(usual):
    frames, context = usual
    shrinking = frames["windows"].assign(entry_kind="shrinking", window_end="2024-12-01")
    cells = [
        r for r in values(chart("windows").build({"windows": shrinking}, context)) if "counts" in r
    ]
    assert cells
    assert all(cell["day"] == day_number(cell["first"]) for cell in cells)


def test_windows_without_a_moving_entry_and_with_many(sweeps):
    moving = {f"rolling {length}": ("rolling", length, 12) for length in range(40, 240, 10)}
    sweep = sweeps.Sweep(
        window=["full sample", *moving],
        moving=moving,
        lags=["4"],
        test=["F"],
        transformation=["log"],
        conditioning=["given"],
    )
    frames = sweeps.frames_of(sweep)
    context = context_of(sweeps.finding_of(sweep), frames["survival"], significance=0.05, title="")
    said = " ".join(chart("windows").build(frames, context)["title"]["subtitle"])
    assert "Shown are 16 of 21 window entries" in said


def test_pooled_positions_are_said(usual):
    frames, context = usual
    pooled = frames["windows"].assign(pooled=3)
    drawn = chart("windows").build({"windows": pooled}, context)
    assert "Up to 3 neighbouring positions" in " ".join(drawn["title"]["subtitle"])


def test_thinning_is_fair_and_counted():
    groups = [
        ("lags", [{"choice": str(n), "keep": n % 2 == 0} for n in range(300)]),
        ("test", [{"choice": "F", "keep": True}, {"choice": "Wald", "keep": False}]),
    ]
    arranged = arrange(groups, 100, lambda record: record["keep"], 0)
    assert arranged.total == 302
    assert arranged.shown == len(arranged.choices) == PAGE
    assert f"{PAGE} of 302 choices" in arranged.thinned
    rest = [row for row in arranged.rows if row.hidden]
    assert len(rest) == 1
    assert len(rest[0].hidden) + arranged.shown == 302
    odd = [row for row in arranged.choices if not row.record["keep"]]
    assert len(odd) > PAGE // 3, "marked rows may not crowd out the others"
    tops = [row.top for row in arranged.rows]
    assert tops == sorted(tops)
    for above, below in zip(arranged.rows, arranged.rows[1:], strict=False):
        assert above.bottom <= below.top + 1e-9


def test_labels_stay_in_their_column(usual):
    frames, context = usual
    for width, across in WIDTHS.items():
        drawn = chart("survival by choice").build(frames, context, width)
        for attributes, text in texts(svg(drawn)):
            size = float(attributes["font-size"].removesuffix("px"))
            assert size * 72 / 96 >= 6.99
            assert text_width(text, size) < across


@pytest.mark.parametrize(
    ("claim", "sign", "reverse", "expected"),
    [
        ("leads", 0, 0, "a lead from a to b, given c, d"),
        ("leads", -1, 0, "a lead from a to b, given c, d, with a negative sum of coefficients"),
        ("leads one way", 0, 0, "a lead from a to b and none back, given c, d"),
        (
            "leads both ways",
            1,
            -1,
            "a lead from a to b and another back, given c, d, with a positive sum of coefficients, "
            "in reverse a negative one",
        ),
        ("does not lead", 0, 0, "no lead from a to b, given c, d"),
    ],
)
def test_claims_in_words(claim, sign, reverse, expected):
    record = {
        "cause": "a",
        "effect": "b",
        "given": "c, d",
        "claim": claim,
        "sign": sign,
        "reverse_sign": reverse,
    }
    assert claim_sentence(record) == expected


def test_frames_may_hold_categoricals(usual):
    frames, context = usual
    named = {
        name: frame.assign(
            **{
                c: frame[c].astype("category")
                for c in ("axis", "choice", "window_name")
                if c in frame
            }
        )
        for name, frame in frames.items()
    }
    for name in CHARTS:
        assert svg(chart(name).build(named, context)) == svg(chart(name).build(frames, context))
    assert isinstance(named["survival"]["axis"].dtype, pd.CategoricalDtype)
