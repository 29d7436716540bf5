"""The report in a real browser: offline, figures drawn, hostile names inert."""

import os
import re
import shutil
import subprocess

import pytest
import report_pages

from sweep.charts import CHARTS

CHROMIUM = next(
    (
        found
        for name in ("chromium", "chromium-browser", "google-chrome", "chrome")
        if (found := shutil.which(name))
    ),
    None,
)
REQUIRED = os.environ.get("CROSSWIND_BROWSER") == "required"

pytestmark = [
    pytest.mark.browser,
    pytest.mark.skipif(
        CHROMIUM is None and not REQUIRED,
        reason="no Chromium on the path; set CROSSWIND_BROWSER=required to insist",
    ),
]


def browse(page, folder, *options):
    """Open a page headless and return what the browser prints."""
    assert CHROMIUM, "CROSSWIND_BROWSER=required, but there is no Chromium on the path"
    command = [
        CHROMIUM, "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic",
        "--no-first-run", "--disable-background-networking", "--disable-component-update",
        "--disable-sync", f"--user-data-dir={folder / 'profile'}", "--window-size=1000,1400",
        "--virtual-time-budget=15000", *options, page.as_uri(),
    ]  # fmt: skip
    done = subprocess.run(command, capture_output=True, text=True, timeout=120, check=True)
    return done.stdout


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    return tmp_path_factory.mktemp("browser")


PROBE = """<script>
addEventListener("load", function () {
  setTimeout(function () {
    var root = document.documentElement;
    var tips = {};
    document.querySelectorAll("figure .moving svg").forEach(function (drawing) {
      drawing.querySelectorAll(".mark-rect path").forEach(function (mark) {
        var box = mark.getBoundingClientRect();
        var options = {bubbles: true, clientX: box.x + box.width / 2, clientY: box.y + 2};
        mark.dispatchEvent(new PointerEvent("pointermove", options));
        var shown = document.getElementById("vg-tooltip-element");
        if (shown) { tips[shown.textContent] = true; }
      });
    });
    root.setAttribute("data-tips", Object.keys(tips).join(" "));
    root.setAttribute("data-hit", String(window.hit));
    root.setAttribute("data-images", String(document.images.length));
    root.setAttribute(
      "data-loaded", String(performance.getEntriesByType("resource").length));
  }, 3000);
});
</script></body>"""


@pytest.fixture(scope="module")
def dom(folder):
    """The document after its scripts have run, with a probe for anything that got loose."""
    page = folder / "report.html"
    before, _, after = report_pages.written(hostile=True).rpartition("</body>")
    page.write_text(before + PROBE + after, encoding="utf-8")
    return browse(page, folder, "--dump-dom")


def test_every_figure_is_drawn(dom):
    assert f'data-figures-drawn="{2 * len(CHARTS)}"' in dom
    assert not re.search(r"<figure[^>]*data-not-drawn", dom)
    assert dom.count('class="drawn"') == 2 * len(CHARTS)
    assert len(re.findall(r'<div class="moving[^>]*>.*?<svg', dom, flags=re.DOTALL)) >= 2 * len(
        CHARTS
    )


def test_tooltips_show_numbers(dom):
    tips = re.search(r'data-tips="([^"]*)"', dom).group(1)
    for words in ("survived of admissible", "p-value after the change", "quartiles of p"):
        assert tips.count(words) >= 2, words


def test_hostile_names_do_not_run(dom):
    assert 'data-hit="undefined"' in dom
    assert 'data-images="0"' in dom


def test_nothing_is_loaded(dom):
    assert 'data-loaded="0"' in dom


def test_page_prints(folder, dom):
    printed = folder / "report.pdf"
    browse(folder / "report.html", folder, f"--print-to-pdf={printed}", "--no-pdf-header-footer")
    content = printed.read_bytes()
    assert content.startswith(b"%PDF")
    pages = re.search(rb"/Type\s*/Pages.*?/Count (\d+)", content, flags=re.DOTALL)
    assert pages is not None
    assert 4 <= int(pages.group(1)) <= 40
