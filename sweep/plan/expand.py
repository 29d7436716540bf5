"""From a plan to its table of codes: a few integer columns, one row a specification."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from sweep.plan.canonical import Token, halves, token
from sweep.plan.choices import AXES
from sweep.plan.draw import draw
from sweep.plan.model import Finding, FindingAxis, Plan, Request
from sweep.plan.tables import Table

__all__ = ["DESIGNS", "Codes", "FindingPositions", "PlanRows", "expand_plan", "request_axes"]

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
    request : ndarray of int16, shape (s,)
        Number of the first request that asks for it, 0 where it is planned.
    """

    finding: NDArray[np.int16]
    codes: Codes
    position: NDArray[np.int32]
    high: NDArray[np.uint64]
    low: NDArray[np.uint64]
    rule: NDArray[np.int16]
    request: NDArray[np.int16]

    @property
    def count(self) -> int:
        """Number of specifications."""
        return int(self.finding.size)

    def part(self, keep: NDArray[np.bool_]) -> PlanRows:
        """Return some of the rows."""
        kept = {f.name: getattr(self, f.name)[keep] for f in fields(self) if f.name != "codes"}
        return PlanRows(codes={axis: held[keep] for axis, held in self.codes.items()}, **kept)


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
        Planned rows first, findings in plan order; within one, moving positions run fastest.
        Then the rows that requests add, request by request.
    """
    parts: list[PlanRows] = []
    for finding in plan.findings:
        axes, held = plan.finding_axes[finding.number], positions[finding.number]
        if isinstance(plan.document.sweep.design, Table):
            drawn = draw(plan, finding, [axes], held.counts)
            codes = np.concatenate([_baseline(axes), drawn.codes])
            position = np.concatenate([np.zeros(1, np.int32), drawn.position])
            parts.append(_rows(plan, finding, codes, position, held))
        else:
            parts.append(_with_positions(plan, finding, _design(plan, axes), held))
    for request in plan.requests:
        for finding in plan.findings:
            earlier = [part for part in parts if part.finding[:1] == finding.number]
            part = _requested(plan, finding, request, positions[finding.number], earlier)
            if part.count:
                parts.append(part)
    return _joined(parts)


def _joined(parts: Sequence[PlanRows]) -> PlanRows:
    codes = {axis: np.concatenate([part.codes[axis] for part in parts]) for axis in AXES}
    others = {
        f.name: np.concatenate([getattr(part, f.name) for part in parts])
        for f in fields(PlanRows)
        if f.name != "codes"
    }
    return PlanRows(codes=codes, **others)


def _requested(
    plan: Plan,
    finding: Finding,
    request: Request,
    positions: FindingPositions,
    earlier: Sequence[PlanRows],
) -> PlanRows:
    """Return the rows that a request adds to those that are there already.

    They are the plan's design with the request's choices added to its axes, as far as they
    hold one of them, and the baseline with any of the request's choices put in.
    """
    planned, asked = plan.finding_axes[finding.number], request.codes[finding.number]
    axes = request_axes(plan, finding, request)
    new = {axis: sorted(set(asked.get(axis, ())) - set(planned[axis].codes)) for axis in AXES}
    answers = {
        axis: FindingAxis(
            tuple(dict.fromkeys((planned[axis].baseline, *asked.get(axis, ())))),
            planned[axis].baseline,
        )
        for axis in AXES
    }
    if isinstance(plan.document.sweep.design, Table):
        rows = _with_positions(plan, finding, _full(answers), positions, request)
        drawn = draw(plan, finding, _blocks(axes, new), positions.counts, request)
        more = _rows(plan, finding, drawn.codes, drawn.position, positions, request)
        rows = _joined([rows, more.part(~_present(more, rows))])
    else:
        codes = np.unique(np.concatenate([_full(answers), _design(plan, axes, new)]), axis=0)
        rows = _with_positions(plan, finding, codes, positions, request)
    found = np.zeros(rows.count, bool)
    for part in earlier:
        found |= _present(rows, part)
    return rows.part(~found)


def request_axes(plan: Plan, finding: Finding, request: Request) -> dict[str, FindingAxis]:
    """Return the planned axes of a finding with the choices that a request adds to them."""
    asked = [request, *(plan.requests[number - 1] for number in request.together)]
    axes = {}
    for axis, held in plan.finding_axes[finding.number].items():
        named = [c for one in reversed(asked) for c in one.codes[finding.number].get(axis, ())]
        axes[axis] = FindingAxis(tuple(dict.fromkeys((*held.codes, *named))), held.baseline)
    return axes


def _present(rows: PlanRows, others: PlanRows) -> NDArray[np.bool_]:
    """Say which rows stand among others, by id."""
    found = np.isin(rows.low, others.low)
    if found.any():
        places = np.flatnonzero(found)
        near = np.isin(others.low, rows.low[places])
        ids = set(zip(others.high[near].tolist(), others.low[near].tolist(), strict=True))
        pairs = zip(rows.high[places].tolist(), rows.low[places].tolist(), strict=True)
        found[places] = [pair in ids for pair in pairs]
    return found


def _design(
    plan: Plan,
    axes: Mapping[str, FindingAxis],
    new: Mapping[str, Sequence[int]] | None = None,
) -> NDArray[np.int16]:
    """Return the entry codes of a design, shape (s, axes).

    Where ``new`` is given, only rows that hold one of its codes.
    """
    make = DESIGNS[plan.document.sweep.design]
    if new is None:
        return make(axes)
    parts = [np.empty((0, len(AXES)), np.int16)]
    for block in _blocks(axes, new):
        codes = make(block)
        held = [np.isin(codes[:, n], block[axis].codes) for n, axis in enumerate(AXES)]
        parts.append(codes[np.all(held, axis=0)])
    return np.concatenate(parts)


def _blocks(
    axes: Mapping[str, FindingAxis], new: Mapping[str, Sequence[int]]
) -> list[Mapping[str, FindingAxis]]:
    """Split the rows that hold a new code into full crosses that share none.

    The first axis on which a row holds a new code says which block it is in.
    """
    blocks: list[Mapping[str, FindingAxis]] = []
    held = dict(axes)
    for axis in AXES:
        if new[axis]:
            only = FindingAxis(tuple(new[axis]), axes[axis].baseline)
            blocks.append(held | {axis: only})
            rest = tuple(code for code in axes[axis].codes if code not in new[axis])
            held[axis] = FindingAxis(rest, axes[axis].baseline)
    return blocks


def _baseline(axes: Mapping[str, FindingAxis]) -> NDArray[np.int16]:
    return np.array([[axes[axis].baseline for axis in AXES]], np.int16)


def _full(axes: Mapping[str, FindingAxis]) -> NDArray[np.int16]:
    grids = np.meshgrid(*[np.array(axes[a].codes, np.int16) for a in AXES], indexing="ij")
    return np.stack([grid.reshape(-1) for grid in grids], axis=1)


def _changes(axes: Mapping[str, FindingAxis], most: int) -> NDArray[np.int16]:
    """Return the baseline and every specification at most ``most`` choices away."""
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


DESIGNS: dict[str, Callable[[Mapping[str, FindingAxis]], NDArray[np.int16]]] = {
    "full": _full,
    "one change": lambda axes: _changes(axes, 1),
    "two changes": lambda axes: _changes(axes, 2),
}


def _with_positions(
    plan: Plan,
    finding: Finding,
    codes: NDArray[np.int16],
    positions: FindingPositions,
    request: Request | None = None,
) -> PlanRows:
    """Repeat moving windows over their positions and add up the ids."""
    window = codes[:, AXES.index("window")]
    count = np.array([positions.counts.get(c, 1) for c in range(int(window.max()) + 1)])[window]
    source = np.repeat(np.arange(codes.shape[0]), count)
    start = np.cumsum(count) - count
    position = (np.arange(source.size) - start[source]).astype(np.int32)
    return _rows(plan, finding, codes[source], position, positions, request)


def _rows(
    plan: Plan,
    finding: Finding,
    codes: NDArray[np.int16],
    position: NDArray[np.int32],
    positions: FindingPositions,
    request: Request | None = None,
) -> PlanRows:
    """Return rows of given codes, shape (s, axes), and positions, with their ids and rules."""
    rows = {axis: np.ascontiguousarray(codes[:, column]) for column, axis in enumerate(AXES)}
    high, low = _ids(plan, finding, rows, position, positions)
    which = np.full(position.size, finding.number, np.int16)
    number = np.full(position.size, request.number if request else 0, np.int16)
    return PlanRows(which, rows, position, high, low, _ruled(plan, finding, rows), number)


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
