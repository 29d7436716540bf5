"""The windows of every finding, cut from the dates at which its series exist.

The dates are those of the finding's baseline measures and all its given and exogenous series,
whatever a specification's own measures and conditioning set: so a change of conditioning or of
measure is compared with the baseline on the same windows.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from sweep.errors import Fault
from sweep.panel.calendar import Calendar
from sweep.panel.load import Dataset
from sweep.panel.windows import Positions, WindowRequest, resolve_window
from sweep.plan.choices import MeasureChoice, WindowChoice
from sweep.plan.model import Finding, Plan

__all__ = ["cut_windows", "spans_of", "unused_rows", "window_notes"]

Windows = tuple[Mapping[int, Positions], ...]


def spans_of(plan: Plan, dataset: Dataset, faults: list[Fault]) -> list[tuple[int, int]]:
    """Return, for each finding, the first and last row at which its series all exist.

    Parameters
    ----------
    plan : Plan
    dataset : Dataset
    faults : list of Fault
        Findings whose series never exist together are added.

    Returns
    -------
    list of (int, int)
        Under the baseline's measures, with all given and exogenous series.
    """
    spans = []
    for finding in plan.findings:
        measure = plan.axes["measures"][plan.finding_axes[finding.number]["measures"].baseline]
        assert isinstance(measure, MeasureChoice)
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


def cut_windows(
    plan: Plan, spans: list[tuple[int, int]], calendar: Calendar, faults: list[Fault]
) -> Windows:
    """Cut every window choice from the sample of every finding.

    A date outside the calendar is a fault, and so is what no finding can do: a window that
    lacks dates or length in every sample, an episode that meets no window.  What only some
    findings cannot do stays, as a position that cannot be run or an episode without effect.

    Returns
    -------
    tuple of mapping, one a finding
        Window code to its positions.
    """
    result: list[dict[int, Positions]] = []
    for finding, span in zip(plan.findings, spans, strict=True):
        found: dict[int, Positions] = {}
        for code in plan.finding_axes[finding.number]["window"].every if span[0] <= span[1] else ():
            choice = plan.axes["window"][code]
            assert isinstance(choice, WindowChoice)
            try:
                found[code] = resolve_window(_request(choice), span, calendar)
            except ValueError as error:
                faults.append(Fault("axes.windows", f'"{choice.label}": {error}'))
        result.append(found)
    for code, choice in enumerate(plan.axes["window"]):
        every = [found[code] for found in result if code in found]
        faults += [
            Fault("axes.windows", f'"{choice.label}": {words}') for words in _impossible(every)
        ]
    return tuple(result)


def _request(choice: WindowChoice) -> WindowRequest:
    return WindowRequest(
        choice.first, choice.last, choice.without, choice.drop_first, choice.drop_last,
        choice.moving, choice.length, choice.step,
    )  # fmt: skip


def _impossible(every: list[Positions]) -> list[str]:
    """Say what is wrong with a window choice in the samples of all findings."""
    if not every:
        return []
    if all(positions.lack for positions in every):
        return [every[0].words]
    cut = [positions for positions in every if not positions.lack]
    idle = [pair for pair in cut[0].idle if all(pair in other.idle for other in cut)]
    return [f"the episode {start} to {end} lies outside the window" for start, end in idle]


def unused_rows(found: Mapping[int, Positions], count: int) -> list[tuple[int, int]]:
    """Return the runs of calendar rows that no window of a finding uses."""
    used = np.zeros(count, bool)
    for positions in found.values():
        if positions.lack:
            continue
        here = np.zeros(count, bool)
        for first, last in zip(positions.first, positions.last, strict=True):
            here[first : last + 1] = True
        for first, last in positions.episodes:
            here[first : last + 1] = False
        used |= here
    idle = np.flatnonzero(~used)
    runs = np.split(idle, np.flatnonzero(np.diff(idle) > 1) + 1) if idle.size else []
    return [(int(run[0]), int(run[-1])) for run in runs]


def window_notes(plan: Plan, windows: Windows) -> list[str]:
    """Name window choices that come down to the same rows, and for which findings."""
    same: dict[tuple[str, str], list[Finding]] = {}
    for finding, found in zip(plan.findings, windows, strict=True):
        seen: dict[object, str] = {}
        for code, positions in found.items():
            if positions.lack:
                continue
            label = plan.axes["window"][code].label
            key = (positions.first.tobytes(), positions.last.tobytes(), positions.episodes)
            if key in seen:
                same.setdefault((seen[key], label), []).append(finding)
            seen.setdefault(key, label)
    notes = []
    for (one, other), findings in same.items():
        whose = ""
        if len(findings) < len(plan.findings):
            whose = ", ".join(finding.name for finding in findings) + ": "
        notes.append(f'{whose}The windows "{one}" and "{other}" hold the same dates.')
    return notes
