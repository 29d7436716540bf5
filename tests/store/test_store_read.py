"""The functions of store.read: their columns, and their numbers against the plain twin."""

from __future__ import annotations

from pathlib import Path
from statistics import NormalDist

import numpy as np
import pandas as pd
import plain_twin
import pytest
import small_plans
from store_samples import Filled

import sweep
from store import read
from store.database import Database, open_reading
from store.errors import Ambiguous, NotFound
from store.read_changes import z_value
from store.schema import AXES

FINDING = 1

COLUMNS = {
    "survival": "sweep finding axis choice code choice_position is_baseline planned "
    "not_applicable infeasible failed screened_out not_run admissible survived other_sign "
    "distinct raw_share headline_share share_at_1 share_at_5 share_at_10 median_p_value",
    "attrition": "status reason rows ruled",
    "single_changes": "axis choice entry_kind positions rows_ok admissible survived flips "
    "flips_forward flips_reverse flips_sign p_value p_low p_high reverse_p_value z_change "
    "reverse_z_change coefficient_sum status reason specification baseline_p_value "
    "baseline_reverse_p_value baseline_survives axis_position choice_position",
    "flips": "changes kind first_axis first_from first_to second_axis second_from second_to "
    "entry_kind positions rows_ok admissible survived flips joint contained unsettled "
    "flips_forward flips_reverse flips_sign p_value p_low p_high reverse_p_value z_change "
    "reverse_z_change first_p_value second_p_value window_start window_end specification "
    "baseline_p_value baseline_reverse_p_value baseline_survives",
    "flip_counts": "changes sets admissible turning joint contained unsettled rows flips",
    "shortest_flips": "changes changed positions admissible flips p_value reverse_p_value "
    "window_start window_end specification",
    "flip_distances": "changes rows flips sets turning",
    "windows": "window_name entry_kind length window_start window_end position planned "
    "admissible survived share median_p p_low p_high pooled",
    "directions": "axis choice verdict rows share choice_position",
    "effects": "scale transformation measures form rows positive negative minimum "
    "lower_quartile median upper_quartile maximum is_baseline",
    "pair_cells": "row_axis column_axis row_choice column_choice row_position column_position "
    "row_is_baseline column_is_baseline planned not_applicable screened_out admissible survived "
    "weight share expected departure row_pooled column_pooled",
    "curve": "scale rank estimate standard_error p_value survives is_baseline lags deterministics "
    "window transformation test conditioning measures specification admissible rows survived "
    "positive median baseline_scale",
    "effects_overall": "quantity rows positive negative minimum lower_quartile median "
    "upper_quartile maximum",
    "strata": "window_name is_baseline weight rows admissible survived size",
}


@pytest.fixture(scope="module")
def planned_twin(filled: Filled) -> pd.DataFrame:
    rows = plain_twin.judged_rows(filled.db, filled.sweep)
    return rows[rows["request"] == 0]


@pytest.fixture(scope="module")
def twin(planned_twin: pd.DataFrame) -> pd.DataFrame:
    return planned_twin[planned_twin["finding"] == FINDING]


@pytest.mark.parametrize("name", COLUMNS)
def test_columns(filled: Filled, name: str) -> None:
    frame = getattr(read, name)(filled.db, filled.sweep, FINDING)
    assert list(frame.columns) == COLUMNS[name].split()
    assert len(frame) > 0


@pytest.mark.parametrize("name", COLUMNS)
def test_a_finding_without_rows_gives_an_empty_frame(filled: Filled, name: str) -> None:
    frame = getattr(read, name)(filled.db, filled.sweep, 99)
    assert list(frame.columns) == COLUMNS[name].split()
    assert frame.empty


def test_survival_is_in_plan_order(filled: Filled) -> None:
    frame = read.survival(filled.db, filled.sweep, FINDING)
    assert frame["axis"].drop_duplicates().tolist() == ["all", *AXES]
    assert frame[frame["axis"] == "lags"]["choice"].tolist() == ["1", "2", "AIC"]
    lags = read.survival(filled.db, filled.sweep, FINDING, "lags")
    pd.testing.assert_frame_equal(lags, frame[frame["axis"] == "lags"].reset_index(drop=True))


