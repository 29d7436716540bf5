"""Rows of a plan that are known to have no number before anything is estimated."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from sweep.engine.prepare import Prepared
from sweep.engine.reasons import REASON_OF_LACK, Reason
from sweep.panel.transforms import TRANSFORMS
from sweep.panel.windows import Lack, Positions
from sweep.plan.choices import AXES, ConditioningChoice, MeasureChoice, TransformationChoice
from sweep.plan.model import Finding, scale_of
from sweep.procedures.lag_augmented import SCALES

__all__ = ["meets_episode", "unsuited"]

Flags = NDArray[np.bool_]


def unsuited(prepared: Prepared) -> dict[Reason, Flags]:
    """Say which rows cannot be run, as far as windows, scales and tests say so, by reason.

    The plan's own rules are not looked at.

    Parameters
    ----------
    prepared : Prepared

    Returns
    -------
    dict of Reason to ndarray of bool, shape (rows,)
        No row has two reasons.
    """
    off_scale = _augmented_off_scale(prepared)
    return {
        Reason.AUGMENTED_SCALE: off_scale,
        Reason.FILTER_EPISODE: _filter_meets_episode(prepared) & ~off_scale,
        **{
            REASON_OF_LACK[lack]: _lacking(prepared, lack) & ~off_scale
            for lack in (Lack.DATES, Lack.LENGTH)
        },
    }


def _lacking(prepared: Prepared, lack: Lack) -> Flags:
    """Say which rows choose a window that the sample of their finding cannot fill."""
    rows = prepared.rows
    found = np.zeros(rows.count, bool)
    for finding in prepared.plan.findings:
        held = prepared.windows[finding.number]
        codes = [code for code, positions in held.items() if positions.lack == lack]
        found |= (rows.finding == finding.number) & np.isin(rows.codes["window"], codes)
    return found


def _filter_meets_episode(prepared: Prepared) -> Flags:
    """Say which rows have no numbers because a two-sided filter would cross an episode.

    Parameters
    ----------
    prepared : Prepared

    Returns
    -------
    ndarray of bool, shape (rows,)
        True where a series of the regression is filtered over the whole window and the window
        leaves out an episode: these rows are ``not applicable``, whatever else they choose.
    """
    rows = prepared.rows
    found = np.zeros(rows.count, bool)
    for finding in prepared.plan.findings:
        mine = np.flatnonzero(rows.finding == finding.number)
        codes = {axis: rows.codes[axis][mine] for axis in AXES}
        filtered = _some_scale(prepared, finding, lambda name: TRANSFORMS[name].two_sided)
        here = filtered[codes["measures"], codes["transformation"], codes["conditioning"]]
        for code, positions in prepared.windows[finding.number].items():
            at = np.flatnonzero(here & (codes["window"] == code))
            found[mine[at]] = meets_episode(positions)[rows.position[mine[at]]]
    return found


def _augmented_off_scale(prepared: Prepared) -> Flags:
    """Say which rows ask for extra lags on series that are not in levels or logarithms.

    Parameters
    ----------
    prepared : Prepared

    Returns
    -------
    ndarray of bool, shape (rows,)
        True where the row is ``not applicable`` for that reason.
    """
    plan, rows = prepared.plan, prepared.rows
    augmented = np.array([getattr(c, "extra_lags", 0) > 0 for c in plan.axes["test"]])
    found = np.zeros(rows.count, bool)
    for finding in plan.findings:
        mine = np.flatnonzero((rows.finding == finding.number) & augmented[rows.codes["test"]])
        codes = {axis: rows.codes[axis][mine] for axis in AXES}
        changed = _some_scale(prepared, finding, lambda name: name not in SCALES, modelled=True)
        found[mine] = changed[codes["measures"], codes["transformation"], codes["conditioning"]]
    return found


def meets_episode(positions: Positions) -> Flags:
    """Say which positions of a window hold a date of an episode that is left out, shape (w,)."""
    meets = np.zeros(positions.count, bool)
    for start, end in positions.episodes:
        meets |= (positions.first <= end) & (positions.last >= start)
    return meets


def _some_scale(
    prepared: Prepared, finding: Finding, is_meant: Callable[[str], bool], *, modelled: bool = False
) -> Flags:
    """Say where some series is on a scale that is meant, (measures, transformation, given).

    All series of the regression count, or only those that are ``modelled``.
    """
    plan = prepared.plan
    roles = finding.roles
    if modelled:
        roles = (finding.cause, finding.effect, *finding.given)
    axes = ("measures", "transformation", "conditioning")
    table = np.zeros([len(plan.axes[axis]) for axis in axes], bool)
    held = [plan.finding_axes[finding.number][axis].every for axis in axes]
    for m in held[0]:
        for t in held[1]:
            for c in held[2]:
                measure, scales, given = (
                    plan.axes[axis][code] for axis, code in zip(axes, (m, t, c), strict=True)
                )
                assert isinstance(measure, MeasureChoice)
                assert isinstance(scales, TransformationChoice)
                assert isinstance(given, ConditioningChoice)
                names = {
                    scale_of(scales, role, measure.column(role))
                    for role in roles
                    if role not in given.without
                }
                table[m, t, c] = any(is_meant(name) for name in names)
    return table
