"""Choices that no combination could run: faults of the plan, found without estimating."""

from __future__ import annotations

from collections.abc import Mapping

from sweep.errors import Fault
from sweep.panel.calendar import Calendar
from sweep.panel.transforms import TRANSFORMS
from sweep.panel.windows import Positions
from sweep.plan.choices import (
    ConditioningChoice,
    DeterministicChoice,
    LagChoice,
    TransformationChoice,
)
from sweep.plan.document import AXIS_KEYS
from sweep.plan.model import Finding, Plan

__all__ = ["FREEDOM_FOR_CRITERION", "fewest_terms", "lowered_maxima", "shortest_faults"]

FREEDOM_FOR_CRITERION = 20
"""Degrees of freedom that the largest order considered must leave (common practice, no source)."""


def shortest_faults(
    plan: Plan, windows: tuple[Mapping[int, Positions], ...], calendar: Calendar
) -> list[Fault]:
    """Find windows too short for every lag choice, and lags too long for every window.

    A window that is short for some specifications or some findings only is no fault: those
    become infeasible.
    """
    faults: list[Fault] = []
    faults += _horizon_faults(plan, windows, calendar)
    lags = {code: c for code, c in enumerate(plan.axes["lags"]) if isinstance(c, LagChoice)}
    lost = _lost_rows(plan, calendar)
    for code, choice in enumerate(plan.axes["window"]):
        sizes = [
            (finding, *_size(windows[finding.number][code], lost))
            for finding in plan.findings
            if code in windows[finding.number] and not windows[finding.number][code].lack
        ]
        fits = [_fits(plan, f, lag, room) for f, _, room in sizes for lag in lags.values()]
        if sizes and not any(fits):
            finding, size, _ = sizes[0]
            whose = f'"{finding.name}"' if len(plan.findings) == 1 else "any finding"
            faults.append(
                Fault(_written(plan, finding, "window", code),
                      f'"{choice.label}" has {size} periods, fewer than the smallest regression of '
                      f"{whose} needs", "Lengthen it or use fewer lags.")
            )  # fmt: skip
    longest = {f.number: _longest(windows[f.number]) for f in plan.findings}
    for code, lag in lags.items():
        if not any(_fits(plan, f, lag, longest[f.number]) for f in plan.findings):
            finding = max(plan.findings, key=lambda f: longest[f.number])
            faults.append(
                Fault(_written(plan, finding, "lags", code),
                      f'"{lag.label}" lags leave no degree of freedom in the longest window of '
                      f'"{finding.name}" ({longest[finding.number]} periods)',
                      "Use fewer lags or longer windows.")
            )  # fmt: skip
    return faults


def _size(positions: Positions, lost: int) -> tuple[int, int]:
    """Return the periods of the longest position, and those that a regression may use."""
    size = int((positions.last - positions.first).max()) + 1
    # A moving or fixed window that starts later may read the values lost at the start.
    starts = int(positions.first.min()) == 0 and positions.count == 1
    return size, size - (lost if starts else 0)


def lowered_maxima(
    plan: Plan, windows: tuple[Mapping[int, Positions], ...], calendar: Calendar
) -> list[str]:
    """Say which criteria cannot consider their largest order even in the longest window."""
    said: dict[str, None] = {}
    for finding in plan.findings:
        size = _longest(windows[finding.number])
        for lag in plan.axes["lags"]:
            assert isinstance(lag, LagChoice)
            if not lag.criterion:
                continue
            fitting = [n for n in range(1, lag.maximum + 1) if _fits(plan, finding, lag, size, n)]
            order = max(fitting, default=0)
            if order in (0, lag.maximum):
                continue
            said[
                f'"{lag.label}" considers at most {order} of {lag.maximum} lags of '
                f'"{finding.name}": more would leave fewer than {FREEDOM_FOR_CRITERION} degrees of '
                f"freedom in the longest window ({size} periods)."
            ] = None
    return list(said)


def _longest(windows: Mapping[int, Positions]) -> int:
    return max((_size(p, 0)[0] for p in windows.values() if not p.lack), default=0)


def _written(plan: Plan, finding: Finding, axis: str, code: int) -> str:
    """Return where in the plan a choice stands."""
    plural, singular = AXIS_KEYS[axis]
    if plan.finding_axes[finding.number][axis].baseline == code:
        return f"baseline.{singular}"
    request = plan.first_request(finding, axis, code)
    return f"requests[{request}].axes.{plural}" if request else f"axes.{plural}"


def _horizon_faults(
    plan: Plan, windows: tuple[Mapping[int, Positions], ...], calendar: Calendar
) -> list[Fault]:
    """Find Hamilton cycles that no window is long enough for."""
    longest = max(_longest(found) for found in windows)
    faults = []
    for code, choice in enumerate(plan.axes["transformation"]):
        assert isinstance(choice, TransformationChoice)
        if "Hamilton cycle" not in {choice.default, *(name for _, name in choice.series)}:
            continue
        lags = calendar.frequency.hamilton_lags
        # One row more than coefficients: rows are what horizon and lags leave.
        needed = (choice.horizon or calendar.frequency.hamilton_horizon) + 2 * lags + 1
        if longest < needed:
            faults.append(
                Fault(_written(plan, plan.findings[0], "transformation", code),
                      f'"{choice.label}" needs {needed} periods for its regression, and the '
                      f"longest window has {longest}", "Shorten the horizon or use longer windows.")
            )  # fmt: skip
    return faults


def fewest_terms(plan: Plan) -> int:
    """Return the fewest deterministic columns of any choice."""
    seasons = plan.frequency.seasons
    counts = []
    for choice in plan.axes["deterministics"]:
        assert isinstance(choice, DeterministicChoice)
        special = len(choice.steps) + len(choice.pulses) + 2 * choice.fourier
        counts.append(choice.trend + 1 + (seasons - 1) * choice.seasonal + special)
    return min(counts)


def _lost_rows(plan: Plan, calendar: Calendar) -> int:
    """Return the fewest rows that a transformation choice loses at the start of the data."""
    lost = []
    for choice in plan.axes["transformation"]:
        assert isinstance(choice, TransformationChoice)
        names = {choice.default, *(name for _, name in choice.series)}
        lost.append(
            max(TRANSFORMS[n].offsets(calendar.frequency, choice.horizon)[-1] for n in names)
        )
    return min(lost)


def _fits(plan: Plan, finding: Finding, lag: LagChoice, room: int, order: int = 1) -> bool:
    """Say whether some combination leaves a degree of freedom in ``room`` periods.

    A criterion must leave as many as it asks for, at the ``order`` named.
    """
    given = []
    for code in plan.finding_axes[finding.number]["conditioning"].every:
        choice = plan.axes["conditioning"][code]
        assert isinstance(choice, ConditioningChoice)
        given.append(len(finding.given) - len(choice.without))
    fixed = fewest_terms(plan) + sum(item.lags + 1 for item in finding.exogenous)
    own, cause, others = (lag.own, lag.cause, lag.given) if not lag.criterion else (order,) * 3
    unmodelled = (item.lags for item in finding.exogenous)
    start = max([own, cause, others if min(given) else 0, lag.common, *unmodelled])
    regressors = fixed + own + cause + min(given) * others
    spare = FREEDOM_FOR_CRITERION if lag.criterion else 1
    return room - start - regressors >= spare
