"""Tables as HTML, Markdown and CSV; LaTeX has a module of its own."""

from __future__ import annotations

import csv
import io
import itertools
import string
from collections.abc import Callable, Iterable, Iterator
from html import escape
from typing import Any

from sweep.verdicts.words import missing, period_text

from .latex import as_latex
from .model import PRINT_ROWS, Column, Table, cell_text, stars_of

__all__ = ["WRITERS", "as_csv", "as_html", "as_markdown", "csv_parts", "parts"]

# Leading characters that spreadsheets take for a formula.
_FORMULA = ("=", "+", "-", "@", "＝", "＋", "－", "＠")
_BREAKS = ("\t", "\r", "\n")
_HARMLESS = frozenset(string.ascii_letters + string.digits)

# Rows of CSV that are put together at once.
_PORTION = 1000


def as_html(table: Table) -> str:
    """Write a table as an HTML ``table`` with caption, scopes and notes; all text escaped."""
    table = table.only("page")
    columns = table.columns[1:] if table.grouped else table.columns
    parts = [f"<table><caption>{escape(table.title)}</caption>", "<thead><tr>"]
    parts += [f'<th scope="col"{_side(one)}>{escape(one.heading)}</th>' for one in columns]
    parts.append("</tr></thead>")
    if table.grouped:
        for name, rows in itertools.groupby(table.rows, key=lambda row: row[0]):
            heading = escape(cell_text(name, table.columns[0].kind))
            parts.append(
                f'<tbody><tr class="group"><th scope="rowgroup" colspan="{len(columns)}">'
                f"{heading}</th></tr>"
            )
            parts += [_html_row(row[1:], columns) for row in rows]
            parts.append("</tbody>")
    else:
        parts += ["<tbody>", *(_html_row(row, columns) for row in table.rows), "</tbody>"]
    if not table.rows:
        parts.append(f'<tbody><tr><td colspan="{len(columns)}">none</td></tr></tbody>')
    parts.append("</table>")
    if table.notes:
        parts.append(f'<p class="note">{escape(" ".join(table.notes))}</p>')
    return "".join(parts)


def _side(column: Column) -> str:
    if column.kind == "date":
        return ' class="d"'
    return ' class="n"' if column.right else ""


def _html_row(row: tuple[Any, ...], columns: tuple[Column, ...]) -> str:
    """Write one row; its first cell heads it."""
    cells = []
    for number, (value, column) in enumerate(zip(row, columns, strict=True)):
        text = escape(column.text(value))
        if number:
            cells.append(f"<td{_side(column)}>{text}</td>")
        else:
            cells.append(f'<th scope="row"{_side(column)}>{text}</th>')
    return f"<tr>{''.join(cells)}</tr>"


def as_markdown(table: Table) -> str:
    """Write a table as Markdown, with characters that would be read as markup escaped."""
    table = table.only("print")

    def line(cells: list[str]) -> str:
        return "| " + " | ".join(_plain(cell) for cell in cells) + " |"

    parts = [f"**{_plain(table.title)}**", ""]
    parts.append(line([column.heading for column in table.columns]))
    parts.append(
        "|" + "|".join(" ---: " if column.right else " --- " for column in table.columns) + "|"
    )
    group = None
    for row in table.rows:
        cells = [
            column.text(value) + (stars_of(value, column) if table.stars else "")
            for value, column in zip(row, table.columns, strict=True)
        ]
        # The name of a group stands in its first row alone.
        if table.grouped and row[0] == group:
            cells[0] = ""
        group = row[0]
        parts.append(line(cells))
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
    return "".join(csv_parts(table))


def csv_parts(table: Table) -> Iterator[str]:
    """Yield the CSV of a table some rows at a time, as :func:`as_csv` writes it."""
    table = table.only("data")
    write = [_RAW.get(column.kind, _raw_text) for column in table.columns]
    yield _lines([[column.field for column in table.columns]])
    rows = table.every_row()
    while portion := list(itertools.islice(rows, _PORTION)):
        yield _lines(
            ["" if value is None or missing(value) else one(value)
             for value, one in zip(row, write, strict=True)]
            for row in portion
        )


def _lines(rows: Iterable[list[str]]) -> str:
    buffer = io.StringIO()
    csv.writer(buffer, lineterminator="\n").writerows(rows)
    return buffer.getvalue()


def _raw_text(value: Any) -> str:
    """Return a text as a data file holds it, safe in spreadsheets."""
    if isinstance(value, bool):
        return "true" if value else "false"
    text = str(value)
    if text[:1] in _HARMLESS:
        return text
    return "'" + text if text.lstrip().startswith(_FORMULA) or text[:1] in _BREAKS else text


def _raw_number(value: Any) -> str:
    return repr(float(value))


# How values of a kind are written in data files; texts otherwise.
_RAW: dict[str, Callable[[Any], str]] = {
    "date": period_text,
    "mark": lambda value: "true" if value else "false",
    "count": lambda value: str(int(value)),
    "share": _raw_number,
    "p": _raw_number,
    "number": _raw_number,
    "fixed": _raw_number,
}


WRITERS: dict[str, Callable[[Table], str]] = {
    "html": as_html,
    "latex": as_latex,
    "markdown": as_markdown,
    "csv": as_csv,
}


def parts(table: Table, form: str) -> Iterator[str]:
    """Yield the text of a table in a form of ``WRITERS``; print is cut to ``PRINT_ROWS``.

    Raises
    ------
    KeyError
        If there is no such form.
    """
    if form == "csv":
        yield from csv_parts(table)
    else:
        yield WRITERS[form](table.first(PRINT_ROWS))
