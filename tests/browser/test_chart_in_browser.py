"""The page of a single chart in a real browser: offline, drawn, hostile names inert."""

from __future__ import annotations

import counted_frames
import pytest
import report_pages
from test_report_in_browser import PROBE, browse, pytestmark  # noqa: F401 - marks this module

from sweep.charts import CHARTS
from sweep.charts.context import context_of
from sweep.report.chart_files import FORMATS, draw_chart


@pytest.fixture(scope="module", params=["two axes", "specification curve"])
def dom(request, tmp_path_factory):
    folder = tmp_path_factory.mktemp("chart")
    assert request.param in CHARTS
    hostile = report_pages.HOSTILE
    made = counted_frames.Sweep(
        cause=hostile, given=hostile, lags=["4", hostile], window=["full sample", "before 2009"],
        moving={}, transformation=["log", f"{hostile} again"],
    )  # fmt: skip
    frames = counted_frames.frames_of(made)
    context = context_of(
        counted_frames.finding_of(made), frames["survival"], significance=0.05, title=hostile
    )
    page = folder / "chart.html"
    text = FORMATS["html"](draw_chart(request.param, frames, context, "wide", {})).decode()
    before, _, after = text.rpartition("</body>")
    page.write_text(before + PROBE + after, encoding="utf-8")
    return browse(page, folder, "--dump-dom")


def test_the_figure_is_drawn_and_nothing_is_loaded_or_run(dom):
    assert 'data-figures-drawn="1"' in dom
    assert 'data-loaded="0"' in dom
    assert 'data-hit="undefined"' in dom
    assert 'data-images="0"' in dom


def test_numbers_show_at_the_pointer(dom):
    tips = dom.partition('data-tips="')[2].partition('"')[0]
    assert "weighted share" in tips or "p-value" in tips
