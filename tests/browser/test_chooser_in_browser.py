"""The chooser in a real browser: what a reader ticks is what SQL counts in the store."""

from __future__ import annotations

import itertools
import json
import random
import re
import shutil
import subprocess
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

import driven
import pandas as pd
import pytest
import report_pages
import small_plans
from test_report_in_browser import CHROMIUM, REQUIRED

import sweep
from store import read
from store.database import open_reading
from sweep.report.content import content_of
from sweep.report.page import page
from sweep.results import Results
from sweep.verdicts.directions import WORDS
from sweep.verdicts.words import percent, share_text

pytestmark = [
    pytest.mark.browser,
    pytest.mark.skipif(
        CHROMIUM is None and not REQUIRED,
        reason="no Chromium on the path; set CROSSWIND_BROWSER=required to insist",
    ),
]

AXES = """
[axes]
lags = [1, 2, 3, "AIC", 30]
deterministics = ["constant", "linear trend"]
windows = ["full sample", { rolling = 80, step = 8 }, { without = ["1995-01", "1995-04"] }]
transformations = ["level", "difference"]
tests = ["F", "LR", { test = "F", covariance = "HC3" }]

[[rule_out]]
when = { transformation = ["difference"], lags = [3] }
because = "an invented reason"

[screens]
require = ["enough observations"]
"""
SECOND = """
sign = "positive"

[[findings]]
name = "y does not lead x"
cause = "y"
effect = "x"
given = ["z"]
claim = "does not lead"
"""
READY = "document.documentElement.dataset.choosers"
AXIS_NAMES = ("lags", "deterministics", "window", "transformation", "test", "conditioning",
              "measures")  # fmt: skip
COLUMNS = {"lags": "lags_choice", "window": "window_name"}


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> Results:
    folder = tmp_path_factory.mktemp("store")
    results = sweep.run(small_plans.write_plan(folder, AXES, SECOND), jobs=1)
    results.report()
    return results


@pytest.fixture(scope="module")
def address(results: Results) -> str:
    return results.store.with_suffix(".html").as_uri()


@pytest.fixture(scope="module")
def browser(tmp_path_factory: pytest.TempPathFactory) -> Iterator[driven.Browser]:
    assert CHROMIUM, "CROSSWIND_BROWSER=required, but there is no Chromium on the path"
    with driven.Browser(CHROMIUM, tmp_path_factory.mktemp("profile")) as browser:
        yield browser


def chooser(number: int = 1) -> str:
    return f"document.getElementById('choose-{number}')"


def shown(browser: driven.Browser, number: int = 1) -> dict[str, Any]:
    """Return what a chooser says, as text."""
    text = browser.run(
        f"""(function () {{
          var place = {chooser(number)};
          function texts(found) {{
            return Array.prototype.map.call(place.querySelectorAll(found), function (one) {{
              return one.textContent; }});
          }}
          var axes = {{}};
          place.querySelectorAll("fieldset.axis").forEach(function (axis) {{
            var rows = {{}};
            axis.querySelectorAll("label.choice").forEach(function (row) {{
              var name = row.querySelector(".name").firstChild.textContent;
              rows[name] = [row.querySelector("input").checked,
                row.querySelector(".counts").textContent, row.querySelector(".share").textContent];
            }});
            axes[axis.querySelector("legend").textContent] = rows;
          }});
          return JSON.stringify({{ axes: axes, live: texts(".live")[0],
            selected: texts(".selected")[0], more: texts(".more")[0],
            message: texts(".message")[0], ways: texts(".way"), entries: texts(".entry"),
            level: texts(".levels label:has(:checked)")[0] }});
        }})()"""
    )
    found: dict[str, Any] = json.loads(text)
    return found


def outcomes(results: Results, number: int) -> pd.DataFrame:
    """Return the planned rows of a finding from the store's view of them."""
    with open_reading(results.store) as db:
        frame = db.frame(
            "SELECT * EXCLUDE (lags) FROM outcomes WHERE finding_number = ? AND origin = 'planned'",
            [number - 1],
        )
    return frame.rename(columns={column: axis for axis, column in COLUMNS.items()})


