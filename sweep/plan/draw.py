"""Drawing a sample of a full cross without building the cross."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import prod

import numpy as np
from numpy.typing import NDArray

from sweep.plan.canonical import digest_text, token
from sweep.plan.choices import AXES
from sweep.plan.model import Finding, FindingAxis, Plan, Request

__all__ = ["Drawn", "draw", "stratum_size"]


@dataclass(frozen=True, slots=True)
class Drawn:
    """Rows drawn from the crosses of a finding.

    Attributes
    ----------
    codes : ndarray of int16, shape (s, axes)
    position : ndarray of int32, shape (s,)
        Position within the window entry.
    """

    codes: NDArray[np.int16]
    position: NDArray[np.int32]


def draw(
    plan: Plan,
    finding: Finding,
    blocks: Sequence[Mapping[str, FindingAxis]],
    positions: Mapping[int, int],
    request: Request | None = None,
) -> Drawn:
    """Draw equally many rows of every window entry, without replacement.

    What is drawn from an entry depends on the seed, the finding's roles, the entry, the
    choices of the other axes (in the order of their meanings, not of the plan) and the number
    wanted, and not on the other entries.

    Parameters
    ----------
    plan : Plan
        Its design says how many rows a finding are wanted.
    finding : Finding
    blocks : sequence of mapping of axis to FindingAxis
        Full crosses without a row in common.
    positions : mapping of window code to int
        How many positions each entry has.
    request : Request or None
        Whose rows they are; those of the plan if None, which leave the baseline out, since it
        is run whatever is drawn.

    Returns
    -------
    Drawn
        Entry by entry.
    """
    entries = list(dict.fromkeys(code for block in blocks for code in block["window"].codes))
    each = -(-plan.document.sweep.design.sample // max(len(entries), 1))
    codes = [np.empty((0, len(AXES)), np.int16)]
    position = [np.empty(0, np.int32)]
    for entry in entries:
        crosses = [
            _Cross(plan, block, entry, positions[entry])
            for block in blocks
            if entry in block["window"].codes
        ]
        sizes = [cross.size for cross in crosses]
        baseline = None if request else crosses[0].baseline
        picks = _picks(_generator(plan, finding, entry, request), sum(sizes), each, baseline)
        ends = np.cumsum(sizes)
        for cross, size, end in zip(crosses, sizes, ends.tolist(), strict=True):
            inside = picks[(picks >= end - size) & (picks < end)] - (end - size)
            rows = cross.rows(inside)
            codes.append(rows[0])
            position.append(rows[1])
    return Drawn(np.concatenate(codes), np.concatenate(position))


def stratum_size(axes: Mapping[str, FindingAxis], entry: int, positions: int) -> int:
    """Return how many rows of the full cross have a window entry.

    Parameters
    ----------
    axes : mapping of axis to FindingAxis
    entry : int
        Code of the window entry.
    positions : int
        How many positions it has.
    """
    others = prod(len(axes[axis].codes) for axis in AXES if axis != "window")
    return others * positions * (entry in axes["window"].codes)


def _generator(
    plan: Plan, finding: Finding, entry: int, request: Request | None
) -> np.random.Generator:
    purpose = [*finding.token, *token("window", plan.axes["window"][entry].meaning)]
    if request is not None:
        purpose += digest_text(request.name)
    return np.random.default_rng(np.random.SeedSequence([plan.document.seed, *purpose]))


def _picks(
    generator: np.random.Generator, size: int, wanted: int, barred: int | None
) -> NDArray[np.int64]:
    """Draw numbers below ``size`` in ascending order, one of them barred."""
    free = size - (barred is not None)
    picks = np.sort(generator.choice(free, min(wanted, free), replace=False, shuffle=False))
    if barred is not None:
        picks += picks >= barred
    return picks


class _Cross:
    """The rows of a cross with one window entry, numbered without being built."""

    def __init__(
        self, plan: Plan, axes: Mapping[str, FindingAxis], entry: int, positions: int
    ) -> None:
        held = {axis: self._in_order(plan, axis, axes[axis].codes) for axis in AXES}
        held["window"] = [entry]
        self._codes = [np.array(held[axis], np.int16) for axis in AXES]
        self._shape = (*(codes.size for codes in self._codes), positions)
        self.size = prod(self._shape)
        self.baseline: int | None = None
        if all(axes[axis].baseline in held[axis] for axis in AXES):
            place = [held[axis].index(axes[axis].baseline) for axis in AXES]
            self.baseline = int(np.ravel_multi_index((*place, 0), self._shape))

    @staticmethod
    def _in_order(plan: Plan, axis: str, codes: Sequence[int]) -> list[int]:
        """Return codes in the order of their tokens, which no plan can change."""
        return sorted(codes, key=lambda code: token(axis, plan.axes[axis][code].meaning))

    def rows(self, numbers: NDArray[np.int64]) -> tuple[NDArray[np.int16], NDArray[np.int32]]:
        """Return codes, shape (s, axes), and positions, shape (s,), of numbered rows."""
        *places, position = np.unravel_index(numbers, self._shape)
        columns = [codes[place] for codes, place in zip(self._codes, places, strict=True)]
        return np.stack(columns, axis=1), position.astype(np.int32)
