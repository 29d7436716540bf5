"""From planned rows to survivors: the stages, and what is lost between them.

planned → applicable → run → admissible → survived; every row that is lost is lost at one step
and for one reason.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from typing import TYPE_CHECKING

from .survival import Counts
from .words import counted, joined, missing, percent

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["Loss", "Stage", "sentences", "stages"]

# What is lost after each stage but the last.
_LOST_AFTER = {
    "planned": ("not run yet", "not applicable"),
    "applicable": ("infeasible", "failed"),
    "run": ("screened out",),
}
_OTHER_SIGN = "rejects with the sign that was not claimed"
_LISTED = 4


@dataclass(frozen=True, slots=True)
class Loss:
    """Rows lost for one reason.

    Attributes
    ----------
    name : str
        ``not run yet``, ``not applicable``, ``infeasible``, ``failed``, ``screened out`` or
        ``does not survive``.
    reason : str
        Why, in words; may be empty.
    rows : int
    start : float
        Rows left below them: the loss covers ``start`` to ``start + rows`` of the planned rows.
    ruled : bool
        Whether the plan's author ruled the combination out.
    """

    name: str
    reason: str
    rows: int
    start: float
    ruled: bool

    @property
    def words(self) -> str:
        """Return the loss as a label."""
        name = "ruled out by the plan" if self.ruled else self.name
        return f"{name}: {self.reason}" if self.reason else name

    @property
    def counted(self) -> bool:
        """Whether the rows are admissible and count against the finding."""
        return self.name == "does not survive"

    @property
    def screened(self) -> bool:
        """Whether the rows were run and then screened out."""
        return self.name == "screened out"


@dataclass(frozen=True, slots=True)
class Stage:
    """Rows left at a stage, and what is lost after it, the author's rule-outs first.

    Attributes
    ----------
    name : str
        ``planned``, ``applicable``, ``run``, ``admissible`` or ``survived``.
    rows : int
    losses : tuple of Loss
        By kind and then by size.
    """

    name: str
    rows: int
    losses: tuple[Loss, ...] = ()

    @property
    def last(self) -> bool:
        """Whether these are the survivors."""
        return self.name == "survived"


def stages(attrition: pd.DataFrame, counts: Counts, level: str) -> list[Stage]:
    """Return the five stages with their losses.

    Parameters
    ----------
    attrition : DataFrame
        The store's frame of that name: status, reason, rows, ruled.
    counts : Counts
        Counts of the whole finding.
    level : str
        The significance level in words.

    Returns
    -------
    list of Stage
        Each stage's rows are those of the one before without its losses.

    Raises
    ------
    ValueError
        If the reasons do not add up to the counts.
    """
    lost = [
        (
            str(row["status"]),
            "" if missing(row["reason"]) else str(row["reason"]),
            int(row["rows"]),
            bool(row["ruled"]),
        )
        for row in attrition.to_dict("records")
    ]
    found, left = [], counts.planned
    for name, kinds in _LOST_AFTER.items():
        own = [one for kind in kinds for one in lost if one[0] == kind]
        own.sort(key=lambda one: not one[3])
        found.append(_stage(name, left, own))
        left -= sum(rows for _, _, rows, _ in own)
    if left != counts.admissible:
        raise ValueError(
            f"the reasons leave {left:,} rows of {counts.planned:,}, but {counts.admissible:,} are "
            "admissible"
        )
    missed = counts.admissible - counts.survived - counts.other_sign
    last = [
        ("does not survive", reason, rows, False)
        for reason, rows in ((f"the claim does not hold at {level}", missed),
                             (_OTHER_SIGN, counts.other_sign))
        if rows
    ]  # fmt: skip
    found.append(_stage("admissible", left, last))
    return [*found, Stage("survived", counts.survived)]


def _stage(name: str, rows: int, lost: list[tuple[str, str, int, bool]]) -> Stage:
    losses, left = [], rows
    for kind, reason, count, ruled in lost:
        left -= count
        losses.append(Loss(kind, reason, count, left, ruled))
    return Stage(name, rows, tuple(losses))


def sentences(steps: list[Stage]) -> list[str]:
    """Say, for each step at which something is lost, how much and why."""
    found = []
    planned = steps[0].rows
    for before, after in itertools.pairwise(steps):
        if not before.losses:
            found.append(f"{after.name.capitalize()}: {counted(after.rows, 'row')}, none lost.")
            continue
        listed = [f"{loss.rows:,} {loss.words}" for loss in before.losses[:_LISTED]]
        others = before.losses[_LISTED:]
        if others:
            rows = sum(loss.rows for loss in others)
            listed.append(f"{rows:,} for {counted(len(others), 'other reason')}")
        share = percent(after.rows / planned if planned else None)
        found.append(
            f"{after.name.capitalize()}: {counted(after.rows, 'row')} ({share} of planned); lost: "
            f"{joined(listed)}."
        )
    return found
