import math

import numpy as np
import pandas as pd
import pytest

from sweep.verdicts import directions, effects, flips, survival


@pytest.fixture(scope="module")
def frames(sweeps):
    return sweeps.frames_of(sweeps.Sweep())


def test_headline_states_counts_weight_and_distinct_computations(frames):
    counts = survival.overall(frames["survival"])
    text = survival.headline(counts)
    assert f"{counts.survived:,} of {counts.admissible:,} rows" in text
    assert f"weighted {survival.percent(counts.headline)}" in text
    assert text.endswith(f"{counts.distinct:,} distinct computations")


@pytest.mark.parametrize("design", ["one change", "two changes"])
def test_designs_of_few_changes_have_no_pooled_share(frames, design):
    assert "weighted" not in survival.headline(survival.overall(frames["survival"]), design)


def test_losses_add_up_to_what_was_planned(frames):
    for row in frames["survival"].to_dict("records"):
        counts = survival.counts_of(row)
        lost = counts.not_applicable + counts.infeasible + counts.failed + counts.screened_out
        assert counts.planned == lost + counts.admissible
        assert counts.left_out == lost


def test_levels_sentence_adds_the_plans_own_level(frames):
    counts = survival.overall(frames["survival"])
    assert "at the plan's 2.5%" in survival.levels_sentence(counts, 0.025)
    assert "plan's" not in survival.levels_sentence(counts, 0.05)


def test_one_overall_row_is_required(frames):
    with pytest.raises(ValueError, match="0 overall rows"):
        survival.overall(frames["survival"].iloc[1:])


def strata(*rows):
    """Return a frame of strata: window, whether baseline, weight, rows, admissible, survived, N."""
    names = ["window_name", "is_baseline", "weight", "rows", "admissible", "survived", "size"]
    return pd.DataFrame(rows, columns=names)


def test_sampling_interval_of_one_stratum_by_hand():
    """Agresti and Coull's interval with the finite population's correction."""
    low, high = survival.sampling_interval(strata(("w", False, 1 / 50, 50, 50, 20, 400)))
    share = 22 / 54
    reach = 1.959964 * math.sqrt((1 - 50 / 400) * share * (1 - share) / 49)
    assert (low, high) == pytest.approx((share - reach, share + reach), rel=1e-6)


def test_sampling_interval_of_several_strata_by_hand():
    """A fixed window drawn whole, and a moving one with two weights: the ratio written out."""
    frame = strata(
        ("fixed", True, 0.25, 1, 1, 1, 4), ("fixed", False, 0.25, 3, 3, 1, 4),
        ("moving", False, 0.1, 4, 3, 2, 90), ("moving", False, 0.05, 6, 6, 3, 90),
    )  # fmt: skip
    weights = np.repeat([0.1, 0.05], [3, 6])  # of the admissible rows that were drawn in part
    survived = np.repeat([(2 + 3 * 2 / 9) / (3 + 3 * 4 / 9), (3 + 6 * 2 / 9) / (6 + 6 * 4 / 9)],
                         [3, 6])  # fmt: skip
    total = 4 * 0.25 + weights.sum()
    share = (2 * 0.25 + (weights * survived).sum()) / total
    # z is w(1 − R) with probability p and −wR otherwise; the tenth row is not admissible.
    mean = (weights * (survived - share)).sum() / 10
    square = (weights**2 * (survived * (1 - share) ** 2 + (1 - survived) * share**2)).sum()
    variance = (1 - 10 / 90) * 10 * (square - 10 * mean**2) / 9
    reach = 1.959964 * math.sqrt(variance) / total
    assert survival.sampling_interval(frame) == pytest.approx(
        (share - reach, share + reach), rel=1e-6
    )


def test_a_sample_of_everything_leaves_nothing_open():
    frame = strata(("a", True, 0.1, 1, 1, 0, 10), ("a", False, 0.1, 9, 9, 6, 10),
                   ("b", False, 0.5, 2, 1, 1, 2))  # fmt: skip
    assert survival.sampling_interval(frame) == pytest.approx((1.1 / 1.5, 1.1 / 1.5))
    nothing = frame.assign(admissible=0, survived=0)
    assert survival.sampling_interval(nothing) is None


@pytest.mark.parametrize("survived", [0, 40])
def test_a_share_of_none_or_all_still_has_an_interval(survived):
    low, high = survival.sampling_interval(strata(("w", False, 1 / 40, 40, 40, survived, 4000)))
    assert (low == 0.0) == (survived == 0)
    assert 0.05 < high - low < 0.25


