"""The long list and the alternatives beside the baseline, against the raw tables."""

from __future__ import annotations

import numpy as np
import pandas as pd
import plain_twin
import pytest
from store_samples import RULES, Filled

from store import read, read_list
from store.read import LIST_COLUMNS, list_rows
from store.schema import AXES

FINDING = 4


@pytest.fixture(scope="module")
def planned(filled: Filled) -> pd.DataFrame:
    rows = plain_twin.judged_rows(filled.db, filled.sweep)
    return rows[rows["request"] == 0]


def listed(filled: Filled, finding: int) -> pd.DataFrame:
    return pd.DataFrame(list_rows(filled.db, filled.sweep, finding), columns=LIST_COLUMNS)


def test_the_long_list_holds_every_row_once(filled: Filled) -> None:
    frame = listed(filled, FINDING).set_index("specification")
    view = filled.db.frame(
        "SELECT * FROM outcomes WHERE finding_number = ? ORDER BY specification", [FINDING]
    ).set_index("specification")
    assert frame.index.is_unique
    assert len(frame) == len(view) == read.list_size(filled.db, filled.sweep, FINDING)["rows"][0]
    assert set(frame["origin"]) == {"planned", "added"}
    frame = frame.loc[view.index]
    for name in LIST_COLUMNS[1:]:
        own, other = frame[name], view[name]
        known = other.notna().to_numpy()
        assert (own.notna().to_numpy() == known).all(), name
        if name in ("window_start", "window_end"):
            own = pd.to_datetime(own)
        assert (own[known] == other[known]).all(), name


def test_the_long_list_is_in_plan_order(filled: Filled) -> None:
    frame = listed(filled, FINDING)
    choices = read.choices(filled.db, filled.sweep, FINDING)
    place = {(c.axis, c.label): c.position for c in choices.itertuples()}
    order = (
        "window", "transformation", "deterministics", "conditioning", "measures", "lags", "test",
    )  # fmt: skip
    columns = {"window": "window_name", "lags": "lags_choice"}
    keys = [
        (*(place[axis, row[columns.get(axis, axis)]] for axis in order), row["position"])
        for row in frame.to_dict("records")
    ]
    assert keys == sorted(keys)


@pytest.mark.parametrize("at_once", [1, 40, 200])
def test_parts_give_the_same_list(
    filled: Filled, monkeypatch: pytest.MonkeyPatch, at_once: int
) -> None:
    whole = listed(filled, FINDING)
    parts = list(read_list._parts(filled.db, filled.sweep, FINDING))
    monkeypatch.setattr(read_list, "_AT_ONCE", at_once)
    more = list(read_list._parts(filled.db, filled.sweep, FINDING))
    assert len(more) > len(parts)
    pd.testing.assert_frame_equal(listed(filled, FINDING), whole)


@pytest.mark.parametrize("finding", range(len(RULES)))
def test_alternatives_agree_with_the_raw_rows(
    filled: Filled, planned: pd.DataFrame, finding: int
) -> None:
    rows = planned[planned["finding"] == finding]
    home = rows[rows["is_baseline"]].iloc[0]
    frame = read.alternatives(filled.db, filled.sweep, finding)
    near = rows[rows["changes"] <= 1]
    assert len(frame) == near[list(AXES)].drop_duplicates().shape[0]
    assert frame["axis"].iloc[0] == "baseline"
    labels = {"lags": "lags_choice", "window": "window_name"}
    for found in frame.to_dict("records"):
        same = np.logical_and.reduce(
            [near[f"{axis}_label"] == found[labels.get(axis, axis)] for axis in AXES]
        )
        own = near[same]
        differing = [axis for axis in AXES if own[axis].iloc[0] != home[axis]]
        assert differing == ([] if found["axis"] == "baseline" else [found["axis"]])
        assert found["positions"] == len(own)
        assert found["admissible"] == own["admissible"].sum()
        assert found["survived"] == own.loc[own["admissible"], "survives"].sum()
        one = len(own) == 1
        for name in ("p_value", "reverse_p_value", "coefficient_sum", "reverse_coefficient_sum"):
            shown = own[own["admissible"]] if own["admissible"].any() else own
            turned = shown["orientation"].astype(float) if name.endswith("sum") else 1.0
            expected = (pd.to_numeric(shown[name]) * turned).median()
            np.testing.assert_equal(found[name], expected)
        for name in ("statistic", "reverse_statistic", "coefficient_sum_se", "df_num", "df_den"):
            expected = pd.to_numeric(own[name]).iloc[0] if one else np.nan
            np.testing.assert_equal(float(pd.to_numeric(found[name])), expected)
        assert (found["specification"] == own["specification"].iloc[0]) == one
        orders = pd.to_numeric(own["order_used"]).dropna()
        if len(orders):
            assert (found["order_least"], found["order_most"]) == (orders.min(), orders.max())
