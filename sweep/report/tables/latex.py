"""Tables as LaTeX: rules of the booktabs package, notes under the table, decimals below each other.

What is written is a part of a document, ASCII throughout, that says in its first lines which
packages it needs.  Lines of 160 mm are assumed (A4 with margins of 25 mm); a table that is too
wide for them in small type is set on a landscape page.
"""

from __future__ import annotations

import itertools
import re
from collections.abc import Iterator, Sequence
from typing import Any

from sweep.verdicts.words import MISSING

from .latex_layout import SEPARATION, Layout, fit, heading_lines, width_of
from .latex_text import code_points, escaped
from .model import Column, Table, stars_of

__all__ = ["as_latex"]

# Lines that fit under the caption of a float; what has more goes over several pages.
_FLOAT_LINES = 42
_NARROWEST_NOTES = 280.0
_CODES = (
    "Codes such as [U+0041] stand for letters that the fonts of this document do not have."
)


def as_latex(table: Table) -> str:
    """Write a table as a part of a LaTeX document.

    Parameters
    ----------
    table : Table
        Any table; its text may hold any character.

    Returns
    -------
    str
        ASCII.  A float with its notes in a minipage, or where it has many rows or is wide, a
        long table with its notes in the last foot.
    """
    table = table.only("print")
    columns = table.columns[1:] if table.grouped else table.columns
    groups = _groups(table)
    texts = [
        [_plain(value, column, table.stars) for value, column in zip(row, columns, strict=True)]
        for _, rows in groups
        for row in rows
    ]
    layout = fit(columns, texts, sum(bool(name) for name, _ in groups))
    body = _body(columns, groups, table.stars, layout)
    head = _head(columns, layout)
    caption = rf"\caption{{{escaped(table.title)}}}\label{{tab:{table.name.replace(' ', '-')}}}"
    notes = [(note, escaped(note)) for note in table.notes]
    if code_points("".join([*body, *head, caption, *(note for _, note in notes)])):
        notes.append((_CODES, escaped(_CODES)))
    if layout.wide or layout.lines > _FLOAT_LINES:
        parts = _long(layout, len(columns), caption, head, body, notes)
    else:
        parts = _float(layout, caption, head, body, notes)
    return "\n".join([*_needs(layout), *parts]) + "\n"


def _needs(layout: Layout) -> list[str]:
    """Return the comment that says what the part needs of its document."""
    packages = ["array", "booktabs"]
    if layout.wide:
        packages += ["longtable", "pdflscape"]
    elif layout.lines > _FLOAT_LINES:
        packages.append("longtable")
    return [
        f"% Needs \\usepackage{{{','.join(packages)}}} and lines of 160 mm or more, such as",
        r"% \usepackage[a4paper,margin=25mm]{geometry} gives.",
    ]


def _groups(table: Table) -> list[tuple[str, list[tuple[Any, ...]]]]:
    """Return rows by the group that they stand under, without the cell that names it."""
    if not table.grouped:
        return [("", list(table.rows))]
    grouped = itertools.groupby(table.rows, key=lambda row: row[0])
    return [(str(name), [row[1:] for row in rows]) for name, rows in grouped]


def _plain(value: Any, column: Column, stars: bool) -> str:
    """Return a cell as people read it, before it is LaTeX."""
    return column.text(value) + (stars_of(value, column) if stars else "")


def _head(columns: Sequence[Column], layout: Layout) -> list[str]:
    cells = []
    for column, width in zip(columns, layout.widths, strict=True):
        lines = [escaped(line) for line in heading_lines(column, width, layout.points)]
        side = "r" if column.right else "l"
        inner = r"\\".join(lines)
        stacked = rf"\begin{{tabular}}[b]{{@{{}}{side}@{{}}}}{inner}\end{{tabular}}"
        cells.append(stacked if len(lines) > 1 else "".join(lines))
    return [r"\toprule", f"{' & '.join(cells)} \\\\", r"\midrule"]


def _body(
    columns: Sequence[Column],
    groups: list[tuple[str, list[tuple[Any, ...]]]],
    stars: bool,
    layout: Layout,
) -> list[str]:
    """Return the lines of the body, group names above their rows."""
    count, lines = len(columns), []
    places = [_places([row[j] for _, rows in groups for row in rows], column, stars)
              for j, column in enumerate(columns)]  # fmt: skip
    number = 0
    for at, (name, rows) in enumerate(groups):
        if name:
            lines += [r"\addlinespace"] if at else []
            lines.append(_across(layout, count, name, rf"\textit{{{escaped(name)}}}"))
        for _ in rows:
            lines.append(f"{_opening(' & '.join(cells[number] for cells in places))} \\\\")
            number += 1
    if not number:
        lines.append(rf"\multicolumn{{{count}}}{{@{{}}l@{{}}}}{{none}} \\")
    return lines


