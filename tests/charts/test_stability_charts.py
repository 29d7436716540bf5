"""The numbers in the two-axis map, the directions, the specification curve and the attrition."""

from __future__ import annotations

import itertools

import numpy as np
import pandas as pd
import pytest

from sweep.charts import chart
from sweep.charts.context import context_of
from sweep.charts.grid import place_grid
from sweep.charts.layout import apart
from sweep.charts.theme import FAILS, SURVIVES, TINTS, WIDTHS
from sweep.charts.ticks import round_ticks, tick_texts
from sweep.errors import InputFault
from sweep.verdicts.attrition import stages
from sweep.verdicts.directions import VERDICTS
from sweep.verdicts.words import percent


def framed(sweeps, sweep):
    frames = sweeps.frames_of(sweep)
    return frames, context_of(
        sweeps.finding_of(sweep), frames["survival"], significance=0.05, title="A title"
    )


@pytest.fixture(scope="module")
def usual(sweeps):
    return framed(sweeps, sweeps.Sweep(not_applicable=("yearly growth",)))


def values(drawn):
    return [row for rows in drawn["datasets"].values() for row in rows]


def written(drawn):
    return {row["text"] for row in values(drawn) if "text" in row}


def subtitle(drawn):
    return " ".join(drawn["title"]["subtitle"])


def coloured(drawn, colour):
    """The rows of the layers that are drawn in one colour."""
    return [
        row
        for layer in drawn["layer"]
        if layer["mark"].get("color") == colour
        for row in drawn["datasets"][layer["data"]["name"]]
    ]


# Two axes


def test_the_pair_that_acts_together_most_is_drawn(usual):
    frames, context = usual
    strongest = frames["pair_cells"].loc[frames["pair_cells"]["departure"].idxmax()]
    pair = (strongest["row_axis"], strongest["column_axis"])
    drawn = chart("two axes").build(frames, context)
    assert f"Shown are {pair[0]} and {pair[1]}, whose cells" in subtitle(drawn)
    assert f"by {100 * strongest['departure']:.1f} points" in subtitle(drawn)
    assert {*pair} <= written(drawn)


def test_every_cell_has_its_tint_and_counts(usual):
    frames, context = usual
    cells = frames["pair_cells"].query("row_axis == 'test' and column_axis == 'conditioning'")
    drawn = chart("two axes").build(frames, context, axes=("conditioning", "test"))
    tips = [row for row in values(drawn) if "counts" in row]
    assert len(tips) == len(cells) == 6
    fills = [row["fill"] for row in values(drawn) if row.get("y", 0) > 30 and "fill" in row]
    assert len(fills) == 6
    for cell in cells.to_dict("records"):
        assert f"{cell['survived']:,} of {cell['admissible']:,}" in written(drawn)
        tip = next(t for t in tips if t["row"].endswith(cell["row_choice"])
                   and t["column"].endswith(cell["column_choice"]))  # fmt: skip
        assert tip["weighted"] == percent(cell["share"])
    assert fills != [TINTS[0].lower()] * 6
    alone = frames["survival"].query("axis in ('test', 'conditioning')")["headline_share"]
    assert {percent(share) for share in alone} <= written(drawn)


def test_what_is_not_applicable_has_a_dot_and_no_counts(usual):
    frames, context = usual
    drawn = chart("two axes").build(frames, context, axes=("transformation", "test"))
    cells = frames["pair_cells"].query("row_axis == 'transformation' and column_axis == 'test'")
    none = int((cells["admissible"] == 0).sum())
    assert none == 3
    assert len([row for row in coloured(drawn, "#7D868B") if "at" in row]) == none
    assert "0 of 0" not in written(drawn)


def test_cells_far_from_the_additive_fit_are_marked(sweeps):
    frames, context = framed(sweeps, sweeps.crowded(4, spread=6.0))
    drawn = chart("two axes").build(frames, context)
    said = subtitle(drawn)
    rows, columns = said.partition("Shown are ")[2].partition(", whose")[0].split(" and ")
    cells = frames["pair_cells"]
    cells = cells[(cells["row_axis"] == rows) & (cells["column_axis"] == columns)]
    gaps = cells["share"].astype(float) - cells["expected"].astype(float)
    for shape, expected in (
        ("triangle-up", (gaps >= 0.10).sum()), ("triangle-down", (gaps <= -0.10).sum()),
    ):  # fmt: skip
        marks = [
            row
            for layer in drawn["layer"]
            if layer["mark"].get("shape") == shape
            for row in drawn["datasets"][layer["data"]["name"]]
        ]
        assert len(marks) == expected
    assert (gaps.abs() >= 0.10).sum() > 0
    assert f"({(gaps.abs() >= 0.10).sum():,} of {len(cells)} cells)" in said
    words = chart("two axes").describe(frames, context)
    far = cells.loc[gaps.abs().idxmax()]
    side = "above" if gaps.loc[far.name] > 0 else "below"
    assert f"{100 * gaps.abs().max():.0f} points {side}" in words


