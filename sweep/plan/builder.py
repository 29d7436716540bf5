"""What builds the axes of a plan: choices by meaning, and every fault collected."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

from pydantic import TypeAdapter, ValidationError

from sweep.errors import Fault
from sweep.panel.periods import FREQUENCIES
from sweep.plan import build
from sweep.plan.canonical import Token, token
from sweep.plan.choices import AXES, Choice, TransformationChoice
from sweep.plan.document import (
    AXIS_KEYS,
    DeterministicEntry,
    FindingTable,
    LagEntry,
    PlanDocument,
    ProcedureEntry,
    TransformationEntry,
    WindowEntry,
)
from sweep.plan.model import Exogenous, Finding, FindingAxis, Rule
from sweep.plan.suggest import suggestion

__all__ = ["AxisTable", "PlanBuilder"]

SIGNS = {None: 0, "positive": 1, "negative": -1}
SCREENS = ("enough observations",)
LATER_SCREENS = (
    "stable roots", "no residual autocorrelation", "integration fits the test",
    "heteroskedasticity", "normality", "cointegration", "parameter stability",
    "uses no future values",
)  # fmt: skip
ENTRIES: dict[str, Any] = {
    "lags": LagEntry,
    "deterministics": DeterministicEntry,
    "window": WindowEntry,
    "transformation": TransformationEntry,
    "test": ProcedureEntry,
}


class AxisTable:
    """Choices of one axis, found by token, codes in order of appearance."""

    def __init__(self, axis: str) -> None:
        self.axis = axis
        self.choices: list[Choice] = []
        self.codes: dict[Token, int] = {}

    def code(self, choice: Choice) -> int:
        """Return the code of a choice, a new one where its meaning is new."""
        key = token(self.axis, choice.meaning)
        if key not in self.codes:
            self.codes[key] = len(self.choices)
            self.choices.append(choice)
        return self.codes[key]

    def known(self, choice: Choice) -> int | None:
        """Return the code of a choice, None where its meaning is new."""
        return self.codes.get(token(self.axis, choice.meaning))


class PlanBuilder:
    """Collects the choices, findings and rules of a document, and every fault of meaning."""

    def __init__(self, document: PlanDocument) -> None:
        self.document = document
        self.frequency = FREQUENCIES[document.data.frequency]
        self.faults: list[Fault] = []
        self.notes: list[str] = []
        self.axes = {axis: AxisTable(axis) for axis in AXES}

    def fault(self, place: str, problem: str, mend: str = "") -> None:
        """Note a fault."""
        self.faults.append(Fault(place, problem, mend))

    def choices(self, axis: str, entry: Any, place: str) -> list[Choice]:
        """Return the choices of one entry, or none and a fault."""
        makers: Mapping[str, Callable[..., Any]] = {
            "lags": lambda e: [build.lag_choice(e, self.frequency)],
            "deterministics": lambda e: [build.deterministic_choice(e, self.frequency)],
            "window": lambda e: build.window_choices(e, self.frequency),
            "transformation": lambda e: [build.transformation_choice(e, self.frequency)],
            "test": lambda e: [build.procedure_choice(e)],
        }
        try:
            return list(makers[axis](entry))
        except ValueError as error:
            self.fault(place, str(error))
            return []

    def shared_axis(self, axis: str) -> FindingAxis:
        """Build an axis that is the same for every finding."""
        plural, singular = AXIS_KEYS[axis]
        table = self.axes[axis]
        found = self.choices(
            axis, getattr(self.document.baseline, singular), f"baseline.{singular}"
        )
        if len(found) > 1:
            self.fault(f"baseline.{singular}", "a split names two windows; the baseline is one")
        baseline = found[0] if found else None
        codes: list[int] = []
        entries = getattr(self.document.axes, plural) or []
        for number, entry in enumerate(entries, start=1):
            place = f"axes.{plural}[{number}]"
            for choice in self.choices(axis, entry, place):
                known = table.known(choice)
                if known is not None:
                    self.fault(
                        place,
                        f'"{choice.label}" means the same as "{table.choices[known].label}"',
                        "Leave one of them out.",
                    )
                    continue
                codes.append(table.code(choice))
        if baseline is None:
            return FindingAxis(tuple(codes), -1)
        known = table.known(baseline)
        if known is None:
            known = table.code(baseline)
            codes.insert(0, known)
        self.labels_differ(axis, codes, f"axes.{plural}")
        return FindingAxis(tuple(codes), known)

    def labels_differ(self, axis: str, codes: Sequence[int], place: str) -> None:
        """Note a fault where two choices carry one name."""
        labels: dict[str, int] = {}
        for code in codes:
            label = self.axes[axis].choices[code].label
            if label in labels:
                problem = f'two choices carry the name "{label}"'
                self.fault(place, problem, "Give each its own name.")
            labels[label] = code

    def conditioning(self, finding: Finding) -> FindingAxis:
        """Build the conditioning axis of one finding; shorthands that coincide are merged."""
        table = self.axes["conditioning"]
        codes: list[int] = []
        merged: list[str] = []
        entries = self.document.axes.conditioning or []
        if len(set(entries)) != len(entries):
            self.fault("axes.conditioning", "a choice stands twice", "Leave one of them out.")
        for number, entry in enumerate(entries, start=1):
            try:
                choices = build.conditioning_choices(entry, finding.given)
            except ValueError as error:
                self.fault(f"axes.conditioning[{number}]", str(error))
                continue
            new = [code for choice in choices if (code := table.code(choice)) not in codes]
            if not new:
                merged.append(f'"{entry}"')
            codes.extend(new)
        baseline = table.code(
            build.conditioning_choices(self.document.baseline.conditioning, finding.given)[0]
        )
        if baseline not in codes:
            codes.insert(0, baseline)
        if merged:
            held = len(finding.given)
            words = "no given series" if not held else f"{held} given series"
            self.notes.append(
                f"{finding.name}: with {words}, {' and '.join(merged)} adds no conditioning set "
                "that is not already there."
            )
        return FindingAxis(tuple(codes), baseline)

    def measures(self, finding: Finding) -> FindingAxis:
        """Build the measures axis of one finding; the first measures are the baseline's."""
        measures: dict[str, Any] = dict(self.document.axes.measures or {})
        choices = build.measure_choices(measures, finding.roles)
        codes = [self.axes["measures"].code(choice) for choice in choices]
        return FindingAxis(tuple(dict.fromkeys(codes)), codes[0])

    def check_measures(self, measures: Mapping[str, Any], roles: set[str], place: str) -> None:
        """Note roles that no finding has and columns that stand twice."""
        for role, entries in measures.items():
            if role not in roles:
                self.fault(f"{place}.{role}", "no finding has this role" + suggestion(role, roles))
            names = [e if isinstance(e, str) else e.series for e in entries]
            if len(set(names)) != len(names):
                self.fault(f"{place}.{role}", "a column stands twice")

    def findings(self) -> tuple[Finding, ...]:
        """Build the findings, in plan order."""
        names: set[str] = set()
        result = []
        for number, table in enumerate(self.document.findings):
            place = f"findings[{number + 1}]"
            self._check_roles(table, place)
            if table.name in names:
                self.fault(f"{place}.name", f'two findings are called "{table.name}"')
            names.add(table.name)
            result.append(
                Finding(
                    number,
                    table.name,
                    table.cause,
                    table.effect,
                    tuple(table.given),
                    tuple(Exogenous(item.series, item.lags) for item in table.exogenous),
                    table.claim,
                    SIGNS[table.sign],
                    SIGNS[table.reverse_sign],
                )
            )
        return tuple(result)

    def _check_roles(self, table: FindingTable, place: str) -> None:
        if table.cause == table.effect:
            self.fault(f"{place}.effect", f'cause and effect are both "{table.cause}"')
        unmodelled = [item.series for item in table.exogenous]
        for key, names in (("given", table.given), ("exogenous", unmodelled)):
            for name in dict.fromkeys(names):
                if name in (table.cause, table.effect):
                    self.fault(f"{place}.{key}", f'"{name}" is already the cause or the effect')
                elif names.count(name) > 1:
                    self.fault(f"{place}.{key}", f'"{name}" stands twice', "Leave one of them out.")
                elif key == "exogenous" and name in table.given:
                    problem = f'"{name}" stands under "given" as well'
                    self.fault(f"{place}.{key}", problem, "Leave one of them out.")

    def rules(self, findings: tuple[Finding, ...]) -> tuple[Rule, ...]:
        """Build the rules; they may name any choice that the builder has met."""
        rules = []
        for number, table in enumerate(self.document.rule_out, start=1):
            place = f"rule_out[{number}]"
            which = None
            if table.finding is not None:
                names = {f.name: f.number for f in findings}
                which = names.get(table.finding)
                if which is None:
                    self.fault(f"{place}.finding", f'no finding is called "{table.finding}"'
                               + suggestion(table.finding, names))  # fmt: skip
            codes = {}
            for axis in AXES:
                written = getattr(table.when, AXIS_KEYS[axis][1])
                if written is not None:
                    codes[axis] = frozenset(self._ruled(axis, written, f"{place}.when.{axis}"))
            if not codes:
                self.fault(f"{place}.when", "names no axis", "Name at least one.")
            rules.append(Rule(codes, table.because, which))
        return tuple(rules)

    def _ruled(self, axis: str, written: list[Any], place: str) -> list[int]:
        table = self.axes[axis]
        codes = []
        for number, entry in enumerate(written, start=1):
            where = f"{place}[{number}]"
            labels = {choice.label: code for code, choice in enumerate(table.choices)}
            if isinstance(entry, str) and entry in labels:
                codes.append(labels[entry])
                continue
            if axis not in ENTRIES:
                self.fault(where, f'no choice is called "{entry}"' + suggestion(str(entry), labels))
                continue
            try:
                parsed = TypeAdapter(ENTRIES[axis]).validate_python(entry)
            except ValidationError:
                self.fault(where, f'"{entry}" is not a choice of this axis'
                           + suggestion(str(entry), labels))  # fmt: skip
                continue
            for choice in self.choices(axis, parsed, where):
                known = table.known(choice)
                if known is None:
                    self.fault(where, f'"{choice.label}" is not among the plan\'s choices',
                               "Leave it out of the rule.")  # fmt: skip
                else:
                    codes.append(known)
        return codes

    def check_screens(self) -> None:
        """Note screens that are unknown or not yet there."""
        screens = self.document.screens
        for key in ("require", "report"):
            for number, name in enumerate(getattr(screens, key), start=1):
                place = f"screens.{key}[{number}]"
                if name in LATER_SCREENS:
                    self.fault(place, f'the screen "{name}" is not yet available in this version')
                elif name not in SCREENS:
                    self.fault(place, f'unknown screen "{name}"' + suggestion(name, SCREENS))

    def check_series(self, roles: set[str]) -> None:
        """Series named in a transformation must be roles or measures."""
        tables = [self.document.axes, *(request.axes for request in self.document.requests)]
        entries = [e for table in tables for es in (table.measures or {}).values() for e in es]
        columns = {e if isinstance(e, str) else e.series for e in entries}
        known = roles | columns
        for choice in self.axes["transformation"].choices:
            assert isinstance(choice, TransformationChoice)
            for name, _ in choice.series:
                if name not in known:
                    self.fault(
                        "axes.transformations",
                        f'"{choice.label}" names the series "{name}", which no finding uses'
                        + suggestion(name, known),
                    )