def survives_at(rows: pd.DataFrame, level: float) -> pd.Series:
    """Judge rows of the two findings of this file at another level, by their claims' words."""
    if rows["claim"].iloc[0] == "does not lead":
        return rows["p_value"] > level
    return (rows["p_value"] <= level) & (rows["coefficient_sum"] > 0)


def counted(rows: pd.DataFrame, level: float) -> dict[str, Any]:
    """Count rows as the page should."""
    good = rows[rows["admissible"]]
    holds = survives_at(good, level) if len(good) else good["admissible"]
    weight = good["weight"].sum()
    share = float((good["weight"] * holds).sum() / weight) if weight else None
    if len(good) and holds.all():
        share = 1.0
    return {"good": good, "holds": holds, "share": share, "survived": int(holds.sum())}


def agrees(found: Mapping[str, Any], rows: pd.DataFrame, level: float = 0.05) -> None:
    """Hold everything that a chooser shows against rows of the store."""
    ticked = {
        axis: [name for name, (on, _, _) in choices.items() if on]
        for axis, choices in found["axes"].items()
    }
    chosen = rows
    for axis, names in ticked.items():
        chosen = chosen[chosen[axis].isin(names)]
    whole = counted(chosen, level)
    if all(ticked.values()) and whole["good"].empty:
        assert "none of" in found["live"]
    elif all(ticked.values()):
        many = len(whole["good"])
        assert found["live"].startswith(
            f"The finding survives in {whole['survived']:,} of {many:,} selected row"
        )
        assert f"({percent(whole['survived'] / many)})" in found["live"]
        assert found["live"].endswith(f"; weighted {percent(whole['share'])}.")
        for way, words in zip(("one way", "reverse", "both ways", "neither rejected"),
                              list(WORDS.values())[:4], strict=True):  # fmt: skip
            number = _ways(whole["good"], level).count(way)
            assert f"{words}{share_text(number, many)}" in found["ways"]
    else:
        assert "no choice is ticked" in found["live"]
    for status, count in chosen["counted_as"].value_counts().items():
        if all(ticked.values()) and status != "admissible":
            assert f"{count:,} {status}" in found["more"]
    for axis, choices in found["axes"].items():
        under = rows
        for other, names in ticked.items():
            if other != axis:
                under = under[under[other].isin(names)]
        for name, (_, counts, share) in choices.items():
            own = counted(under[under[axis] == name], level)
            if own["good"].empty:
                assert (counts, share) == ("none admissible", ""), (axis, name)
            else:
                assert counts == f"{own['survived']:,} of {len(own['good']):,}", (axis, name)
                assert share == percent(own["share"]), (axis, name)
    entries = []
    for name in [name for name in rows["window"].drop_duplicates() if name in ticked["window"]]:
        own = counted(chosen[chosen["window"] == name], level)
        text = share_text(own["survived"], len(own["good"]))
        entries.append(f"{name}{text}")
    assert sorted(re.sub(r" in \d+ positions?$", "", one) for one in found["entries"]) == (
        sorted(entries)
    )


def _ways(rows: pd.DataFrame, level: float) -> list[str]:
    found = []
    for row in rows.itertuples():
        if row.reverse_status != "ok":
            found.append("undetermined")
            continue
        forward, reverse = row.p_value <= level, row.reverse_p_value <= level
        found.append({(1, 1): "both ways", (1, 0): "one way", (0, 1): "reverse"}.get(
            (int(forward), int(reverse)), "neither rejected"))  # fmt: skip
    return found


def axis_of(number: int, axis: str) -> str:
    return (
        f"Array.prototype.filter.call({chooser(number)}.querySelectorAll('fieldset.axis'), "
        f"function (one) {{ return one.querySelector('legend').textContent === '{axis}'; }})[0]"
    )


def box(number: int, axis: str, place: int) -> str:
    return f"{axis_of(number, axis)}.querySelectorAll('label.choice')[{place}]"


def tool(number: int, axis: str, place: int) -> str:
    return f"{axis_of(number, axis)}.querySelectorAll('.tools button')[{place}]"


