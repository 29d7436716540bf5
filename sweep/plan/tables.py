"""The tables of a plan file that stand for one choice each.

Every table refuses unknown keys and says which known one was probably meant.
"""

from __future__ import annotations

from datetime import date
from typing import Annotated, Any, Literal

from pydantic import (
    AfterValidator,
    BaseModel,
    ConfigDict,
    Discriminator,
    Field,
    ModelWrapValidatorHandler,
    StrictBool,
    StrictInt,
    StrictStr,
    Tag,
    ValidationError,
    WithJsonSchema,
    model_validator,
)
from pydantic_core import InitErrorDetails, PydanticCustomError

from sweep.plan.suggest import suggestion

__all__ = [
    "CRITERIA",
    "TRANSFORMATIONS",
    "DeterministicTable",
    "LagTable",
    "MeasureTable",
    "ProcedureTable",
    "Table",
    "TransformationTable",
    "WindowTable",
    "anything_of",
]

CRITERIA = Literal["AIC", "BIC", "HQ", "FPE", "sequential LR"]
TRENDS = Literal["none", "constant", "linear trend", "quadratic trend"]
TRANSFORMATIONS = Literal[
    "level",
    "log",
    "difference",
    "log difference",
    "yearly growth",
    "seasonal difference",
    "inverse hyperbolic sine",
    "linearly detrended",
    "Hodrick-Prescott cycle",
    "Hamilton cycle",
]
STATISTICS = Literal["F", "Wald", "LR", "LM", "lag augmented"]
COVARIANCES = Literal["classical", "HC0", "HC1", "HC2", "HC3", "HAC"]


def _refuse(text: str) -> None:
    raise PydanticCustomError("crosswind", "{text}", {"text": text, "kind": "rule"})


def _when(value: Any) -> Any:
    if isinstance(value, bool) or not isinstance(value, str | int | date):
        _refuse('a date is needed here, for example "2009-01", "2009-Q1" or 2009')
    return value


def _episode(value: Any) -> Any:
    """Check the form of ``without``: one episode or a list of episodes."""
    nested = isinstance(value, list) and value and all(isinstance(item, list) for item in value)
    for pair in value if nested else [value]:
        if not isinstance(pair, list) or len(pair) != 2:
            _refuse('an episode is a pair of dates, for example ["2020-03", "2021-06"]')
        for item in pair:
            _when(item)
    return value


BANDWIDTH_RULES = ("Newey-West", "Andrews")


def _bandwidth(value: Any) -> Any:
    if isinstance(value, str):
        if value not in BANDWIDTH_RULES:
            _refuse(f'"{value}" is no rule for a bandwidth' + suggestion(value, BANDWIDTH_RULES))
        return value
    if isinstance(value, bool) or not isinstance(value, int | float):
        _refuse("a bandwidth is a number of periods or the name of a rule")
    if not 0 <= value <= 1000:
        _refuse("a bandwidth is a number of periods from 0 to 1000")
    return float(value)


Bandwidth = Annotated[
    Any,
    AfterValidator(_bandwidth),
    WithJsonSchema({"anyOf": [{"type": "number", "minimum": 0}, {"enum": BANDWIDTH_RULES}]}),
]
WHEN_SCHEMA = {"type": ["string", "integer"], "description": "1990, 1990-Q1, 1990-03 or a day"}
When = Annotated[Any, AfterValidator(_when), WithJsonSchema(WHEN_SCHEMA)]
_PAIR = {"type": "array", "items": WHEN_SCHEMA, "minItems": 2, "maxItems": 2}
Episodes = Annotated[
    Any,
    AfterValidator(_episode),
    WithJsonSchema({"anyOf": [_PAIR, {"type": "array", "items": _PAIR}]}),
]

# Names that design and documents speak of and that this version cannot do yet.
LATER = {
    "statistic": ("error correction", "system Wald", "instantaneous"),
    "covariance": (),
    "keys": ("reference", "draws"),
}


