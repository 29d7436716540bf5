"""A plan and its data together: everything that can be known before anything is estimated."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from pathlib import Path

from sweep.engine.cutting import cut_windows, spans_of, unused_rows, window_notes
from sweep.engine.feasible import shortest_faults
from sweep.errors import Fault, InputFault
from sweep.panel.calendar import Calendar
from sweep.panel.deterministics import CONSTANT, Term
from sweep.panel.load import (
    Dataset,
    collinear_faults,
    constant_faults,
    data_digest,
    magnitude_faults,
    missing_faults,
    positive_faults,
    read_dataset,
    values_digest,
)
from sweep.panel.transforms import TRANSFORMS
from sweep.panel.windows import Positions
from sweep.plan.canonical import Token, add_tokens, digest_text, halves, position_tokens
from sweep.plan.choices import (
    DeterministicChoice,
    MeasureChoice,
    TransformationChoice,
)
from sweep.plan.expand import FindingPositions, PlanRows, expand_plan, request_axes
from sweep.plan.model import Finding, FindingAxis, Plan, scale_of

__all__ = ["Prepared", "prepare", "terms_of", "with_data"]

MAXIMUM_ROWS = 20_000_000


@dataclass(frozen=True, slots=True)
class Prepared:
    """A plan whose data were read and found sound.

    Attributes
    ----------
    plan : Plan
    dataset : Dataset
    windows : tuple of mapping, one a finding
        Window code to the rows of its positions.
    rows : PlanRows
        Every planned specification.
    data_keys : tuple of Token, one a finding
        Digest of the values that the finding uses.
    spans : tuple of (int, int), one a finding
        First and last row at which the series of the baseline's measures and all given and
        exogenous series exist; windows are cut from these rows, whatever the measures and
        the conditioning set of a specification.
    terms : mapping of deterministics code to tuple of Term
    notes : tuple of str
        Choices that give the same numbers by construction, in words.
    """

    plan: Plan
    dataset: Dataset
    windows: tuple[Mapping[int, Positions], ...]
    rows: PlanRows
    data_keys: tuple[Token, ...]
    terms: Mapping[int, tuple[Term, ...]]
    notes: tuple[str, ...]
    spans: tuple[tuple[int, int], ...]

    def data_key(self, finding: Finding, measure: MeasureChoice) -> Token:
        """Return the digest of all that a finding's numbers rest on under a choice of measures.

        It covers the values of its series and the rows that windows are cut from.
        """
        names = sorted(set(self.plan.columns(finding, measure)))
        high, low = data_digest(self.dataset, names)
        first, last = (self.dataset.calendar.label(row) for row in self.spans[finding.number])
        return add_tokens((high, low), digest_text(f"span\0{first}\0{last}"))


def prepare(plan: Plan) -> Prepared:
    """Read the data of a plan and expand it; nothing is estimated.

    Raises
    ------
    InputFault
        With every fault of the data, or of the plan in the light of the data.
    """
    data = plan.document.data
    dataset = read_dataset(
        plan.data_path, data.date, data.frequency, plan.every_column(),
        calendar_rule=data.calendar,
    )  # fmt: skip
    faults = magnitude_faults(dataset, dataset.names)
    if faults:
        raise InputFault(*faults)  # nothing can be computed with such numbers
    faults = constant_faults(dataset, dataset.names)
    faults += _log_faults(plan, dataset)
    if not faults:
        faults += _collinear_faults(plan, dataset)
    spans = spans_of(plan, dataset, faults)
    windows = cut_windows(plan, spans, dataset.calendar, faults)
    terms = _terms(plan, dataset.calendar, faults)
    if faults:
        raise InputFault(*_unique(faults))
    for finding in plan.findings:
        unused = unused_rows(windows[finding.number], len(dataset.calendar))
        faults += missing_faults(dataset, sorted(_columns(plan, finding)), unused)
    faults += shortest_faults(plan, windows, dataset.calendar)
    if faults:
        raise InputFault(*_unique(faults))
    positions = [_tokens(plan, windows[f.number], dataset.calendar) for f in plan.findings]
    _check_size(plan, positions)
    rows = expand_plan(plan, positions)
    keys = tuple(data_digest(dataset, sorted(_columns(plan, f))) for f in plan.findings)
    notes = (*plan.notes, *window_notes(plan, windows), *_measure_notes(dataset))
    return Prepared(plan, dataset, windows, rows, keys, terms, notes, tuple(spans))


def with_data(plan: Plan, path: Path) -> Plan:
    """Return the plan with its data file at another path."""
    data = plan.document.data.model_copy(update={"file": str(path.resolve())})
    return replace(plan, document=plan.document.model_copy(update={"data": data}))


def _unique(faults: list[Fault]) -> list[Fault]:
    return list(dict.fromkeys(faults))


def _measures(plan: Plan, finding: Finding) -> Iterator[MeasureChoice]:
    for code in plan.finding_axes[finding.number]["measures"].every:
        choice = plan.axes["measures"][code]
        assert isinstance(choice, MeasureChoice)
        yield choice


def _columns(plan: Plan, finding: Finding) -> set[str]:
    return {c for measure in _measures(plan, finding) for c in plan.columns(finding, measure)}


def _log_faults(plan: Plan, dataset: Dataset) -> list[Fault]:
    """Find series that some choice takes the log of and that are not positive everywhere."""
    logged: dict[str, None] = {}
    for finding in plan.findings:
        for measure in _measures(plan, finding):
            for role, column in zip(finding.roles, plan.columns(finding, measure), strict=True):
                for choice in plan.axes["transformation"]:
                    assert isinstance(choice, TransformationChoice)
                    if TRANSFORMS[scale_of(choice, role, column)].needs_positive:
                        logged[column] = None
    return positive_faults(dataset, list(logged))


def _collinear_faults(plan: Plan, dataset: Dataset) -> list[Fault]:
    faults = []
    for finding in plan.findings:
        for measure in _measures(plan, finding):
            names = plan.columns(finding, measure)
            if len(set(names)) < len(names):
                twice = next(name for name in names if names.count(name) > 1)
                faults.append(
                    Fault("axes.measures", f'the column "{twice}" stands for two roles of '
                          f'"{finding.name}" at once', "Give each role a column of its own.")
                )  # fmt: skip
            else:
                faults += collinear_faults(dataset, names)
    return faults


def _terms(plan: Plan, calendar: Calendar, faults: list[Fault]) -> dict[int, tuple[Term, ...]]:
    found = {}
    for code, choice in enumerate(plan.axes["deterministics"]):
        assert isinstance(choice, DeterministicChoice)
        try:
            found[code] = terms_of(choice, calendar)
        except ValueError as error:
            faults.append(Fault("axes.deterministics", f'"{choice.label}": {error}'))
    return found


def terms_of(choice: DeterministicChoice, calendar: Calendar) -> tuple[Term, ...]:
    """Return the columns of a deterministic choice.

    Raises
    ------
    ValueError
        If a step or pulse lies outside the sample.
    """
    terms = [CONSTANT] if choice.trend >= 0 else []
    terms += [Term("trend", power) for power in range(1, choice.trend + 1)]
    if choice.seasonal:
        terms += [Term("season", season) for season in range(calendar.frequency.seasons - 1)]
    terms += [Term("step", calendar.find(label, "first")) for label in choice.steps]
    terms += [Term("pulse", calendar.find(label, "first")) for label in choice.pulses]
    for number in range(1, choice.fourier + 1):
        terms += [Term("sine", number), Term("cosine", number)]
    return tuple(terms)


def _tokens(plan: Plan, windows: Mapping[int, Positions], calendar: Calendar) -> FindingPositions:
    counts, tokens = {}, {}
    for code, positions in windows.items():
        choice = plan.axes["window"][code]
        counts[code] = positions.count
        if getattr(choice, "moving", ""):
            labels = [
                (calendar.dates[first].isoformat(), calendar.dates[last].isoformat())
                for first, last in zip(
                    positions.first.tolist(), positions.last.tolist(), strict=True
                )
            ]
            tokens[code] = halves(position_tokens(labels))
    return FindingPositions(counts, tokens)


def _check_size(plan: Plan, positions: list[FindingPositions]) -> None:
    total = 0
    for finding in plan.findings:
        counts = positions[finding.number].counts
        planned = _full_size(plan.finding_axes[finding.number], counts)
        total += planned
        for request in plan.requests:
            # An upper bound: what two requests ask alike is added once.
            total += _full_size(request_axes(plan, finding, request), counts) - planned
    if total > MAXIMUM_ROWS and plan.document.sweep.design == "full":
        raise InputFault(
            Fault("axes", f"the full cross has {total:,} specifications, more than "
                  f"{MAXIMUM_ROWS:,}", "Choose fewer, or set [sweep] design = { sample = 5000 }.")
        )  # fmt: skip


def _full_size(axes: Mapping[str, FindingAxis], counts: Mapping[int, int]) -> int:
    """Return the number of specifications of a full cross."""
    size = sum(counts[code] for code in axes["window"].codes)
    for axis, held in axes.items():
        if axis != "window":
            size *= len(held.codes)
    return size


def _measure_notes(dataset: Dataset) -> list[str]:
    """Name columns that hold the same values."""
    seen: dict[str, str] = {}
    notes = []
    for name in dataset.names:
        key = values_digest(dataset, name)
        if key in seen:
            notes.append(f'The columns "{seen[key]}" and "{name}" hold the same values.')
        seen.setdefault(key, name)
    return notes
