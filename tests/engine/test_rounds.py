"""Requests through the public verbs: only what is new is run, the headline stays, the answers."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
import small_plans

import sweep
from store import read
from sweep.results import Results

TAIL = """
[axes]
lags = [1, 2, 3]
windows = ["full sample", { rolling = 80, step = 20 }]
tests = ["F", "LR"]
measures = { x = ["x", "w"] }
"""
ROUND = """
extends = "plan.toml"
[[requests]]
name = "comment 1"
from = "Referee 1"
asks = "And with HC1 and 4 lags?"
axes = { lags = [4], tests = [{ test = "F", covariance = "HC1" }] }
[[requests]]
name = "comment 2"
from = "Referee 1"
axes = { windows = [{ rolling = 100, step = 20 }], measures = { x = ["v"] } }
[[requests]]
name = "comment 3"
axes = { lags = [3] }
"""


@pytest.fixture
def rounds(tmp_path: Path) -> tuple[Results, Results]:
    plan = small_plans.write_plan(tmp_path, TAIL)
    (tmp_path / "round.toml").write_text(ROUND, encoding="utf-8")
    return sweep.run(plan, jobs=1), sweep.run(tmp_path / "round.toml", jobs=1)


def numbers(results: Results, where: str | None = None) -> pd.DataFrame:
    frame = results.outcomes(where=where).drop(columns=["sweep"])
    return frame.sort_values("specification").reset_index(drop=True).astype(object)


def test_only_what_is_new_is_computed(rounds: tuple[Results, Results]) -> None:
    first, second = rounds
    before, after = first.run_report, second.run_report
    assert before is not None
    assert after is not None
    assert second.store == first.store
    assert after.reused == before.planned
    assert after.added == after.computed == after.planned - before.planned
    assert after.added > 0
    counts = numbers(second)["request"].value_counts().to_dict()
    # comment 1: 1 new lag × (1 + 5) positions × 3 tests × 2 measures and 3 old lags × 6 × 1 × 2;
    # comment 2: (6 + 4) × 3 lags × 2 tests × 3 measures less 6 × 3 × 2 × 2 planned ones.
    assert counts == {"comment 1": 36 + 36, "comment 2": 180 - 72}


def test_planned_rows_and_headline_stay_as_they_were(rounds: tuple[Results, Results]) -> None:
    first, second = rounds
    pd.testing.assert_frame_equal(
        numbers(first).drop(columns="request"),
        numbers(second, "origin = 'planned'").drop(columns="request"),
        check_exact=True,
    )
    left, right = (one.survival().drop(columns="sweep") for one in rounds)
    pd.testing.assert_frame_equal(left, right, check_exact=True)


def test_a_store_of_its_own_gives_the_same_numbers(
    rounds: tuple[Results, Results], tmp_path: Path
) -> None:
    fresh = sweep.run(tmp_path / "round.toml", store=tmp_path / "fresh.duckdb", jobs=1)
    report = fresh.run_report
    assert report is not None
    assert report.reused == 0
    one, two = numbers(rounds[1]), numbers(fresh)
    exact = ["specification", "request", "origin", "status", "lags", "observations", "survives"]
    pd.testing.assert_frame_equal(one[exact], two[exact], check_exact=True)
    # Running sums are cut by the windows of the plan, and the second plan has more of them.
    for name in ("statistic", "p_value", "coefficient_sum"):
        np.testing.assert_allclose(one[name].astype(float), two[name].astype(float), rtol=1e-8)


def test_answers_are_the_rows_beside_the_baseline(rounds: tuple[Results, Results]) -> None:
    second = rounds[1]
    with second._open() as database:
        found = read.answers(database, second.sweep, 0)
    outcomes = second.outcomes()
    home = outcomes[outcomes["is_baseline"]].iloc[0]
    axes = ["lags_choice", "deterministics", "window_name", "transformation", "test",
            "conditioning", "measures"]  # fmt: skip
    asked = {
        1: {"lags_choice": ["4"], "test": ["F, HC1"]},
        2: {"window_name": ["rolling 100, step 20"], "measures": ["v"]},
        3: {"lags_choice": ["3"]},
    }
    for request, choices in asked.items():
        near = outcomes
        for axis in axes:
            near = near[near[axis].isin([home[axis], *choices.get(axis, [])])]
        groups = near.astype(dict.fromkeys(axes, str)).groupby(axes, observed=True)
        expected = {
            tuple(key[axes.index(axis)] for axis in axes): rows for key, rows in groups
        }
        expected.pop(tuple(str(home[axis]) for axis in axes))
        own = found[found["request"] == request]
        assert len(own) == len(expected) == (3 if request < 3 else 1)
        medians = sorted(float(rows["p_value"].median()) for rows in expected.values())
        np.testing.assert_allclose(sorted(own["p_value"]), medians, rtol=1e-15)
        counts = sorted(int(rows["survives"].sum()) for rows in expected.values())
        assert sorted(own["survived"]) == counts
    assert found["baseline_p_value"].unique().tolist() == [home["p_value"]]
    assert found[found["request"] == 3]["planned"].tolist() == [True]
    assert found[found["request"] == 1]["changed"].tolist() == [
        "lags 4", "test F, HC1", "lags 4; test F, HC1",
    ]  # fmt: skip


def test_requests_count_the_rows_that_they_added(rounds: tuple[Results, Results]) -> None:
    second = rounds[1]
    with second._open() as database:
        found = read.requests(database, second.sweep, 0).set_index("request_name")
    outcomes = second.outcomes()
    for name, row in found.iterrows():
        mine = outcomes[outcomes["request"].astype(str) == name]
        assert row["added"] == len(mine)
        assert row["admissible"] == mine["admissible"].sum()
        assert row["survived"] == mine["survives"].fillna(False).sum()
        if len(mine):
            good = mine[mine["admissible"]]
            weight = good["weight"].to_numpy(float)
            kept = good["survives"].to_numpy(bool)
            share = weight[kept].sum() / weight.sum()
            np.testing.assert_allclose(row["weighted_share"], share, rtol=1e-12)
    assert found.loc["comment 3", "added"] == 0


def test_the_summary_and_the_table_answer(rounds: tuple[Results, Results]) -> None:
    first, second = rounds
    sentences = " ".join(second.summary()[0][1])
    assert "Referee 1, comment 1 asks: “And with HC1 and 4 lags?” At the baseline" in sentences
    assert "comment 3. At the baseline" in sentences
    assert "all that it asks was planned" in sentences
    assert "asks" not in " ".join(first.summary()[0][1])
    table = second.table("requests")
    assert [row[0] for row in table.rows] == (
        ["baseline"] + ["Referee 1, comment 1"] * 3 + ["Referee 1, comment 2"] * 3 + ["comment 3"]
    )
    assert table.rows[0][-1] in ("holds", "does not hold")


def test_check_says_what_requests_add(tmp_path: Path) -> None:
    small_plans.write_plan(tmp_path, TAIL)
    (tmp_path / "round.toml").write_text(ROUND, encoding="utf-8")
    found = sweep.check(tmp_path / "round.toml")
    assert [(one.request, one.added) for one in found.requests] == [
        ("comment 1", 72), ("comment 2", 108), ("comment 3", 0),
    ]  # fmt: skip
    assert (found.planned, found.added) == (72, 180)


def test_data_that_changed_in_a_requested_measure_are_not_taken_over(
    rounds: tuple[Results, Results], tmp_path: Path
) -> None:
    path = tmp_path / "small.csv"
    lines = path.read_text(encoding="utf-8").splitlines()
    cells = lines[50].split(",")
    cells[-1] = "22.5"  # the series v, which only comment 2 reads
    lines[50] = ",".join(cells)
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    third = sweep.run(tmp_path / "round.toml", jobs=1)
    report = third.run_report
    assert report is not None
    # All that reads v is computed again, and nothing else.
    reads_v = numbers(third)["measures"].astype(str) == "v"
    assert report.computed == reads_v.sum() > 0
