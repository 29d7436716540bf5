"""A plan: findings, axes and rules, before anything is estimated."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from sweep.notebook import plan_html
from sweep.panel.periods import Frequency
from sweep.plan.canonical import Token, add_tokens, digest_text, token
from sweep.plan.choices import AXES, Choice, MeasureChoice, TransformationChoice
from sweep.plan.document import PlanDocument

__all__ = ["Exogenous", "Finding", "FindingAxis", "Plan", "Request", "Rule"]


@dataclass(frozen=True, slots=True)
class Exogenous:
    """A regressor that is not modelled: its current value and ``lags`` lags."""

    series: str
    lags: int


@dataclass(frozen=True, slots=True)
class Finding:
    """A claim about two series, given others.

    Attributes
    ----------
    number : int
        Position in the plan, from 0.
    sign, reverse_sign : int
        1, -1, or 0 where the claim names none.
    """

    number: int
    name: str
    cause: str
    effect: str
    given: tuple[str, ...]
    exogenous: tuple[Exogenous, ...]
    claim: str
    sign: int
    reverse_sign: int

    @property
    def roles(self) -> tuple[str, ...]:
        """Every role of the finding: cause, effect, given, exogenous."""
        return (self.cause, self.effect, *self.given, *(item.series for item in self.exogenous))

    @property
    def token(self) -> Token:
        """Token of the roles; what a specification's id starts from."""
        meaning: dict[str, object] = {"cause": self.cause, "effect": self.effect}
        if self.given:
            meaning["given"] = sorted(self.given)
        if self.exogenous:
            meaning["exogenous"] = sorted([item.series, item.lags] for item in self.exogenous)
        return token("roles", meaning)

    @property
    def sentence(self) -> str:
        """The finding in words."""
        text = f"{self.cause} → {self.effect}"
        return f"{text}, given {' and '.join(self.given)}" if self.given else text


@dataclass(frozen=True, slots=True)
class FindingAxis:
    """The choices of one axis that a finding is run with.

    Attributes
    ----------
    codes : tuple of int
        Codes into ``Plan.axes[axis]``, plan order.
    baseline : int
        Code of the baseline's choice.
    added : tuple of int
        Further codes that requests brought, in the order of the requests.
    """

    codes: tuple[int, ...]
    baseline: int
    added: tuple[int, ...] = ()

    @property
    def every(self) -> tuple[int, ...]:
        """Codes of the plan and of its requests."""
        return (*self.codes, *self.added)


@dataclass(frozen=True, slots=True)
class Rule:
    """A combination of choices that the author holds indefensible.

    Attributes
    ----------
    codes : mapping of axis to frozenset of int
        The rule holds where every listed axis has one of its codes.
    finding : int or None
        Only for this finding.
    """

    codes: Mapping[str, frozenset[int]]
    because: str
    finding: int | None


@dataclass(frozen=True, slots=True)
class Request:
    """A referee's question, answered by further choices.

    Attributes
    ----------
    number : int
        Position in the plan, from 1; 0 stands for what was planned.
    name, asked_by, asks : str
        Words of the plan.
    together : tuple of int
        Numbers of the earlier requests whose choices it is crossed with.
    codes : tuple of mapping of axis to tuple of int, one a finding
        The choices that it names on each axis, planned ones included; empty for a finding
        that it does not ask about.
    """

    number: int
    name: str
    asked_by: str
    asks: str
    together: tuple[int, ...]
    codes: tuple[Mapping[str, tuple[int, ...]], ...]


@dataclass(frozen=True, slots=True, repr=False)
class Plan:
    """A validated plan file.

    Attributes
    ----------
    path : Path
        The plan file.
    text : str
        Its text.
    document : PlanDocument
        What was written.
    frequency : Frequency
    findings : tuple of Finding
    axes : mapping of axis to tuple of Choice
        Every choice of any finding; a code is a position in the tuple.
    finding_axes : tuple of mapping, one a finding
        Which codes each finding uses.
    rules : tuple of Rule
    notes : tuple of str
        Choices that give the same numbers by construction, in words.
    requests : tuple of Request
    origin : Path or None
        The first plan of a chain of ``extends``; None for a plan that extends none.
    replaced : tuple of str
        Keys of the plans it extends that it says anew.
    """

    path: Path
    text: str
    document: PlanDocument
    frequency: Frequency
    findings: tuple[Finding, ...]
    axes: Mapping[str, tuple[Choice, ...]]
    finding_axes: tuple[Mapping[str, FindingAxis], ...]
    rules: tuple[Rule, ...]
    notes: tuple[str, ...]
    requests: tuple[Request, ...] = ()
    origin: Path | None = None
    replaced: tuple[str, ...] = ()

    @property
    def title(self) -> str:
        """Title of the plan."""
        return self.document.title

    @property
    def significance(self) -> float:
        """Stated level of significance."""
        return self.document.significance

    @property
    def data_path(self) -> Path:
        """The data file, as an absolute or plan-relative path."""
        return self.path.parent / self.document.data.file

    @property
    def store_path(self) -> Path:
        """The store's default place: beside the plan, or beside the one that it extends."""
        return (self.origin or self.path).with_suffix(".duckdb")

    @property
    def report_path(self) -> Path:
        """The report's default place, beside the plan."""
        return self.path.with_suffix(".html")

    @property
    def digest(self) -> str:
        """Digest of what the plan says, comments and layout left aside."""
        from sweep.plan.canonical import canonical_json

        high, low = digest_text(canonical_json(self.document.model_dump(mode="json")))
        return f"{high:016x}{low:016x}"

    def columns(self, finding: Finding, measure: MeasureChoice) -> tuple[str, ...]:
        """Return the data columns of a finding's roles under a choice of measures."""
        return tuple(measure.column(role) for role in finding.roles)

    def every_column(self) -> tuple[str, ...]:
        """Return every data column that the plan reads, first use first."""
        names: dict[str, None] = {}
        for finding, axes in zip(self.findings, self.finding_axes, strict=True):
            for code in axes["measures"].every:
                measure = self.axes["measures"][code]
                assert isinstance(measure, MeasureChoice)
                names.update(dict.fromkeys(self.columns(finding, measure)))
        return tuple(names)

    def first_request(self, finding: Finding, axis: str, code: int) -> int:
        """Return the number of the request that first brought a choice, 0 for a planned one."""
        if code in self.finding_axes[finding.number][axis].codes:
            return 0
        return next(
            request.number
            for request in self.requests
            if code in request.codes[finding.number].get(axis, ())
        )

    def __repr__(self) -> str:
        return f"Plan {self.path.name}: {self.title}"

    def _repr_html_(self) -> str:
        return plan_html(self)

    def baseline_id(self, finding: Finding) -> Token:
        """Return the id of the baseline specification (fixed window)."""
        axes = self.finding_axes[finding.number]
        parts = [token(axis, self.axes[axis][axes[axis].baseline].meaning) for axis in AXES]
        return add_tokens(finding.token, *parts)


def scale_of(choice: TransformationChoice, role: str, column: str) -> str:
    """Return the transformation of a series; its column's entry goes before its role's."""
    named = dict(choice.series)
    return named.get(column, named.get(role, choice.default))
