"""Paths of moving windows to go with the invented sweeps of ``counted_frames``."""

from __future__ import annotations

import pandas as pd

COLUMNS = (
    "window_name", "entry_kind", "length", "place", "position", "window_start", "window_end",
    "rows", "admissible", "survived", "median_p", "baseline_p", "baseline_survives",
)  # fmt: skip
_AXES = ("lags", "deterministics", "transformation", "test", "conditioning", "measures")


def window_paths_frame(rows: pd.DataFrame) -> pd.DataFrame:
    """The moving windows along time, as the store's frame of that name."""
    base = rows[rows["is_baseline"]].iloc[0]
    moving = rows[rows["entry_kind"] != "fixed"]
    found = []
    for (name, position), own in moving.groupby(["window", "position"], sort=False):
        good = own[own["admissible"]]
        home = good[(good[list(_AXES)] == base[list(_AXES)]).all(axis=1)]
        one = home.iloc[0] if len(home) else None
        found.append(
            (
                name, own["entry_kind"].iloc[0], own["length"].iloc[0], 1, position,
                own["window_start"].iloc[0], own["window_end"].iloc[0], len(own), len(good),
                int(good["survives"].sum()), good["p_value"].median() if len(good) else None,
                None if one is None else one["p_value"],
                None if one is None else bool(one["survives"]),
            )
        )  # fmt: skip
    return pd.DataFrame(found, columns=list(COLUMNS))
