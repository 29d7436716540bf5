"""From the rows that are missing to tasks: one panel, a block of windows, all the rest."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sweep.engine.cost import task_seconds
from sweep.engine.prepare import Prepared
from sweep.engine.reasons import REASON_OF_LACK
from sweep.engine.task import Scale, System, Task
from sweep.panel.load import values_digest
from sweep.panel.transforms import TRANSFORMS
from sweep.panel.windows import Positions
from sweep.plan.choices import (
    AXES,
    ConditioningChoice,
    LagChoice,
    MeasureChoice,
    ProcedureChoice,
    TransformationChoice,
    WindowChoice,
)
from sweep.plan.model import Finding, scale_of

__all__ = ["make_tasks"]

Ints = NDArray[np.int64]

LARGEST_TASK = 60_000
"""Rows a task holds at the most."""
SECONDS = 0.3
"""Work that a task is cut to: what a stopped run waits for, and more than a task's own cost."""


def make_tasks(prepared: Prepared, missing: Ints, details: NDArray[np.bool_]) -> list[Task]:
    """Group rows by panel, cut each panel into runs of windows, dear tasks first.

    Parameters
    ----------
    prepared : Prepared
    missing : ndarray of int, shape (s,)
        Rows of ``prepared.rows`` to compute.
    details : ndarray of bool, shape (rows,)
        Rows whose single lag coefficients are kept.

    Returns
    -------
    list of Task
    """
    if not missing.size:
        return []
    tasks = [
        task
        for members in _by_panel(prepared, missing)
        for task in _panel_tasks(prepared, members, details)
    ]
    return sorted(tasks, key=lambda task: -task.cost)


def _by_panel(prepared: Prepared, missing: Ints) -> Iterator[Ints]:
    """Split rows by series and transformation; findings on the same series go together."""
    plan, rows = prepared.plan, prepared.rows
    panels: dict[object, int] = {}
    table = np.zeros((len(plan.findings), len(plan.axes["measures"])), np.int64)
    for finding in plan.findings:
        for code in plan.finding_axes[finding.number]["measures"].every:
            columns = _columns(prepared, finding, code)
            roles = tuple(sorted(zip(columns, finding.roles, strict=True)))
            span = tuple(
                (c, p.first.tobytes(), p.last.tobytes())
                for c, p in sorted(prepared.windows[finding.number].items())
            )
            table[finding.number, code] = panels.setdefault((roles, span), len(panels))
    key = table[rows.finding[missing], rows.codes["measures"][missing]]
    key = key * len(plan.axes["transformation"]) + rows.codes["transformation"][missing]
    order = np.argsort(key, kind="stable")
    for members in np.split(order, np.flatnonzero(np.diff(key[order])) + 1):
        yield missing[members]


def _columns(prepared: Prepared, finding: Finding, code: int) -> tuple[str, ...]:
    measure = prepared.plan.axes["measures"][code]
    assert isinstance(measure, MeasureChoice)
    return prepared.plan.columns(finding, measure)


