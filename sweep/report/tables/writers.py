"""Tables as HTML, Markdown and CSV."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable
from html import escape
from typing import Any

from sweep.verdicts.words import missing, period_text

from .model import Table, cell_text

__all__ = ["WRITERS", "as_csv", "as_html", "as_markdown"]

# Leading characters that spreadsheets take for a formula.
_FORMULA = ("=", "+", "-", "@", "\t", "\r")


def as_html(table: Table) -> str:
    """Write a table as an HTML ``table`` with caption, scopes and notes; all text escaped."""
    numeric = ' class="n"'
    parts = [f"<table><caption>{escape(table.title)}</caption>", "<thead><tr>"]
    parts += [
        f'<th scope="col"{numeric if column.right else ""}>{escape(column.heading)}</th>'
        for column in table.columns
    ]
    parts.append("</tr></thead><tbody>")
    before: tuple[Any, ...] | None = None
    for row in table.rows:
        group = row[: table.group]
        first = bool(table.group) and group != before
        before = group
        parts.append('<tr class="first">' if first else "<tr>")
        for number, (value, column) in enumerate(zip(row, table.columns, strict=True)):
            text = escape(cell_text(value, column.kind))
            attributes = numeric if column.right else ""
            if number == table.group:
                parts.append(f'<th scope="row"{attributes}>{text}</th>')
            else:
                parts.append(f"<td{attributes}>{text}</td>")
        parts.append("</tr>")
    parts.append("</tbody></table>")
    if table.notes:
        parts.append(f'<p class="note">{escape(" ".join(table.notes))}</p>')
    return "".join(parts)


def as_markdown(table: Table) -> str:
    """Write a table as Markdown, with characters that would be read as markup escaped."""

    def line(cells: list[str]) -> str:
        return "| " + " | ".join(_plain(cell) for cell in cells) + " |"

    parts = [f"**{_plain(table.title)}**", ""]
    parts.append(line([column.heading for column in table.columns]))
    parts.append(
        "|" + "|".join(" ---: " if column.right else " --- " for column in table.columns) + "|"
    )
    parts += [
        line([cell_text(value, c.kind) for value, c in zip(row, table.columns, strict=True)])
        for row in table.rows
    ]
    if table.notes:
        parts += ["", _plain(" ".join(table.notes))]
    return "\n".join(parts) + "\n"


def _plain(text: str) -> str:
    for mark in ("\\", "|", "*", "_", "`", "[", "]"):
        text = text.replace(mark, "\\" + mark)
    return " ".join(text.replace("<", "&lt;").replace(">", "&gt;").split())


def as_csv(table: Table) -> str:
    """Write a table's values in full precision, empty where there is none.

    Text that a spreadsheet would run as a formula gets an apostrophe in front.
    """
    buffer = io.StringIO()
    writer = csv.writer(buffer, lineterminator="\n")
    writer.writerow([column.field for column in table.columns])
    for row in table.rows:
        writer.writerow(
            [_raw(value, column.kind) for value, column in zip(row, table.columns, strict=True)]
        )
    return buffer.getvalue()


def _raw(value: Any, kind: str) -> str:
    if missing(value):
        return ""
    if kind == "date":
        return period_text(value)
    if kind == "count":
        return str(int(value))
    if kind in ("share", "p", "number"):
        return repr(float(value))
    text = ("yes" if value else "no") if isinstance(value, bool) else str(value)
    return "'" + text if text.startswith(_FORMULA) else text


WRITERS: dict[str, Callable[[Table], str]] = {
    "html": as_html,
    "markdown": as_markdown,
    "csv": as_csv,
}
