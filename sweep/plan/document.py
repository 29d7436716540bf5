"""The plan file as a validated document: what may be written, nothing of what it means yet."""

from __future__ import annotations

from typing import Annotated, Any, Literal, get_args

from pydantic import (
    AfterValidator,
    BeforeValidator,
    Field,
    StrictInt,
    StrictStr,
    WithJsonSchema,
    model_validator,
)
from pydantic.json_schema import SkipJsonSchema

from sweep.plan.printed import PrintedNumber, PrintedProbability
from sweep.plan.suggest import suggestion
from sweep.plan.tables import (
    CRITERIA,
    STATISTICS,
    TRANSFORMATIONS,
    TRENDS,
    DeterministicTable,
    LagTable,
    MeasureTable,
    ProcedureTable,
    Table,
    TransformationTable,
    WindowTable,
    _refuse,
    anything_of,
)

__all__ = ["AXIS_KEYS", "PlanDocument", "ReportedTable"]

# Store name → key in [axes] (plural) and in [baseline] and rules (singular).
AXIS_KEYS = {
    "lags": ("lags", "lags"),
    "deterministics": ("deterministics", "deterministics"),
    "window": ("windows", "window"),
    "transformation": ("transformations", "transformation"),
    "test": ("tests", "test"),
    "conditioning": ("conditioning", "conditioning"),
    "measures": ("measures", "measures"),
}

Frequencies = Literal["annual", "quarterly", "monthly", "weekly", "business daily", "daily"]


def _lag(value: Any) -> Any:
    known = get_args(CRITERIA)
    if isinstance(value, str):
        if value not in known:
            _refuse(f'"{value}" is not a criterion' + suggestion(value, known))
    elif isinstance(value, bool) or not isinstance(value, int):
        _refuse("a lag order is a whole number or the name of a criterion")
    elif value < 1:
        _refuse(f"{value} is not a lag order; orders start at 1")
    return value


LagPlain = Annotated[
    Any,
    AfterValidator(_lag),
    WithJsonSchema({"anyOf": [{"type": "integer", "minimum": 1}, {"enum": get_args(CRITERIA)}]}),
]
LagEntry = anything_of(LagTable, LagPlain)
DeterministicEntry = anything_of(DeterministicTable, TRENDS)
WindowEntry = anything_of(WindowTable, Literal["full sample"])
TransformationEntry = anything_of(TransformationTable, TRANSFORMATIONS)
ProcedureEntry = anything_of(ProcedureTable, STATISTICS)
DESIGNS = Literal["full", "one change", "two changes"]
Conditioning = Literal["given", "pairwise", "leave one out", "every subset"]
MeasureEntry = anything_of(MeasureTable, StrictStr)


class DataTable(Table):
    """Where the series are."""

    file: StrictStr = Field(description="CSV, Parquet or Excel; relative to the plan file.")
    date: StrictStr = Field(description="Column that holds the dates.")
    frequency: Frequencies = Field(description="How often the series are observed.")
    calendar: Literal["every period", "as observed"] = Field(
        default="every period",
        description="'as observed': consecutive rows are consecutive periods (weekly and business "
        "daily data).",
    )
    source: StrictStr = Field(default="", description="Where the data come from.")
    licence: StrictStr = Field(default="", description="Terms under which they are used.")


class ExogenousTable(Table):
    """A regressor that is not modelled: current value and lags 1 to ``lags``."""

    series: StrictStr = Field(description="Column of the data file.")
    lags: StrictInt = Field(default=0, ge=0, description="Lags beside the current value.")


class FindingTable(Table):
    """A claim: cause, effect, and what it is conditioned on."""

    name: StrictStr = Field(min_length=1, description="Short name of the finding.")
    cause: StrictStr = Field(description="Column, or role under measures, said to lead.")
    effect: StrictStr = Field(description="Column or role said to follow.")
    given: list[StrictStr] = Field(default=[], description="Conditioning series.")
    claim: Literal["leads", "leads one way", "leads both ways", "does not lead"] = Field(
        default="leads", description="What is said of cause and effect."
    )
    sign: Literal["positive", "negative"] | None = Field(
        default=None, description="Sign of the effect that the claim names, if any."
    )
    reverse_sign: Literal["positive", "negative"] | None = Field(
        default=None, description='Sign of the reverse effect, with "leads both ways".'
    )
    exogenous: list[ExogenousTable] = Field(default=[], description="Unmodelled regressors.")

    @model_validator(mode="after")
    def _signs(self) -> FindingTable:
        if self.claim == "does not lead" and (self.sign or self.reverse_sign):
            _refuse('a sign makes no sense under the claim "does not lead"; leave it out')
        if self.reverse_sign and self.claim != "leads both ways":
            _refuse('"reverse_sign" belongs to the claim "leads both ways"')
        return self


class ReportedTable(Table):
    """The numbers that are in print."""

    statistic: PrintedNumber | None = Field(default=None, description="Printed statistic.")
    p_value: PrintedProbability | None = Field(default=None, description="Printed p-value.")
    observations: StrictInt | None = Field(default=None, ge=1, description="Printed rows T.")
    tolerance: float | None = Field(
        default=None,
        gt=0,
        description="Largest difference of statistic and p-value that counts as reproduced; half "
        "a unit of each one's last printed digit if left out.",
    )
    finding: StrictStr | None = Field(
        default=None, description="Finding the numbers belong to; the first if left out."
    )