def test_strata_follow_the_twin(filled: Filled, twin: pd.DataFrame) -> None:
    frame = read.strata(filled.db, filled.sweep, FINDING)
    names = ["window_label", "weight"]
    for keys, part in twin.groupby(names):
        rows = frame[(frame["window_name"] == keys[0]) & np.isclose(frame["weight"], keys[1])]
        assert rows["rows"].sum() == len(part)
        assert rows["admissible"].sum() == part["admissible"].sum()
        survived = part["admissible"] & part["survives"].astype("boolean").fillna(False)
        assert rows["survived"].sum() == survived.sum()
    assert frame["rows"].sum() == len(twin)
    codes = filled.content.codes
    others = np.prod([len(codes[axis]) for axis in AXES if axis != "window"])
    for window, size in zip(frame["window_name"], frame["size"], strict=True):
        (entry,) = {c.positions for c in filled.content.choices if c.label == window}
        assert size == entry * others


def test_sums_speak_of_the_role_where_a_measure_is_inverted(tmp_path: Path) -> None:
    """w falls when x rises: its sum is turned wherever effects of choices stand side by side."""
    axes = (
        '[axes]\nmeasures = { x = ["x", "w", { series = "v", inverted = true }] }\n'
        'windows = ["full sample", { rolling = 90, step = 35 }]\n'
    )
    results = sweep.run(small_plans.write_plan(tmp_path, axes), jobs=1)
    stored = results.outcomes(where="window_name = 'full sample'").set_index("measures")
    with open_reading(results.store) as db:
        changes = read.single_changes(db, 1, 0).query("axis == 'measures'").set_index("choice")
        near = read.alternatives(db, 1, 0).query("axis == 'measures'").set_index("measures")
        scales = read.effects(db, 1, 0)
    for name, turned in (("w", 1), ("v", -1)):
        wanted = turned * stored.loc[name, "coefficient_sum"]
        assert changes.loc[name, "coefficient_sum"] == wanted
        assert near.loc[name, "coefficient_sum"] == wanted
        reverse = turned * stored.loc[name, "reverse_coefficient_sum"]
        assert near.loc[name, "reverse_coefficient_sum"] == reverse
        of_scale = scales[scales["measures"] == name].iloc[0]
        assert of_scale["minimum"] <= wanted <= of_scale["maximum"]


def test_attrition_adds_up(filled: Filled, twin: pd.DataFrame) -> None:
    frame = read.attrition(filled.db, filled.sweep, FINDING)
    lost = twin[~twin["admissible"]]
    words = lost["reason_text"].where(lost["counted_as"] != "screened out", lost["required_failed"])
    expected = lost.groupby([lost["counted_as"], words]).size().to_dict()
    found = {(s, r): n for s, r, n in zip(frame["status"], frame["reason"], frame["rows"],
                                          strict=True)}  # fmt: skip
    assert found == expected
    assert frame[frame["ruled"]]["reason"].tolist() == ["yearly growth with short lags"]
    order = ["not applicable", "infeasible", "failed", "screened out"]
    assert frame["status"].drop_duplicates().tolist() == order


@pytest.mark.parametrize("finding", range(9))
def test_single_changes_agree_with_the_twin(
    filled: Filled, planned_twin: pd.DataFrame, finding: int
) -> None:
    rows = planned_twin[planned_twin["finding"] == finding]
    home = rows[rows["is_baseline"]].iloc[0]
    frame = read.single_changes(filled.db, filled.sweep, finding)
    count = 0
    for axis in AXES:
        others = [a for a in AXES if a != axis]
        near = rows[(rows["changes"] == 1) & (rows[others] == home[others]).all(axis=1)]
        for label, part in near.groupby(f"{axis}_label"):
            count += 1
            found = frame[(frame["axis"] == axis) & (frame["choice"] == label)].iloc[0]
            okay = part[part["counted_status"] == 0]
            counted = part[part["admissible"]]
            assert found["positions"] == len(part)
            assert found["rows_ok"] == len(okay)
            assert found["admissible"] == len(counted)
            assert found["survived"] == counted["survives"].sum()
            flips = 0
            if home["admissible"]:
                flips = sum(s != home["survives"] for s in counted["survives"])
            assert found["flips"] == flips
            assert pd.isna(found["baseline_survives"]) == (not home["admissible"])
            shown = counted if len(counted) else okay
            p = shown["p_value"].astype(float)
            for name, value in (("p_value", p.median()), ("p_low", p.min()), ("p_high", p.max())):
                np.testing.assert_equal(found[name], value)
            change = np.nan
            if len(p) and pd.notna(home["p_value"]):
                change = np.median([z_value(v) for v in p]) - z_value(home["p_value"])
            np.testing.assert_allclose(found["z_change"], change, rtol=1e-12, atol=1e-12)
            back = shown["reverse_p_value"].dropna().astype(float)
            change = np.nan
            if len(back) and pd.notna(home["reverse_p_value"]):
                change = np.median([z_value(v) for v in back]) - z_value(home["reverse_p_value"])
            np.testing.assert_allclose(found["reverse_z_change"], change, rtol=1e-12, atol=1e-12)
            best = "ok" if len(counted) else None
            for word in ("screened out", "not applicable", "infeasible", "failed"):
                best = best or (word if (part["counted_as"] == word).any() else None)
            assert found["status"] == best
            assert pd.isna(found["specification"]) == (len(part) > 1)
    assert count == len(frame)