class Table(BaseModel):
    """Base of every table: strict, frozen, and helpful about unknown keys."""

    model_config = ConfigDict(extra="forbid", frozen=True, populate_by_name=True)

    @model_validator(mode="wrap")
    @classmethod
    def _name_unknown_keys(cls, value: Any, handler: ModelWrapValidatorHandler[Any]) -> Any:
        try:
            return handler(value)
        except ValidationError as error:
            raise ValidationError.from_exception_data(
                cls.__name__, [cls._rewrite(item) for item in error.errors()]
            ) from None

    @classmethod
    def _rewrite(cls, item: Any) -> InitErrorDetails:
        """Turn one of pydantic's errors into one of ours; ours pass unchanged."""
        kind, text = item["type"], item["msg"]
        if kind == "extra_forbidden" and len(item["loc"]) == 1:
            kind, text = "unknown_key", cls._unknown_key(str(item["loc"][0]))
        context = dict(item.get("ctx") or {})
        context.pop("error", None)
        inner = context.pop("kind", kind)
        return InitErrorDetails(
            type=PydanticCustomError(
                "crosswind", "{text}", {"text": text, "kind": inner, **context}
            ),
            loc=item["loc"],
            input=item["input"],
        )

    @classmethod
    def _unknown_key(cls, key: str) -> str:
        names = [field.alias or name for name, field in cls.model_fields.items()]
        if cls is ProcedureTable and key in LATER["keys"]:
            return f'"{key}" is not yet available in this version'
        return f'unknown key "{key}"' + suggestion(key, names)


class Named(Table):
    """A choice that may carry its own name and the author's reason."""

    name: StrictStr = Field(default="", description="Words that tables and charts show.")
    because: StrictStr = Field(default="", description="Why the choice is defensible.")


def anything_of(table: type[Table], plain: Any) -> Any:
    """Return the type of an entry that is either ``plain`` or a table.

    Faults are then reported for the form that was written, not for every form.
    """

    def which(value: Any) -> str:
        return "~table" if isinstance(value, dict | table) else "~plain"

    return Annotated[
        Annotated[plain, Tag("~plain")] | Annotated[table, Tag("~table")], Discriminator(which)
    ]


class SampleTable(Table):
    """``sample = { common = 12 }``: the rows that order 12 would use."""

    common: StrictInt = Field(ge=1, description="Order whose estimation sample is used.")


class LagTable(Named):
    """Lag orders, or the criterion that picks one."""

    order: StrictInt | None = Field(default=None, ge=1, description="One order for all series.")
    own: StrictInt | None = Field(default=None, ge=1, description="Lags of the effect itself.")
    cause: StrictInt | None = Field(default=None, ge=1, description="Lags of the cause.")
    given: StrictInt | None = Field(
        default=None, ge=1, description="Lags of the conditioning series; as own if left out."
    )
    criterion: CRITERIA | None = Field(default=None, description="Rule that picks the order.")
    maximum: StrictInt | None = Field(
        default=None, ge=1, description="Largest order the criterion considers."
    )
    scope: Literal["system", "equation"] = Field(
        default="system",
        description="Criterion of the whole autoregression, or of the effect's equation alone.",
    )
    level: float = Field(
        default=0.05, gt=0, lt=1, description="Level of the sequential likelihood-ratio test."
    )
    sample: anything_of(SampleTable, Literal["own"]) = Field(  # type: ignore[valid-type]
        default="own", description="Rows used: the order's own, or those of a common order."
    )

    @model_validator(mode="after")
    def _one_form(self) -> LagTable:
        forms = [self.order is not None, self.criterion is not None, self.own is not None]
        if sum(forms) != 1:
            _refuse('give one of "order", "criterion", or "own" with "cause"')
        if self.own is not None and self.cause is None:
            _refuse('"own" needs "cause" beside it, for example { own = 4, cause = 2 }')
        if self.own is None and (self.cause is not None or self.given is not None):
            _refuse('"cause" and "given" go with "own", for example { own = 4, cause = 2 }')
        if self.criterion is None and (self.maximum is not None or self.scope != "system"):
            _refuse('"maximum" and "scope" go with "criterion"')
        if "level" in self.model_fields_set and self.criterion != "sequential LR":
            _refuse('"level" goes with the criterion "sequential LR"')
        if self.criterion is not None and self.sample != "own" and self.maximum is None:
            _refuse('a criterion on a common sample needs its own "maximum"')
        return self


class DeterministicTable(Named):
    """Deterministic terms of the regression."""

    trend: TRENDS = Field(default="constant", description="Trend terms, lower ones included.")
    seasonal: StrictBool = Field(default=False, description="Centred seasonal dummies.")
    steps: list[When] = Field(default=[], description="First dates of level shifts.")
    pulses: list[When] = Field(default=[], description="Dates of one-period dummies.")
    fourier: StrictInt = Field(
        default=0, ge=0, le=12, description="Sine and cosine pairs; the window is the period."
    )


