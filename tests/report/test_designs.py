"""The report of sweeps that are not the full cross."""

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
    assert f"{counts.survived:,} of {counts.admissible:,} rows" in text
    if rows:
        assert counts.planned == rows
        assert "there is no pooled share" in text
        assert "the weighted share runs" not in text
    else:
        assert "sampling interval" in text
