"""What every figure and table must be able to say about itself."""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from sweep.verdicts.survival import Counts, losses_sentence, overall
from sweep.verdicts.words import level_text, period_text

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["Context", "baseline_record", "claim_sentence", "context_of", "frequency_of"]


@dataclass(frozen=True, slots=True)
class Context:
    """The finding, its level and its counts.

    Attributes
    ----------
    title : str
        Title of the plan.
    finding : str
        Name of the finding.
    statement : str
        The claim as a phrase.
    significance : float
        Level in (0, 1).
    counts : Counts
        Counts of the whole finding.
    design : str
        ``full``, ``one change``, ``two changes`` or words for a sample.
    data_note : str
        Source of the data in words; may be empty.
    claim : str
        The claim's kind, as the plan names it.
    frequency : str
        How often the series are observed; empty where that is not known.
    """

    title: str
    finding: str
    statement: str
    significance: float
    counts: Counts
    design: str = "full"
    data_note: str = ""
    claim: str = "leads"
    frequency: str = ""

    def period(self, value: Any) -> str:
        """Write a date as the data's own periods are called, such as ``1980-Q3``."""
        return period_text(value, self.frequency)

    @property
    def level(self) -> str:
        """Return the significance level in per cent."""
        return level_text(self.significance)

    @property
    def lead(self) -> str:
        """Return finding and level, the words with which every subtitle starts."""
        return f"Finding: {self.statement}; significance level {self.level}."

    @property
    def losses(self) -> str:
        """Return what was planned and not counted, as a sentence; a sample says that it is one."""
        words = losses_sentence(self.counts)
        if self.design.startswith("sample"):
            words += " These rows were drawn from the plan; what was not drawn is not in here."
        return words


def _series(finding: Mapping[str, Any], role: str) -> str:
    return str(finding[role])


def claim_sentence(finding: Mapping[str, Any]) -> str:
    """Put a finding's claim into one phrase.

    Names of series are singular or plural ("rents", "freight"); no verb has to agree with them.

    Parameters
    ----------
    finding : mapping
        The finding's record: cause, effect, given, claim, sign, reverse_sign.

    Examples
    --------
    >>> claim_sentence({"cause": "freight", "effect": "rents", "given": "diesel",
    ...                 "claim": "leads", "sign": 1, "reverse_sign": 0})
    'a lead from freight to rents, given diesel, with a positive sum of coefficients'
    """
    cause, effect = _series(finding, "cause"), _series(finding, "effect")
    words = {
        "leads": f"a lead from {cause} to {effect}",
        "leads one way": f"a lead from {cause} to {effect} and none back",
        "leads both ways": f"a lead from {cause} to {effect} and another back",
        "does not lead": f"no lead from {cause} to {effect}",
    }[str(finding["claim"])]
    given = str(finding.get("given") or "")
    if given:
        words += f", given {given}"
    signs = {1: "positive", -1: "negative"}
    forward = signs.get(int(finding.get("sign") or 0))
    backward = signs.get(int(finding.get("reverse_sign") or 0))
    if forward:
        words += f", with a {forward} sum of coefficients"
    if backward:
        words += f", in reverse a {backward} one"
    return words


class _Absent(dict[str, Any]):
    """A baseline row that is not in the store: every number is missing."""

    def __missing__(self, name: str) -> None:
        return None


def baseline_record(baseline: pd.DataFrame) -> Mapping[str, Any]:
    """Return the baseline's row as a mapping.

    Parameters
    ----------
    baseline : DataFrame
        The store's frame of that name: one row, or none while a run has not reached it.

    Returns
    -------
    mapping
        Without a row, the status is ``not run yet`` and every other value None.
    """
    if baseline.empty:
        return _Absent(status="not run yet", reason="", failed_screens="")
    return {str(name): value for name, value in baseline.iloc[0].items()}


def frequency_of(info: Mapping[str, Any]) -> str:
    """Return the frequency of the data from a sweep's record, empty where it is not noted."""
    return str(json.loads(str(info["data_note"])).get("frequency", ""))


def context_of(
    finding: Mapping[str, Any],
    survival: pd.DataFrame,
    *,
    significance: float,
    title: str,
    design: str = "full",
    data_note: str = "",
    frequency: str = "",
) -> Context:
    """Build the context of one finding from its record and its survival frame.

    Parameters
    ----------
    finding : mapping
        The finding's record as the store keeps it.
    survival : DataFrame
        The survival frame of this finding.
    significance : float
        The plan's level.
    title, design, data_note, frequency : str
        From the sweep's record.

    Raises
    ------
    ValueError
        If the survival frame has not exactly one overall row.
    """
    return Context(
        title=title,
        finding=str(finding["name"]),
        statement=claim_sentence(finding),
        significance=significance,
        counts=overall(survival),
        design=design,
        data_note=data_note,
        claim=str(finding["claim"]),
        frequency=frequency,
    )
