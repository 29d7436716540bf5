"""Build a plan from a valid document, with every fault of meaning collected."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from sweep.errors import Fault, InputFault
from sweep.panel.periods import FREQUENCIES, Frequency
from sweep.plan.builder import PlanBuilder
from sweep.plan.choices import AXES, MeasureChoice
from sweep.plan.document import PlanDocument
from sweep.plan.model import Finding, FindingAxis, Plan
from sweep.plan.requests import build_requests
from sweep.plan.suggest import suggestion
from sweep.plan.twins import twin_notes

__all__ = ["build_plan"]


def build_plan(document: PlanDocument, text: str, path: Path) -> Plan:
    """Build a plan from a valid document.

    Raises
    ------
    InputFault
        With every fault of meaning: duplicate choices, roles that clash, unknown names.
    """
    builder = PlanBuilder(document)
    findings = builder.findings()
    shared = {
        axis: builder.shared_axis(axis)
        for axis in ("lags", "deterministics", "window", "transformation", "test")
    }
    roles = {role for finding in findings for role in finding.roles}
    builder.check_measures(document.axes.measures or {}, roles, "axes.measures")
    finding_axes: tuple[Mapping[str, FindingAxis], ...] = tuple(
        shared
        | {"conditioning": builder.conditioning(finding), "measures": builder.measures(finding)}
        for finding in findings
    )
    requests, finding_axes = build_requests(builder, findings, finding_axes)
    rules = builder.rules(findings)
    builder.check_screens()
    builder.check_series(roles)
    _check_reported(builder, findings)
    if builder.faults:
        raise InputFault(*builder.faults)
    axes = {axis: tuple(builder.axes[axis].choices) for axis in AXES}
    notes = (*builder.notes, *twin_notes(axes, findings, builder.frequency))
    plan = Plan(
        path, text, document, builder.frequency, findings, axes, finding_axes, rules,
        tuple(dict.fromkeys(notes)), requests,
    )  # fmt: skip
    _check_baseline(plan)
    return plan


def _check_reported(builder: PlanBuilder, findings: tuple[Finding, ...]) -> None:
    reported = builder.document.baseline.reported
    if reported is None:
        return
    names = [finding.name for finding in findings]
    if reported.finding is not None and reported.finding not in names:
        builder.fault(
            "baseline.reported.finding",
            f'no finding is called "{reported.finding}"' + suggestion(reported.finding, names),
        )
    if reported.statistic is None and reported.p_value is None and reported.observations is None:
        builder.fault("baseline.reported", "holds no number", "Give a statistic or a p_value.")


def _check_baseline(plan: Plan) -> None:
    window = plan.axes["window"][plan.finding_axes[0]["window"].baseline]
    if getattr(window, "moving", ""):
        raise InputFault(
            Fault(
                "baseline.window",
                "the baseline is one specification, and a moving window is many",
                "Choose a fixed window.",
            )
        )
    for finding, axes in zip(plan.findings, plan.finding_axes, strict=True):
        for number, rule in enumerate(plan.rules, start=1):
            applies = rule.finding in (None, finding.number)
            if applies and all(axes[axis].baseline in codes for axis, codes in rule.codes.items()):
                raise InputFault(
                    Fault(
                        f"rule_out[{number}]",
                        f'rules out the baseline of "{finding.name}"',
                        "Narrow the rule or change the baseline.",
                    )
                )


def measure_of(plan: Plan, code: int) -> MeasureChoice:
    """Return a measures choice by code."""
    choice = plan.axes["measures"][code]
    assert isinstance(choice, MeasureChoice)
    return choice


def frequency_of(document: PlanDocument) -> Frequency:
    """Return the frequency a document declares."""
    return FREQUENCIES[document.data.frequency]