def test_z_is_the_inverse_survival_function() -> None:
    assert z_value(1e-290) == pytest.approx(-NormalDist().inv_cdf(1e-290))
    assert z_value(5e-324) == 37.0
    assert z_value(0.5) == 0.0


def test_windows_agree_with_the_twin(filled: Filled, twin: pd.DataFrame) -> None:
    frame = read.windows(filled.db, filled.sweep, FINDING)
    assert len(frame) == 1 + 1 + 7 + 4
    assert frame["length"].tolist() == [pd.NA] * 2 + [40] * 7 + [30] * 4
    assert (frame["pooled"] == 1).all()
    for _, cell in frame.iterrows():
        part = twin[
            (twin["window_label"] == cell["window_name"]) & (twin["position"] == cell["position"])
        ]
        counted = part[part["admissible"]]
        p = counted["p_value"].astype(float)
        assert (cell["planned"], cell["admissible"]) == (len(part), len(counted))
        assert cell["survived"] == counted["survives"].sum()
        assert cell["share"] == cell["survived"] / cell["admissible"]
        quartiles = cell[["p_low", "median_p", "p_high"]].astype(float)
        np.testing.assert_allclose(quartiles, p.quantile([0.25, 0.5, 0.75]))


def test_windows_pool_neighbours(filled: Filled) -> None:
    fine = read.windows(filled.db, filled.sweep, FINDING)
    coarse = read.windows(filled.db, filled.sweep, FINDING, cells=6)
    assert len(coarse) == 5
    rolling = coarse[coarse["entry_kind"] == "rolling"]
    assert rolling["pooled"].tolist() == [4, 3]
    assert rolling["window_end"].iloc[0] == fine["window_end"].iloc[2 + 3]
    for name in ("planned", "admissible", "survived"):
        assert coarse[name].sum() == fine[name].sum()


def test_directions_agree_with_the_twin(filled: Filled, twin: pd.DataFrame) -> None:
    frame = read.directions(filled.db, filled.sweep, FINDING)
    counted = twin[twin["admissible"]]
    overall = frame[frame["axis"] == "all"].set_index("verdict")["rows"].to_dict()
    assert overall == counted["verdict"].value_counts().to_dict()
    for axis in AXES:
        part = frame[frame["axis"] == axis].set_index(["choice", "verdict"])["rows"].to_dict()
        assert part == counted.groupby([f"{axis}_label", "verdict"]).size().to_dict()
    np.testing.assert_allclose(frame.groupby(["axis", "choice"])["share"].sum(), 1.0)


def test_effects_stay_within_a_scale(filled: Filled, twin: pd.DataFrame) -> None:
    frame = read.effects(filled.db, filled.sweep, FINDING)
    counted = twin[twin["admissible"] & twin["coefficient_sum"].notna()]
    effect = counted["coefficient_sum"].astype(float) * counted["orientation"].astype(float)
    keys = [counted["transformation_label"], counted["measures_label"], counted["form"]]
    assert len(frame) == effect.groupby(keys).ngroups == 4
    for names, values in effect.groupby(keys):
        row = frame[frame["scale"] == " · ".join(names)].iloc[0]
        assert row[["transformation", "measures", "form"]].tolist() == list(names)
        assert (row["rows"], row["positive"]) == (len(values), (values > 0).sum())
        summary = row[["minimum", "lower_quartile", "median", "upper_quartile", "maximum"]]
        np.testing.assert_allclose(
            summary.astype(float), values.quantile([0, 0.25, 0.5, 0.75, 1]), rtol=1e-12
        )
    assert frame["is_baseline"].tolist() == [True, False, False, False]


def test_effects_overall_turn_inverted_measures(filled: Filled, twin: pd.DataFrame) -> None:
    frame = read.effects_overall(filled.db, filled.sweep, FINDING).set_index("quantity")
    counted = twin[twin["admissible"]]
    for quantity, column in (
        ("signed partial R²", "signed_partial_r2"),
        ("standardised sum", "standardised_sum"),
    ):
        values = (counted[column].astype(float) * counted["orientation"].astype(float)).dropna()
        assert frame.loc[quantity, "rows"] == len(values)
        assert frame.loc[quantity, "positive"] == (values > 0).sum()
        assert frame.loc[quantity, "median"] == pytest.approx(values.median())


