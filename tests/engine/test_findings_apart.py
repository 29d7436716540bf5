"""Findings with samples of their own: what one of them cannot do leaves the others alone."""

from __future__ import annotations

from pathlib import Path

import pandas as pd
import pytest
import small_plans

import sweep
from sweep.errors import InputFault

LATE = """
[[findings]]
name = "w leads y"
cause = "w"
effect = "y"
"""
"""w exists from 1998-01 on: 64 months; the other series have 160."""
NO_DATES = "the window leaves no date at which all series of the finding exist"
TOO_LONG = "the moving window is longer than the sample of the finding"
TOO_FEW = "fewer observations than the regression needs"


def write_plan(folder: Path, axes: str, finding: str = LATE) -> Path:
    data = small_plans.write_data(folder)
    frame = pd.read_csv(data)
    frame.loc[frame["month"] < "1998-01", "w"] = None
    frame.to_csv(data, index=False)
    return small_plans.write_plan(folder, f"[axes]\n{axes}\n", finding)


def outcomes(plan: Path) -> pd.DataFrame:
    frame = sweep.run(plan, jobs=1).outcomes()
    return frame[~frame["is_baseline"]].set_index("finding")


@pytest.mark.parametrize(
    ("axes", "reason"),
    [
        ('windows = [{ until = "1996-12" }]', NO_DATES),
        ('windows = [{ from = "1990-06", until = "1997-12" }]', NO_DATES),
        ('windows = [{ without = ["1997-06", "2003-04"] }]', NO_DATES),
        ("windows = [{ rolling = 100, step = 60 }]", TOO_LONG),
        ("windows = [{ expanding = 70, step = 90 }]", TOO_LONG),
        ('windows = [{ from = "1996-01", until = "1998-04" }]', TOO_FEW),
        ("lags = [32]", TOO_FEW),
    ],
)
def test_what_one_finding_cannot_do_is_infeasible_there(
    tmp_path: Path, axes: str, reason: str
) -> None:
    plan = write_plan(tmp_path, axes)
    frame = outcomes(plan)
    late, others = frame.loc[["w leads y"]], frame.loc[["x leads y"]]
    assert (others["status"] == "ok").all()
    assert (late["status"] == "infeasible").all()
    assert (late["reverse_status"] == "infeasible").all()
    assert set(late["reason"]) == {reason}
    assert late["window_start"].notna().all()
    assert sweep.open_results(plan.with_suffix(".duckdb")).verify().agrees
    announced = {(item.finding, item.because): item.specifications
                 for item in sweep.check(plan).ruled_out}  # fmt: skip
    foreseen = {} if reason == TOO_FEW else {("w leads y", reason): len(late)}
    assert announced == foreseen


@pytest.mark.parametrize(
    "window",
    [
        '{ from = "1992-01" }',
        '{ without = ["1993-01", "1993-06"] }',
        '{ without = [["1990-02", "1990-03"], ["1993-01", "1993-06"]] }',
    ],
)
def test_what_lies_before_one_finding_leaves_it_its_full_sample(
    tmp_path: Path, window: str
) -> None:
    plan = write_plan(tmp_path, f'windows = ["full sample", {window}]')
    results = sweep.run(plan, jobs=1)
    frame = results.outcomes()
    late = frame[frame["finding"] == "w leads y"]
    assert len(late) == 2
    assert (late["status"] == "ok").all()
    assert set(late["window_start"].astype(str)) == {"1998-01-01"}
    assert late["computation"].nunique() == late["p_value"].nunique() == 1
    others = frame[frame["finding"] == "x leads y"]
    assert others["computation"].nunique() == 2
    (note,) = sweep.check(plan).notes
    assert note.startswith('w leads y: The windows "full sample" and ')
    assert note.endswith(" hold the same dates.")