def named(number: int, text: str) -> str:
    return (
        f"Array.prototype.filter.call({chooser(number)}.querySelectorAll('.whole button'), "
        f"function (one) {{ return one.textContent.indexOf('{text}') === 0; }})[0]"
    )


@pytest.mark.parametrize("number", [1, 2])
def test_everything_ticked_is_the_whole_plan(
    browser: driven.Browser, results: Results, address: str, number: int
) -> None:
    browser.show(address, READY)
    found = shown(browser, number)
    assert found["selected"] == "Selected: everything that was planned."
    agrees(found, outcomes(results, number))
    survival = results.survival(finding=number - 1)
    for row in survival[survival["axis"] != "all"].itertuples():
        if row.axis in found["axes"] and row.admissible:
            _, counts, share = found["axes"][row.axis][row.choice]
            assert counts == f"{row.survived:,} of {row.admissible:,}"
            assert share == percent(row.headline_share)


@pytest.mark.parametrize("number", [1, 2])
def test_clicks_are_followed_by_counts(
    browser: driven.Browser, results: Results, address: str, number: int
) -> None:
    browser.show(address, READY)
    rows = outcomes(results, number)
    draw = random.Random(number)
    sizes = {axis: len(choices) for axis, choices in shown(browser, number)["axes"].items()}
    assert sizes == {"lags": 5, "deterministics": 2, "window": 3, "transformation": 2, "test": 3}
    for _ in range(10):
        axis = draw.choice(list(sizes))
        before = shown(browser, number)["axes"][axis]
        place = draw.randrange(sizes[axis])
        browser.click(box(number, axis, place))
        found = shown(browser, number)
        name = list(before)[place]
        assert found["axes"][axis][name][0] is not before[name][0]
        agrees(found, rows)
    browser.click(f"{chooser(number)}.querySelectorAll('.levels label')[2]")
    found = shown(browser, number)
    assert found["level"] == "10%"
    assert "At 10% instead of the plan’s 5%." in found["selected"]
    agrees(found, rows, 0.10)
    browser.click(f"{chooser(number)}.querySelectorAll('.levels label')[0]")
    agrees(shown(browser, number), rows, 0.01)
    # The other finding has stayed as it was.
    assert shown(browser, 3 - number)["selected"] == "Selected: everything that was planned."
    assert browser.faults() == []
    assert browser.requests() == [address]


def test_buttons_tick_what_they_say(
    browser: driven.Browser, results: Results, address: str
) -> None:
    browser.show(address, READY)
    rows = outcomes(results, 1)
    browser.click(tool(1, "lags", 1))
    found = shown(browser)
    assert found["live"] == "Nothing is selected: no choice is ticked under lags."
    assert found["more"] == ""
    agrees(found, rows)
    browser.click(tool(1, "lags", 2))
    found = shown(browser)
    assert [name for name, row in found["axes"]["lags"].items() if row[0]] == ["2"]
    assert found["selected"] == "Selected: lags: 2 (1 of 5)."
    agrees(found, rows)
    browser.click(tool(1, "lags", 0))
    assert shown(browser)["selected"] == "Selected: everything that was planned."
    browser.click(named(1, "Baseline"))
    found = shown(browser)
    agrees(found, rows)
    baseline = rows[rows["is_baseline"]].iloc[0]
    assert f"of 1 selected row ({percent(float(baseline['survives']))})" in found["live"]
    browser.click(named(1, "Start again"))
    assert shown(browser)["selected"] == "Selected: everything that was planned."
    assert "#choose" not in browser.run("location.href")


def test_nothing_admissible_is_said(
    browser: driven.Browser, results: Results, address: str
) -> None:
    browser.show(address, READY)
    browser.click(tool(1, "lags", 1))
    browser.click(box(1, "lags", 4))
    browser.click(tool(1, "window", 1))
    browser.click(box(1, "window", 1))
    found = shown(browser)
    # 30 lags of three series do not fit into windows of 80 months.
    assert found["live"].startswith("Nothing can be said: none of ")
    assert found["axes"]["lags"]["30"][1:] == ["none admissible", ""]
    assert found["ways"] == []
    agrees(found, outcomes(results, 1))


