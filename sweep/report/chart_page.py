"""One chart as a self-contained HTML page that opens offline and shows numbers when pointed at."""

from __future__ import annotations

from importlib.resources import files
from typing import TYPE_CHECKING

import jinja2
from markupsafe import Markup

from sweep.charts.render import svg

from .library import Library
from .notes import CAUTIONS
from .page import script_json, still

if TYPE_CHECKING:
    from .chart_files import DrawnChart

__all__ = ["chart_page"]


def chart_page(drawn: DrawnChart) -> str:
    """Write a chart as a document that needs no other file and no network.

    Parameters
    ----------
    drawn : DrawnChart
        Every string in it may come from a user's files and is escaped.
    """
    folder = files(__package__)
    environment = jinja2.Environment(
        autoescape=True, undefined=jinja2.StrictUndefined, trim_blocks=True, lstrip_blocks=True
    )
    template = environment.from_string((folder / "chart.html.j2").read_text(encoding="utf-8"))
    return template.render(
        name=drawn.name,
        question=drawn.question,
        title=drawn.title,
        statement=drawn.statement,
        words=drawn.words,
        cautions=CAUTIONS,
        still=still(svg(drawn.plain), 1),
        json=script_json(drawn.plain),
        style=Markup((folder / "page.css").read_text(encoding="utf-8")),
        script=Markup((folder / "page.js").read_text(encoding="utf-8")),
        bundle=Library().script(),
    )
