"""A comparison as one self-contained HTML page."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from importlib.resources import files
from typing import TYPE_CHECKING, Any

import jinja2
from markupsafe import Markup

from .notes import CAUTIONS
from .page import still
from .tables.writers import as_html

if TYPE_CHECKING:
    from .tables.model import Table

__all__ = ["comparison_page"]


def comparison_page(
    title: str,
    remarks: Sequence[str],
    summary: Sequence[tuple[str, Sequence[str]]],
    figures: Mapping[str, Sequence[tuple[str, str]]],
    tables: Mapping[str, Sequence[Table]],
    shared: Sequence[Table],
) -> str:
    """Write a comparison as HTML that needs no other file and no network.

    Parameters
    ----------
    title : str
        What is compared.
    remarks : sequence of str
        Sentences on the whole.
    summary : sequence of (str, sequence of str)
        Finding and sentences.
    figures : mapping of str to sequence of (str, str)
        For each finding its drawings (SVG text) with their text alternatives.
    tables : mapping of str to sequence of Table
        For each finding.
    shared : sequence of Table
        Tables of no finding.
    """
    folder = files(__package__)
    environment = jinja2.Environment(
        autoescape=True, undefined=jinja2.StrictUndefined, trim_blocks=True, lstrip_blocks=True
    )
    template = environment.from_string(
        (folder / "comparison.html.j2").read_text(encoding="utf-8")
    )
    number = 0
    sections: list[dict[str, Any]] = []
    for name, sentences in summary:
        drawn = []
        for drawing, words in figures.get(name, ()):
            number += 1
            drawn.append({"number": number, "still": still(drawing, number), "words": words})
        sections.append(
            {
                "anchor": f"finding-{len(sections) + 1}",
                "name": name,
                "sentences": sentences,
                "figures": drawn,
                "tables": [Markup(as_html(table)) for table in tables.get(name, ())],
            }
        )
    return template.render(
        title=title,
        remarks=remarks,
        sections=sections,
        shared=[Markup(as_html(table)) for table in shared],
        style=Markup((folder / "page.css").read_text(encoding="utf-8")),
        cautions=CAUTIONS,
    )