class BaselineTable(Table):
    """The specification that is reported: one choice an axis."""

    lags: LagEntry = Field(description="Order or criterion.")  # type: ignore[valid-type]
    deterministics: DeterministicEntry = Field(  # type: ignore[valid-type]
        default="constant", description="Deterministic terms."
    )
    window: WindowEntry = Field(  # type: ignore[valid-type]
        default="full sample", description="Sample window, a fixed one."
    )
    transformation: TransformationEntry = Field(  # type: ignore[valid-type]
        description="Scale of the series."
    )
    test: ProcedureEntry = Field(  # type: ignore[valid-type]
        default="F", description="Statistic and covariance."
    )
    conditioning: Literal["given", "pairwise"] = Field(
        default="given", description="With or without the given series."
    )
    reported: ReportedTable | None = Field(
        default=None, description="The numbers in print, to be reproduced."
    )


def _axis(entry: Any, description: str) -> Any:
    return Annotated[list[entry], Field(min_length=1, description=description)]


class AxesTable(Table):
    """What is swept; an axis left out holds the baseline's choice alone."""

    lags: _axis(LagEntry, "Orders and criteria.") | None = None  # type: ignore[valid-type]
    deterministics: _axis(DeterministicEntry, "Deterministic terms.") | None = None  # type: ignore[valid-type]
    windows: _axis(WindowEntry, "Sample windows.") | None = None  # type: ignore[valid-type]
    transformations: _axis(TransformationEntry, "Scales.") | None = None  # type: ignore[valid-type]
    tests: _axis(ProcedureEntry, "Ways of testing.") | None = None  # type: ignore[valid-type]
    conditioning: _axis(Conditioning, "Conditioning sets.") | None = None  # type: ignore[valid-type]
    measures: dict[str, _axis(MeasureEntry, "Columns for a role.")] | None = None  # type: ignore[valid-type]


class WhenTable(Table):
    """Choices whose combination is ruled out: each axis lists choices or their names."""

    lags: list[Any] | None = None
    deterministics: list[Any] | None = None
    window: list[Any] | None = None
    transformation: list[Any] | None = None
    test: list[Any] | None = None
    conditioning: list[Any] | None = None
    measures: list[Any] | None = None


class RuleTable(Table):
    """A combination that the author holds indefensible."""

    when: WhenTable
    because: StrictStr = Field(min_length=1, description="Why it is ruled out.")
    finding: StrictStr | None = Field(default=None, description="Only for this finding.")


class ScreensTable(Table):
    """Preconditions: those a specification must pass, and those only shown."""

    require: list[StrictStr] = Field(
        default=["enough observations"], description="Screens that an admissible row passes."
    )
    report: list[StrictStr] = Field(default=[], description="Screens that are only shown.")


class SampleDesign(Table):
    """``design = { sample = 5000 }``: a stratified draw of the full cross."""

    sample: StrictInt = Field(ge=10, description="Specifications a finding.")


def _design(value: Any) -> Any:
    known = get_args(DESIGNS)
    if isinstance(value, str) and value not in known:
        listed = ", ".join(f'"{name}"' for name in known)
        near = suggestion(value, known, list_all=0)
        _refuse(
            f'"{value}" is not a design' + (near or f"; known: {listed} and {{ sample = 5000 }}")
        )
    return value


class SweepTable(Table):
    """How much of the cross is run."""

    design: anything_of(SampleDesign, Annotated[DESIGNS, BeforeValidator(_design)]) = Field(  # type: ignore[valid-type]
        default="full", description="Full cross, changes from the baseline, or a sample."
    )
    coefficients: Literal["baseline", "fixed windows", "all", "none"] = Field(
        default="fixed windows",
        description="For which specifications each lag's coefficient is kept.",
    )


class RequestTable(Table):
    """A referee's question: choices to be added to the plan's."""

    name: StrictStr = Field(min_length=1, description="Short name of the request.")
    from_: StrictStr = Field(default="", alias="from", description="Who asks.")
    asks: StrictStr = Field(default="", description="The question in words.")
    axes: AxesTable = Field(description="Choices to add, written as in [axes].")
    with_: list[StrictStr] = Field(
        default=[], alias="with", description="Earlier requests to cross it with."
    )
    finding: StrictStr | None = Field(default=None, description="Only for this finding.")


def _unavailable(value: Any) -> Any:
    if value is not None:
        _refuse("not yet available in this version; leave it out")
    return value


Later = SkipJsonSchema[Annotated[Any, AfterValidator(_unavailable)]]


class PlanDocument(Table):
    """A whole plan file."""

    title: StrictStr = Field(min_length=1, description="What the plan asks, in words.")
    significance: float = Field(
        default=0.05, gt=0, lt=1, description="Level at which a hypothesis is rejected."
    )
    seed: StrictInt = Field(
        default=0, ge=0, le=2**63 - 1, description="Seed of everything random."
    )
    data: DataTable
    findings: list[FindingTable] = Field(min_length=1)
    baseline: BaselineTable
    axes: AxesTable = AxesTable()
    rule_out: list[RuleTable] = Field(default=[], description="Combinations that are not run.")
    screens: ScreensTable = ScreensTable()
    sweep: SweepTable = SweepTable()
    requests: list[RequestTable] = Field(default=[], description="Questions of referees.")
    extends: StrictStr | None = Field(
        default=None, description="Plan file that this one starts from, relative to it."
    )
    calibration: Later = None