def test_the_address_brings_a_selection_back(
    browser: driven.Browser, results: Results, address: str
) -> None:
    browser.show(address, READY)
    browser.click(box(1, "lags", 0))
    browser.click(box(2, "test", 1))
    browser.click(f"{chooser(2)}.querySelectorAll('.levels label')[0]")
    kept = browser.run("location.href")
    assert "&1.lags=2-5&2.level=1&2.test=1.3" in kept
    assert browser.run(f"{chooser(1)}.querySelector('.whole a').href") == kept
    before = [shown(browser, number) for number in (1, 2)]
    browser.show(kept, READY)
    assert [shown(browser, number) for number in (1, 2)] == before
    agrees(before[1], outcomes(results, 2), 0.01)
    assert browser.run("scrollY") > 500


@pytest.mark.parametrize(
    "wrong",
    ["#choose=00000000&1.lags=1", "CHECK&1.lags=9", "CHECK&1.nothing=1", "CHECK&7.lags=1",
     "CHECK&1.level=3", "CHECK&1.lags=3-1", "CHECK&1.lags=<img src=x onerror=hit()>", "CHECK&"],
)  # fmt: skip
def test_an_address_of_another_report_is_refused_in_words(
    browser: driven.Browser, address: str, wrong: str
) -> None:
    browser.show(address, READY)
    browser.click(box(1, "lags", 0))
    mark = browser.run("location.hash").split("&")[0]
    browser.show(address + wrong.replace("CHECK", mark), READY)
    found = shown(browser)
    assert found["message"].startswith("The link was made for another report")
    assert found["selected"] == "Selected: everything that was planned."
    assert browser.faults() == []


def test_the_keyboard_is_enough(browser: driven.Browser, results: Results, address: str) -> None:
    browser.show(address, READY)
    browser.run(f"{chooser(1)}.querySelector('.levels input:checked').focus()")
    browser.press("ArrowRight")
    assert shown(browser)["level"] == "10%"
    browser.press("ArrowLeft")
    assert shown(browser)["level"] == "5% (the plan’s)"
    # Start again, baseline, link; all, none, baseline's of the lags; then the first choice.
    browser.press("Tab", 7)
    at = "document.activeElement"
    assert browser.run(f"{at}.type") == "checkbox"
    assert browser.run(f"{at} === {box(1, 'lags', 0)}.querySelector('input')")
    outline = f"getComputedStyle({at}).outlineStyle + getComputedStyle({at}).outlineWidth"
    assert browser.run(outline) == "solid3px"
    browser.press("Space")
    found = shown(browser)
    assert found["axes"]["lags"]["1"][0] is False
    agrees(found, outcomes(results, 1))
    browser.press("Tab", shift=True)
    assert browser.run(f"{at}.getAttribute('aria-label')") == "baseline’s lags only"
    assert browser.run(outline) == "solid3px"
    browser.press("Enter")
    assert shown(browser)["selected"] == "Selected: lags: 2 (1 of 5)."
    browser.press("Tab", 1)
    browser.press("Space")
    assert shown(browser)["selected"] == "Selected: lags: 1, 2 (2 of 5)."
    assert browser.run(f"{chooser(1)}.querySelector('.live').getAttribute('aria-live')") == "polite"
    unnamed = browser.run(
        f"Array.prototype.filter.call({chooser(1)}.querySelectorAll('input, button, a'), "
        "function (one) { return !(one.labels && one.labels.length ? "
        "one.labels[0].textContent : one.textContent).trim(); }).length"
    )
    assert unnamed == 0


