"""Requests and plans that extend others: which rows they add, and that nothing else moves."""

from __future__ import annotations

from itertools import product
from pathlib import Path

import numpy as np
import pytest
import small_plans

from sweep.engine.prepare import Prepared, prepare
from sweep.errors import InputFault
from sweep.plan.choices import AXES
from sweep.plan.load import load_plan, plan_from_text

TAIL = """
[axes]
lags = [1, 2, 3]
windows = ["full sample", { rolling = 80, step = 40 }]
tests = ["F", "LR"]
"""
FIRST = """
[[requests]]
name = "more lags"
axes = { lags = [4, 6], tests = ["LR"] }
"""
SECOND = """
[[requests]]
name = "robust"
axes = { tests = [{ test = "F", covariance = "HC1" }], lags = [4] }
"""


def prepared(folder: Path, tail: str, finding: str = "") -> Prepared:
    return prepare(load_plan(small_plans.write_plan(folder, tail, finding)))


def labels(found: Prepared, request: int) -> set[tuple[object, ...]]:
    """Return the labels and positions of the rows of a request, and that none stands twice."""
    rows, plan = found.rows, found.plan
    mine = np.flatnonzero(rows.request == request)
    named = [
        (*(plan.axes[axis][rows.codes[axis][row]].label for axis in AXES), int(rows.position[row]))
        for row in mine
    ]
    assert len(set(named)) == len(named)
    return set(named)


def cross(lags: list[str], windows: list[str], tests: list[str]) -> set[tuple[object, ...]]:
    """Return a full cross by plain enumeration; a rolling window has 3 positions."""
    return {
        (lag, "constant", window, "level", test, "given", "as named", position)
        for lag, window, test in product(lags, windows, tests)
        for position in range(3 if "rolling" in window else 1)
    }


WINDOWS = ["full sample", "rolling 80, step 40"]


def test_a_request_adds_the_full_cross_less_what_is_planned(tmp_path: Path) -> None:
    found = prepared(tmp_path, TAIL + FIRST)
    planned = cross(["1", "2", "3"], WINDOWS, ["F", "LR"])
    assert labels(found, 0) == planned
    assert labels(found, 1) == cross(["1", "2", "3", "4", "6"], WINDOWS, ["F", "LR"]) - planned


def test_requests_are_not_crossed_with_each_other(tmp_path: Path) -> None:
    found = prepared(tmp_path, TAIL + FIRST + SECOND)
    planned = cross(["1", "2", "3"], WINDOWS, ["F", "LR"])
    first = cross(["1", "2", "3", "4", "6"], WINDOWS, ["F", "LR"]) - planned
    second = cross(["1", "2", "3", "4"], WINDOWS, ["F", "LR", "F, HC1"]) - planned - first
    assert labels(found, 1) == first
    assert labels(found, 2) == second
    assert not any(row[0] == "6" for row in second)


def test_with_crosses_a_request_with_an_earlier_one(tmp_path: Path) -> None:
    found = prepared(tmp_path, TAIL + FIRST + SECOND + 'with = ["more lags"]\n')
    planned = cross(["1", "2", "3"], WINDOWS, ["F", "LR"])
    first = cross(["1", "2", "3", "4", "6"], WINDOWS, ["F", "LR"]) - planned
    every = cross(["1", "2", "3", "4", "6"], WINDOWS, ["F", "LR", "F, HC1"])
    assert labels(found, 2) == every - planned - first


def test_a_request_for_what_is_planned_adds_nothing(tmp_path: Path) -> None:
    tail = TAIL + '[[requests]]\nname = "known"\naxes = { lags = [3], tests = ["LR"] }\n'
    found = prepared(tmp_path, tail)
    assert labels(found, 1) == set()
    assert found.plan.requests[0].codes[0]["lags"] == (2,)


def test_planned_rows_are_the_same_with_and_without_requests(tmp_path: Path) -> None:
    for folder in ("plain", "asked"):
        (tmp_path / folder).mkdir()
    plain = prepared(tmp_path / "plain", TAIL).rows
    asked = prepared(tmp_path / "asked", TAIL + FIRST + SECOND).rows
    kept = asked.request == 0
    for name in ("finding", "position", "high", "low", "rule"):
        assert np.array_equal(getattr(plain, name), getattr(asked, name)[kept]), name


@pytest.mark.parametrize("design", ["one change", "two changes"])
def test_in_a_design_of_changes_a_request_adds_its_changes(tmp_path: Path, design: str) -> None:
    tail = TAIL + SECOND + f'[sweep]\ndesign = "{design}"\n'
    found = prepared(tmp_path, tail)
    home = ("2", "constant", "full sample", "level", "F", "given", "as named")
    most = 1 if design == "one change" else 2
    every = cross(["1", "2", "3", "4"], WINDOWS, ["F", "LR", "F, HC1"])

    def distance(row: tuple[object, ...]) -> int:
        return sum(a != b for a, b in zip(row, home, strict=False))

    planned = {
        row for row in cross(["1", "2", "3"], WINDOWS, ["F", "LR"]) if distance(row) <= most
    }
    assert labels(found, 0) == planned
    # The changes themselves, and both of the request's choices together.
    answers = cross(["2", "4"], ["full sample"], ["F", "F, HC1"])
    near = {row for row in every if distance(row) <= most and (row[0] == "4" or row[4] == "F, HC1")}
    assert labels(found, 1) == (near | answers) - planned


