"""Contract of the family of tables and of their writers."""

import csv
import io
from html.parser import HTMLParser

import pytest

from sweep.charts.context import context_of
from sweep.report.tables import TABLES, WRITERS, Column, Table

HOSTILE = "=cmd()|<script>alert(1)</script>\"'_*"


class Cells(HTMLParser):
    """Tags seen and text by cell."""

    def __init__(self):
        super().__init__()
        self.tags, self.rows, self.text = [], [], None

    def handle_starttag(self, tag, attrs):
        self.tags.append(tag)
        if tag == "tr":
            self.rows.append([])
        if tag in ("td", "th"):
            self.text = ""

    def handle_data(self, data):
        if self.text is not None:
            self.text += data

    def handle_endtag(self, tag):
        if tag in ("td", "th"):
            self.rows[-1].append(self.text)
            self.text = None


@pytest.fixture(scope="module", params=["usual", "hostile"])
def case(request, sweeps):
    sweep = sweeps.crowded(6)
    if request.param == "hostile":
        sweep = sweeps.crowded(6, cause=HOSTILE)
        sweep.deterministics = ["constant", HOSTILE]
    frames = sweeps.frames_of(sweep)
    context = context_of(
        sweeps.finding_of(sweep), frames["survival"], significance=0.05, title="A title"
    )
    return frames, context


@pytest.mark.parametrize("name", TABLES)
def test_every_table_is_written_in_every_format(case, name):
    frames, context = case
    module = TABLES[name]
    table = module.build({need: frames[need] for need in module.NEEDS}, context)
    assert table.name == module.NAME == name
    assert context.statement in table.title
    # The notes stand alone: finding, level, what was planned, what was left out.
    notes = " ".join(table.notes)
    assert context.lead in notes
    assert context.losses in notes
    assert module.SHOWS
    page = Cells()
    page.feed(WRITERS["html"](table))
    assert page.tags.count("table") == page.tags.count("caption") == 1
    assert "script" not in page.tags
    body = [row for row in page.rows[1:] if len(row) > 1]
    assert len(body) == len(table.rows)
    lines = WRITERS["markdown"](table).splitlines()
    assert sum(line.startswith("| ") for line in lines) == len(table.rows) + 2
    assert "<script" not in "\n".join(lines)
    rows = list(csv.reader(io.StringIO(WRITERS["csv"](table))))
    assert len(rows) == len(table.rows) + 1
    assert len({*rows[0]}) == len(table.only("data").columns)
    assert not any(cell.startswith(("=", "+", "@")) for row in rows for cell in row)


@pytest.mark.parametrize("name", TABLES)
def test_every_table_can_be_empty(case, name):
    frames, context = case
    module = TABLES[name]
    none = {
        need: frames[need].iloc[:0] if need != "survival" else frames[need].iloc[:1]
        for need in module.NEEDS
    }
    table = module.build(none, context)
    for writer in WRITERS.values():
        assert writer(table).strip()


def test_survival_table_holds_every_count(case):
    frames, context = case
    table = TABLES["survival"].build(frames, context)
    rows = list(csv.DictReader(io.StringIO(WRITERS["csv"](table))))
    assert len(rows) == len(frames["survival"])
    for written, row in zip(rows, frames["survival"].to_dict("records"), strict=True):
        for name in ("planned", "not_applicable", "infeasible", "failed", "screened_out",
                     "admissible", "survived", "other_sign", "distinct"):  # fmt: skip
            assert int(written[name]) == row[name]
        assert float(written["headline_share"]) == row["headline_share"]


def test_single_changes_table_says_what_turned(case):
    frames, context = case
    table = TABLES["single changes"].build(frames, context)
    rows = list(csv.DictReader(io.StringIO(WRITERS["csv"](table))))
    turned = sum(int(row["flips"]) for row in rows)
    assert turned == int(frames["single_changes"]["flips"].sum())


def test_directions_stand_in_a_fixed_order(case):
    frames, context = case
    table = TABLES["directions"].build(frames, context)
    headings = [column.heading for column in table.columns]
    assert headings[3:8] == ["One way", "Reverse", "Both ways", "Neither rejected", "Undetermined"]
    for row in table.rows:
        assert row[2] == sum(row[3:8])


SMALL = Table(
    "small",
    "A <b>title</b>",
    (Column("Name"), Column("Share", "share"), Column("p", "p"), Column("Rows", "count")),
    (("a|b", 0.9999, 0.0, 1200), ("-x", None, 0.5, None)),
    ("A note with <tags>.",),
)


def test_html_escapes_and_formats():
    text = WRITERS["html"](SMALL)
    assert "<caption>A &lt;b&gt;title&lt;/b&gt;</caption>" in text
    assert '<td class="n">&gt;99%</td><td class="n">&lt;0.001</td><td class="n">1,200</td>' in text
    assert '<th scope="row">a|b</th>' in text
    assert "A note with &lt;tags&gt;." in text


def test_markdown_escapes_the_bars_of_cells():
    assert "| a\\|b | &gt;99% | &lt;0.001 | 1,200 |" in WRITERS["markdown"](SMALL)


def test_csv_keeps_full_precision_and_starts_no_formula():
    rows = list(csv.reader(io.StringIO(WRITERS["csv"](SMALL))))
    assert rows == [
        ["name", "share", "p", "rows"],
        ["a|b", "0.9999", "0.0", "1200"],
        ["'-x", "", "0.5", ""],
    ]


def test_ragged_rows_are_refused():
    with pytest.raises(ValueError, match="a row has 1 values for 2 columns"):
        Table("t", "T", (Column("A"), Column("B")), (("only",),))


def test_the_first_rows_say_how_many_follow():
    some = SMALL.first(1)
    assert some.rows == SMALL.rows[:1]
    assert some.notes[-1] == "The first 1 of 2 rows are shown; 1 left out."
    assert SMALL.first(2) is SMALL
    assert SMALL.first(None) is SMALL


def test_columns_appear_where_they_are_wanted():
    table = Table(
        "t", "T", (Column("A"), Column("B", within=("data",)), Column("C", within=("print",))),
        (("a", "b", "c"),),
    )  # fmt: skip
    assert "b" not in WRITERS["markdown"](table).splitlines()[4]
    assert WRITERS["csv"](table) == "a,b\na,b\n"
    assert ">c<" not in WRITERS["html"](table)


@pytest.mark.parametrize("claim", ["leads", "leads one way"])
def test_what_turned_is_a_column_where_it_says_something(sweeps, claim):
    sweep = sweeps.Sweep(claim=claim, centre=3.2, seed=1)
    frames = sweeps.frames_of(sweep)
    context = context_of(
        sweeps.finding_of(sweep), frames["survival"], significance=0.05, title="A title"
    )
    for name in ("single changes", "flips"):
        table = TABLES[name].build(frames, context)
        headings = [column.heading for column in table.only("page").columns]
        for heading in ("Turned by", "Change in reverse z"):
            assert (heading in headings) == (claim == "leads one way"), (name, heading)
        fields = [column.field for column in table.only("data").columns]
        assert {"turned_by", "reverse_z_change"} <= set(fields)
