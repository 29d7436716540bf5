"""What a plan comes to, before anything is estimated."""

from __future__ import annotations

import os
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from sweep.engine.cost import estimate_seconds
from sweep.engine.feasible import lowered_maxima
from sweep.engine.prepare import Prepared, prepare
from sweep.engine.reasons import REASONS, Reason
from sweep.engine.unsuited import unsuited
from sweep.errors import Fault, InputFault
from sweep.notebook import check_html, duration, specifications
from sweep.plan.choices import AXES
from sweep.plan.model import Plan

__all__ = ["Asked", "AxisSize", "Check", "RuledOut", "check_plan", "default_jobs", "workers"]


@dataclass(frozen=True, slots=True)
class AxisSize:
    """One axis of one finding.

    Attributes
    ----------
    finding, axis : str
    choices : tuple of str
        Labels in plan order.
    baseline : str
        Label of the baseline's choice.
    positions : int
        Window positions in all; the number of choices on other axes.
    """

    finding: str
    axis: str
    choices: tuple[str, ...]
    baseline: str
    positions: int


@dataclass(frozen=True, slots=True)
class RuledOut:
    """Specifications of one finding that are not run, and why."""

    finding: str
    specifications: int
    because: str


@dataclass(frozen=True, slots=True)
class Asked:
    """A request, and the specifications that it adds for one finding."""

    request: str
    asked_by: str
    finding: str
    added: int


@dataclass(frozen=True, slots=True, repr=False)
class Check:
    """A plan found sound, and its size.

    Attributes
    ----------
    plan : Plan
    axes : tuple of AxisSize
    findings : tuple of (str, int, int)
        Name, planned specifications, and those that will be run.
    ruled_out : tuple of RuledOut
    notes : tuple of str
        Choices that give the same numbers by construction.
    seconds : float
        Rough estimate of a whole run with ``jobs`` workers, nothing stored before.
    jobs : int
    first, last : str
        First and last period of the data.
    requests : tuple of Asked
        What each request adds; these specifications are not among the planned ones.
    lowered : tuple of str
        Criteria whose largest order the data do not allow, in words.
    """

    plan: Plan
    axes: tuple[AxisSize, ...]
    findings: tuple[tuple[str, int, int], ...]
    ruled_out: tuple[RuledOut, ...]
    notes: tuple[str, ...]
    seconds: float
    jobs: int
    first: str
    last: str
    requests: tuple[Asked, ...] = ()
    lowered: tuple[str, ...] = ()

    @property
    def planned(self) -> int:
        """Planned specifications of all findings."""
        return sum(planned for _, planned, _ in self.findings)

    @property
    def added(self) -> int:
        """Specifications that requests add to the planned ones."""
        return sum(asked.added for asked in self.requests)

    def __str__(self) -> str:
        added = f", {self.added:,} of them for requests" if self.added else ""
        workers = f"{self.jobs} worker{'s' if self.jobs > 1 else ''}"
        return (
            f"{specifications(self.planned + self.added)} in all{added}; "
            f"{duration(self.seconds)} with {workers}."
        )

    def __repr__(self) -> str:
        return f"{self.plan!r}\n{self}"

    def _repr_html_(self) -> str:
        return check_html(self)


def default_jobs() -> int:
    """Return the cores that this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def workers(jobs: int | None) -> int:
    """Return the number of worker processes: what was asked for, or one a core.

    Raises
    ------
    InputFault
        If it is no number of workers.
    """
    if jobs is None:
        return default_jobs()
    if isinstance(jobs, bool) or not isinstance(jobs, int) or jobs < 1:
        raise InputFault(Fault("jobs", f"{jobs!r} is no number of workers", "Give 1 or more."))
    return jobs


def check_plan(plan: Plan, *, jobs: int | None = None) -> Check:
    """Validate a plan with its data and count its specifications; estimates nothing.

    Raises
    ------
    InputFault
        With every fault of the data.
    """
    jobs = workers(jobs)
    prepared = prepare(plan)
    calendar = prepared.dataset.calendar
    rows = prepared.rows
    senseless = {reason: there & (rows.rule < 0) for reason, there in unsuited(prepared).items()}
    to_run = (rows.rule < 0) & ~np.any(list(senseless.values()), axis=0)
    counts = []
    for finding in plan.findings:
        mine = (rows.finding == finding.number) & (rows.request == 0)
        counts.append((finding.name, int(mine.sum()), int((mine & to_run).sum())))
    return Check(
        plan,
        tuple(_axes(prepared)),
        tuple(counts),
        tuple(_ruled(prepared, senseless)),
        prepared.notes,
        estimate_seconds(prepared, jobs),
        jobs,
        calendar.label(0),
        calendar.label(len(calendar) - 1),
        tuple(_asked(prepared)),
        tuple(lowered_maxima(plan, prepared.windows, calendar)),
    )


def _asked(prepared: Prepared) -> list[Asked]:
    """Count what each request adds, for the findings that it asks about."""
    rows = prepared.rows
    return [
        Asked(
            request.name,
            request.asked_by,
            finding.name,
            int(((rows.finding == finding.number) & (rows.request == request.number)).sum()),
        )
        for request in prepared.plan.requests
        for finding in prepared.plan.findings
        if request.codes[finding.number]
    ]


def _axes(prepared: Prepared) -> list[AxisSize]:
    plan = prepared.plan
    sizes = []
    for finding in plan.findings:
        for axis in AXES:
            held = plan.finding_axes[finding.number][axis]
            positions = len(held.codes)
            if axis == "window":
                positions = sum(prepared.windows[finding.number][code].count for code in held.codes)
            labels = tuple(plan.axes[axis][code].label for code in held.codes)
            sizes.append(
                AxisSize(
                    finding.name, axis, labels, plan.axes[axis][held.baseline].label, positions
                )
            )
    return sizes


def _ruled(
    prepared: Prepared, senseless: Mapping[Reason, NDArray[np.bool_]]
) -> list[RuledOut]:
    """Count what the plan's rules exclude, and choices that make no sense together."""
    plan, rows = prepared.plan, prepared.rows
    found = []
    for finding in plan.findings:
        mine = rows.finding == finding.number
        for number, rule in enumerate(plan.rules):
            count = int((mine & (rows.rule == number)).sum())
            if count:
                found.append(RuledOut(finding.name, count, rule.because))
        for reason, there in senseless.items():
            count = int((mine & there).sum())
            if count:
                found.append(RuledOut(finding.name, count, REASONS[reason][1]))
    return found


def shown_path(path: Path) -> str:
    """Return a path as short as it can be written from here."""
    try:
        return str(path.relative_to(Path.cwd()))
    except ValueError:
        return str(path)
