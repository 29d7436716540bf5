"""What the report says, and that it loads and runs nothing it should not."""

import dataclasses
import json
import re
from html.parser import HTMLParser

import pytest
import report_pages

from sweep.charts import CHARTS
from sweep.report.content import FRAMES, baseline_sentence, content_of, summary
from sweep.report.notes import CAUTIONS, METHOD_NOTES
from sweep.report.page import script_json, still
from sweep.report.tables import PAGE_TABLES
from sweep.verdicts.survival import headline, overall


class Document(HTMLParser):
    """Elements, attributes and text of a page."""

    def __init__(self, text):
        super().__init__()
        self.elements, self.scripts, self.words, self._open = [], [], [], None
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        self.elements.append((tag, dict(attrs)))
        self._open = tag
        if tag == "script":
            self.scripts.append((dict(attrs), ""))

    def handle_endtag(self, tag):
        self._open = None

    def handle_data(self, data):
        if self._open == "script":
            attributes, text = self.scripts[-1]
            self.scripts[-1] = (attributes, text + data)
        elif self._open != "style":
            self.words.append(data)

    def named(self, tag):
        return [attributes for name, attributes in self.elements if name == tag]

    @property
    def text(self):
        return " ".join(" ".join(self.words).split())


@pytest.fixture(scope="module")
def content():
    return report_pages.content()


@pytest.fixture(scope="module")
def friendly():
    return Document(report_pages.written())


@pytest.fixture(scope="module")
def hostile():
    return Document(report_pages.written(hostile=True))


def test_first_line_says_whether_the_baseline_reproduces(friendly):
    first = friendly.text.index("The baseline reproduces the reported numbers: statistic 3.42")
    assert first < friendly.text.index("The finding survives in")


def test_findings_without_printed_numbers_share_a_line(hostile):
    assert hostile.text.count("was not checked") == 1
    assert hostile.text.count("The baseline reproduces") == 1


def test_headline_with_counts_and_levels(friendly, content):
    counts = overall(content.findings[0].frames["survival"])
    assert f"The finding survives in {headline(counts)}." in friendly.text
    assert re.search(r"weighted share is \S+ at 1%, \S+ at 5% and \S+ at 10%", friendly.text)


def test_every_chart_and_table_is_there(friendly, content):
    assert [one["data-name"] for one in friendly.named("figure")] == list(CHARTS)
    assert len(friendly.named("table")) == len(PAGE_TABLES) == len(friendly.named("caption"))
    for module in PAGE_TABLES.values():
        table = module.build(content.findings[0].frames, content.findings[0].context)
        # The finding says its claim once; captions leave it out.
        title, _, claim = table.title.partition(": ")
        assert title in friendly.text
        assert claim == f"{content.findings[0].context.statement}."


def test_long_tables_are_folded(friendly, content):
    folded = [one for one in friendly.named("details") if one.get("class") == "table"]
    built = [
        module.build(content.findings[0].frames, content.findings[0].context)
        for module in PAGE_TABLES.values()
    ]
    assert len(folded) == sum(len(table.rows) > 14 for table in built) > 0
    assert not any("open" in one for one in folded)
    survival = next(table for table in built if table.name == "survival")
    assert f"Survival by axis and choice ({len(survival.rows)} rows)" in friendly.text


def test_every_part_is_in_the_contents(hostile):
    ids = [one["id"] for _, one in hostile.elements if "id" in one]
    assert len(ids) == len(set(ids))
    links = [link["href"].removeprefix("#") for link in hostile.named("a")]
    for heading in hostile.named("h2"):
        assert links.count(heading["id"]) == 1
    for heading in hostile.named("h3"):
        assert links.count(heading["id"]) == int(heading["id"].startswith("finding"))
    for number in (1, 2):
        for part in ("survival-by-choice", "choose-the-specifications", "direction", "windows"):
            assert f"finding-{number}-name-{part}" in links


def test_the_baseline_is_said_in_words(friendly):
    assert re.search(
        r"In the baseline \(lags 4, deterministics constant, window full sample, transformation "
        r"log difference, test F, conditioning given, measures as named\) the finding "
        r"(holds|does not hold): p [<0-9.]+ from cause to effect and [<0-9.]+ back\.",
        friendly.text,
    )


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"status": "infeasible", "reason": "too short"}, r"\) is infeasible: too short\.$"),
        ({"admissible": False}, r"\) is not admissible: p [<0-9.]+ from .* back\.$"),
        ({"survives": False, "reverse_p_value": None},
         r"\) the finding does not hold: p [<0-9.]+ from cause to effect\.$"),
        ({"lags_choice": None}, r"^The baseline has not been run yet\.$"),
    ],
)  # fmt: skip
def test_a_baseline_of_any_fate_is_said_in_words(content, changes, said):
    finding = content.findings[0]
    frames = finding.frames | {"baseline": finding.frames["baseline"].assign(**changes)}
    assert re.search(said, baseline_sentence(dataclasses.replace(finding, frames=frames)))


def test_losses_redundancies_and_record_are_there(friendly):
    assert "not applicable for an invented reason" in friendly.text
    assert "F in other dress" in friendly.text
    for words in (
        "ab" * 16,
        "0123456789abcdeffedcba9876543210",
        "harbour.csv",
        "2.4.6",
        "A <plan>",
    ):
        assert words in friendly.text


