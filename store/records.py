"""Frozen records: what callers hand to the writer, and a statement of a user's SQL."""

from __future__ import annotations

from dataclasses import dataclass

__all__ = [
    "ChoiceRecord",
    "FindingRecord",
    "RequestChoiceRecord",
    "RequestRecord",
    "Statement",
    "SweepChoiceRecord",
    "SweepRecord",
]


@dataclass(frozen=True, slots=True)
class ChoiceRecord:
    """One choice of an axis, as the store's dictionary knows it.

    Attributes
    ----------
    token_high, token_low : int
        128-bit digest of the meaning as two unsigned 64-bit halves.
    label : str
        Words for people.
    meaning : str
        Canonical JSON that the token digests.
    """

    token_high: int
    token_low: int
    label: str
    meaning: str


@dataclass(frozen=True, slots=True)
class FindingRecord:
    """One finding of a sweep.

    Attributes
    ----------
    finding : int
        Number in the sweep, plan order.
    name, cause, effect, given, exogenous : str
        Words of the plan; several series are joined by ``", "``.
    claim : str
        ``leads``, ``leads one way``, ``leads both ways`` or ``does not lead``.
    sign, reverse_sign : int
        1, -1, or 0 where no sign is claimed.
    data_high, data_low : int
        128-bit digest of the values of its series, as unsigned halves.
    required_mask : int
        Bits of the screens that an admissible row must pass.
    baseline_high, baseline_low : int
        Specification of the baseline, as unsigned halves.
    reported_statistic, reported_p_value : str or None
        Numbers printed in the paper, where the plan gives them, in their printed digits.
    reported_observations, reported_tolerance : float or None
        Printed number of rows; difference that the plan allows, None for the rounding of each.
    planned, added : int
        Rows that the plan asks for, and rows that its requests add: what there will be once
        the sweep has run to its end.
    baseline_weight : float
        What the weight of the baseline's row is multiplied by: 1 unless rows were drawn, when
        it stands for itself and every other row of its window entry for several.
    """

    finding: int
    name: str
    cause: str
    effect: str
    given: str
    exogenous: str
    claim: str
    sign: int
    reverse_sign: int
    data_high: int
    data_low: int
    required_mask: int
    baseline_high: int
    baseline_low: int
    reported_statistic: str | None = None
    reported_p_value: str | None = None
    reported_observations: float | None = None
    reported_tolerance: float | None = None
    planned: int = 0
    added: int = 0
    baseline_weight: float = 1.0


@dataclass(frozen=True, slots=True)
class SweepRecord:
    """One run of a plan.

    Attributes
    ----------
    plan_digest : str
        Digest of the plan in canonical form.
    plan_toml : str
        The plan file as it was read.
    title : str
        Title of the plan.
    seed : int
        Seed of everything random; fits a signed 64-bit integer.
    significance : float
        Stated level in (0, 1).
    numerics : str
        Versions of the numerical rules, including which screens were computed: rows are
        shared between sweeps only where it is equal.
    design : str
        ``full``, ``one change``, ``two changes`` or a sample and its size.
    data_note, versions : str
        JSON.
    """

    plan_digest: str
    plan_toml: str
    title: str
    seed: int
    significance: float
    numerics: str
    design: str
    data_note: str
    versions: str


@dataclass(frozen=True, slots=True)
class SweepChoiceRecord:
    """One choice as a finding of a sweep uses it.

    Attributes
    ----------
    finding : int
        Number of the finding.
    axis : str
        Axis name.
    code : int
        Code from :meth:`store.write.SweepWriter.register_choices`.
    label, because : str
        Words of the plan.
    is_baseline : bool
        True for the choice that the baseline makes; one on each axis.
    position : int
        Place on the axis in plan order.
    weight : float
        Part of the headline weight, in (0, 1].
    orientation : int
        1, or -1 where an inverted measure turns the sign of the effect.
    entry_kind : str
        ``rolling``, ``expanding``, ``shrinking``, or ``""`` for everything else.
    positions : int
        Planned positions of a moving window; 1 otherwise.
    scale_group : str
        Choices whose coefficients are on one scale share it.
    length : int
        Periods in a moving window (the shortest one where it grows); 0 otherwise.
    request : int
        0 for a choice of the plan, otherwise the request that first brought it.
    data_high, data_low : int
        On the axis measures, the digest of the values of the finding's series under this
        choice: rows are shared between sweeps only where it is equal.  0 on other axes.
    planned : int
        Rows of the plan that make the choice, those that requests add aside.
    """

    finding: int
    axis: str
    code: int
    label: str
    because: str
    is_baseline: bool
    position: int
    weight: float
    orientation: int
    entry_kind: str
    positions: int
    scale_group: str
    length: int = 0
    request: int = 0
    data_high: int = 0
    data_low: int = 0
    planned: int = 0


@dataclass(frozen=True, slots=True)
class RequestRecord:
    """A referee's question.

    Attributes
    ----------
    request : int
        Number in the sweep, from 1; 0 stands for planned rows.
    name, asked_by, asks : str
        Words of the plan.
    """

    request: int
    name: str
    asked_by: str
    asks: str


@dataclass(frozen=True, slots=True)
class RequestChoiceRecord:
    """A choice that a request names for a finding.

    Attributes
    ----------
    finding, request : int
        Numbers of both.
    axis : str
        Axis name.
    code : int
        Code from :meth:`store.write.SweepWriter.register_choices`.
    position : int
        Place on the axis in the request.
    """

    finding: int
    request: int
    axis: str
    code: int
    position: int


@dataclass(frozen=True, slots=True)
class Statement:
    """One statement of a user's SQL.

    Attributes
    ----------
    kind : str
        ``SELECT`` for everything that only reads; otherwise its verb, such as ``COPY``.
    parameters : frozenset of str
        Names after a ``$``.
    """

    kind: str
    parameters: frozenset[str]
