"""One self-contained HTML page: it opens offline, loads nothing and prints."""

from __future__ import annotations

import itertools
import json
import re
from dataclasses import dataclass, replace
from importlib.resources import files
from importlib.resources.abc import Traversable
from typing import Any

import jinja2
from markupsafe import Markup

from sweep.charts import CHARTS, absent, chart
from sweep.charts.context import Context
from sweep.charts.render import svg
from sweep.charts.theme import ABSENT, FAILS, SURVIVES, WASH
from sweep.verdicts.survival import axis_sentences
from sweep.verdicts.words import level_text

from . import cube
from .content import (
    FindingContent,
    ReportContent,
    answered,
    baseline_sentence,
    first_lines,
    sizes,
    summary,
)
from .contents import with_contents
from .library import Library
from .tables import PAGE_TABLES, Table
from .tables.writers import as_html

__all__ = ["Figure", "page", "script_json", "still"]

# Most rows of a table on the page; data files hold them all.
_MOST_ROWS = 200

# Rows above which a table is folded away until it is asked for or printed.
_FOLDED = 14

# The page's own parts, in the order in which they build on each other.
_STYLES = ("page.css", "chooser/style.css")
_SCRIPTS = (
    "page.js", "chooser/cube.js", "chooser/selection.js", "chooser/view.js", "chooser/strips.js",
    "chooser/address.js",
)  # fmt: skip

_COLOURS = {"survives": SURVIVES, "fails": FAILS, "absent": ABSENT, "wash": WASH}


@dataclass(frozen=True, slots=True)
class Figure:
    """A figure of the page.

    Attributes
    ----------
    number : int
        Counted through the page, from 1.
    name, question : str
        The chart's name and the question it answers.
    still : Markup
        The drawing itself, complete without scripts.
    json : Markup
        The chart's specification, safe inside a script element.
    words : str
        The text alternative.
    """

    number: int
    name: str
    question: str
    still: Markup
    json: Markup
    words: str


@dataclass(frozen=True, slots=True)
class Tabled:
    """A table of the page.

    Attributes
    ----------
    title : str
        What it shows, without the finding's claim.
    rows : int
        Rows on the page.
    html : Markup
        The table itself.
    """

    title: str
    rows: int
    html: Markup

    @property
    def long(self) -> bool:
        """Whether the table is folded away."""
        return self.rows > _FOLDED


def script_json(value: Any) -> Markup:
    r"""Write JSON that cannot leave a script element, whatever its strings hold.

    Parameters
    ----------
    value : object
        Plain JSON values.

    Examples
    --------
    >>> print(script_json({"name": "</script><b>"}))
    {"name":"\u003c/script\u003e\u003cb\u003e"}
    """
    text = json.dumps(value, ensure_ascii=False, separators=(",", ":"), allow_nan=False)
    for character in "<>&\u2028\u2029":
        text = text.replace(character, f"\\u{ord(character):04x}")
    return Markup(text)


def still(drawing: str, number: int) -> Markup:
    """Prepare SVG text for a page with several drawings: its ids become the figure's own."""
    own = re.sub(r'\bid="([^"<>]*)"', rf'id="figure-{number}-\1"', drawing)
    own = re.sub(r"url\(#([^)<>]*)\)", rf"url(#figure-{number}-\1)", own)
    return Markup(own[own.index("<svg") :])


def _figure(finding: FindingContent, name: str, number: int) -> Figure:
    """Draw one chart of one finding."""
    module = chart(name)
    plain = module.build(finding.frames, finding.context, "wide")
    return Figure(
        number,
        name,
        module.QUESTION,
        still(svg(plain), number),
        script_json(plain),
        module.describe(finding.frames, finding.context),
    )


def _tabled(table: Table, context: Context) -> Tabled:
    """Write one table; claim, level and counts, which a finding says once, are left out."""
    title = table.title.removesuffix(f": {context.statement}.")
    notes = " ".join(table.notes)
    for said in (context.lead, context.losses):
        notes = notes.replace(said, "")
    table = table.dated(context.frequency)
    short = replace(table, title=title, notes=tuple(filter(None, [" ".join(notes.split())])))
    short = short.first(min(table.page_rows or _MOST_ROWS, _MOST_ROWS))
    return Tabled(title, len(short.rows), Markup(as_html(short)))


def _figures(report: ReportContent) -> list[dict[str, Figure]]:
    """Draw every figure: for each finding, its figures by name."""
    number = itertools.count(1)
    return [
        {
            name: _figure(finding, name, next(number))
            for name in CHARTS
            if not absent(name, finding.frames)
        }
        for finding in report.findings
    ]


def _sections(report: ReportContent, drawn: list[dict[str, Figure]]) -> list[dict[str, Any]]:
    sections = []
    for number, (finding, figures) in enumerate(zip(report.findings, drawn, strict=True), start=1):
        tables = {
            name: _tabled(module.build(finding.frames, finding.context), finding.context)
            for name, module in PAGE_TABLES.items()
        }
        # Counts of selections are of stored rows; while rows are missing there are none.
        choices = cube.chooser(finding.frames, finding.context) if not report.unfinished else {}
        sections.append(
            {
                "anchor": f"finding-{number}",
                "number": number,
                "choosing": bool(choices and choices["axes"]) or choices is None,
                "chooser": script_json(choices) if choices else None,
                "name": finding.context.finding,
                "statement": finding.context.statement,
                "baseline": baseline_sentence(finding),
                "summary": summary(finding),
                "by_axis": axis_sentences(finding.frames["survival"]),
                "sizes": sizes(finding),
                "answers": answered(finding),
                "figures": figures,
                "absent": {
                    name: absent(name, finding.frames) for name in CHARTS if name not in figures
                },
                "tables": tables,
                "redundancies": finding.redundancies,
            }
        )
    return sections


def _together(folder: Traversable, names: tuple[str, ...]) -> str:
    return "".join((folder / name).read_text(encoding="utf-8") for name in names)


def page(report: ReportContent, *, library: Library | None = None) -> str:
    """Write the whole report as one HTML document.

    Parameters
    ----------
    report : ReportContent
        What to show; every string in it may come from a user's files and is escaped.
    library : Library or None
        The drawing library, where it is being fetched already.

    Returns
    -------
    str
        A document that needs no other file and no network.
    """
    folder = files(__package__)
    environment = jinja2.Environment(
        autoescape=True,
        undefined=jinja2.StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        loader=jinja2.FunctionLoader(lambda name: (folder / name).read_text(encoding="utf-8")),
    )
    drawn = _figures(report)
    colours = "".join(f"--{name}:{colour};" for name, colour in _COLOURS.items())
    style = Markup(f":root{{{colours}}}\n" + _together(folder, _STYLES))
    script = Markup(_together(folder, _SCRIPTS))
    text = environment.get_template("template.html.j2").render(
        report=report,
        first_lines=first_lines(report),
        level=level_text(report.significance),
        sections=_sections(report, drawn),
        style=style,
        script=script,
        bundle=(library or Library()).script(),
    )
    # Scripts follow the main part; they hold no headings of the page.
    main, end, scripts = text.partition("</main>")
    return with_contents(main) + end + scripts
