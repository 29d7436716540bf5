"""Printed numbers with the digits in which they were printed."""

from __future__ import annotations

import re
from typing import Annotated, Any

from pydantic import AfterValidator, WithJsonSchema

from sweep.plan.tables import _refuse

__all__ = ["PrintedNumber", "PrintedProbability", "WrittenFloat"]

_NUMBER = re.compile(r"[+-]?\d+(\.\d*)?([eE][+-]?\d+)?")


class WrittenFloat(float):
    """A number of a plan file that remembers how it was written.

    A float has no trailing zeros: 0.0200 and 0.02 are one number, and differ in the digits
    that a comparison must agree in.

    Examples
    --------
    >>> WrittenFloat("0.0200"), str(WrittenFloat("0.0200"))
    (0.02, '0.0200')
    """

    text: str

    def __new__(cls, text: str) -> WrittenFloat:
        """Make a number of its text."""
        number = super().__new__(cls, text)
        number.text = text
        return number

    def __str__(self) -> str:
        return self.text


def _printed(value: Any) -> str:
    """Return a printed number as its text; a whole number has no decimals."""
    fits = isinstance(value, int | float | str) and not isinstance(value, bool)
    text = str(value).strip().replace("_", "") if fits else ""
    if not _NUMBER.fullmatch(text):
        _refuse('a printed number is needed here, such as 3.42, 0.0190 or "0.0190"')
    return text


def _probability(text: str) -> str:
    if not 0 <= float(text) <= 1:
        _refuse(f"{text} is no probability; a p-value lies between 0 and 1")
    return text


_SCHEMA = {"anyOf": [{"type": "number"}, {"type": "string", "pattern": f"^{_NUMBER.pattern}$"}]}
PrintedNumber = Annotated[Any, AfterValidator(_printed), WithJsonSchema(_SCHEMA)]
PrintedProbability = Annotated[
    Any, AfterValidator(_printed), AfterValidator(_probability), WithJsonSchema(_SCHEMA)
]
