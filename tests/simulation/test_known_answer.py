"""The shipped invented example: the sweep says what its generator put there.

See configs/data/make_harbour.py.  The bounds are loose: what matters is the order of size,
and the data are one draw.
"""

from __future__ import annotations

from pathlib import Path

import pandas as pd
import pytest

import sweep

pytestmark = pytest.mark.slow

HARBOUR = Path(__file__).resolve().parents[2] / "configs" / "harbour.toml"
SEASONAL = ("constant + seasonal", "linear trend + seasonal")


@pytest.fixture(scope="module")
def outcomes(tmp_path_factory: pytest.TempPathFactory) -> pd.DataFrame:
    store = tmp_path_factory.mktemp("harbour") / "harbour.duckdb"
    rows = sweep.run(sweep.load_plan(HARBOUR), store=store, jobs=1).outcomes()
    assert not (rows["status"] == "failed").any()
    rows = rows[rows["admissible"].astype(bool)]
    names = ["cause", "window_name", "transformation", "conditioning", "deterministics", "measures"]
    return rows.astype(dict.fromkeys(names, str))


def share(
    outcomes: pd.DataFrame,
    cause: str = "freight",
    conditioning: str = "given",
    seasonal: bool = True,
    **equal: str,
) -> float:
    """Return the share of rows in which the claim survives, two lags or more."""
    rows = outcomes[(outcomes["cause"] == cause) & (outcomes["lags"] >= 2)]
    rows = rows[rows["conditioning"] == conditioning]
    rows = rows[rows["deterministics"].isin(SEASONAL) == seasonal]
    for column, value in equal.items():
        rows = rows[rows[column] == value]
    assert len(rows) > 0
    return float(rows["survives"].astype(bool).mean())


GROWTH = {"transformation": "log difference"}


def test_link_holds_until_2010_and_not_afterwards(outcomes: pd.DataFrame) -> None:
    assert share(outcomes, window_name="until 2010-12", **GROWTH) > 0.9
    assert share(outcomes, window_name="from 2011-01", **GROWTH) < 0.2


def test_rolling_windows_show_when(outcomes: pd.DataFrame) -> None:
    rolling = outcomes[outcomes["window_name"] == "rolling 10 years"]
    early = rolling[pd.to_datetime(rolling["window_end"]) < pd.Timestamp(2011, 1, 1)]
    late = rolling[pd.to_datetime(rolling["window_start"]) >= pd.Timestamp(2011, 1, 1)]
    assert share(early, **GROWTH) > 0.7
    assert share(late, **GROWTH) < 0.25


def test_common_driver_left_out_looks_like_a_lead(outcomes: pd.DataFrame) -> None:
    late = {"window_name": "from 2011-01", "measures": "freight_teu", **GROWTH}
    assert share(outcomes, conditioning="pairwise", **late) > 0.9
    assert share(outcomes, conditioning="given", **late) < 0.2


def test_seasons_left_out_look_like_a_lead(outcomes: pd.DataFrame) -> None:
    late = {"window_name": "from 2011-01", "measures": "freight_teu", **GROWTH}
    assert share(outcomes, seasonal=False, **late) > share(outcomes, seasonal=True, **late) + 0.3


def test_rents_never_lead_freight(outcomes: pd.DataFrame) -> None:
    assert share(outcomes, cause="rents", window_name="full sample", **GROWTH) > 0.85


def test_inverted_measure_keeps_the_claimed_sign(outcomes: pd.DataFrame) -> None:
    """Fewer idle berths mean more freight: the raw sum is negative and still counts."""
    rows = outcomes[(outcomes["measures"] == "idle_berths") & (outcomes["cause"] == "freight")]
    rows = rows[(rows["window_name"] == "until 2010-12") & rows["survives"].astype(bool)]
    assert len(rows) > 0
    assert (rows["coefficient_sum"] < 0).all()
