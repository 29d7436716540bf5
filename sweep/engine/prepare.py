"""A plan and its data together: everything that can be known before anything is estimated."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

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
from sweep.panel.windows import Positions, WindowRequest, resolve_window
from sweep.plan.canonical import Token, add_tokens, digest_text, halves, position_tokens
from sweep.plan.choices import (
    DeterministicChoice,
    MeasureChoice,
    TransformationChoice,
    WindowChoice,
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
        First and last row at which the baseline's series all exist; windows are cut from
        these rows, whatever the measures and the conditioning set.
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
    spans = _spans(plan, dataset, faults)
    windows = _windows(plan, spans, dataset.calendar, faults)
    terms = _terms(plan, dataset.calendar, faults)
    if faults:
        raise InputFault(*_unique(faults))
    faults = missing_faults(dataset, dataset.names, _covered(windows, len(dataset.calendar)))
    faults += shortest_faults(plan, windows, dataset.calendar)
    if faults:
        raise InputFault(*_unique(faults))
    positions = [_tokens(plan, windows[f.number], dataset.calendar) for f in plan.findings]
    _check_size(plan, positions)
    rows = expand_plan(plan, positions)
    keys = tuple(data_digest(dataset, sorted(_columns(plan, f))) for f in plan.findings)
    notes = (*plan.notes, *_window_notes(plan, windows), *_measure_notes(dataset))
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


def _spans(plan: Plan, dataset: Dataset, faults: list[Fault]) -> list[tuple[int, int]]:
    """Return, for each finding, the first and last row at which all its series exist."""
    spans = []
    for finding in plan.findings:
        measure = next(_measures(plan, finding))
        low, high = 0, len(dataset.calendar) - 1
        for name in plan.columns(finding, measure):
            rows = np.flatnonzero(np.isfinite(dataset.column(name)))
            if rows.size:
                low, high = max(low, int(rows[0])), min(high, int(rows[-1]))
        if low > high:
            names = ", ".join(plan.columns(finding, measure))
            faults.append(
                Fault(dataset.path.name, f"no date has a value of every series of "
                      f'"{finding.name}" ({names})', "Use series that overlap in time.")
            )  # fmt: skip
        spans.append((low, high))
    return spans


def _windows(
    plan: Plan, spans: list[tuple[int, int]], calendar: Calendar, faults: list[Fault]
) -> tuple[dict[int, Positions], ...]:
    result = []
    for finding, span in zip(plan.findings, spans, strict=True):
        found: dict[int, Positions] = {}
        for code in plan.finding_axes[finding.number]["window"].every:
            choice = plan.axes["window"][code]
            assert isinstance(choice, WindowChoice)
            request = WindowRequest(
                choice.first, choice.last, choice.without, choice.drop_first, choice.drop_last,
                choice.moving, choice.length, choice.step,
            )  # fmt: skip
            if span[0] > span[1]:
                continue
            try:
                found[code] = resolve_window(request, span, calendar)
            except ValueError as error:
                faults.append(Fault("axes.windows", f'"{choice.label}": {error}'))
        result.append(found)
    return tuple(result)


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


def _covered(windows: tuple[Mapping[int, Positions], ...], count: int) -> list[tuple[int, int]]:
    """Return the runs of rows that no window of any finding uses."""
    used = np.zeros(count, bool)
    for found in windows:
        for positions in found.values():
            here = np.zeros(count, bool)
            for first, last in zip(positions.first, positions.last, strict=True):
                here[first : last + 1] = True
            for first, last in positions.episodes:
                here[first : last + 1] = False
            used |= here
    idle = np.flatnonzero(~used)
    runs = np.split(idle, np.flatnonzero(np.diff(idle) > 1) + 1) if idle.size else []
    return [(int(run[0]), int(run[-1])) for run in runs]


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


def _window_notes(plan: Plan, windows: tuple[Mapping[int, Positions], ...]) -> list[str]:
    """Name window choices that come down to the same rows."""
    notes: dict[str, None] = {}
    for found in windows:
        seen: dict[tuple[bytes, bytes, object], str] = {}
        for code, positions in found.items():
            label = plan.axes["window"][code].label
            key = (positions.first.tobytes(), positions.last.tobytes(), positions.episodes)
            if key in seen:
                notes[f'The windows "{seen[key]}" and "{label}" hold the same dates.'] = None
            seen.setdefault(key, label)
    return list(notes)


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
