"""Choices that give the same numbers by construction, whatever the data, in words."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Hashable, Iterable, Mapping, Sequence

from sweep.panel.periods import Frequency
from sweep.panel.transforms import TRANSFORMS
from sweep.plan.choices import (
    Choice,
    ConditioningChoice,
    DeterministicChoice,
    LagChoice,
    TransformationChoice,
)
from sweep.plan.model import Finding

__all__ = ["twin_notes"]


def twin_notes(
    axes: Mapping[str, Sequence[Choice]], findings: Sequence[Finding], frequency: Frequency
) -> list[str]:
    """Name the choices of a plan that come down to one another.

    Meanings are compared, never labels.

    Parameters
    ----------
    axes : mapping of axis to sequence of Choice
        Every choice of the plan and its requests.
    findings : sequence of Finding
    frequency : Frequency
    """
    notes = _transformations(axes, frequency)
    lags = [choice for choice in axes["lags"] if isinstance(choice, LagChoice)]
    same = _alike((choice.label, _orders(choice)) for choice in lags if not choice.criterion)
    notes += [f"{_both(labels)} use the same lags on the same rows." for labels in same]
    for choice in lags:
        only = choice.criterion and choice.maximum == 1
        ones = [c.label for c in lags if not c.criterion and _orders(c) == (1, 1, 1, 0)]
        if only and choice.common <= 1 and ones:
            notes.append(f'"{choice.label}" can only choose 1 lag, as "{ones[0]}" does.')
    return notes + _given_orders(axes, findings, lags)


def _transformations(axes: Mapping[str, Sequence[Choice]], frequency: Frequency) -> list[str]:
    scales = [c for c in axes["transformation"] if isinstance(c, TransformationChoice)]
    same = _alike((c.label, _scale(c, frequency, line=False)) for c in scales)
    notes = [f"{_both(labels)} give the same numbers in {frequency.name} data." for labels in same]
    lines = [
        f'"{c.label}"'
        for c in axes["deterministics"]
        if isinstance(c, DeterministicChoice) and c.trend >= 1
    ]
    for labels in _alike((c.label, _scale(c, frequency, line=True)) for c in scales):
        if lines and labels not in same:
            where = f"under {lines[0]}" if len(lines) == 1 else f"under each of {', '.join(lines)}"
            notes.append(
                f"{_both(labels)} give the same tests {where}, which takes the line out anyway."
            )
    return notes


def _given_orders(
    axes: Mapping[str, Sequence[Choice]], findings: Sequence[Finding], lags: Sequence[LagChoice]
) -> list[str]:
    """Name lag choices that differ in the given series alone, where there may be none."""
    alone = any(not finding.given for finding in findings) or any(
        isinstance(c, ConditioningChoice) and c.meaning == {"set": "pairwise"}
        for c in axes["conditioning"]
    )
    fixed = [choice for choice in lags if not choice.criterion]
    whole = _alike((choice.label, _orders(choice)) for choice in fixed)
    without = _alike((choice.label, _orders(choice, given=False)) for choice in fixed)
    return [
        f"{_both(labels)} use the same lags where there is no given series."
        for labels in without
        if alone and labels not in whole
    ]


def _scale(choice: TransformationChoice, frequency: Frequency, *, line: bool) -> Hashable:
    """Return what a choice does to each series; with ``line``, up to a line in time."""

    def plain(name: str) -> str:
        name = TRANSFORMS[name].equals(frequency) or name
        return "level" if line and name == "linearly detrended" else name

    default = plain(choice.default)
    series = tuple((s, plain(name)) for s, name in choice.series if plain(name) != default)
    return default, series, choice.smoothing, choice.horizon


def _orders(choice: LagChoice, *, given: bool = True) -> tuple[int, int, int, int]:
    """Return the orders, and the sample's where it is not the own one."""
    others = choice.given if given else choice.own
    longest = max(choice.own, choice.cause, others)
    return choice.own, choice.cause, others, choice.common if choice.common > longest else 0


def _alike(choices: Iterable[tuple[str, Hashable]]) -> list[tuple[str, ...]]:
    """Return the labels of choices that do the same, two or more at a time."""
    groups: dict[Hashable, list[str]] = defaultdict(list)
    for label, does in choices:
        groups[does].append(label)
    return [tuple(labels) for labels in groups.values() if len(labels) > 1]


def _both(labels: Sequence[str]) -> str:
    """Join labels in quotation marks."""
    quoted = [f'"{label}"' for label in labels]
    return f"{', '.join(quoted[:-1])} and {quoted[-1]}"