def test_a_hole_counts_where_a_finding_uses_it(tmp_path: Path) -> None:
    """A value of w missing in 1999 is in no window of x and y, and in one of w's."""
    data = small_plans.write_data(tmp_path)
    frame = pd.read_csv(data)
    frame.loc[frame["month"] == "1999-05", "w"] = None
    frame.to_csv(data, index=False)
    plan = small_plans.write_plan(tmp_path, "", LATE)
    with pytest.raises(InputFault, match="column w: a value is missing inside the sample: 1999-05"):
        sweep.check(plan)
    spared = 'window = { until = "1999-04" }\n[axes]\nwindows = [{ from = "1999-06" }]'
    sweep.check(small_plans.write_plan(tmp_path, spared, LATE, "spared.toml"))
    sweep.check(small_plans.write_plan(tmp_path, spared + "\n", name="alone.toml"))


@pytest.mark.parametrize(
    ("axes", "message"),
    [
        (
            'windows = [{ from = "1989-12" }]',
            'axes.windows: "from 1989-12": 1989-12 lies outside the sample (1990-01 to 2003-04).',
        ),
        (
            "windows = [{ rolling = 200 }]",
            'axes.windows: "rolling 200": a window of 200 periods is longer than the sample '
            "(160 periods, 1990-01 to 2003-04).",
        ),
        (
            'windows = [{ from = "1999-01", without = ["1997-01", "1997-02"] }]',
            'axes.windows: "from 1999-01, without 1997-01 to 1997-02": the episode 1997-01 to '
            "1997-02 lies outside the window.",
        ),
        (
            'windows = [{ from = "1998-01", until = "1998-06" }]',
            'axes.windows: "from 1998-01 until 1998-06" has 6 periods, fewer than the smallest '
            "regression of any finding needs. Lengthen it or use fewer lags.",
        ),
        (
            "lags = [70]",
            'axes.lags: "70" lags leave no degree of freedom in the longest window of "x leads y" '
            "(160 periods). Use fewer lags or longer windows.",
        ),
    ],
)
def test_what_no_finding_can_do_is_a_fault(tmp_path: Path, axes: str, message: str) -> None:
    with pytest.raises(InputFault) as caught:
        sweep.check(write_plan(tmp_path, axes))
    assert [str(fault) for fault in caught.value.faults] == [message]


def test_a_baseline_that_one_finding_cannot_run_is_said(tmp_path: Path) -> None:
    plan = write_plan(tmp_path, 'windows = ["full sample"]')
    text = plan.read_text(encoding="utf-8").replace(
        'transformation = "level"', 'transformation = "level"\nwindow = { until = "1996-12" }'
    )
    plan.write_text(text, encoding="utf-8")
    results = sweep.run(plan, jobs=1)
    said = dict(results.summary())
    late = " ".join(next(lines for statement, lines in said.items() if "from w to y" in statement))
    assert "The baseline is not admissible" in late
    assert results.report(tmp_path / "report.html").exists()
    assert results.explain("baseline", finding="w leads y").verdict == (
        f"No number: infeasible, because {NO_DATES}.",
    )


def test_one_set_of_windows_serves_every_conditioning_set_and_measure(tmp_path: Path) -> None:
    """z begins 30 months late: pairwise rows and another measure stay on the baseline's dates."""
    data = small_plans.write_data(tmp_path)
    frame = pd.read_csv(data)
    frame.loc[:29, "z"] = None
    frame.to_csv(data, index=False)
    axes = (
        '[axes]\nconditioning = ["given", "pairwise"]\nmeasures = { x = ["x", "w"] }\n'
        'windows = ["full sample", { rolling = 90, step = 40 }]\n'
    )
    found = sweep.run(small_plans.write_plan(tmp_path, axes), jobs=1).outcomes()
    starts = found.groupby("window_name", observed=True)["window_start"]
    assert set(starts.get_group("full sample").astype(str)) == {"1992-07-01"}
    rolling = found[found["window_name"] != "full sample"]
    groups = rolling.groupby(["conditioning", "measures"], observed=True)["window_start"]
    dates = {tuple(sorted(group.astype(str))) for _, group in groups}
    assert dates == {("1992-07-01", "1995-11-01")[: len(next(iter(dates)))]}
    assert (found["status"] == "ok").all()
