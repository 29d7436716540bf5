"""CSV files, read with the standard library so that a fault can name its line."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Sequence
from pathlib import Path

from sweep.errors import Fault, InputFault
from sweep.panel.cells import is_blank
from sweep.panel.table import Table, header_faults

__all__ = ["read_csv"]

_DELIMITERS = {";": "semicolons", "\t": "tabs", "|": "vertical bars", " ": "spaces"}
_SHOWN = 3


def _decode(path: Path, content: bytes) -> str:
    mend = "Save the file again as UTF-8."
    if content[:2] in (b"\xff\xfe", b"\xfe\xff"):
        raise InputFault(Fault(str(path), "the text is written in UTF-16, not UTF-8", mend))
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        problem = (
            f"the text is not UTF-8 (byte {content[error.start]:#04x} on line {line}); "
            "it may be Latin-1 or Windows-1252"
        )
        raise InputFault(Fault(str(path), problem, mend)) from None
    if "\0" in text:
        line = text.count("\n", 0, text.index("\0")) + 1
        problem = f"there is a zero byte on line {line}, so this is no plain text"
        raise InputFault(Fault(str(path), problem, mend))
    return text


def _wrong_delimiter(path: Path, lines: list[str]) -> Fault | None:
    """Say which sign stands between the fields, where it is not a comma."""
    head = [line for line in lines[:20] if line.strip()]
    if _splits_evenly([len(line.split(",")) for line in head]):
        return None
    for sign, words in _DELIMITERS.items():
        if _splits_evenly([len(line.split(None if sign == " " else sign)) for line in head]):
            problem = f"the fields look separated by {words}, not by commas"
            mend = "Save the file again with commas between fields and points in decimal numbers."
            return Fault(f"{path.name}, line 1", problem, mend)
    return None


def _splits_evenly(parts: list[int]) -> bool:
    """Say whether most lines have as many parts as the first, and more than one."""
    return parts[0] > 1 and parts.count(parts[0]) * 2 > len(parts)


def _csv_rows(path: Path, text: str) -> Iterable[tuple[int, list[str]]]:
    """Yield the line on which each record starts, and its cells; skip blank lines."""
    reader = csv.reader(io.StringIO(text, newline=""), strict=True, skipinitialspace=True)
    line = 1
    try:
        for record in reader:
            if record:
                yield line, [cell.strip() for cell in record]
            line = reader.line_num + 1
    except csv.Error as error:
        problem = f"the record cannot be read ({error})"
        mend = "Look for a quotation mark that is not closed."
        raise InputFault(Fault(f"{path.name}, line {line}", problem, mend)) from None


def read_csv(path: Path, content: bytes, digest: str) -> Table:
    """Read the content of a CSV file: UTF-8, commas between fields.

    Raises
    ------
    InputFault
        If the encoding, the delimiter or the quotation marks are wrong.
    """
    text = _decode(path, content)
    if not text.strip():
        raise InputFault(
            Fault(str(path), "the file is empty", "It needs a header and a row for each period.")
        )
    wrong = _wrong_delimiter(path, text.splitlines())
    if wrong:
        raise InputFault(wrong)
    records = list(_csv_rows(path, text))
    while len(records) > 1 and all(is_blank(cell) for cell in records[-1][1]):
        records.pop()  # spreadsheets leave rows of bare commas behind
    (first, header), rows = records[0], records[1:]
    faults = header_faults(f"{path.name}, line {first}", header)
    faults += _ragged_faults(path, len(header), rows)
    width = len(header)
    padded = [[*cells, *[""] * (width - len(cells))][:width] for _, cells in rows]
    columns: tuple[list[object], ...] = tuple(
        [cells[place] for cells in padded] for place in range(width)
    )
    lines = tuple(line for line, _ in rows)
    ragged = frozenset(row for row, (_, cells) in enumerate(rows) if len(cells) != width)
    return Table(path, tuple(header), columns, lines, "line", digest, tuple(faults), ragged)


def _ragged_faults(path: Path, width: int, rows: Sequence[tuple[int, list[str]]]) -> list[Fault]:
    ragged = [(line, cells) for line, cells in rows if len(cells) != width]
    if not ragged:
        return []
    line, cells = ragged[0]
    others = [str(other) for other, _ in ragged[1:_SHOWN]]
    if len(ragged) > _SHOWN:
        others.append(f"{len(ragged) - _SHOWN} more")
    more = f" (likewise on {', '.join(others)})" if others else ""
    problem = f"there are {len(cells)} cells where the header has {width}{more}"
    mend = "Every line needs as many cells as the header."
    if len(cells) > width:
        mend += " Numbers take a decimal point; a comma starts a new cell."
    return [Fault(f"{path.name}, line {line}", problem, mend)]
