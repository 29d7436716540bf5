"""What objects show in a notebook: complete, inert, and without anything to fetch."""

from __future__ import annotations

import base64
import re
import socket
import xml.etree.ElementTree as ET
from html.parser import HTMLParser
from pathlib import Path
from typing import Any

import altair
import pytest
import small_plans

import sweep
from sweep.charts import CHARTS
from sweep.report.tables import TABLES
from sweep.results import Results

HOSTILE = '<script>hit()</script><img src="http://127.0.0.1/x" onerror="hit()">'
TAIL = (
    '[axes]\nlags = [1, 2, "AIC"]\n'
    'windows = ["full sample", { rolling = 80, step = 20, because = "<b>because</b>" }]\n'
    "[[rule_out]]\nwhen = { lags = [1], window = [\"rolling 80, step 20\"] }\n"
    f"because = '''{HOSTILE}'''\n"
)
KNOWN = {"p", "strong", "table", "caption", "thead", "tbody", "tr", "th", "td", "ul", "li"}


class Seen(HTMLParser):
    """Collects elements, their attributes and the words between them; checks that they close."""

    def __init__(self) -> None:
        super().__init__()
        self.elements: set[str] = set()
        self.attributes: set[str] = set()
        self.open: list[str] = []
        self.words = ""

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.add(tag)
        self.attributes |= {name for name, _ in attrs}
        self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        self.words += data


def seen(shown: Any) -> Seen:
    parser = Seen()
    parser.feed(shown._repr_html_())
    parser.close()
    assert not parser.open
    assert parser.elements <= KNOWN
    assert parser.attributes <= {"style", "scope", "class", "colspan"}
    return parser


@pytest.fixture(scope="module")
def plan_path(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = small_plans.write_plan(tmp_path_factory.mktemp("shown"), TAIL)
    text = path.read_text(encoding="utf-8").replace('"A small plan"', f"'''{HOSTILE}'''")
    path.write_text(text, encoding="utf-8")
    return path


@pytest.fixture(scope="module")
def results(plan_path: Path) -> Results:
    return sweep.run(plan_path, jobs=1)


@pytest.fixture(autouse=True)
def no_network(monkeypatch: pytest.MonkeyPatch) -> None:
    def refused(*arguments: object, **settings: object) -> None:
        raise AssertionError("something reached for the network")

    monkeypatch.setattr(socket.socket, "connect", refused)
    monkeypatch.setattr(socket, "getaddrinfo", refused)


def test_a_plan(plan_path: Path) -> None:
    plan = sweep.load_plan(plan_path)
    assert repr(plan) == f"Plan plan.toml: {HOSTILE}"
    shown = seen(plan)
    assert HOSTILE in shown.words
    assert "x → y, given z" in shown.words
    assert "rolling 80, step 20" in shown.words
    assert "Ruled out" in shown.words


def test_a_check(plan_path: Path) -> None:
    check = sweep.check(plan_path, jobs=2)
    shown = seen(check)
    assert f"x leads y: {check.planned} specifications" in shown.words
    assert "with 2 workers" in shown.words
    assert "ruled out are" in shown.words
    assert str(check) in shown.words
    assert repr(check).splitlines()[1] == str(check)
    assert str(check).startswith(f"{check.planned} specifications in all; a few seconds")


def test_results(results: Results) -> None:
    shown = seen(results)
    assert HOSTILE in shown.words
    assert "The finding survives in" in shown.words


def test_an_explanation(results: Results) -> None:
    explanation = results.explain()
    shown = seen(explanation)
    assert str(explanation.row["specification"]) in repr(explanation).splitlines()[0]
    for item in explanation.compared:
        assert f"{item.stored:.6g}" in shown.words
    assert "Coefficients of x" in shown.words
    assert "Hypothesis: every lag coefficient" in shown.words
    ruled = results.outcomes(["specification"], "status <> 'ok'")["specification"].iloc[0]
    assert HOSTILE in seen(results.explain(str(ruled))).words


def test_a_verification(results: Results) -> None:
    verification = results.verify(rows=5)
    assert "every stored value came out again" in seen(verification).words
    assert repr(verification).endswith("rows recomputed: every stored value came out again")


@pytest.mark.parametrize("name", TABLES)
def test_a_table(results: Results, name: str) -> None:
    table = results.table(name)
    shown = seen(table)
    assert table.title in shown.words


@pytest.mark.parametrize("name", CHARTS)
def test_a_chart_is_a_picture(results: Results, name: str) -> None:
    """As SVG and PNG; still an object of the drawing library, also after a change."""
    chart = results.chart(name)
    assert isinstance(chart, altair.LayerChart)
    pictures, _ = chart._repr_mimebundle_()
    assert set(pictures) == {"image/svg+xml", "image/png", "text/plain"}
    root = ET.fromstring(pictures["image/svg+xml"])
    assert root.tag == "{http://www.w3.org/2000/svg}svg"
    assert {element.tag.rpartition("}")[2] for element in root.iter()}.isdisjoint(
        {"script", "image", "foreignObject", "a"}
    )
    names = {name for element in root.iter() for name in element.attrib}
    assert not {name for name in names if re.search(r"href|src|^on", name)}
    assert base64.b64decode(pictures["image/png"])[:8] == b"\x89PNG\r\n\x1a\n"
    assert pictures["text/plain"].endswith(".")
    changed = chart.properties(height=chart.height + 10)
    assert isinstance(changed, altair.LayerChart)
    assert changed._repr_mimebundle_()[0]["image/svg+xml"].startswith("<svg")


def test_a_chart_with_another_title_is_drawn_too(results: Results) -> None:
    """The quick drawer does not know a plain title; the library's own drawer takes over."""
    changed = results.chart("survival by choice").properties(title="Another title")
    drawn = changed._repr_mimebundle_()[0]["image/svg+xml"]
    assert "Another title" in drawn
