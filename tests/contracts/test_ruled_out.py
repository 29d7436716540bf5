"""What `check` announces as ruled out is what `run` stores as not applicable, count by count."""

from __future__ import annotations

from collections import Counter
from pathlib import Path

import pytest
import small_plans

import sweep

AXES = """
[axes]
lags = [1, 2, { own = 3, cause = 1 }, "AIC", { criterion = "BIC", maximum = 4, scope = "equation" }]
windows = [
  "full sample",
  { without = ["1995-01", "1995-04"] },
  { rolling = 60, step = 12, without = ["1993-01", "1993-02"] },
  { until = "1998-12", without = [["1992-01", "1992-03"], ["1996-01", "1996-02"]] },
]
transformations = [
  "level", "Hodrick-Prescott cycle",
  { default = "level", series = { z = "Hodrick-Prescott cycle" } },
  { default = "difference", series = { v = "Hodrick-Prescott cycle" } },
  { default = "difference", series = { w = "Hodrick-Prescott cycle" } },
]
conditioning = ["given", "pairwise"]
measures = { x = ["x", "w"] }

[[rule_out]]
when = { transformation = ["Hodrick-Prescott cycle"], lags = [1], conditioning = ["pairwise"] }
because = "one lag of a cycle says little"
"""
EXOGENOUS = """
[[findings]]
name = "x leads y beside v"
cause = "x"
effect = "y"
exogenous = [{ series = "v", lags = 1 }]
"""
REQUEST = """
[[requests]]
name = "another episode"
axes = { windows = [{ without = ["2000-01", "2000-03"] }] }
"""


@pytest.mark.parametrize("design", ["full", "two changes"])
def test_check_announces_what_run_stores(tmp_path: Path, design: str) -> None:
    tail = f'{AXES}\n[sweep]\ndesign = "{design}"\n{REQUEST}'
    plan = small_plans.write_plan(tmp_path, tail, EXOGENOUS)
    announced = Counter[tuple[str, str]]()
    found = sweep.check(plan)
    for item in found.ruled_out:
        announced[item.finding, item.because] += item.specifications
    results = sweep.run(plan, jobs=1)
    frame = results.outcomes(["finding", "status", "reason", "origin", "reverse_status"])
    lost = frame[frame["status"] == "not applicable"]
    assert dict(announced) == lost.groupby(["finding", "reason"], observed=True).size().to_dict()
    assert {name for name, _ in announced} == {"x leads y", "x leads y beside v"}
    assert len({because for _, because in announced}) == (2 if design == "full" else 1)
    assert (lost["reverse_status"] == "not applicable").all()
    planned = frame[frame["origin"] == "planned"]
    for name, count, to_run in found.findings:
        mine = planned[planned["finding"] == name]
        assert (count, to_run) == (len(mine), (mine["status"] != "not applicable").sum())


def test_a_filter_across_an_episode_is_not_applicable_whatever_picks_the_lags(
    tmp_path: Path,
) -> None:
    """A criterion finds no rows there; that is no shortness of the window."""
    axes = AXES.split("[[rule_out]]", maxsplit=1)[0]
    results = sweep.run(small_plans.write_plan(tmp_path, axes, EXOGENOUS), jobs=1)
    frame = results.outcomes(
        ["status", "reason", "lags_choice", "transformation", "window_name"],
        where="transformation = 'Hodrick-Prescott cycle' AND window_name LIKE 'without%'",
    )
    assert frame["lags_choice"].nunique() == 5
    assert set(frame["status"]) == {"not applicable"}
    (reason,) = set(frame["reason"])
    assert "free of the episode left out" in reason
