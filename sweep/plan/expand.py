"""From a plan to its table of codes: a few integer columns, one row a specification."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sweep.plan.canonical import Token, digest_text, halves, token
from sweep.plan.choices import AXES
from sweep.plan.model import Finding, Plan
from sweep.plan.tables import Table

__all__ = ["DESIGNS", "Codes", "FindingPositions", "PlanRows", "expand_plan"]

Codes = dict[str, NDArray[np.int16]]


@dataclass(frozen=True, slots=True)
class FindingPositions:
    """How many positions each window choice has for one finding, and their tokens.

    Attributes
    ----------
    counts : mapping of code to int
    tokens : mapping of code to (high, low) arrays of shape (w,)
        Zero for fixed windows.
    """

    counts: Mapping[int, int]
    tokens: Mapping[int, tuple[NDArray[np.uint64], NDArray[np.uint64]]]


@dataclass(frozen=True, slots=True)
class PlanRows:
    """Every planned specification.

    Attributes
    ----------
    finding : ndarray of int16, shape (s,)
    codes : dict of axis to ndarray of int16, shape (s,)
        Codes into ``Plan.axes``.
    position : ndarray of int32, shape (s,)
        Position within a moving window choice, 0 for fixed ones.
    high, low : ndarray of uint64, shape (s,)
        Id of the specification.
    rule : ndarray of int16, shape (s,)
        Index of the first rule that rules it out, -1 for none.
    """

    finding: NDArray[np.int16]
    codes: Codes
    position: NDArray[np.int32]
    high: NDArray[np.uint64]
    low: NDArray[np.uint64]
    rule: NDArray[np.int16]

    @property
    def count(self) -> int:
        """Number of specifications."""
        return int(self.finding.size)


def expand_plan(plan: Plan, positions: Sequence[FindingPositions]) -> PlanRows:
    """Expand a plan; a pure function of the plan and the window positions.

    Parameters
    ----------
    plan : Plan
    positions : sequence of FindingPositions
        One a finding.

    Returns
    -------
    PlanRows
        Findings in plan order; within one, moving positions run fastest.
    """
    parts = []
    for finding in plan.findings:
        codes = _design(plan, finding, positions[finding.number])
        parts.append(_with_positions(plan, finding, codes, positions[finding.number]))
    joined = {axis: np.concatenate([part.codes[axis] for part in parts]) for axis in AXES}
    return PlanRows(
        np.concatenate([part.finding for part in parts]),
        joined,
        np.concatenate([part.position for part in parts]),
        np.concatenate([part.high for part in parts]),
        np.concatenate([part.low for part in parts]),
        np.concatenate([part.rule for part in parts]),
    )


def _design(plan: Plan, finding: Finding, positions: FindingPositions) -> NDArray[np.int16]:
    """Return the entry codes of a finding's specifications, shape (s, axes)."""
    design = plan.document.sweep.design
    if isinstance(design, Table):
        return _full(plan, finding)
    return DESIGNS[design](plan, finding)


def _full(plan: Plan, finding: Finding) -> NDArray[np.int16]:
    axes = plan.finding_axes[finding.number]
    grids = np.meshgrid(*[np.array(axes[a].codes, np.int16) for a in AXES], indexing="ij")
    return np.stack([grid.reshape(-1) for grid in grids], axis=1)


def _changes(plan: Plan, finding: Finding, most: int) -> NDArray[np.int16]:
    """Return the baseline and every specification at most ``most`` choices away."""
    axes = plan.finding_axes[finding.number]
    baseline = np.array([axes[a].baseline for a in AXES], np.int16)
    found = [baseline[None]]
    for column, axis in enumerate(AXES):
        others = np.array([c for c in axes[axis].codes if c != axes[axis].baseline], np.int16)
        for earlier in list(found):
            near = earlier[(earlier != baseline).sum(axis=1) < most]
            block = np.repeat(near, others.size, axis=0)
            block[:, column] = np.tile(others, near.shape[0])
            found.append(block)
    return np.concatenate(found)


DESIGNS: dict[str, Callable[[Plan, Finding], NDArray[np.int16]]] = {
    "full": _full,
    "one change": lambda plan, finding: _changes(plan, finding, 1),
    "two changes": lambda plan, finding: _changes(plan, finding, 2),
}


def _with_positions(
    plan: Plan, finding: Finding, codes: NDArray[np.int16], positions: FindingPositions
) -> PlanRows:
    """Repeat moving windows over their positions and add up the ids."""
    window = codes[:, AXES.index("window")]
    count = np.array([positions.counts.get(c, 1) for c in range(int(window.max()) + 1)])[window]
    source = np.repeat(np.arange(codes.shape[0]), count)
    start = np.cumsum(count) - count
    position = (np.arange(source.size) - start[source]).astype(np.int32)
    if isinstance(plan.document.sweep.design, Table):
        keep = _stratified(plan, finding, codes, source)
        source, position = source[keep], position[keep]
    rows = {axis: codes[source, column] for column, axis in enumerate(AXES)}
    high, low = _ids(plan, finding, rows, position, positions)
    which = np.full(source.size, finding.number, np.int16)
    return PlanRows(which, rows, position, high, low, _ruled(plan, finding, rows))


def _stratified(
    plan: Plan, finding: Finding, codes: NDArray[np.int16], source: NDArray[np.int64]
) -> NDArray[np.int64]:
    """Draw equally many rows of every window entry; the baseline is always in."""
    wanted = plan.document.sweep.design.sample
    axes = plan.finding_axes[finding.number]
    window = codes[source, AXES.index("window")]
    entries = axes["window"].codes
    seed = np.random.SeedSequence([plan.document.seed, *digest_text(finding.name)])
    generator = np.random.default_rng(seed)
    each = -(-wanted // len(entries))
    kept = []
    for entry in entries:
        members = np.flatnonzero(window == entry)
        size = min(each, members.size)
        kept.append(generator.choice(members, size=size, replace=False, shuffle=False))
    baseline = np.array([axes[a].baseline for a in AXES])
    kept.append(np.flatnonzero((codes[source] == baseline).all(axis=1)))
    return np.unique(np.concatenate(kept))


def _ids(
    plan: Plan,
    finding: Finding,
    rows: Codes,
    position: NDArray[np.int32],
    positions: FindingPositions,
) -> tuple[NDArray[np.uint64], NDArray[np.uint64]]:
    start = finding.token
    high = np.full(position.size, start[0], np.uint64)
    low = np.full(position.size, start[1], np.uint64)
    for axis in AXES:
        tokens: list[Token] = [token(axis, choice.meaning) for choice in plan.axes[axis]]
        high_part, low_part = halves(tokens)
        high += high_part[rows[axis]]
        low += low_part[rows[axis]]
    for code, (high_part, low_part) in positions.tokens.items():
        here = np.flatnonzero(rows["window"] == code)
        high[here] += high_part[position[here]]
        low[here] += low_part[position[here]]
    return high, low


def _ruled(plan: Plan, finding: Finding, rows: Codes) -> NDArray[np.int16]:
    ruled = np.full(rows["lags"].size, -1, np.int16)
    for number in range(len(plan.rules) - 1, -1, -1):
        rule = plan.rules[number]
        if rule.finding not in (None, finding.number):
            continue
        mask = np.ones(ruled.size, bool)
        for axis, codes in rule.codes.items():
            mask &= np.isin(rows[axis], list(codes))
        ruled[mask] = number
    return ruled
