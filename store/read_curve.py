"""Estimates in order, thinned by rank: what a specification curve is drawn from."""

from __future__ import annotations

import pandas as pd

from store.database import Database
from store.schema import query

__all__ = ["curve"]

# More points than any figure has room for.
_POINTS = 240


def curve(db: Database, sweep: int, finding: int, rows: int = 5000) -> pd.DataFrame:
    """Return admissible planned rows in order of their estimate, thinned by rank.

    Parameters
    ----------
    db : Database
        An open store.
    sweep, finding : int
        Numbers of the sweep and the finding.
    rows : int
        Most rows to return.

    Returns
    -------
    pandas.DataFrame
        For ``scale`` = ``all`` first, then for each scale by name: ``rank`` (from 1 at the
        lowest), ``estimate``, ``standard_error``, ``p_value, survives, is_baseline`` (of a moving
        window, its last position), the choices ``lags, deterministics, window, transformation,
        test, conditioning, measures``, ``specification``, and of the whole scale ``admissible,
        rows`` (those with an estimate), ``survived, positive, median, baseline_scale``.  Under
        ``all`` the estimate is the standardised sum of the lag coefficients (standard deviations
        of the effect for one of the cause), otherwise the sum in units of the effect per unit
        of the cause; the standard error is on the same scale, and missing where there is none.
        Kept are ranks evenly spread from the lowest to the highest, and the baseline.
    """
    parameters = {"sweep": sweep, "finding": finding}
    scales = db.scalar(
        "SELECT count(DISTINCT code) FILTER (axis = 'transformation') "
        "* count(DISTINCT code) FILTER (axis = 'measures') "
        "* count(DISTINCT scale_group) FILTER (axis = 'test') "
        "FROM sweep_choice WHERE sweep = $sweep AND finding = $finding",
        parameters,
    )
    # The baseline may come on top of the evenly spread ranks, once over all and once in its scale.
    points = max(2, min(_POINTS, (rows - 2) // (int(scales or 0) + 1)))
    return db.frame(query("curve"), parameters | {"points": points})