@pytest.mark.parametrize(
    ("axes", "message"),
    [
        (("lags", "lags"), "two different axes are needed"),
        (("lags",), "two different axes are needed"),
        (("lags", "tests"), 'no axis "tests" with several choices; did you mean "test"?'),
        (("lags", "measures"), 'no axis "measures" with several choices'),
    ],
)
def test_axes_that_are_no_pair_are_refused(usual, axes, message):
    frames, context = usual
    for verb in ("build", "describe", "numbers"):
        with pytest.raises(InputFault, match=r".*") as raised:
            getattr(chart("two axes"), verb)(frames, context, axes=axes)
        assert message in str(raised.value)


def test_the_numbers_behind_the_map_are_the_pairs_cells(usual):
    frames, context = usual
    found = chart("two axes").numbers(frames, context, axes=("test", "lags"))
    assert set(zip(found["row_axis"], found["column_axis"], strict=True)) == {("lags", "test")}
    assert len(found) == 5 * 3


@pytest.mark.parametrize("width", WIDTHS)
def test_a_closing_column_sums_the_choices_without_one(sweeps, width):
    sweep = sweeps.Sweep(
        lags=[str(n) for n in range(30)], window=[f"from {n}" for n in range(30)], moving={},
        deterministics=["constant"], transformation=["log"], test=["F"], conditioning=["given"],
    )  # fmt: skip
    cells = framed(sweeps, sweep)[0]["pair_cells"]
    grid = place_grid(cells, width)
    *alone, closing = grid.columns
    assert closing.closing
    assert grid.hidden == len(closing.choices) == 30 - len(alone) > 10
    assert alone[0].baseline
    assert closing.right <= WIDTHS[width]
    for row in ("0", "17"):
        own = cells[(cells["row_choice"] == row) & cells["column_choice"].isin(closing.choices)]
        summed = grid.cell([row], closing.choices)
        assert summed.admissible == own["admissible"].sum()
        assert summed.survived == own["survived"].sum()
        share = np.average(own["share"].astype(float).fillna(0.0), weights=own["weight"])
        assert summed.share == pytest.approx(share, rel=1e-12)
        assert summed.expected is None
    assert grid.cell(["no such row"], closing.choices) is None


def test_the_longer_axis_makes_the_rows(usual):
    frames, _ = usual
    cells = frames["pair_cells"].query("row_axis == 'deterministics' and column_axis == 'window'")
    grid = place_grid(cells, "wide")
    assert (grid.rows_axis, grid.columns_axis) == ("window", "deterministics")
    assert len(grid.columns) == 3
    assert not grid.hidden


# Directions


def test_bars_are_the_shares_of_each_verdict_in_order(usual):
    frames, context = usual
    drawn = chart("directions").build(frames, context)
    pieces = [row for row in values(drawn) if "to" in row and "fill" in row]
    pieces += [row for row in values(drawn) if "to" in row and "fill" not in row]
    assert len(pieces) == len({(piece["y"], piece["share"]) for piece in pieces})
    bars = {}
    for piece in pieces:
        bars.setdefault(piece["y"], []).append((piece["share"], piece["to"]))
    for bar in bars.values():
        ends = sorted(bar)
        assert ends[0][0] == 0.0
        assert ends[-1][1] == pytest.approx(1.0)
        for one, other in itertools.pairwise(ends):
            assert one[1] == other[0]
    whole = frames["directions"].query("axis == 'all'").set_index("verdict")["rows"]
    for verdict, rows in whole.items():
        assert verdict in written(drawn)
        assert f"{rows:,} ({percent(rows / whole.sum())})" in written(drawn)