class WindowTable(Named):
    """A sample window, or a family of moving ones."""

    from_: When | None = Field(default=None, alias="from", description="First date.")
    until: When | None = Field(default=None, description="Last date.")
    without: Episodes | None = Field(
        default=None, description="Inclusive episode [first, last], or a list of episodes."
    )
    split: When | None = Field(default=None, description="Two windows: before the date, and on.")
    rolling: StrictInt | None = Field(default=None, ge=4, description="Length in periods.")
    expanding: StrictInt | None = Field(default=None, ge=4, description="Shortest length.")
    shrinking: StrictInt | None = Field(default=None, ge=4, description="Shortest length.")
    step: StrictInt = Field(default=1, ge=1, description="Periods from one window to the next.")
    drop_first: float = Field(default=0.0, ge=0, lt=1, description="Share of the sample dropped.")
    drop_last: float = Field(default=0.0, ge=0, lt=1, description="Share of the sample dropped.")

    @model_validator(mode="after")
    def _one_form(self) -> WindowTable:
        moving = [self.rolling, self.expanding, self.shrinking]
        if sum(value is not None for value in moving) > 1:
            _refuse('give one of "rolling", "expanding" and "shrinking"')
        if self.step != 1 and all(value is None for value in moving):
            _refuse('"step" goes with "rolling", "expanding" or "shrinking"')
        given = self.model_fields_set - {"name", "because"}
        if self.split is not None and given != {"split"}:
            _refuse('"split" stands alone; write two windows with "from" and "until" instead')
        if not given:
            _refuse('an empty window table; write "full sample" for all dates')
        if self.drop_first + self.drop_last >= 1:
            _refuse('"drop_first" and "drop_last" together leave nothing')
        return self


class TransformationTable(Named):
    """The scale of each series."""

    default: TRANSFORMATIONS = Field(description="Transformation of every series not listed.")
    series: dict[str, TRANSFORMATIONS] = Field(default={}, description="Exceptions by series.")
    smoothing: float | None = Field(default=None, gt=0, description="Hodrick-Prescott smoothing.")
    horizon: StrictInt | None = Field(default=None, ge=1, description="Hamilton horizon, periods.")


class ProcedureTable(Named):
    """One way of testing the finding."""

    statistic: STATISTICS = Field(alias="test", description="Statistic.")
    covariance: COVARIANCES = Field(default="classical", description="Covariance estimate.")
    divisor: Literal["T-k", "T"] = Field(
        default="T-k", description="Divisor of the residual variance in a classical Wald statistic."
    )
    extra_lags: StrictInt = Field(
        default=1, ge=1, description="Lags added and not tested, with lag augmented."
    )
    kernel: Literal["Bartlett", "quadratic spectral"] = Field(
        default="Bartlett", description="Weights over time, with HAC."
    )
    bandwidth: Bandwidth | None = Field(
        default=None, description="Lags in time that count, or the rule that picks them, with HAC."
    )
    small_sample: StrictBool = Field(
        default=False, description="Scale a HAC covariance by T/(T-k)."
    )
    form: Literal["F", "Wald"] = Field(
        default="F", description="Statistic and law of a lag augmented test."
    )

    @model_validator(mode="before")
    @classmethod
    def _later(cls, value: Any) -> Any:
        if isinstance(value, dict):
            for key in ("test", "covariance"):
                known = LATER["statistic" if key == "test" else "covariance"]
                if value.get(key) in known:
                    _refuse(f'{key} "{value[key]}" is not yet available in this version')
        return value

    @model_validator(mode="after")
    def _fits(self) -> ProcedureTable:
        augmented = self.statistic == "lag augmented"
        for key in ("extra_lags", "form"):
            if key in self.model_fields_set and not augmented:
                _refuse(f'"{key}" goes with the test "lag augmented"')
        for key in ("kernel", "bandwidth", "small_sample"):
            if key in self.model_fields_set and self.covariance != "HAC":
                _refuse(f'"{key}" goes with covariance = "HAC"')
        if self.covariance == "HAC" and self.bandwidth is None:
            _refuse(
                'HAC needs a "bandwidth": a number of periods, for example 4, or the rule '
                '"Newey-West" or "Andrews"'
            )
        form = self.form if augmented else self.statistic
        if self.covariance != "classical" and form not in ("F", "Wald"):
            _refuse(
                f"{self.statistic} has no form with covariance {self.covariance}; use F or Wald"
            )
        if self.divisor == "T" and (form != "Wald" or self.covariance != "classical"):
            _refuse('divisor = "T" belongs to the classical Wald statistic')
        return self


class MeasureTable(Table):
    """A column that can stand for a role."""

    series: StrictStr = Field(description="Column of the data file.")
    inverted: StrictBool = Field(default=False, description="Rises when the role falls.")
