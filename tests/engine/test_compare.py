"""Comparisons through the public verbs, each number against pandas on the outcomes."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
import small_plans
from click.testing import CliRunner

import sweep
from sweep.cli import group
from sweep.comparison import Comparison
from sweep.errors import InputFault
from sweep.results import Results

TAIL = """
[axes]
lags = [1, 2, 3, 4]
windows = ["full sample", { rolling = 80, step = 4 }, { rolling = 100, step = 2 }]
transformations = ["level", "difference"]
tests = ["F", { test = "F", covariance = "HC3" }]
"""
OTHER = TAIL.replace("[1, 2, 3, 4]", '[1, 2, 3, { order = 4, name = "four" }, "AIC"]')


@pytest.fixture
def vintages(tmp_path: Path) -> tuple[Results, Results]:
    """Two sweeps in two stores: revised data, one more lag rule, another level."""
    for name in ("old", "new"):
        (tmp_path / name).mkdir()
    old = small_plans.write_plan(tmp_path / "old", TAIL)
    new = small_plans.write_plan(tmp_path / "new", OTHER)
    text = new.read_text(encoding="utf-8")
    new.write_text("significance = 0.1\n" + text, encoding="utf-8")
    path = tmp_path / "new" / "small.csv"
    lines = path.read_text(encoding="utf-8").splitlines()
    for number in (90, 91, 120):
        cells = lines[number].split(",")
        cells[2] = f"{float(cells[2]) + 3:.6f}"
        lines[number] = ",".join(cells)
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return sweep.run(old, jobs=1), sweep.run(new, jobs=1)


def merged(mine: Results, theirs: Results) -> pd.DataFrame:
    """The rows of both, matched by specification in pandas."""
    left, right = mine.outcomes(), theirs.outcomes()
    return left.merge(right, on="specification", suffixes=("_my", "_their"))


def test_counts_are_those_of_the_matched_rows(vintages: tuple[Results, Results]) -> None:
    mine, theirs = vintages
    counts = mine.compare(theirs).frames["counts"].iloc[0]
    both = merged(mine, theirs)
    good = both[both["admissible_my"] & both["admissible_their"]]
    first, second = (good[f"survives_{side}"].astype(bool) for side in ("my", "their"))
    assert counts["my_rows"] == len(mine.outcomes())
    assert counts["their_rows"] == len(theirs.outcomes())
    assert counts["shared"] == len(both)
    assert 0 < len(both) < counts["their_rows"]
    assert counts["both_admissible"] == len(good)
    lost = both["admissible_my"] & ~both["admissible_their"]
    assert counts["only_mine_admissible"] == lost.sum()
    assert counts["both_survive"] == (first & second).sum()
    assert counts["only_mine_survive"] == (first & ~second).sum()
    assert counts["only_theirs_survive"] == (~first & second).sum() > 0
    assert counts["neither_survives"] == (~first & ~second).sum()
    unlike = good["verdict_my"].astype(str) != good["verdict_their"].astype(str)
    assert counts["verdict_changed"] == unlike.sum()
    moves = (good["p_value_my"] - good["p_value_their"]).abs()
    np.testing.assert_allclose(counts["largest_p_difference"], moves.max(), rtol=1e-12)


def test_changed_rows_are_all_there_and_ordered(vintages: tuple[Results, Results]) -> None:
    mine, theirs = vintages
    changed = mine.compare(theirs).frame("changed")
    both = merged(mine, theirs)
    good = both["admissible_my"] & both["admissible_their"]
    unlike = (both["verdict_my"].astype(str) != both["verdict_their"].astype(str)) | (
        both["survives_my"] != both["survives_their"]
    )
    expected = both[(both["admissible_my"] != both["admissible_their"]) | (good & unlike)]
    assert set(changed["specification"]) == set(expected["specification"])
    assert len(changed) == len(expected) > 0
    # The count is of all of them, however many are listed.
    assert mine.compare(theirs).frame("counts")["changed"].iloc[0] == len(expected)
    move = (np.log(changed["my_p"]) - np.log(changed["their_p"])).abs().dropna()
    assert (np.diff(move) <= 1e-9).all()
    row = changed.iloc[-1]
    twin = both[both["specification"] == row["specification"]].iloc[0]
    assert row["my_p"] == twin["p_value_my"]
    assert row["their_p"] == twin["p_value_their"]
    assert row["lags"] == twin["lags_choice_my"]
    assert str(row["window_end"])[:10] == str(twin["window_end_my"])[:10]


def test_cells_of_p_values_hold_every_row_once(vintages: tuple[Results, Results]) -> None:
    mine, theirs = vintages
    cells = mine.compare(theirs).frame("p_values")
    both = merged(mine, theirs)
    good = both[both["admissible_my"] & both["admissible_their"]]

    def place(values: pd.Series) -> pd.Series:
        return np.maximum(np.ceil(np.log10(values) * 20), -64).astype(int)

    twin = pd.DataFrame(
        {
            "my_cell": place(good["p_value_my"]),
            "their_cell": place(good["p_value_their"]),
            "turned": (good["survives_my"] != good["survives_their"]).astype(int),
        }
    )
    expected = twin.groupby(["my_cell", "their_cell"]).agg(
        rows=("turned", "size"), turned=("turned", "sum")
    )
    got = cells.set_index(["my_cell", "their_cell"])[["rows", "turned"]].sort_index()
    pd.testing.assert_frame_equal(
        got, expected.sort_index(), check_dtype=False, check_index_type=False
    )


def test_survival_is_matched_by_meaning(vintages: tuple[Results, Results]) -> None:
    mine, theirs = vintages
    frame = mine.compare(theirs).frame("survival")
    lags = frame[frame["axis"] == "lags"].set_index("choice")
    # "4" here and "four" there are one choice; "AIC" is in the second only.
    assert lags.index.tolist() == ["1", "2", "3", "4", "AIC"]
    assert pd.isna(lags.loc["AIC", "my_share"])
    own = theirs.survival("lags").set_index("choice")
    assert lags.loc["4", "their_survived"] == own.loc["four", "survived"]
    assert lags.loc["4", "their_share"] == own.loc["four", "headline_share"]
    whole = frame[frame["axis"] == "all"].iloc[0]
    assert whole["my_share"] == mine.survival("all")["headline_share"].iloc[0]


def test_data_differences_are_listed_by_date(vintages: tuple[Results, Results]) -> None:
    mine, theirs = vintages
    found = mine.compare(theirs)
    data = found.frame("data")
    # Line 0 of the file is its head, so line n is month n - 1 from 1990-01.
    assert data["date"].tolist() == ["1997-06", "1997-07", "1999-12"]
    assert set(data["series"]) == {"y"}
    np.testing.assert_allclose(data["difference"], 3.0, rtol=0, atol=1e-9)
    assert "The data differ in 3 values of y at 3 dates." in found.remarks
    assert any("The levels differ: 5% in" in remark for remark in found.remarks)


def test_data_that_are_gone_are_said(vintages: tuple[Results, Results], tmp_path: Path) -> None:
    mine, theirs = vintages
    (tmp_path / "old" / "small.csv").unlink()
    found = mine.compare(theirs)
    assert "data" not in found.frames
    assert any("cannot be shown" in remark for remark in found.remarks)


def test_two_sweeps_of_one_store(tmp_path: Path) -> None:
    store = tmp_path / "both.duckdb"
    one = sweep.run(small_plans.write_plan(tmp_path, TAIL), store=store, jobs=1)
    two = sweep.run(small_plans.write_plan(tmp_path, OTHER), store=store, jobs=1)
    found = one.compare(two)
    counts = found.frame("counts").iloc[0]
    assert counts["shared"] == counts["my_rows"] == len(one.outcomes())
    assert counts["same_numbers"] == counts["both_admissible"] > 0
    assert counts["verdict_changed"] == 0
    assert found.frame("changed").empty
    assert found.names == ("sweep 1", "sweep 2")
    assert "Both sweeps were run on the same data." in found.remarks
    assert "All their p-values are the same." in found.summary[0][1]
    with pytest.raises(InputFault, match="both sides are sweep 2 of one store"):
        two.compare(sweep.open_results(store))


def test_findings_are_matched_by_their_series(tmp_path: Path) -> None:
    (tmp_path / "a").mkdir()
    (tmp_path / "b").mkdir()
    more = '[[findings]]\nname = "second"\ncause = "z"\neffect = "y"\ngiven = ["w"]\n'
    one = sweep.run(small_plans.write_plan(tmp_path / "a", TAIL, more), jobs=1)
    plan = small_plans.write_plan(tmp_path / "b", TAIL)
    plan.write_text(
        plan.read_text(encoding="utf-8").replace('name = "x leads y"', 'name = "renamed"')
        .replace('given = ["z"]', 'given = ["z"]\nclaim = "does not lead"'),
        encoding="utf-8",
    )  # fmt: skip
    two = sweep.run(plan, jobs=1)
    found = one.compare(two)
    assert [name for name, _ in found.summary] == ["x leads y"]
    assert "Findings without a counterpart in b/plan: second." in found.remarks
    assert any("makes another claim" in remark for remark in found.remarks)
    with pytest.raises(InputFault, match="no finding is called"):
        one.compare(two, finding="thrid")


def test_windows_are_set_side_by_side_by_their_last_date(vintages: tuple[Results, Results]) -> None:
    mine = vintages[0]
    found = mine.compare()
    rows = mine.outcomes()
    rows = rows[rows["window_entry"].astype(str) == "rolling"]
    paths = found.frame("paths").set_index(["window_name", "position"])
    for (name, position), own in rows.groupby(["window_name", "position"], observed=True):
        good = own[own["admissible"]]
        twin = paths.loc[(name, position)]
        assert twin["rows"] == len(own)
        assert twin["admissible"] == len(good)
        assert twin["survived"] == good["survives"].astype(bool).sum()
        np.testing.assert_allclose(twin["median_p"], good["p_value"].median(), rtol=1e-12)
        home = good[
            (good["lags_choice"].astype(str) == "2") & (good["test"].astype(str) == "F")
            & (good["transformation"].astype(str) == "level")
        ]  # fmt: skip
        assert twin["baseline_p"] == home["p_value"].iloc[0]
    pair = found.frame("pairs").iloc[0]
    keys = ["lags_choice", "deterministics", "transformation", "test", "conditioning", "measures",
            "window_end"]  # fmt: skip
    good = rows[rows["admissible"]].assign(window_name=lambda f: f["window_name"].astype(str))
    sides = [good[good["window_name"] == pair[f"{side}_window"]] for side in ("first", "second")]
    both = sides[0].merge(sides[1], on=keys, suffixes=("_a", "_b"))
    first, second = (both[f"survives_{side}"].astype(bool) for side in ("a", "b"))
    assert pair["shared"] == len(both) > 0
    assert pair["both_survive"] == (first & second).sum()
    assert pair["only_first"] == (first & ~second).sum()
    assert pair["only_second"] == (~first & second).sum()
    assert pair["neither"] == (~first & ~second).sum()


def test_a_sweep_without_moving_windows_says_so(tmp_path: Path) -> None:
    results = sweep.run(small_plans.write_plan(tmp_path), jobs=1)
    with pytest.raises(InputFault, match="no moving window"):
        results.compare()


def test_a_comparison_shows_itself(vintages: tuple[Results, Results], tmp_path: Path) -> None:
    found: Comparison = vintages[0].compare(vintages[1])
    assert "<li>" in found._repr_html_()
    assert found.title in repr(found)
    assert found.chart().to_dict(validate=True)["title"]["text"]
    page = found.report(tmp_path / "page.html").read_text(encoding="utf-8")
    assert page.count("<svg") == 1
    assert "://" not in page.replace("http://www.w3.org", "")
    with pytest.raises(InputFault, match="did you mean"):
        found.frame("change")


@pytest.mark.parametrize("part", ["counts", "changed", "survival", "p_values", "verdicts", "data"])
def test_the_command_prints_every_part(
    vintages: tuple[Results, Results], part: str
) -> None:
    mine, theirs = vintages
    asked = ["compare", str(mine.store), str(theirs.store), "--part", part, "--format", "json"]
    done = CliRunner().invoke(group, asked)
    assert done.exit_code == 0
    assert len(json.loads(done.stdout)) == len(mine.compare(theirs).frame(part))


def test_the_command_says_what_it_says_in_python(
    vintages: tuple[Results, Results], tmp_path: Path
) -> None:
    mine, theirs = vintages
    page = tmp_path / "page.html"
    done = CliRunner().invoke(
        group, ["compare", str(mine.store), str(theirs.store), "--output", str(page)]
    )
    words = " ".join(done.stdout.split())
    for _, sentences in mine.compare(theirs).summary:
        for sentence in sentences:
            assert sentence in words
    assert page.exists()
    alone = CliRunner().invoke(group, ["compare", str(mine.store)])
    assert "rolling 80, step 4: with the baseline's other choices" in " ".join(
        alone.stdout.split()
    )
    wrong = CliRunner().invoke(group, ["compare", str(mine.store), "--against", "1"])
    assert wrong.exit_code == 2