def _panel_tasks(prepared: Prepared, members: Ints, details: NDArray[np.bool_]) -> Iterator[Task]:
    """Cut the windows of a panel, in order of entry and position, into tasks of even cost."""
    rows = prepared.rows
    longest = int(rows.position[members].max()) + 1
    where = rows.codes["window"][members].astype(np.int64) * longest + rows.position[members]
    order = np.argsort(where, kind="stable")
    members, where = members[order], where[order]
    starts = np.concatenate([[0], np.flatnonzero(np.diff(where)) + 1])
    calls, per_row = task_seconds(prepared, members)
    pieces = min(
        max(round(per_row * members.size / SECONDS), -(-members.size // LARGEST_TASK), 1),
        starts.size,
    )
    cuts = starts[np.linspace(0, starts.size, pieces + 1).astype(int)[1:-1]]
    for part in np.split(members, cuts):
        yield _task(prepared, part, details, calls + per_row * part.size)


def _task(
    prepared: Prepared,
    members: Ints,
    details: NDArray[np.bool_],
    cost: float,
) -> Task:
    plan, rows, calendar = prepared.plan, prepared.rows, prepared.dataset.calendar
    first_row = int(members[0])
    finding = plan.findings[int(rows.finding[first_row])]
    measure = int(rows.codes["measures"][first_row])
    pairs = sorted(zip(_columns(prepared, finding, measure), finding.roles, strict=True))
    transformation = plan.axes["transformation"][int(rows.codes["transformation"][first_row])]
    assert isinstance(transformation, TransformationChoice)
    names = [column for column, _ in pairs]
    scales = tuple(
        Scale(scale_of(transformation, role, column), transformation.smoothing,
              transformation.horizon)
        for column, role in pairs
    )  # fmt: skip
    used = {axis: np.unique(rows.codes[axis][members]) for axis in AXES}
    terms = tuple(prepared.terms[int(c)] for c in used["deterministics"])
    windows = _window_rows(prepared, members, scales)
    systems, system = _systems(prepared, members, names)
    season = calendar.season(np.arange(len(calendar)))
    values = np.column_stack([prepared.dataset.column(name) for name in names])
    return Task(
        values=values,
        scales=scales,
        frequency=calendar.frequency.name,
        season=season,
        seasons=calendar.frequency.seasons,
        first=windows.first,
        last=windows.last,
        episodes=windows.episodes,
        block=windows.block,
        unequal=windows.unequal,
        lacking=windows.lacking,
        spans=windows.spans,
        systems=systems,
        lags=tuple(_lag(plan.axes["lags"][c]) for c in used["lags"]),
        terms=terms,
        procedures=tuple(_procedure(plan.axes["test"][c]) for c in used["test"]),
        row=members,
        system=system,
        lag=np.searchsorted(used["lags"], rows.codes["lags"][members]).astype(np.int16),
        term=np.searchsorted(used["deterministics"], rows.codes["deterministics"][members]).astype(
            np.int16
        ),
        procedure=np.searchsorted(used["test"], rows.codes["test"][members]).astype(np.int16),
        window=windows.window,
        coefficients=details[members],
        tokens=tuple(values_digest(prepared.dataset, name) for name in names),
        cost=cost,
    )


def _lag(choice: object) -> LagChoice:
    assert isinstance(choice, LagChoice)
    return choice


def _procedure(choice: object) -> ProcedureChoice:
    assert isinstance(choice, ProcedureChoice)
    return choice


@dataclass(frozen=True, slots=True)
class _Windows:
    first: Ints
    last: Ints
    episodes: tuple[tuple[tuple[int, int], ...], ...]
    block: Ints
    unequal: NDArray[np.bool_]
    lacking: Ints
    spans: dict[int, tuple[int, int]]
    window: NDArray[np.int32]


def _window_rows(prepared: Prepared, members: Ints, scales: tuple[Scale, ...]) -> _Windows:
    """Return the windows of a task, the running sums that serve them, and each row's window."""
    rows = prepared.rows
    found = prepared.windows[int(rows.finding[members[0]])]
    longest = int(rows.position[members].max()) + 1
    key = rows.codes["window"][members].astype(np.int64) * longest + rows.position[members]
    kinds, window = np.unique(key, return_inverse=True)
    code, position = kinds // longest, kinds % longest
    first, last = np.empty_like(kinds), np.empty_like(kinds)
    block, unequal = np.full(kinds.size, -1, np.int64), np.zeros(kinds.size, bool)
    lacking = np.zeros(kinds.size, np.int64)
    spans: dict[int, tuple[int, int]] = {}
    episodes: list[tuple[tuple[int, int], ...]] = [()] * kinds.size
    local = all(TRANSFORMS[scale.name].kind == "local" for scale in scales)
    for entry in np.unique(code).tolist():
        here = np.flatnonzero(code == entry)
        positions: Positions = found[entry]
        first[here] = positions.first[position[here]]
        last[here] = positions.last[position[here]]
        for w in here.tolist():
            episodes[w] = positions.episodes
        choice = prepared.plan.axes["window"][entry]
        assert isinstance(choice, WindowChoice)
        lacking[here] = REASON_OF_LACK[positions.lack]
        unequal[here] = choice.moving in ("expanding", "shrinking")
        if choice.moving and local and not positions.episodes and not positions.lack:
            number = position[here] // _block_limit(choice)
            block[here] = entry * 2**32 + number
            for b in np.unique(number).tolist():
                spans[entry * 2**32 + b] = _block_span(positions, b, _block_limit(choice))
    return _Windows(
        first, last, tuple(episodes), block, unequal, lacking, spans,
        window.reshape(-1).astype(np.int32),
    )  # fmt: skip


def _block_span(positions: Positions, block: int, limit: int) -> tuple[int, int]:
    inside = slice(block * limit, (block + 1) * limit)
    return int(positions.first[inside].min()), int(positions.last[inside].max())


def _block_limit(choice: WindowChoice) -> int:
    """Return how many neighbouring windows share running sums: span at most twice the window."""
    if choice.moving == "rolling":
        return max(1, min(256, choice.length // choice.step))
    return 128


def _systems(
    prepared: Prepared, members: Ints, names: list[str]
) -> tuple[tuple[System, ...], NDArray[np.int16]]:
    """Return the systems of a block and each row's system."""
    plan, rows = prepared.plan, prepared.rows
    width = len(plan.axes["conditioning"])
    key = rows.finding[members].astype(np.int64) * width + rows.codes["conditioning"][members]
    kinds, system = np.unique(key, return_inverse=True)
    measure = int(rows.codes["measures"][members[0]])
    systems = []
    for kind in kinds.tolist():
        finding = plan.findings[kind // width]
        choice = plan.axes["conditioning"][kind % width]
        assert isinstance(choice, ConditioningChoice)
        code = measure
        if code not in plan.finding_axes[finding.number]["measures"].every:
            code = plan.finding_axes[finding.number]["measures"].baseline
        place = {
            role: names.index(column)
            for role, column in zip(finding.roles, _columns(prepared, finding, code), strict=True)
        }
        systems.append(
            System(
                place[finding.effect],
                place[finding.cause],
                tuple(place[role] for role in finding.given if role not in choice.without),
                tuple((place[item.series], item.lags) for item in finding.exogenous),
            )
        )
    return tuple(systems), system.reshape(-1).astype(np.int16)