def test_every_choice_has_its_counts_of_verdicts(usual):
    frames, context = usual
    tips = [r for r in values(chart("directions").build(frames, context)) if "one_way" in r]
    found = frames["directions"].set_index(["axis", "choice", "verdict"])["rows"]
    for tip in tips:
        key = (tip["axis"], tip["choice"])
        for verdict in VERDICTS:
            count = int(found.get((*key, verdict), 0))
            assert tip[verdict.replace(" ", "_")].startswith(f"{count:,} (")
    varying = frames["survival"].query("axis not in ('all', 'measures')")
    assert len(tips) == len(varying)


# Specification curve


def test_the_curve_rises_and_says_what_it_leaves_out(usual):
    frames, context = usual
    drawn = chart("specification curve").build(frames, context)
    whole = frames["curve"].query("scale == 'all'").iloc[0]
    tips = [row for row in values(drawn) if "rank" in row]
    assert len(tips) == 150
    ranks = [int(tip["rank"].split(" of ")[0].replace(",", "")) for tip in tips]
    assert ranks == sorted(ranks)
    assert (ranks[0], ranks[-1]) == (1, whole["rows"])
    assert f"Drawn are 150 of {whole['rows']:,} specifications" in subtitle(drawn)
    assert f"positive in {whole['positive']:,} of {whole['rows']:,}" in subtitle(drawn)
    assert f"survives {whole['survived']:,}" in written(drawn)
    assert f"does not {whole['rows'] - whole['survived']:,}" in written(drawn)
    dots = {
        colour: [row for row in coloured(drawn, colour) if "y2" not in row]
        for colour in (SURVIVES, FAILS)
    }
    assert sum(map(len, dots.values())) == 150
    kept = sum(tip["outcome"] == "survives" for tip in tips)
    assert len(dots[SURVIVES]) == kept
    heights = [row["y"] for row in sorted(
        [*dots[SURVIVES], *dots[FAILS]], key=lambda row: row["place"])]  # fmt: skip
    assert heights == sorted(heights, reverse=True), "higher estimates stand higher"


def test_choices_below_are_those_of_each_specification(usual):
    frames, context = usual
    drawn = chart("specification curve").build(frames, context)
    varying = [a for a in ("lags", "deterministics", "window", "transformation", "test",
                           "conditioning", "measures")
               if frames["survival"].query("axis == @a").shape[0] > 1]  # fmt: skip
    strokes = [row for colour in (SURVIVES, FAILS) for row in coloured(drawn, colour)
               if "y2" in row and row["y2"] - row["y"] == pytest.approx(8.0, abs=0.02)]  # fmt: skip
    # One stroke says whether it survives, the others which choices it makes.
    assert len(strokes) == 150 * (1 + len(varying))


def test_intervals_are_normal_at_the_level(sweeps):
    frames, context = framed(sweeps, sweeps.crowded(3))
    drawn = chart("specification curve").build(frames, context)
    tips = [row for row in values(drawn) if "interval" in row]
    own = frames["curve"].query("scale != 'all'").reset_index(drop=True)
    assert len(tips) == len(own)
    for tip, row in zip(tips, own.to_dict("records"), strict=True):
        low, high = (float(t.replace("−", "-")) for t in tip["interval"].split(" to "))
        # Tips hold three digits.
        assert low == pytest.approx(row["estimate"] - 1.959964 * 0.08, abs=6e-3)
        assert high == pytest.approx(row["estimate"] + 1.959964 * 0.08, abs=6e-3)
    assert "normal 95% intervals" in subtitle(drawn)
    assert "in units of the effect per unit of the cause" in subtitle(drawn), "one scale only"


@pytest.mark.parametrize(
    ("scale", "expected"),
    [
        ("all", "all"), ("baseline", "log difference · as named"), ("log · as named",) * 2,
        ("log", "log · as named"),
    ],
)
def test_a_scale_can_be_asked_for(usual, scale, expected):
    frames, context = usual
    module = chart("specification curve")
    found = module.numbers(frames, context, scale=scale)
    assert found["scale"].unique().tolist() == [expected]
    drawn = module.build(frames, context, scale=scale)
    said = subtitle(drawn)
    assert (f"on the scale {expected}" in said) == (expected != "all")
    held = expected.partition(" · ")[0]
    assert (f"transformation: {held}" in said) == (expected != "all"), "other scales have no row"
    assert ("transformation" in written(drawn)) == (expected == "all")
    elsewhere = context.counts.admissible - int(found["admissible"].iloc[0])
    assert (f"{elsewhere:,} admissible rows are on other scales" in said) == (expected != "all")
    assert module.describe(frames, context, scale=scale)


