"""F along rolling and expanding windows against R, both directions.

Rows are matched by the last quarter of the window.  R's sample begins with the first
quarter at which all transformed series exist (1959-Q2), ours with the first at which the raw
ones do, so that under log differences one window of ours, the earliest, has no partner.

Tolerances: F 1e-8 relative (what the store promises), p-values 1e-6 relative (tails magnify).
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import published_plans as plans
import pytest

ROLLING = ("macro_gdp_cons_p2", "macro_unemp_infl_p2", "macro_unemp_infl_p4_ct")


def quarter(dates: pd.Series[Any]) -> pd.Series[Any]:
    return pd.to_datetime(dates).dt.to_period("Q")


def paths(folder: Path, name: str) -> tuple[dict[str, Any], pd.DataFrame]:
    """Run the rolling and the expanding windows of one reference path."""
    block = plans.reference()["rolling"][name]
    case = plans.reference()["cases"][block["case"]]
    axes = {
        "lags": [block["lag"]],
        "deterministics": [plans.DETERMINISTICS[block["det"]]],
        "windows": [
            {"name": "rolling", "rolling": block["window"]},
            {"name": "expanding", "expanding": block["window"]},
        ],
    }
    text = plans.case_plan(folder, case | {"from": None}, axes)
    outcomes = plans.run_plan(folder, text)
    rows = (outcomes["lags"] == block["lag"]) & (outcomes["deterministics"] == block["det"])
    return block, outcomes[rows]


@pytest.mark.parametrize("name", ROLLING)
def test_paths(name: str, tmp_path: Path) -> None:
    block, outcomes = paths(tmp_path, name)
    for entry in ("rolling", "expanding"):
        ours = outcomes[outcomes["window_name"] == entry].copy()
        assert (ours["window_entry"] == entry).all()
        ours["quarter"] = quarter(ours["window_end"])
        for prefix, direction in (("", "cause_to_effect"), ("reverse_", "effect_to_cause")):
            theirs = plans.table(block[direction][entry])
            theirs["quarter"] = quarter(theirs["end"])
            both = theirs.merge(ours, on="quarter")
            assert len(both) == len(theirs) == len(ours) - (name == "macro_gdp_cons_p2")
            assert (both["nobs"] == both["observations"]).all()
            np.testing.assert_allclose(both[f"{prefix}statistic"], both["F"], rtol=1e-8)
            np.testing.assert_allclose(both[f"{prefix}p_value"], both["p_F"], rtol=1e-6)


def test_window_dates(tmp_path: Path) -> None:
    """A window of 60 quarters spans 60 quarters; the dates are its first and last ones."""
    _, outcomes = paths(tmp_path, "macro_gdp_cons_p2")
    rolling = outcomes[outcomes["window_name"] == "rolling"]
    assert len(rolling) == 203 - 60 + 1
    first, last = quarter(rolling["window_start"]), quarter(rolling["window_end"])
    assert {(b - a).n for a, b in zip(first, last, strict=True)} == {59}
    assert str(first.min()) == "1959Q1"
    assert str(last.max()) == "2009Q3"