def test_print_says_what_is_selected(browser: driven.Browser, address: str, tmp_path: Path) -> None:
    browser.show(address, READY)
    browser.click(box(1, "test", 1))
    browser.call("Emulation.setEmulatedMedia", media="print")
    try:
        seen = browser.run(f"{chooser(1)}.innerText")
        whole = browser.run(f"{chooser(2)}.innerText")
        tools = browser.run(f"{chooser(1)}.querySelector('.controls').offsetHeight")
    finally:
        browser.call("Emulation.setEmulatedMedia", media="")
    assert "Selected: test: all but LR (2 of 3)." in seen
    assert "The finding survives in" in seen
    assert "F, HC3" in seen
    assert "LR\n" not in seen
    assert tools == 0
    # Where nothing was left out, the figures above say the same; one paragraph is enough.
    assert "Selected: everything that was planned." in whole
    assert "F, HC3" not in whole
    printed = browser.printed()
    assert printed.startswith(b"%PDF")
    if shutil.which("pdftotext"):
        path = tmp_path / "report.pdf"
        path.write_bytes(printed)
        text = subprocess.run(["pdftotext", "-layout", str(path), "-"], capture_output=True,
                              text=True, check=True).stdout  # fmt: skip
        assert "Selected: test: all but LR (2 of 3)." in text
        assert "Selected: everything that was planned." in text


def test_folded_tables_are_open_on_paper(browser: driven.Browser, address: str) -> None:
    browser.show(address, READY)
    count = "document.querySelectorAll('details.table{}').length"
    folded = browser.run(count.format(""))
    assert folded > 0 == browser.run(count.format("[open]"))
    browser.run("window.dispatchEvent(new Event('beforeprint'))")
    assert browser.run(count.format("[open]")) == folded
    browser.run("window.dispatchEvent(new Event('afterprint'))")
    assert browser.run(count.format("[open]")) == 0


def test_without_scripts_a_note_stands_instead(browser: driven.Browser, address: str) -> None:
    browser.call("Emulation.setScriptExecutionDisabled", value=True)
    try:
        browser.call("Page.navigate", url="about:blank")
        browser.call("Page.navigate", url=address)
        browser.wait(f"document.readyState === 'complete' && {chooser(1)} !== null")
        text = browser.run("document.getElementById('finding-1').innerText")
        hidden = browser.run(f"{chooser(1)}.offsetHeight")
    finally:
        browser.call("Emulation.setScriptExecutionDisabled", value=False)
    assert "Ticking choices needs scripts" in text
    assert hidden == 0


def summed(frame: pd.DataFrame, axes: Sequence[str], size: int) -> pd.DataFrame:
    """Return the crosses of every set of so many axes, summed from the cross of all."""
    other = [name for name in ("weight", "entry_kind", "pool", "window_start", "window_end",
                               "pooled") if name in frame]  # fmt: skip
    keys = [*(axis for axis in AXIS_NAMES if axis in frame), *other]
    parts = [
        frame.assign(**dict.fromkeys(set(axes) - set(kept), -1)).groupby(keys, as_index=False).sum()
        for kept in itertools.combinations(axes, size)
    ]
    return pd.concat(parts)


def limited(results: Results, folder: Path, size: int) -> Path:
    """Write the report as if a page could hold crosses of so many axes only."""
    content = results.content()
    findings = []
    with open_reading(results.store) as db:
        for number, one in enumerate(content.findings):
            cube = read.cube(db, results.sweep, number)
            path = read.cube_windows(db, results.sweep, number)
            own = [axis for axis in AXIS_NAMES if (cube[axis] >= 0).any()]
            others = [axis for axis in own if axis != "window"]
            frames = one.frames | {
                "cube": summed(cube, own, size) if size else cube.iloc[:0],
                "cube_windows": summed(path, others, 1),
            }
            findings.append(replace(one, frames=frames))
    page_path = folder / "limited.html"
    page_path.write_text(page(replace(content, findings=tuple(findings))), encoding="utf-8")
    return page_path


