"""How numbers are written, so that no figure, table or sentence rounds one into a lie."""

from __future__ import annotations

import math
from collections.abc import Iterable
from datetime import date
from typing import Any

from sweep.panel.periods import period_label

__all__ = [
    "MISSING",
    "counted",
    "fixed",
    "given_number",
    "joined",
    "level_text",
    "missing",
    "number",
    "p_text",
    "percent",
    "period_text",
    "reason_text",
    "share_text",
]

MISSING = "–"

_IRREGULAR = {"analysis": "analyses", "series": "series", "this": "these"}


def missing(value: Any) -> bool:
    """Return True for None, NaN, NaT and the missing value of pandas.

    Examples
    --------
    >>> missing(None), missing(float("nan")), missing(0.0), missing("")
    (True, True, False, False)
    """
    if value is None:
        return True
    try:
        return bool(value != value)  # noqa: PLR0124 - only missing values differ from themselves
    except TypeError:  # pandas.NA refuses to be a truth value
        return True


def percent(share: float | None) -> str:
    """Write a share in per cent without ever rounding it to 0% or 100%.

    Parameters
    ----------
    share : float or None
        Share in [0, 1]; None or NaN where it does not exist.

    Examples
    --------
    >>> percent(0.75), percent(0.0), percent(1.0), percent(0.001), percent(0.9996), percent(None)
    ('75%', '0%', '100%', '<1%', '>99%', '–')
    """
    if share is None or missing(share):
        return MISSING
    if share <= 0.0:
        return "0%"
    if share >= 1.0:
        return "100%"
    if share < 0.01:
        return "<1%"
    if share > 0.99:
        return ">99%"
    return f"{math.floor(100 * share + 0.5)}%"


def share_text(survived: int, admissible: int) -> str:
    """Write a share beside its counts.

    Parameters
    ----------
    survived, admissible : int
        Numerator and denominator, in rows.

    Examples
    --------
    >>> share_text(18, 24), share_text(0, 0), share_text(1200, 1201)
    ('18 of 24 (75%)', 'none admissible', '1,200 of 1,201 (>99%)')
    """
    if not admissible:
        return "none admissible"
    return f"{survived:,} of {admissible:,} ({percent(survived / admissible)})"


def p_text(p_value: float | None) -> str:
    """Write a p-value: three decimals, never ``0.000`` and never ``1.000`` unless exact.

    Examples
    --------
    >>> p_text(0.0336), p_text(0.0004), p_text(0.0), p_text(0.9999), p_text(None)
    ('0.034', '<0.001', '<0.001', '>0.999', '–')
    """
    if p_value is None or missing(p_value):
        return MISSING
    if p_value < 0.001:
        return "<0.001"
    if 0.9995 <= p_value < 1.0:
        return ">0.999"
    return f"{p_value:.3f}"


def number(value: float | None, digits: int = 3) -> str:
    """Write a number to a count of significant digits, with a true minus sign.

    Examples
    --------
    >>> number(0.0123456), number(-12.3456), number(1234.5), number(0.0), number(None)
    ('0.0123', '−12.3', '1,234', '0', '–')
    >>> number(2.5e-9)
    '2.5e−09'
    """
    if value is None or missing(value):
        return MISSING
    if value == 0:
        return "0"
    size = float(f"{abs(value):.{digits - 1}e}")  # rounded, so that 99.95 counts as 100
    if size >= 10 ** (digits - 1):
        text = f"{value:,.0f}"
    elif size >= 1e-4:
        decimals = max(0, digits - 1 - math.floor(math.log10(size)))
        text = f"{value:.{decimals}f}"
    else:
        text = f"{value:.{digits - 1}g}"
    return text.replace("-", "−")


def fixed(value: float | None, decimals: int) -> str:
    """Write a number with a fixed count of decimals and a true minus sign."""
    if value is None or missing(value):
        return MISSING
    return f"{value:,.{decimals}f}".replace("-", "−")


def given_number(value: float | None) -> str:
    """Write a number as the user gave it (shortest form that reads back to the same value)."""
    if value is None or missing(value):
        return MISSING
    text = repr(float(value))
    return text.removesuffix(".0").replace("-", "−")


def counted(count: int, noun: str) -> str:
    """Write a count with its noun in the right number.

    Examples
    --------
    >>> counted(1, "row"), counted(2400, "specification"), counted(2, "analysis")
    ('1 row', '2,400 specifications', '2 analyses')
    """
    if count == 1:
        return f"1 {noun}"
    head, _, last = noun.rpartition(" ")
    plural = _IRREGULAR.get(last, f"{last}s")
    return f"{count:,} {head} {plural}" if head else f"{count:,} {plural}"


def joined(parts: Iterable[str], word: str = "and") -> str:
    """Join parts the way a sentence does.

    Examples
    --------
    >>> joined(["a"]), joined(["a", "b"]), joined(["a", "b", "c"])
    ('a', 'a and b', 'a, b and c')
    """
    items = list(parts)
    if len(items) < 2:
        return "".join(items)
    return f"{', '.join(items[:-1])} {word} {items[-1]}"


def level_text(level: float) -> str:
    """Write a significance level in per cent.

    Examples
    --------
    >>> level_text(0.05), level_text(0.025)
    ('5%', '2.5%')
    """
    return f"{100 * level:.6g}%"


def period_text(value: Any, frequency: str = "") -> str:
    """Write a date, whatever kind of date a frame holds.

    Parameters
    ----------
    value : date or None
    frequency : str
        Frequency of the data, by which periods are named; an ISO day where it is empty.

    Examples
    --------
    >>> period_text("1980-07-01 00:00:00"), period_text("1980-07-01", "quarterly")
    ('1980-07-01', '1980-Q3')
    """
    if missing(value):
        return MISSING
    day = str(value)[:10]
    return period_label(date.fromisoformat(day), frequency) if frequency else day


def reason_text(status: Any, reason: Any) -> str:
    """Put a status and its reason into one phrase."""
    if missing(reason) or not str(reason):
        return str(status)
    return f"{status}: {reason}"
