"""Single cells of a data file: numbers, missing values, dates, and what is wrong with them.

Missing is an empty cell, ``NA``, ``NaN`` (in any case) or a full stop.
"""

from __future__ import annotations

import math
import re
from datetime import date, datetime, time
from decimal import Decimal

from sweep.panel.periods import Frequency, as_frequency, parse_period, period_of_cell

__all__ = ["CellError", "is_blank", "looks_like_data", "read_day", "read_number", "shown"]

_MISSING = frozenset({"", "na", "nan", "."})
_DECIMAL_COMMA = re.compile(r"[+-]?\d+,\d+(?:[eE][+-]?\d+)?", re.ASCII)
_THOUSANDS = re.compile(r"[+-]?\d{1,3}(?:,\d{3})+(?:\.\d*)?", re.ASCII)
_DAY_FIRST = re.compile(r"\d{1,2}[./-]\d{1,2}[./-]\d{2,4}", re.ASCII)
_MONTH_LETTER = re.compile(r"(\d{4})[-:]?[mM](\d{1,2})", re.ASCII)
_PACKED = re.compile(r"\d{6}|\d{8}", re.ASCII)
_WITH_MIDNIGHT = re.compile(r"(\d{4}-\d{2}-\d{2})[T ]00:00(?::00(?:\.0+)?)?Z?", re.ASCII)
_OTHER_MINUS = frozenset("\u2212\u2013\u2014")  # minus sign, dashes
_WITH_TIME = re.compile(r"\d{4}-\d{2}-\d{2}[T ]+\d{1,2}:\d{2}.*", re.ASCII)
_DATE_ALONE = "Write the date alone, as 1990-03-15."
_AS_MISSING = "Leave the cell empty (or write NA, NaN or a full stop) where a value is missing."


class CellError(ValueError):
    """A cell that cannot be used.

    Attributes
    ----------
    kind : str
        What is wrong, the same words for every cell with this defect.
    mend : str
        What to do about it.
    """

    def __init__(self, kind: str, mend: str) -> None:
        super().__init__(kind)
        self.kind = kind
        self.mend = mend


def shown(cell: object) -> str:
    """Return a cell in quotation marks, shortened where it is long."""
    text = str(cell)
    return f"“{text if len(text) <= 40 else text[:39] + '…'}”"


def is_blank(cell: object) -> bool:
    """Say whether there is nothing in a cell."""
    return cell is None or (isinstance(cell, str) and not cell.strip())


def read_number(cell: object) -> float:
    """Return a cell as a number, NaN where it is missing.

    Raises
    ------
    CellError
        If the cell holds something else, or a number that is not finite.
    """
    if cell is None:
        return math.nan
    if isinstance(cell, str):
        return _number_in(cell.strip())
    if isinstance(cell, bool) or not isinstance(cell, int | float | Decimal):
        raise CellError("is not a number", "A series needs a number in every cell.")
    try:
        return _finite(float(cell), missing=True)
    except OverflowError:
        return _finite(math.inf, missing=False)


def _number_in(text: str) -> float:
    if text.lower() in _MISSING:
        return math.nan
    try:
        # float() also reads digits of other scripts and underscores, which are slips here.
        value = float(text) if text.isascii() and "_" not in text else None
    except ValueError:
        value = None
    if value is not None:
        return _finite(value, missing=False)
    if _THOUSANDS.fullmatch(text) and ("." in text or text.count(",") > 1):
        raise CellError("has commas between thousands", f"Write {text.replace(',', '')}.")
    if _DECIMAL_COMMA.fullmatch(text):
        mend = f"Numbers take a decimal point: write {text.replace(',', '.')}."
        raise CellError("has a decimal comma", mend)
    if text.endswith("%"):
        raise CellError("has a per cent sign", "Leave the sign out: write the number alone.")
    if text[:1] in _OTHER_MINUS:
        mend = f"Write the minus sign as a hyphen: -{text[1:].strip()}."
        raise CellError("has a typeset minus sign", mend)
    raise CellError("is not a number", _AS_MISSING)


def _finite(value: float, *, missing: bool) -> float:
    if math.isfinite(value) or (missing and math.isnan(value)):
        return value
    raise CellError("is not a finite number", _AS_MISSING)


def read_day(cell: object, frequency: Frequency | str) -> date:
    """Return the (first) day that a cell of the date column names.

    Numbers in Excel and Parquet files are years.  A time of day is allowed where it is
    midnight, which is how some programs write a bare date.

    Raises
    ------
    CellError
        If the cell is blank, is no date, or names more than one period.
    """
    if isinstance(cell, bool) or is_blank(cell):
        raise CellError("is not a date", "Every row needs a date.")
    if isinstance(cell, datetime):
        if cell.time() != time(0):
            raise CellError("has a time of day", _DATE_ALONE)
        cell = cell.date()
    if isinstance(cell, float) and cell.is_integer():
        cell = int(cell)
    if not isinstance(cell, str | int | date):
        raise CellError("is not a date", "Write dates as 1990, 1990-Q1, 1990-03 or 1990-03-15.")
    if isinstance(cell, str):
        midnight = _WITH_MIDNIGHT.fullmatch(cell.strip())
        cell = midnight[1] if midnight else cell.strip()
    try:
        return period_of_cell(cell, frequency)
    except ValueError:
        raise _bad_day(cell, as_frequency(frequency)) from None


def _bad_day(cell: str | int | date, frequency: Frequency) -> CellError:
    text = str(cell)
    try:
        parse_period(cell, frequency)
    except ValueError:
        pass
    else:
        mend = f"Each row is one {frequency.unit}: write the date more closely."
        return CellError(f"names more than one {frequency.unit} of {frequency.name} data", mend)
    letter = _MONTH_LETTER.fullmatch(text)
    if letter:
        return CellError(
            "is not a date that can be read", f"Write {letter[1]}-{int(letter[2]):02d}."
        )
    if _WITH_TIME.fullmatch(text):
        return CellError("has a time of day", _DATE_ALONE)
    if _DAY_FIRST.fullmatch(text):
        return CellError(
            "could be day or month first", "Write the year first, as in 1990-03-15 or 1990-03."
        )
    if _PACKED.fullmatch(text):
        parts = "-".join(part for part in (text[:4], text[4:6], text[6:]) if part)
        return CellError("is not a date that can be read", f"Write {parts}.")
    mend = "Write dates as 1990, 1990-Q1, 1990-03 or 1990-03-15."
    return CellError("is not a date that can be read", mend)


def looks_like_data(cell: object) -> bool:
    """Say whether a cell reads as a number, a date or a missing mark, so not as a name."""
    try:
        return not math.isnan(read_number(cell))
    except CellError:
        pass
    try:
        read_day(cell, "annual")
    except CellError:
        return False
    return True
