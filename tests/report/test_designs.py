"""The report of sweeps that are not the full cross."""

import re
from pathlib import Path

import pytest
import small_plans

import sweep

AXES = """
[axes]
lags = [1, 2, "AIC"]
windows = ["full sample", { rolling = 80, step = 20 }]
transformations = ["level", "difference"]
[sweep]
design = """


@pytest.mark.parametrize(
    ("design", "rows"),
    [
        ('"one change"', 1 + 2 + 5 + 1),
        ('"two changes"', 1 + 8 + 2 * 5 + 2 + 5),
        ("{ sample = 20 }", 0),
    ],
)
def test_the_report_of_every_design_is_written(tmp_path: Path, design: str, rows: int) -> None:
    results = sweep.run(small_plans.write_plan(tmp_path, AXES + design), jobs=1)
    text = results.report(tmp_path / "page.html").read_text(encoding="utf-8")
    assert text.rstrip().endswith("</html>")
    counts = results.content().findings[0].context.counts
    pooled = f"The finding survives in {counts.survived:,} of {counts.admissible:,} rows"
    if rows:
        assert pooled not in text
        assert counts.planned == rows
        assert "there is no pooled share" in text
        assert "the weighted share runs" not in text
    else:
        assert pooled in text
        assert "sampling interval" in text


def test_dates_are_called_as_the_data_call_their_periods(tmp_path: Path) -> None:
    """Months by month in the report and its tables; data files keep days."""
    results = sweep.run(small_plans.write_plan(tmp_path, AXES + '"full"'), jobs=1)
    text = results.report(tmp_path / "page.html").read_text(encoding="utf-8")
    assert "full sample (1990-01 to 2003-04)" in text
    assert "1990-01-01" not in text
    assert not re.search(r"\d{4}-\d\d-\d\d", re.sub(r'<dd>[^<]*</dd>|"[^"]*"', "", _seen(text)))
    printed = results.table("shortest flips").text("markdown")
    flips = results.content().findings[0].frames["shortest_flips"]
    assert not flips.empty
    assert f"{flips['window_start'].iloc[0]:%Y-%m} " in printed
    assert f"{flips['window_start'].iloc[0]:%Y-%m-%d}" not in printed
    data = results.table("shortest flips").text("csv")
    assert f"{flips['window_start'].iloc[0]:%Y-%m-%d}" in data


def _seen(page: str) -> str:
    """Return a page without its scripts, styles and drawings."""
    return re.sub(r"(?s)<(script|style|svg)\b.*?</\1>", "", page)
