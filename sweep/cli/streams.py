"""Rows of any length as a table, CSV or JSON, written while they are read."""

from __future__ import annotations

import json
import math
import re
import unicodedata
from collections.abc import Callable, Iterator
from datetime import date, datetime
from decimal import Decimal
from typing import Any

from store.errors import QueryFault

__all__ = ["WRITERS"]

Columns = list[tuple[str, str]]
Rows = list[tuple[Any, ...]]
Portions = Iterator[Rows]

WIDEST = 60
"""Letters to which a column of a table is aligned at the most; longer cells are not cut."""
_QUOTED = re.compile('[,"\n\r]')
# Leading characters that spreadsheets take for a formula.
_FORMULA = ("=", "+", "-", "@", "\t", "\r", "\n")


def as_table(columns: Columns, portions: Portions) -> Iterator[str]:
    """Yield an aligned table; the widths are those of the first portion."""
    first = next(portions, [])
    cells = [[_shown(value) for value in row] for row in first]
    # A portion without numbers in a column says nothing about it.
    right = [
        any(_number(row[j]) for row in first)
        and all(row[j] is None or _number(row[j]) for row in first)
        for j in range(len(columns))
    ]
    width = [
        min(max([_width(name), *(_width(row[j]) for row in cells)]), WIDEST)
        for j, (name, _) in enumerate(columns)
    ]

    def line(texts: list[str]) -> str:
        padded = []
        for text, wide, flush in zip(texts, width, right, strict=True):
            space = " " * max(wide - _width(text), 0)
            padded.append(space + text if flush else text + space)
        return "  ".join(padded).rstrip() + "\n"

    yield line([name for name, _ in columns])
    yield "".join(line(row) for row in cells)
    for rows in portions:
        yield "".join(line([_shown(value) for value in row]) for row in rows)


def as_csv(columns: Columns, portions: Portions) -> Iterator[str]:
    """Yield CSV: nothing for a missing value, two quotes for an empty text."""
    yield ",".join(_field(name) for name, _ in columns) + "\n"
    for rows in portions:
        yield "".join(",".join(_field(value) for value in row) + "\n" for row in rows)


def as_json(columns: Columns, portions: Portions) -> Iterator[str]:
    """Yield a JSON list of objects.

    Raises
    ------
    QueryFault
        If two columns share a name.
    """
    names = [name for name, _ in columns]
    twice = next((name for name in names if names.count(name) > 1), None)
    if twice is not None:
        raise QueryFault(f'Two columns are called "{twice}". Name one of them with AS.')
    between = "[\n"
    for rows in portions:
        records = [
            {name: _plain(value) for name, value in zip(names, row, strict=True)} for row in rows
        ]
        texts = [f" {json.dumps(r, ensure_ascii=False, allow_nan=False)}" for r in records]
        yield between + ",\n".join(texts)
        between = ",\n"
    yield "[]\n" if between == "[\n" else "\n]\n"


WRITERS: dict[str, Callable[[Columns, Portions], Iterator[str]]] = {
    "table": as_table,
    "csv": as_csv,
    "json": as_json,
}


def _number(value: Any) -> bool:
    return isinstance(value, int | float | Decimal) and not isinstance(value, bool)


def _width(text: str) -> int:
    """Return the columns that a text takes on a terminal."""
    if text.isascii():
        return len(text)
    return sum(
        0 if unicodedata.combining(sign) else 2 if unicodedata.east_asian_width(sign) in "WF" else 1
        for sign in text
    )


def _shown(value: Any) -> str:
    """Write a value for people, on one line."""
    if isinstance(value, float):
        return f"{value:.10g}"
    text = "NULL" if value is None else _text(value)
    if text.isprintable():
        return text
    return "".join(sign if sign.isprintable() else " " for sign in text)


def _text(value: Any) -> str:
    """Write a value that is there, in full precision."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, float):
        return repr(value)
    if isinstance(value, datetime | date):
        return value.isoformat()
    if isinstance(value, bytes):
        return value.hex()
    if isinstance(value, list | tuple | dict):
        return json.dumps(_plain(value), ensure_ascii=False)
    return str(value)


def _field(value: Any) -> str:
    """Write one field of CSV; a text that a spreadsheet would run gets an apostrophe."""
    if value is None:
        return ""
    if type(value) is float:
        return repr(value)
    if type(value) is int:
        return str(value)
    text = value if type(value) is str else _text(value)
    if text.startswith(_FORMULA) and not _number(value):
        text = "'" + text
    if text == "" or _QUOTED.search(text):
        return '"' + text.replace('"', '""') + '"'
    return text


def _plain(value: Any) -> Any:
    """Return a value as JSON knows it; numbers without an end become words."""
    if value is None or isinstance(value, bool | int | str):
        return value
    if isinstance(value, float):
        return value if math.isfinite(value) else _word(value)
    if isinstance(value, Decimal):
        return float(value)
    if isinstance(value, list | tuple):
        return [_plain(item) for item in value]
    if isinstance(value, dict):
        return {str(key): _plain(item) for key, item in value.items()}
    return _text(value)


def _word(value: float) -> str:
    if math.isnan(value):
        return "NaN"
    return "Infinity" if value > 0 else "-Infinity"
