"""Whether the baseline gives the numbers that were printed."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

from .words import given_number, joined, missing, number, reason_text

__all__ = ["Difference", "Reproduction", "compare", "rounding"]


@dataclass(frozen=True, slots=True)
class Difference:
    """One printed number beside the computed one.

    Attributes
    ----------
    quantity : str
        ``statistic``, ``p-value`` or ``observations``.
    reported, computed : float
        In the unit of the quantity.
    allowed : float
        Largest absolute difference that still counts as the same number.
    """

    quantity: str
    reported: float
    computed: float
    allowed: float

    @property
    def agrees(self) -> bool:
        """Whether the difference is within what is allowed (up to binary rounding)."""
        slack = 1e-9 * max(1.0, abs(self.reported))
        return abs(self.computed - self.reported) <= self.allowed + slack


@dataclass(frozen=True, slots=True)
class Reproduction:
    """The comparison of a baseline with the printed numbers.

    Attributes
    ----------
    reproduced : bool or None
        None where the plan gives no printed numbers.
    sentence : str
        The report's first line.
    differences : tuple of Difference
        One for each printed number.
    """

    reproduced: bool | None
    sentence: str
    differences: tuple[Difference, ...] = ()


def rounding(reported: float) -> float:
    """Return half a unit of the last decimal in which a number is given.

    At least two decimals are taken as printed, since 4.00 arrives as 4.

    Examples
    --------
    >>> rounding(3.42), rounding(0.1), rounding(0.0336)
    (0.005, 0.005, 5e-05)
    """
    exponent = Decimal(repr(float(reported))).normalize().as_tuple().exponent
    return float(Decimal(5).scaleb(min(int(exponent), -2) - 1))


def _differences(baseline: Mapping[str, Any], finding: Mapping[str, Any]) -> list[Difference]:
    tolerance = finding.get("reported_tolerance")
    found = []
    for quantity, reported_name, computed_name in (
        ("statistic", "reported_statistic", "statistic"),
        ("p-value", "reported_p_value", "p_value"),
    ):
        reported = finding.get(reported_name)
        if missing(reported):
            continue
        given = float(str(reported))
        allowed = rounding(given)
        if not missing(tolerance):
            allowed = max(allowed, float(str(tolerance)))
        computed = baseline[computed_name]
        value = math.nan if missing(computed) else float(computed)
        found.append(Difference(quantity, given, value, allowed))
    rows = finding.get("reported_observations")
    if not missing(rows):
        computed = baseline["observations"]
        value = math.nan if missing(computed) else float(computed)
        found.append(Difference("observations", float(str(rows)), value, 0.0))
    return found


def compare(baseline: Mapping[str, Any], finding: Mapping[str, Any]) -> Reproduction:
    """Compare the baseline's row with the numbers that the plan reports.

    Parameters
    ----------
    baseline : mapping
        The baseline's row with the columns of the view ``outcomes``.
    finding : mapping
        The finding with ``reported_statistic``, ``reported_p_value``,
        ``reported_observations`` and ``reported_tolerance``, any of them None.  The tolerance
        is absolute and holds for statistic and p-value; a number that rounds to the printed
        one agrees in any case.  Observations must be equal.
    """
    differences = _differences(baseline, finding)
    if not differences:
        return Reproduction(
            None,
            "The plan gives no reported numbers, so whether the baseline reproduces a printed "
            "result was not checked.",
        )
    if baseline["status"] != "ok":
        why = reason_text(baseline["status"], baseline["reason"])
        return Reproduction(
            False,
            f"The baseline does not reproduce the reported numbers: it could not be run ({why}).",
            tuple(differences),
        )
    words = joined(_words(difference) for difference in differences)
    if all(difference.agrees for difference in differences):
        sentence = f"The baseline reproduces the reported numbers: {words}."
        return Reproduction(True, sentence, tuple(differences))
    sentence = f"The baseline does not reproduce the reported numbers: {words}."
    return Reproduction(False, sentence, tuple(differences))


def _words(difference: Difference) -> str:
    reported, quantity = given_number(difference.reported), difference.quantity
    if missing(difference.computed):
        return f"{quantity} {reported} reported, none computed"
    computed = number(difference.computed, 6)
    if quantity == "observations":
        computed = f"{difference.computed:.0f}"
    if quantity == "p-value" and difference.computed < 1e-4:
        computed = f"{difference.computed:.2e}".replace("-", "−")
    if difference.agrees:
        return f"{quantity} {reported} reported, {computed} computed"
    gap = difference.computed - difference.reported
    sign = "+" if gap > 0 else "−"
    return (
        f"{quantity} {reported} reported, {computed} computed "
        f"(off by {sign}{number(abs(gap), 3)}, allowed {given_number(difference.allowed)})"
    )