def _across(layout: Layout, count: int, text: str, latex: str) -> str:
    """Return a row of one cell over all columns, broken into lines only where it must be.

    The star keeps the row that follows on the same page.
    """
    if width_of(text, layout.points) < layout.inner:
        return rf"\multicolumn{{{count}}}{{@{{}}l@{{}}}}{{{latex}}} \\*"
    cell = rf"\raggedright {latex}\strut"
    return rf"\multicolumn{{{count}}}{{@{{}}p{{{layout.inner:.0f}pt}}@{{}}}}{{{cell}}} \\*"


def _opening(line: str) -> str:
    """Keep the first cell of a row from being read as an argument of the row's end before it."""
    return f"{{}}{line}" if line.startswith(("[", "*")) else line


def _places(values: list[Any], column: Column, stars: bool) -> list[str]:
    """Return the cells of one column; decimals of numbers stand below each other."""
    if not column.right or column.kind == "count":
        return [escaped(column.text(value)) for value in values]
    texts = [column.text(value) for value in values]
    signs = [stars_of(value, column) if stars else "" for value in values]
    decimals = [_decimals(text) for text in texts]
    most = max((number for number in decimals if number is not None), default=0)
    longest = max((len(sign) for sign in signs), default=0)
    cells = []
    for text, number, sign in zip(texts, decimals, signs, strict=True):
        cell = _scientific(text)
        if number is not None and number < most:
            missing = "0" * (most - number) if number else "." + "0" * most
            cell += rf"\phantom{{{missing}}}"
        cell += f"$^{{{sign}}}$" if sign else ""
        if len(sign) < longest:
            cell += rf"\phantom{{$^{{{'*' * (longest - len(sign))}}}$}}"
        cells.append(cell)
    return cells


def _decimals(text: str) -> int | None:
    """Return how many digits follow the point; None where a cell holds no plain number."""
    if text == MISSING or "e" in text or text.endswith("%"):
        return None
    return len(text.partition(".")[2])


def _scientific(text: str) -> str:
    """Write a number as LaTeX, powers of ten as such."""
    found = re.fullmatch(r"(−?[\d.]+)e([−+]?)0*(\d+)", text)
    if found is None:
        return escaped(text)
    sign = "-" if found[2] == "−" else ""
    return rf"{escaped(found[1])}$\times10^{{{sign}{found[3]}}}$"


def _float(
    layout: Layout, caption: str, head: list[str], body: list[str], notes: list[tuple[str, str]]
) -> list[str]:
    width = max(layout.width, _NARROWEST_NOTES)
    return [
        r"\begin{table}[htbp]",
        rf"\centering{layout.size}\setlength{{\tabcolsep}}{{{SEPARATION:.0f}pt}}",
        caption,
        r"\par\medskip",
        rf"\begin{{tabular}}{{{layout.columns}}}",
        *head,
        *body,
        r"\bottomrule",
        r"\end{tabular}",
        "",
        r"\smallskip",
        rf"\begin{{minipage}}{{{width:.0f}pt}}\raggedright",
        *_paragraphs([note for _, note in notes]),
        r"\end{minipage}",
        r"\end{table}",
    ]


def _paragraphs(notes: list[str]) -> Iterator[str]:
    for number, note in enumerate(notes):
        if number:
            yield r"\par"
        yield note


def _long(
    layout: Layout,
    count: int,
    caption: str,
    head: list[str],
    body: list[str],
    notes: list[tuple[str, str]],
) -> list[str]:
    parts = [
        rf"\begingroup{layout.size}\setlength{{\tabcolsep}}{{{SEPARATION:.0f}pt}}",
        rf"\setlength{{\LTcapwidth}}{{{max(layout.width, _NARROWEST_NOTES):.0f}pt}}",
        rf"\begin{{longtable}}{{{layout.columns}}}",
        rf"{caption}\\",
        *head,
        r"\endfirsthead",
        rf"\multicolumn{{{count}}}{{@{{}}l}}{{\tablename\ \thetable{{}}, continued}} \\",
        *head,
        r"\endhead",
        r"\midrule",
        rf"\multicolumn{{{count}}}{{@{{}}l}}{{continued on the next page}} \\",
        r"\endfoot",
        r"\bottomrule",
        r"\addlinespace",
        *(_across(layout, count, plain, note) for plain, note in notes),
        r"\endlastfoot",
        *body,
        r"\end{longtable}",
        r"\endgroup",
    ]
    return [r"\begin{landscape}", *parts, r"\end{landscape}"] if layout.wide else parts
