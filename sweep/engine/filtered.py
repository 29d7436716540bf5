"""Which rows of a plan take a filter of the whole window across an episode left out of it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from sweep.engine.prepare import Prepared
from sweep.panel.transforms import TRANSFORMS
from sweep.panel.windows import Positions
from sweep.plan.choices import AXES, ConditioningChoice, MeasureChoice, TransformationChoice
from sweep.plan.model import Finding, scale_of

__all__ = ["filter_meets_episode", "meets_episode"]

Flags = NDArray[np.bool_]


def filter_meets_episode(prepared: Prepared) -> Flags:
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
        filtered = _filtered(prepared, finding)
        here = filtered[codes["measures"], codes["transformation"], codes["conditioning"]]
        for code, positions in prepared.windows[finding.number].items():
            at = np.flatnonzero(here & (codes["window"] == code))
            found[mine[at]] = meets_episode(positions)[rows.position[mine[at]]]
    return found


def meets_episode(positions: Positions) -> Flags:
    """Say which positions of a window hold a date of an episode that is left out, shape (w,)."""
    meets = np.zeros(positions.count, bool)
    for start, end in positions.episodes:
        meets |= (positions.first <= end) & (positions.last >= start)
    return meets


def _filtered(prepared: Prepared, finding: Finding) -> Flags:
    """Say where some series of the regression is filtered, (measures, transformation, given)."""
    plan = prepared.plan
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
                    for role in finding.roles
                    if role not in given.without
                }
                table[m, t, c] = any(TRANSFORMS[name].two_sided for name in names)
    return table