def test_axis_sentences_name_lowest_and_highest(frames):
    sentence = next(
        s for s in survival.axis_sentences(frames["survival"]) if s.startswith("By test")
    )
    rows = frames["survival"].query("axis == 'test'").sort_values("headline_share")
    assert f"under {rows['choice'].iloc[0]} (" in sentence
    assert f"under {rows['choice'].iloc[-1]} (" in sentence
    assert "the weighted share runs from" in sentence
    for row in (rows.iloc[0], rows.iloc[-1]):
        share = row["survived"] / row["admissible"]
        assert (
            f"({row['survived']:,} of {row['admissible']:,} rows, unweighted "
            f"{survival.percent(share)})"
        ) in sentence


def test_without_a_weighted_share_there_is_no_sentence_on_axes(frames):
    frame = frames["survival"].assign(headline_share=float("nan"))
    assert survival.axis_sentences(frame) == []


def test_verdicts_count_each_admissible_row_once(frames):
    counts = directions.totals(frames["directions"])
    assert tuple(counts) == directions.VERDICTS
    assert sum(counts.values()) == survival.overall(frames["survival"]).admissible
    without = frames["directions"].query("axis != 'all'")
    assert directions.totals(without) == counts
    assert "not evidence of independence" in directions.sentence(frames["directions"])


def test_verdicts_of_nothing(frames):
    assert directions.sentence(frames["directions"].iloc[:0]).startswith("No specification")


def test_single_changes_are_counted_and_named(frames):
    changes, base = frames["single_changes"], frames["baseline"].iloc[0]
    rows = flips.turned(changes)
    sentence = flips.single_sentence(changes, base["survives"], limit=1)
    tried = int((changes["admissible"] > 0).sum())
    assert sentence.startswith(f"{len(rows)} of {tried} single changes")
    assert f"and {len(rows) - 1} more" in sentence
    assert rows["z_change"].abs().is_monotonic_decreasing


@pytest.mark.parametrize(("holds", "word"), [(True, "holds"), (False, "still does not hold")])
def test_no_flip_is_said_plainly(frames, holds, word):
    changes = frames["single_changes"].assign(flips=0)
    assert word in flips.single_sentence(changes, holds)


def test_flips_without_a_baseline(frames):
    assert "not admissible" in flips.single_sentence(frames["single_changes"], None)
    assert flips.path_sentence(frames["shortest_flips"], None) == ""
    none = frames["shortest_flips"].iloc[:0]
    said = [flips.path_sentence(none, True, design) for design in ("full", "sample of 60")]
    assert said[0] == "In no specification of this sweep does the finding stop holding."
    assert said[1] == "In no row drawn does the finding stop holding."
    empty = flips.single_sentence(frames["single_changes"].iloc[:0], True)
    assert empty.startswith("No choice differs")


def test_shortest_path_states_the_changes(frames):
    base = frames["baseline"].iloc[0]
    sentence = flips.path_sentence(frames["shortest_flips"], base["survives"])
    assert frames["shortest_flips"]["changed"].iloc[0] in sentence
    assert "after 1 changed choice" in sentence


def test_effect_sentences(frames):
    found = effects.sentences(frames["effects_overall"], frames["effects"])
    assert found[0].startswith("The signed partial R² is positive in ")
    assert found[1].startswith("The standardised sum ")
    assert "keeps one sign throughout" in found[2]
    assert effects.sentences(frames["effects_overall"].iloc[:0], frames["effects"].iloc[:0]) == []


def counts_of_pairs(admissible, turning, joint):
    import pandas as pd

    return pd.DataFrame(
        [{"changes": 2, "admissible": admissible, "turning": turning, "joint": joint}]
    )


@pytest.mark.parametrize(
    ("numbers", "holds", "expected"),
    [
        ((9, 0, 0), True, "None of 9 pairs of changes breaks the finding."),
        (
            (1, 1, 1),
            True,
            "1 of 1 pair of changes breaks the finding; neither change does so alone.",
        ),
        (
            (9, 3, 3),
            False,
            "3 of 9 pairs of changes restore the finding; in all of them, neither change does so "
            "alone.",
        ),
        (
            (9, 3, 1),
            True,
            "3 of 9 pairs of changes break the finding; in 1 of them, neither change does so "
            "alone.",
        ),
        (
            (9, 3, 0),
            True,
            "3 of 9 pairs of changes break the finding; in each of them a single change does so "
            "alone, or could not be judged.",
        ),
        ((0, 0, 0), True, ""),
        ((9, 3, 1), None, ""),
    ],
)
def test_pairs_are_counted_by_what_they_hold(numbers, holds, expected):
    assert flips.pair_sentence(counts_of_pairs(*numbers), holds) == expected


def test_what_turned_is_named_for_claims_on_both_directions():
    row = {"flips": 2, "flips_forward": 0, "flips_reverse": 2, "flips_sign": 1}
    assert flips.turned_by(row, "leads one way") == "reverse and sign of the sum"
    assert flips.turned_by(row, "leads") == "sign of the sum"
    assert flips.turned_by(row | {"flips": 0}, "leads") == ""
