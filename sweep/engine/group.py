"""From the rows that are missing to tasks: one panel, a block of windows, all the rest."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from sweep.engine.cost import seconds_a_row, seconds_a_window
from sweep.engine.prepare import Prepared
from sweep.engine.task import Scale, System, Task
from sweep.panel.load import data_digest
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
SECONDS = 0.6
"""Work that a task is cut to, between 0.2 and 1 s."""


def make_tasks(prepared: Prepared, missing: Ints, details: NDArray[np.bool_]) -> list[Task]:
    """Group rows by panel, cut each panel into blocks of windows, dear tasks first.

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
    """Split rows by series, transformation and moving window entry (fixed ones together)."""
    plan, rows = prepared.plan, prepared.rows
    panels: dict[object, int] = {}
    table = np.zeros((len(plan.findings), len(plan.axes["measures"])), np.int64)
    for finding in plan.findings:
        for code in plan.finding_axes[finding.number]["measures"].codes:
            columns = _columns(prepared, finding, code)
            roles = tuple(sorted(zip(columns, finding.roles, strict=True)))
            span = tuple(
                (c, p.first.tobytes(), p.last.tobytes())
                for c, p in sorted(prepared.windows[finding.number].items())
            )
            table[finding.number, code] = panels.setdefault((roles, span), len(panels))
    moving = np.array([bool(getattr(c, "moving", "")) for c in plan.axes["window"]])
    entry = np.where(moving, np.arange(moving.size) + 1, 0)
    key = table[rows.finding[missing], rows.codes["measures"][missing]]
    key = key * len(plan.axes["transformation"]) + rows.codes["transformation"][missing]
    key = key * (moving.size + 1) + entry[rows.codes["window"][missing]]
    order = np.argsort(key, kind="stable")
    for members in np.split(order, np.flatnonzero(np.diff(key[order])) + 1):
        yield missing[members]


def _columns(prepared: Prepared, finding: Finding, code: int) -> tuple[str, ...]:
    measure = prepared.plan.axes["measures"][code]
    assert isinstance(measure, MeasureChoice)
    return prepared.plan.columns(finding, measure)


def _panel_tasks(
    prepared: Prepared, members: Ints, details: NDArray[np.bool_]
) -> Iterator[Task]:
    rows = prepared.rows
    window_code = rows.codes["window"][members]
    choice = prepared.plan.axes["window"][int(window_code[0])]
    assert isinstance(choice, WindowChoice)
    if choice.moving:
        where = rows.position[members].astype(np.int64)
    else:
        _, where = np.unique(window_code, return_inverse=True)
        where = where.reshape(-1)
    order = np.argsort(where, kind="stable")
    members, where = members[order], where[order]
    limit = _block_limit(choice)
    cost = seconds_a_row(prepared, members) * members.size / max(int(where.max()) + 1, 1)
    cost += seconds_a_window(prepared, members)
    each = max(1, min(limit, int(SECONDS / max(cost, 1e-9)), _rows_limit(where)))
    for block in np.split(members, np.flatnonzero(np.diff(where // each)) + 1):
        yield _task(prepared, block, details, choice, cost * each)


def _rows_limit(where: Ints) -> int:
    windows = int(where.max()) + 1
    return max(1, int(LARGEST_TASK * windows / where.size))


def _block_limit(choice: WindowChoice) -> int:
    """Return how many neighbouring windows share running sums: span at most twice the window."""
    if choice.moving == "rolling":
        return max(1, min(256, choice.length // choice.step))
    return 128


def _task(
    prepared: Prepared,
    members: Ints,
    details: NDArray[np.bool_],
    choice: WindowChoice,
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
    first, last, episodes, window = _window_rows(prepared, members, choice)
    systems, system = _systems(prepared, members, names)
    used = {axis: np.unique(rows.codes[axis][members]) for axis in AXES}
    season = calendar.season(np.arange(len(calendar)))
    values = np.column_stack([prepared.dataset.column(name) for name in names])
    return Task(
        values=values,
        scales=scales,
        frequency=calendar.frequency.name,
        season=season,
        seasons=calendar.frequency.seasons,
        first=first,
        last=last,
        episodes=episodes,
        running=bool(choice.moving) and not any(episodes),
        systems=systems,
        lags=tuple(_lag(plan.axes["lags"][c]) for c in used["lags"]),
        terms=tuple(prepared.terms[int(c)] for c in used["deterministics"]),
        procedures=tuple(_procedure(plan.axes["test"][c]) for c in used["test"]),
        row=members,
        system=system,
        lag=np.searchsorted(used["lags"], rows.codes["lags"][members]).astype(np.int16),
        term=np.searchsorted(
            used["deterministics"], rows.codes["deterministics"][members]
        ).astype(np.int16),
        procedure=np.searchsorted(used["test"], rows.codes["test"][members]).astype(np.int16),
        window=window,
        coefficients=details[members],
        tokens=_column_tokens(prepared, names, scales),
        cost=cost,
    )


def _lag(choice: object) -> LagChoice:
    assert isinstance(choice, LagChoice)
    return choice


def _procedure(choice: object) -> ProcedureChoice:
    assert isinstance(choice, ProcedureChoice)
    return choice


def _window_rows(
    prepared: Prepared, members: Ints, choice: WindowChoice
) -> tuple[Ints, Ints, tuple[tuple[tuple[int, int], ...], ...], NDArray[np.int32]]:
    """Return the windows of a block and each row's window in it."""
    rows = prepared.rows
    found = prepared.windows[int(rows.finding[members[0]])]
    code = rows.codes["window"][members].astype(np.int64)
    if choice.moving:
        positions: Positions = found[int(code[0])]
        places, window = np.unique(rows.position[members], return_inverse=True)
        episodes = (positions.episodes,) * places.size
        first, last = positions.first[places], positions.last[places]
    else:
        codes, window = np.unique(code, return_inverse=True)
        first = np.array([found[int(c)].first[0] for c in codes], dtype=np.int64)
        last = np.array([found[int(c)].last[0] for c in codes], dtype=np.int64)
        episodes = tuple(found[int(c)].episodes for c in codes)
    return first, last, episodes, window.reshape(-1).astype(np.int32)


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
        if code not in plan.finding_axes[finding.number]["measures"].codes:
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


def _column_tokens(
    prepared: Prepared, names: list[str], scales: tuple[Scale, ...]
) -> tuple[str, ...]:
    tokens = []
    for name, scale in zip(names, scales, strict=True):
        high, low = data_digest(prepared.dataset, [name])
        tokens.append(f"{high:016x}{low:016x} {scale.name} {scale.smoothing} {scale.horizon}")
    return tuple(tokens)
