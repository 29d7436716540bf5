"""Requests of referees: further choices, built after the plan's own and kept apart from them."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any

from sweep.plan import build
from sweep.plan.builder import PlanBuilder
from sweep.plan.choices import AXES, Choice
from sweep.plan.document import AXIS_KEYS, AxesTable, RequestTable
from sweep.plan.model import Finding, FindingAxis, Request
from sweep.plan.suggest import suggestion

__all__ = ["build_requests"]

Codes = dict[str, tuple[int, ...]]
Axes = Mapping[str, FindingAxis]


def build_requests(
    builder: PlanBuilder, findings: tuple[Finding, ...], finding_axes: tuple[Axes, ...]
) -> tuple[tuple[Request, ...], tuple[Axes, ...]]:
    """Build the requests of a plan and add their choices to the axes of the findings.

    Parameters
    ----------
    builder : PlanBuilder
        Holds the document and the choices of the plan's own axes; choices are added.
    findings : tuple of Finding
    finding_axes : tuple of mapping, one a finding
        The planned choices.

    Returns
    -------
    requests : tuple of Request
    finding_axes : tuple of mapping, one a finding
        With what the requests brought in ``added``.
    """
    names: dict[str, int] = {}
    requests = []
    grown = [dict(axes) for axes in finding_axes]
    for number, table in enumerate(builder.document.requests, start=1):
        place = f"requests[{number}]"
        together = _together(builder, table, names, place)
        if table.name in names:
            builder.fault(f"{place}.name", f'two requests are called "{table.name}"')
        names[table.name] = number
        asked = _asked_about(builder, table, findings, place)
        shared = _shared(builder, table.axes, place)
        roles = {role for finding in asked for role in finding.roles}
        builder.check_measures(table.axes.measures or {}, roles, f"{place}.axes.measures")
        codes: list[Codes] = [{} for _ in findings]
        for finding in asked:
            own = shared | _own(builder, table.axes, finding, place)
            codes[finding.number] = own
            grown[finding.number] = _with_added(grown[finding.number], own)
        if not table.axes.model_fields_set:
            builder.fault(f"{place}.axes", "names no choice", "Name at least one.")
        requests.append(
            Request(number, table.name, table.from_, table.asks, together, tuple(codes))
        )
    for finding in findings:
        for axis, held in grown[finding.number].items():
            if held.added:
                builder.labels_differ(axis, held.every, f"requests, axis {axis}")
    return tuple(requests), tuple(grown)


def _together(
    builder: PlanBuilder, table: RequestTable, names: Mapping[str, int], place: str
) -> tuple[int, ...]:
    """Return the numbers of the earlier requests that a request is crossed with."""
    found = []
    for name in dict.fromkeys(table.with_):
        if name in names:
            found.append(names[name])
        elif name == table.name:
            builder.fault(f"{place}.with", "a request cannot be crossed with itself")
        else:
            later = [other.name for other in builder.document.requests]
            problem = f'no earlier request is called "{name}"'
            mend = "Put it before this one." if name in later else ""
            builder.fault(f"{place}.with", problem + suggestion(name, names), mend)
    return tuple(found)


def _asked_about(
    builder: PlanBuilder, table: RequestTable, findings: tuple[Finding, ...], place: str
) -> list[Finding]:
    if table.finding is None:
        return list(findings)
    chosen = [finding for finding in findings if finding.name == table.finding]
    if not chosen:
        known = [finding.name for finding in findings]
        builder.fault(
            f"{place}.finding",
            f'no finding is called "{table.finding}"' + suggestion(table.finding, known),
        )
    return chosen


def _shared(builder: PlanBuilder, axes: AxesTable, place: str) -> Codes:
    """Return the codes on the axes that are the same for every finding."""
    found: Codes = {}
    for axis in ("lags", "deterministics", "window", "transformation", "test"):
        plural = AXIS_KEYS[axis][0]
        codes: list[int] = []
        for number, entry in enumerate(getattr(axes, plural) or [], start=1):
            where = f"{place}.axes.{plural}[{number}]"
            for choice in builder.choices(axis, entry, where):
                code = builder.axes[axis].code(choice)
                if code in codes:
                    known = builder.axes[axis].choices[code].label
                    builder.fault(where, f'"{choice.label}" means the same as "{known}"',
                                  "Leave one of them out.")  # fmt: skip
                else:
                    codes.append(code)
        if codes:
            found[axis] = tuple(codes)
    return found


def _own(builder: PlanBuilder, axes: AxesTable, finding: Finding, place: str) -> Codes:
    """Return the codes on the axes that depend on the finding."""
    found: Codes = {}
    makers: list[tuple[str, Callable[[], list[Any]]]] = [
        ("conditioning", lambda: _conditioning(builder, axes, finding, place)),
        ("measures", lambda: _measures(builder, axes, finding)),
    ]
    for axis, make in makers:
        codes = [builder.axes[axis].code(choice) for choice in make()]
        if codes:
            found[axis] = tuple(dict.fromkeys(codes))
    return found


def _conditioning(
    builder: PlanBuilder, axes: AxesTable, finding: Finding, place: str
) -> list[Choice]:
    found: list[Choice] = []
    for number, entry in enumerate(axes.conditioning or [], start=1):
        try:
            found += build.conditioning_choices(entry, finding.given)
        except ValueError as error:
            builder.fault(f"{place}.axes.conditioning[{number}]", str(error))
    return found


def _measures(builder: PlanBuilder, axes: AxesTable, finding: Finding) -> list[Choice]:
    """Return the combinations of measures that hold one of the request's.

    They are crossed with the measures of the plan's other roles.
    """
    asked = {role: entries for role, entries in (axes.measures or {}).items()
             if role in finding.roles}  # fmt: skip
    if not asked:
        return []
    planned: dict[str, Any] = dict(builder.document.axes.measures or {})
    merged = dict(planned)
    for role, entries in asked.items():
        known = list(planned.get(role, [role]))
        merged[role] = known + [entry for entry in entries if entry not in known]
    columns = {
        role: {entry if isinstance(entry, str) else entry.series for entry in entries}
        for role, entries in asked.items()
    }
    return [
        choice
        for choice in build.measure_choices(merged, finding.roles)
        if any(choice.column(role) in held for role, held in columns.items())
    ]


def _with_added(axes: Axes, own: Codes) -> dict[str, FindingAxis]:
    """Add the codes of a request to the axes of a finding, those it has already left out."""
    grown = dict(axes)
    for axis in AXES:
        new = [code for code in own.get(axis, ()) if code not in grown[axis].every]
        if new:
            grown[axis] = replace(grown[axis], added=(*grown[axis].added, *new))
    return grown