def test_methods_and_cautions_are_there(friendly):
    for note in METHOD_NOTES:
        assert note.heading in friendly.text
    for caution in CAUTIONS:
        assert caution in friendly.text
    said = " ".join(CAUTIONS)
    for words in ("not structural cause", "not the probability", "not yet calibrated",
                  "no reference distribution", "common drivers", "temporal aggregation",
                  "Overlapping windows", "Decisions that rest"):  # fmt: skip
        assert words in said


def test_page_loads_nothing(hostile):
    for tag, attributes in hostile.elements:
        for name in ("src", "srcset", "data", "poster", "action", "background", "ping"):
            assert name not in attributes, (tag, attributes)
        for name in ("href", "xlink:href"):
            assert attributes.get(name, "#").startswith("#"), (tag, attributes)
        assert not any(name.startswith("on") for name in attributes), (tag, attributes)
    assert not hostile.named("link")
    policy = next(one["content"] for one in hostile.named("meta") if "http-equiv" in one)
    assert policy.startswith("default-src 'none'")
    assert "unsafe-eval" not in policy


def test_hostile_names_stay_text(hostile):
    assert not hostile.named("img")
    scripts = [attributes.get("type") for attributes, _ in hostile.scripts]
    assert scripts == ["application/json"] * 2 * (len(CHARTS) + 1) + [None, None]
    for attributes, text in hostile.scripts:
        if attributes.get("type"):
            assert not set("<>&\u2028") & set(text)
            json.loads(text)
        else:
            assert "window.hit" not in text
    assert "window.hit=1" in hostile.text
    assert "{{7*7}}" in hostile.text


def test_figures_have_text_alternatives(friendly):
    ids = [one["id"] for _, one in friendly.elements if "id" in one]
    assert len(ids) == len(set(ids)), "ids of several drawings must not clash"
    images = [one for one in friendly.named("div") if one.get("role") == "img"]
    assert len(images) == 2 * len(CHARTS)
    for image in images:
        assert image["aria-label"].endswith("?")
        assert image["aria-describedby"] in ids


def test_page_is_usable_by_keyboard_and_reader(friendly):
    assert friendly.named("html")[0]["lang"] == "en"
    assert len(friendly.named("main")) == len(friendly.named("h1")) == 1
    ids = {one["id"] for _, one in friendly.elements if "id" in one}
    for link in friendly.named("a"):
        assert link["href"].removeprefix("#") in ids
    scrolling = [one for one in friendly.named("div") if one.get("class") == "scroll"]
    assert len(scrolling) == len(PAGE_TABLES)
    assert all(one["tabindex"] == "0" and one["aria-label"] for one in scrolling)
    assert all("scope" in one for one in friendly.named("th"))


def test_still_figures_are_complete_and_print(friendly):
    page = report_pages.written()
    assert len(friendly.named("svg")) == len(CHARTS)
    assert "@media print" in page
    assert "@page" in page


def test_same_content_same_page(content):
    from sweep.report.page import page

    assert page(content) == page(content)


@pytest.mark.parametrize(
    ("design", "expected", "absent"),
    [
        ("full", "weighted", "sampling interval"),
        ("full", "The finding survives in", "rows drawn"),
        ("one change", "no pooled share", "weighted"),
        ("two changes", "no pooled share", "The finding survives in"),
        ("sample of 5000", "95% sampling interval", "no pooled share"),
        ("sample of 5000", "In the rows drawn, the finding stops holding after", "The finding st"),
    ],
)
def test_summary_follows_the_design(design, expected, absent):
    finding = report_pages.content(design=design).findings[0]
    said = " ".join(summary(finding))
    assert expected in said
    assert absent not in said


def test_one_specification_leaves_nothing_to_choose(sweeps):
    from sweep.report.page import page

    single = sweeps.Sweep(
        lags=["4"], deterministics=["constant"], window=["full sample"],
        transformation=["log"], test=["F"], conditioning=["given"],
    )  # fmt: skip
    frames = {1: sweeps.frames_of(single)}
    report = content_of(report_pages.sweep_info(), [sweeps.finding_of(single)], frames)
    document = Document(page(report))
    assert "Choose the specifications" not in document.text
    assert not [one for one in document.named("div") if one.get("class") == "chooser"]


def test_nothing_admissible_is_said(sweeps):
    sweep = sweeps.crowded(2, not_applicable=("log difference",))
    frames = {1: sweeps.frames_of(sweep)}
    report = content_of(report_pages.sweep_info(), [sweeps.finding_of(sweep)], frames)
    said = summary(report.findings[0])
    assert said[0] == "Nothing can be said: none of 24 planned rows is admissible."
    assert "no share to state" in " ".join(said)


def test_a_missing_frame_is_an_error(sweeps):
    frames = {1: dict.fromkeys(FRAMES[:-1])}
    with pytest.raises(KeyError, match=FRAMES[-1]):
        content_of(report_pages.sweep_info(), [sweeps.finding_of(sweeps.Sweep())], frames)


def test_content_is_frozen(content):
    with pytest.raises(dataclasses.FrozenInstanceError):
        content.title = "another"


def test_script_json_leaves_no_markup():
    value = {"a": "</script><!--", "b": "\u2029&"}
    text = str(script_json(value))
    assert not set("<>&\u2029") & set(text)
    assert json.loads(text) == value


def test_ids_of_a_drawing_become_the_figures_own():
    drawing = '<?xml version="1.0"?><svg><g id="clip0"/><path clip-path="url(#clip0)"/></svg>'
    assert str(still(drawing, 3)) == (
        '<svg><g id="figure-3-clip0"/><path clip-path="url(#figure-3-clip0)"/></svg>'
    )