def test_smaller_crosses_count_the_same_and_say_how_far_they_reach(
    browser: driven.Browser, results: Results, tmp_path: Path
) -> None:
    rows = outcomes(results, 1)
    path = limited(results, tmp_path, 2)
    text = path.read_text(encoding="utf-8")
    data = json.loads(re.search(r'id="cube-1">(.*?)</script>', text)[1])
    assert {len(cross["axes"]) for cross in data["crosses"]} == {2}
    browser.show(path.as_uri(), READY)
    assert "choices can be left out on 1 axis at a time" in browser.run(
        f"{chooser(1)}.querySelector('.hint').textContent"
    )
    agrees(shown(browser), rows)
    browser.click(box(1, "lags", 0))
    browser.click(box(1, "lags", 2))
    agrees(shown(browser), rows)
    shut = f"{box(1, 'test', 0)}.querySelector('input').disabled"
    assert browser.run(shut) is True
    browser.click(box(1, "test", 0))
    found = shown(browser)
    assert found["axes"]["test"]["F"][0] is True
    agrees(found, rows)
    browser.click(tool(1, "lags", 0))
    assert browser.run(shut) is False
    browser.click(box(1, "test", 0))
    agrees(shown(browser), rows)
    browser.show(f"{path.as_uri()}{browser.run('location.hash')}&1.lags=2", READY)
    assert shown(browser)["message"].startswith("The link was made for another report")
    assert browser.faults() == []


def test_too_many_choices_leave_a_note(
    browser: driven.Browser, results: Results, tmp_path: Path
) -> None:
    path = limited(results, tmp_path, 0)
    browser.show(path.as_uri(), READY)
    assert browser.run("document.querySelectorAll('.chooser').length") == 0
    assert "more choices than can be combined on a page" in path.read_text(encoding="utf-8")
    assert browser.faults() == []


def test_hostile_names_stay_text(browser: driven.Browser, tmp_path: Path) -> None:
    path = tmp_path / "hostile.html"
    path.write_text(report_pages.written(hostile=True), encoding="utf-8")
    browser.show(path.as_uri(), READY)
    browser.click(box(2, "lags", 1))
    found = shown(browser, 2)
    assert report_pages.HOSTILE in found["axes"]["lags"]
    assert found["selected"].startswith("Selected: lags: 4 (1 of 2)")
    browser.click(box(2, "lags", 1))
    browser.click(box(2, "lags", 0))
    assert f"Selected: lags: {report_pages.HOSTILE} (1 of 2)." == shown(browser, 2)["selected"]
    assert browser.run("window.hit") is None
    assert browser.run("document.images.length") == 0
    assert browser.run(f"{chooser(2)}.querySelectorAll('script, img').length") == 0
    assert browser.requests() == [path.as_uri()]
    assert browser.faults() == []


def test_no_selection_reaches_beyond_a_narrow_window(browser: driven.Browser, address: str) -> None:
    browser.show(address, READY, width=400, height=800)
    assert (
        browser.run(
            f"Array.prototype.filter.call({chooser(1)}.querySelectorAll('*'), function (one) {{ "
            "return one.getBoundingClientRect().right > document.documentElement.clientWidth + 1; "
            "}).map(function (one) { return one.outerHTML.slice(0, 80); }).join()"
        )
        == ""
    )


@pytest.mark.parametrize("design", ["sample of 5000", "one change"])
def test_designs_show_what_they_have(browser: driven.Browser, tmp_path: Path, design: str) -> None:
    path = tmp_path / "design.html"
    path.write_text(report_pages.written(design=design), encoding="utf-8")
    browser.show(path.as_uri(), READY)
    found = shown(browser)
    if design == "one change":
        assert "weighted" not in found["live"]
        assert {share for rows in found["axes"].values() for _, _, share in rows.values()} == {""}
        assert "sampling interval" not in found["more"]
        return
    # The interval is that of the whole share, which the summary gives; a selection has none.
    said = "These rows are a sample of the plan; the summary gives the interval of the whole share."
    assert found["more"].endswith(said)
    browser.click(box(1, "window", 1))
    assert shown(browser)["more"].endswith(said)


def test_many_choices_stay_in_their_box(
    browser: driven.Browser, sweeps: Any, tmp_path: Path
) -> None:
    many = sweeps.crowded(300)
    content = content_of(report_pages.sweep_info(), [sweeps.finding_of(many)],
                         {1: sweeps.frames_of(many)})  # fmt: skip
    path = tmp_path / "many.html"
    path.write_text(page(content), encoding="utf-8")
    browser.show(path.as_uri(), READY)
    browser.click(box(1, "lags", 250))
    assert shown(browser)["selected"] == "Selected: lags: all but 251 (299 of 300)."
    assert browser.run(f"{axis_of(1, 'lags')}.offsetHeight") < 800
