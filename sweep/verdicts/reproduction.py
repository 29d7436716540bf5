"""Whether the baseline gives the numbers that were printed."""

from __future__ import annotations

import math
import sys
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
    printed : str
        The reported number in the digits in which it was printed.
    computed : float
        In the unit of the quantity; NaN where there is none.
    allowed : float
        Largest absolute difference that still counts as the same number.
    """

    quantity: str
    printed: str
    computed: float
    allowed: float

    @property
    def reported(self) -> float:
        """The reported number."""
        return float(self.printed)

    @property
    def agrees(self) -> bool:
        """Whether the difference is within what is allowed (up to binary rounding)."""
        slack = 1e-9 * self.allowed + 4 * sys.float_info.epsilon * abs(self.reported)
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


def rounding(printed: str) -> float:
    """Return half a unit of the last digit in which a number is printed.

    Examples
    --------
    >>> rounding("3.42"), rounding("0.0190"), rounding("4"), rounding("2.81e-08")
    (0.005, 5e-05, 0.5, 5e-11)
    """
    exponent = Decimal(printed).as_tuple().exponent
    return float(Decimal(5).scaleb(int(exponent) - 1))


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
        printed = str(reported)
        allowed = rounding(printed) if missing(tolerance) else float(str(tolerance))
        computed = baseline[computed_name]
        value = math.nan if missing(computed) else float(computed)
        found.append(Difference(quantity, printed, value, allowed))
    rows = finding.get("reported_observations")
    if not missing(rows):
        computed = baseline["observations"]
        value = math.nan if missing(computed) else float(computed)
        found.append(Difference("observations", f"{float(str(rows)):.0f}", value, 0.0))
    return found


def compare(baseline: Mapping[str, Any], finding: Mapping[str, Any]) -> Reproduction:
    """Compare the baseline's row with the numbers that the plan reports.

    Parameters
    ----------
    baseline : mapping
        The baseline's row with the columns of the view ``outcomes``.
    finding : mapping
        The finding with ``reported_statistic``, ``reported_p_value`` (texts),
        ``reported_observations`` and ``reported_tolerance``, any of them None.  A tolerance is
        absolute and holds for statistic and p-value; without one, a number agrees that rounds
        to the printed one.  Observations must be equal.
    """
    differences = _differences(baseline, finding)
    if not differences:
        return Reproduction(
            None,
            "The plan gives no reported numbers, so whether the baseline reproduces a printed "
            "result was not checked.",
        )
    if baseline["status"] == "not run yet":
        said = (
            "Whether the baseline reproduces the reported numbers is not known: it was not run yet."
        )
        return Reproduction(False, said, tuple(differences))
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
    reported, quantity = difference.printed.replace("-", "−"), difference.quantity
    if missing(difference.computed):
        return f"{quantity} {reported} reported, none computed"
    computed = number(difference.computed, 6)
    if quantity == "observations":
        computed = f"{difference.computed:.0f}"
    if quantity == "p-value" and difference.computed < 1e-4:
        digits = max(3, 1 + len(Decimal(difference.printed).as_tuple().digits))
        computed = f"{difference.computed:.{digits - 1}e}".replace("-", "−")
    if difference.agrees:
        return f"{quantity} {reported} reported, {computed} computed"
    gap = difference.computed - difference.reported
    sign = "+" if gap > 0 else "−"
    return (
        f"{quantity} {reported} reported, {computed} computed "
        f"(off by {sign}{number(abs(gap), 3)}, allowed {given_number(difference.allowed)})"
    )