def test_baseline_is_one_row(filled: Filled, twin: pd.DataFrame) -> None:
    frame = read.baseline(filled.db, filled.sweep, FINDING)
    assert len(frame) == 1
    assert frame["specification"][0] == twin[twin["is_baseline"]]["specification"].iloc[0]
    assert frame["origin"][0] == "planned"
    assert frame["window_start"][0] == pd.Timestamp("2000-01-01")


def test_outcomes_select_columns_conditions_and_rows(filled: Filled) -> None:
    everything = read.outcomes(filled.db, filled.sweep)
    view = filled.db.frame("SELECT * FROM outcomes LIMIT 0")
    assert list(everything.columns) == list(view.columns)
    for name in ("finding", "lags_choice", "window_name", "test", "status", "reason", "verdict"):
        assert everything[name].dtype == "category", name
    part = read.outcomes(
        filled.db,
        filled.sweep,
        columns=["p_value", "lags_choice"],
        where="lags_choice = 'AIC' AND survives",
        limit=5,
    )
    assert list(part.columns) == ["p_value", "lags_choice"]
    assert part["lags_choice"].tolist() == ["AIC"] * 5
    assert set(everything["request"].dropna()) == {"longer lags"}
    assert set(everything["origin"]) == {"planned", "added"}


def test_design_columns_are_there(filled: Filled) -> None:
    expected = """sweep finding cause effect given claim specification origin lags_choice
    deterministics window_name window_entry window_start window_end transformation test
    conditioning measures lags observations statistic df_num df_den p_value coefficient_sum
    coefficient_sum_se signed_partial_r2 standardised_sum reverse_statistic reverse_p_value request
    computation solver reverse_status status reason admissible failed_screens survives verdict
    is_baseline"""
    view = filled.db.frame("SELECT * FROM outcomes LIMIT 0")
    assert set(expected.split()) <= set(view.columns)


@pytest.mark.parametrize("where", ["1) OR (1", "1; DROP TABLE meta", "p_value < 0.1 --", "'", ""])
def test_outcomes_refuse_what_is_no_condition(filled: Filled, where: str) -> None:
    with pytest.raises(ValueError, match="not one SQL expression"):
        read.outcomes(filled.db, where=where)


def test_outcomes_name_unknown_columns(filled: Filled) -> None:
    with pytest.raises(ValueError, match="No such column of outcomes: p, q"):
        read.outcomes(filled.db, columns=["p", "sweep", "q"])


def test_specification_by_prefix(filled: Filled, twin: pd.DataFrame) -> None:
    full = twin["specification"].iloc[17]
    for prefix in (full, full[:20], full.upper()[:31]):
        row = read.specification(filled.db, filled.sweep, prefix, finding=FINDING)
        assert row["specification"].tolist() == [full]
        assert row["finding_number"].tolist() == [FINDING]
    named = r"[0-9a-f]{32} \(“freight leads rents \d”\), .* Give more digits"
    with pytest.raises(Ambiguous, match=named):
        read.specification(filled.db, filled.sweep, full[0])
    with pytest.raises(NotFound, match="begins with"):
        read.specification(filled.db, filled.sweep, "0" * 32)
    for prefix in ("", "xyz", "a" * 33):
        with pytest.raises(NotFound, match="hexadecimal"):
            read.specification(filled.db, filled.sweep, prefix)


def test_sweeps_and_findings(filled: Filled) -> None:
    frame = read.sweeps(filled.db)
    assert list(frame.columns) == [
        "sweep", "plan_digest", "title", "started", "finished", "significance", "rows", "findings",
        "planned",
    ]  # fmt: skip
    assert frame["findings"].tolist() == [9]
    assert frame["finished"].isna().all()
    assert read.latest_sweep(filled.db) == filled.sweep
    rows = read.findings(filled.db, filled.sweep)
    assert rows["data_high"].tolist() == [2**64 - 1] * 9
    assert rows["reported_p_value"].isna().all()
    assert set(filled.content.findings[0].__slots__) <= set(rows.columns)
    choices = read.choices(filled.db, filled.sweep, FINDING)
    assert choices["label"].head(4).tolist() == ["1", "2", "AIC", "constant"]


def test_an_empty_store_has_no_sweep(db: Database) -> None:
    with pytest.raises(NotFound, match="no sweep yet"):
        read.latest_sweep(db)
    with pytest.raises(NotFound, match="no sweep 4"):
        read.sweep_info(db, 4)
    assert read.outcomes(db).empty
    assert read.sweeps(db).empty