def test_in_a_sample_a_request_adds_a_sample_that_holds_its_answers(tmp_path: Path) -> None:
    tail = TAIL + SECOND + "[sweep]\ndesign = { sample = 10 }\n"
    found = prepared(tmp_path, tail)
    every = cross(["1", "2", "3", "4"], WINDOWS, ["F", "LR", "F, HC1"])
    planned = cross(["1", "2", "3"], WINDOWS, ["F", "LR"])
    added = labels(found, 1)
    answers = cross(["2", "4"], ["full sample"], ["F", "F, HC1"])
    assert answers - labels(found, 0) <= added <= every - labels(found, 0)
    assert added - planned == added
    assert len(added) <= 10 + len(answers)
    again = prepared(tmp_path, tail)
    assert np.array_equal(found.rows.low, again.rows.low)


def test_rules_hold_for_added_rows(tmp_path: Path) -> None:
    rule = '[[rule_out]]\nwhen = { lags = [6], test = ["LR"] }\nbecause = "too many"\n'
    rows = prepared(tmp_path, TAIL + FIRST + rule).rows
    ruled = rows.rule >= 0
    assert ruled.sum() == 4  # the full sample and three positions
    assert (rows.request[ruled] == 1).all()


def test_a_request_may_ask_about_one_finding(tmp_path: Path) -> None:
    second = '[[findings]]\nname = "z leads y"\ncause = "z"\neffect = "y"\n'
    tail = FIRST + 'finding = "z leads y"\n'
    plan = small_plans.write_plan(tmp_path, TAIL + tail, second)
    rows = prepare(load_plan(plan)).rows
    assert set(rows.finding[rows.request == 1].tolist()) == {1}


def test_new_measures_leave_the_planned_ones_alone(tmp_path: Path) -> None:
    tail = '[axes]\nmeasures = { x = ["x", "w"] }\n'
    asked = tail + '[[requests]]\nname = "other z"\naxes = { measures = { z = ["v"] } }\n'
    found = prepared(tmp_path, asked)
    measures = [found.plan.axes["measures"][code].label for code in
                found.plan.finding_axes[0]["measures"].added]  # fmt: skip
    assert measures == ["x: x; z: v", "x: w; z: v"]
    assert (found.rows.request == 1).sum() == 2


EXTENDING = """
extends = "plan.toml"
title = "Round two"
[axes]
lags = [1, 2]
[[requests]]
name = "round two"
axes = { tests = ["LM"] }
"""


def test_an_extending_plan_merges_tables_and_adds_requests(tmp_path: Path) -> None:
    small_plans.write_plan(tmp_path, TAIL + FIRST)
    path = tmp_path / "round.toml"
    path.write_text(EXTENDING, encoding="utf-8")
    plan = load_plan(path)
    assert plan.title == "Round two"
    assert [choice.label for choice in plan.axes["lags"]] == ["1", "2", "4", "6"]
    assert [request.name for request in plan.requests] == ["more lags", "round two"]
    assert plan.replaced == ("title", "axes.lags")
    assert plan.store_path == tmp_path / "plan.duckdb"
    assert plan.report_path == tmp_path / "round.html"
    # What the store keeps can be read without the files.
    alone = plan_from_text(plan.text, tmp_path / "elsewhere.toml")
    assert alone.digest == plan.digest


def test_a_data_file_is_found_from_the_folder_of_its_own_plan(tmp_path: Path) -> None:
    small_plans.write_plan(tmp_path, TAIL)
    (tmp_path / "answers").mkdir()
    path = tmp_path / "answers" / "round.toml"
    path.write_text(EXTENDING.replace("plan.toml", "../plan.toml"), encoding="utf-8")
    plan = load_plan(path)
    assert plan.data_path.resolve() == (tmp_path / "small.csv").resolve()
    assert plan.store_path.resolve() == (tmp_path / "plan.duckdb").resolve()
    assert prepare(plan).rows.count > 0


def test_a_chain_is_followed_to_its_first_plan(tmp_path: Path) -> None:
    small_plans.write_plan(tmp_path, TAIL)
    (tmp_path / "one.toml").write_text(EXTENDING, encoding="utf-8")
    (tmp_path / "two.toml").write_text(
        'extends = "one.toml"\n[[requests]]\nname = "third"\naxes = { lags = [7] }\n',
        encoding="utf-8",
    )
    plan = load_plan(tmp_path / "two.toml")
    assert [request.name for request in plan.requests] == ["round two", "third"]
    assert plan.store_path == tmp_path / "plan.duckdb"
    assert plan.text.startswith("# two.toml, which starts from one.toml, which starts from plan")


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ('extends = "round.toml"', 'extends: "round.toml" leads back to a plan that extends it.'),
        ('extends = "plon.toml"', 'there is no such plan file. Did you mean "plan.toml"?'),
        ("extends = 3", "extends: the name of a plan file in quotes is needed here."),
        ('extends = "broken.toml"', "broken.toml: not valid TOML"),
    ],
)
def test_faults_of_extending(tmp_path: Path, text: str, message: str) -> None:
    small_plans.write_plan(tmp_path, TAIL)
    (tmp_path / "broken.toml").write_text("a = [", encoding="utf-8")
    path = tmp_path / "round.toml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(InputFault) as caught:
        load_plan(path)
    assert message in str(caught.value)