def test_a_scale_that_is_none_is_refused(usual):
    frames, context = usual
    with pytest.raises(InputFault, match=r'no scale "logs"'):
        chart("specification curve").build(frames, context, scale="logs")


def test_missing_standard_errors_have_no_interval(usual):
    frames, context = usual
    without = frames | {"curve": frames["curve"].assign(standard_error=np.nan)}
    drawn = chart("specification curve").build(without, context)
    assert {tip["interval"] for tip in values(drawn) if "interval" in tip} == {"–"}


# Attrition


def test_attrition_adds_up_from_planned_to_survived(usual):
    frames, context = usual
    counts = context.counts
    steps = stages(frames["attrition"], counts, "5%")
    assert [step.name for step in steps] == [
        "planned", "applicable", "run", "admissible", "survived",
    ]  # fmt: skip
    assert [step.rows for step in steps] == [
        counts.planned,
        counts.planned - counts.not_applicable,
        counts.planned - counts.not_applicable - counts.infeasible - counts.failed,
        counts.admissible,
        counts.survived,
    ]
    for before, after in itertools.pairwise(steps):
        assert before.rows - sum(loss.rows for loss in before.losses) == after.rows
        if before.losses:
            assert before.losses[-1].start == after.rows
    table = chart("attrition").numbers(frames, context)
    assert table.query("kind == 'lost'")["rows"].sum() == counts.planned - counts.survived


def test_the_authors_rulings_stand_apart(usual):
    frames, context = usual
    lost = frames["attrition"]
    half = lost.query("status == 'not applicable'").iloc[0]
    split = pd.concat([
        lost.drop(index=half.name),
        pd.DataFrame([half.to_dict() | {"rows": half["rows"] - 100, "ruled": False},
                      half.to_dict() | {"rows": 100, "ruled": True, "reason": "never together"}]),
    ])  # fmt: skip
    drawn = chart("attrition").build({"attrition": split}, context)
    assert "ruled out by the plan: never together" in written(drawn)
    assert "Heavy strokes: ruled out by the plan's author." in subtitle(drawn)
    first = stages(split, context.counts, "5%")[0].losses[0]
    assert (first.ruled, first.rows) == (True, 100)
    assert "100 ruled out by the plan: never together" in chart("attrition").describe(
        {"attrition": split}, context
    )


def test_reasons_that_do_not_add_up_are_an_error(usual):
    frames, context = usual
    with pytest.raises(ValueError, match="are admissible"):
        stages(frames["attrition"].iloc[1:], context.counts, "5%")


def test_many_reasons_are_summed_up(usual):
    frames, context = usual
    half = frames["attrition"].query("status == 'not applicable'").iloc[0]
    each, rest = divmod(int(half["rows"]), 20)
    many = [half.to_dict() | {"rows": each + (rest if n == 0 else 0), "reason": f"reason {n}"}
            for n in range(20)]  # fmt: skip
    frame = pd.concat([frames["attrition"].drop(index=half.name), pd.DataFrame(many)])
    drawn = chart("attrition").build({"attrition": frame}, context)
    assert "not applicable: 15 other reasons" in written(drawn)
    assert f"−{15 * each:,}" in written(drawn)
    assert len(chart("attrition").numbers({"attrition": frame}, context)) > 20


# Their helpers


@pytest.mark.parametrize("seed", range(20))
def test_labels_are_kept_apart_inside_their_room(seed):
    rng = np.random.default_rng(seed)
    sizes = rng.uniform(10, 60, 5)
    wished = np.sort(rng.uniform(0, 317, 5))
    places = apart(wished.tolist(), sizes.tolist(), 0, 317, gap=4)
    left, right = places - sizes / 2, places + sizes / 2
    assert left[0] >= -1e-9
    assert right[-1] <= 317 + 1e-9
    assert (left[1:] - right[:-1] >= 4 - 1e-9).all()


@pytest.mark.parametrize("low", [-3.1, -1e-5, 0.0, 12.0, -4e6])
@pytest.mark.parametrize("span", [1e-4, 0.3, 7.0, 1e5])
@pytest.mark.parametrize("most", [4, 6])
def test_round_ticks_lie_inside_and_are_few(low, span, most):
    ticks = round_ticks(low, low + span, most)
    assert 1 <= len(ticks) <= most
    slack = 1e-6 * span
    assert all(low - slack <= tick <= low + span + slack for tick in ticks)
    assert len(set(tick_texts(ticks))) == len(ticks)
