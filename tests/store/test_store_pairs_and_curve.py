"""Cells of pairs of axes and ordered estimates, held against plain pandas."""

from __future__ import annotations

import itertools
from pathlib import Path

import numpy as np
import pandas as pd
import plain_twin
import pytest
from statsmodels.regression.linear_model import WLS
from store_samples import LABELS, Filled, fill

import store.database
from store import read
from store.read_pairs import additive_fit, departure
from store.schema import AXES

FINDINGS = range(9)


@pytest.fixture(scope="module")
def twin(filled: Filled) -> pd.DataFrame:
    rows = plain_twin.judged_rows(filled.db, filled.sweep)
    return rows[rows["request"] == 0]


def cell(rows: pd.DataFrame) -> dict[str, float]:
    """Count the rows of one cell."""
    good = rows[rows["admissible"]]
    survived = good["survives"].astype(bool)
    weight = float(good["weight"].sum())
    return {
        "planned": len(rows),
        "not_applicable": int((rows["counted_as"] == "not applicable").sum()),
        "screened_out": int((rows["counted_as"] == "screened out").sum()),
        "admissible": len(good),
        "survived": int(survived.sum()),
        "weight": weight,
        "share": float(good["weight"][survived].sum()) / weight if weight else np.nan,
    }


@pytest.mark.parametrize("finding", FINDINGS)
def test_cells_are_those_of_pandas(filled: Filled, twin: pd.DataFrame, finding: int) -> None:
    found = read.pair_cells(filled.db, filled.sweep, finding)
    own = twin[twin["finding"] == finding]
    several = [axis for axis in AXES if len(LABELS[axis]) > 1]
    expected = [
        {"row_axis": a, "column_axis": b, "row_choice": row, "column_choice": column} | cell(part)
        for a, b in itertools.combinations(several, 2)
        for (row, column), part in own.groupby([f"{a}_label", f"{b}_label"])
    ]
    keys = ["row_axis", "column_axis", "row_choice", "column_choice"]
    both = found.merge(pd.DataFrame(expected), on=keys, suffixes=("", "_plain"))
    assert len(both) == len(found) == len(expected)
    for name in ("planned", "not_applicable", "screened_out", "admissible", "survived"):
        assert both[name].tolist() == both[f"{name}_plain"].tolist(), name
    for name in ("weight", "share"):
        np.testing.assert_allclose(both[name], both[f"{name}_plain"], rtol=1e-12, err_msg=name)
    assert found["row_axis"].drop_duplicates().tolist() == several[:-1]
    assert (found["row_pooled"] == 1).all()
    baseline = found[found["row_is_baseline"] & found["column_is_baseline"]]
    assert len(baseline) == len(list(itertools.combinations(several, 2)))


def test_the_fit_is_weighted_least_squares_on_dummies(filled: Filled) -> None:
    cells = read.pair_cells(filled.db, filled.sweep, 1)
    for pair, part in cells.groupby(["row_axis", "column_axis"]):
        part = part[part["admissible"] > 0]  # noqa: PLW2901
        dummies = np.hstack(
            [pd.get_dummies(part["row_choice"]),
             pd.get_dummies(part["column_choice"], drop_first=True)]
        ).astype(float)  # fmt: skip
        fit = WLS(part["share"].to_numpy(), dummies, weights=part["weight"].to_numpy()).fit()
        expected = fit.fittedvalues.clip(0, 1)
        # Both solve a system with condition around 100, so 1e-10 leaves four digits to spare.
        np.testing.assert_allclose(part["expected"], expected, atol=1e-10)
        spread = np.sqrt(np.average((part["share"] - expected) ** 2, weights=part["weight"]))
        np.testing.assert_allclose(part["departure"], spread, rtol=1e-8, err_msg=str(pair))


def test_departure_by_hand() -> None:
    """Two rows, two columns, weights 1: fit = row mean + column mean − grand mean.

    Shares 0.9, 0.5 over 0.3, 0.1 have row means 0.7 and 0.2, column means 0.6 and 0.3 and the
    mean 0.45, so the fit is 0.85, 0.55 over 0.35, 0.05 and every cell is off by 0.05.
    """
    rows, columns = np.array([0, 0, 1, 1]), np.array([0, 1, 0, 1])
    share = np.array([0.9, 0.5, 0.3, 0.1])
    fitted = additive_fit(rows, columns, np.ones(4), share)
    # Rounding of a four by four system.
    np.testing.assert_allclose(fitted, [0.85, 0.55, 0.35, 0.05], atol=1e-13)
    assert departure(np.ones(4), share, fitted) == pytest.approx(0.05, abs=1e-13)


def test_a_missing_cell_is_not_taken_for_acting_together() -> None:
    """Additive shares stay on the fit when a cell is missing and weights differ."""
    rows, columns = np.array([0, 0, 1, 1, 2]), np.array([0, 1, 0, 1, 1])
    share = np.array([0.1, 0.3, 0.4, 0.6, 0.7])
    weight = np.array([5.0, 1.0, 2.0, 9.0, 4.0])
    fitted = additive_fit(rows, columns, weight, share)
    np.testing.assert_allclose(fitted, share, atol=1e-13)
    assert departure(weight, share, fitted) < 1e-13
    assert additive_fit(rows[:0], columns[:0], weight[:0], share[:0]).size == 0
    assert departure(weight[:0], share[:0], share[:0]) == 0.0


def test_long_axes_are_pooled_and_nothing_is_lost(filled: Filled) -> None:
    whole = read.pair_cells(filled.db, filled.sweep, 1)
    pooled = read.pair_cells(filled.db, filled.sweep, 1, cells=45)
    assert len(pooled) < len(whole)
    keys = ["row_axis", "column_axis"]
    for name in ("planned", "admissible", "survived"):
        assert (
            pooled.groupby(keys)[name].sum().to_dict() == whole.groupby(keys)[name].sum().to_dict()
        )
    assert pooled.groupby(keys)["departure"].first().to_dict() == pytest.approx(
        whole.groupby(keys)["departure"].first().to_dict()
    )
    closing = pooled[(pooled["row_pooled"] > 1) | (pooled["column_pooled"] > 1)]
    assert closing["expected"].isna().all()
    assert pooled[pooled["row_is_baseline"]]["row_pooled"].eq(1).all()
    one = closing.iloc[0]
    named = whole[(whole["row_axis"] == one["row_axis"])
                  & (whole["column_axis"] == one["column_axis"])]  # fmt: skip
    alone = pooled[(pooled["row_axis"] == one["row_axis"]) & (pooled["row_pooled"] == 1)]
    for side in ("row", "column"):
        if one[f"{side}_pooled"] > 1:
            assert one[f"{side}_choice"] == f"{one[f'{side}_pooled']} other choices"
            held = pooled[(pooled[f"{side}_axis"] == one[f"{side}_axis"])
                          & (pooled[f"{side}_pooled"] == 1)][f"{side}_choice"]  # fmt: skip
            named = named[~named[f"{side}_choice"].isin(held)]
        else:
            named = named[named[f"{side}_choice"] == one[f"{side}_choice"]]
    assert len(alone)
    assert one["admissible"] == named["admissible"].sum()
    share = np.average(named["share"].fillna(0.0), weights=named["weight"])
    assert one["share"] == pytest.approx(share, rel=1e-12)


def test_pairs_need_two_axes_that_vary(tmp_path: Path) -> None:
    few = {axis: entries[:1] for axis, entries in LABELS.items()} | {"lags": LABELS["lags"]}
    with store.database.create(tmp_path / "x.duckdb") as db:
        filled = fill(db, 1, labels=few)
        assert read.pair_cells(db, filled.sweep, 0).empty
        assert not read.curve(db, filled.sweep, 0).empty


def ordered(rows: pd.DataFrame, column: str) -> pd.DataFrame:
    """Return the admissible rows of one finding that have an estimate, in order."""
    good = rows[rows["admissible"] & rows[column].notna()].copy()
    good["estimate"] = good[column].astype(float) * good["orientation"].astype(float)
    good["high"] = good["specification"].str[:16].map(lambda text: int(text, 16))
    good["low"] = good["specification"].str[16:].map(lambda text: int(text, 16))
    good = good.sort_values(["estimate", "high", "low"])
    return good.assign(rank=np.arange(1, len(good) + 1))


@pytest.mark.parametrize("finding", FINDINGS)
@pytest.mark.parametrize("rows", [5000, 61])
def test_the_curve_is_that_of_pandas(
    filled: Filled, twin: pd.DataFrame, finding: int, rows: int
) -> None:
    found = read.curve(filled.db, filled.sweep, finding, rows)
    assert len(found) <= rows
    own = twin[twin["finding"] == finding]
    assert found["scale"].drop_duplicates().tolist()[0] == "all"
    for scale, part in found.groupby("scale"):
        plain = ordered(own, "standardised_sum")
        within = own[own["admissible"]]
        if scale != "all":
            names = own["transformation_label"] + " · " + own["measures_label"] + " · plain"
            plain = ordered(own[names == scale], "coefficient_sum")
            within = own[(names == scale) & own["admissible"]]
        whole = part.iloc[0]
        assert whole["admissible"] == len(within)
        assert whole["rows"] == len(plain)
        assert whole["survived"] == plain["survives"].astype(bool).sum()
        assert whole["positive"] == (plain["estimate"] > 0).sum()
        assert whole["median"] == pytest.approx(plain["estimate"].median(), rel=1e-12)
        same = plain.set_index("rank").loc[part["rank"]]
        np.testing.assert_allclose(part["estimate"], same["estimate"], rtol=1e-12)
        assert part["specification"].tolist() == same["specification"].tolist()
        assert part["survives"].tolist() == same["survives"].astype(bool).tolist()
        for axis in AXES:
            assert part[axis].tolist() == same[f"{axis}_label"].tolist()
        assert part["rank"].iloc[[0, -1]].tolist() == [1, len(plain)]
        error = same["coefficient_sum_se"].astype(float)
        if scale == "all":
            error *= (same["standardised_sum"].astype(float)
                      / same["coefficient_sum"].astype(float)).abs()  # fmt: skip
        np.testing.assert_allclose(part["standard_error"], error, rtol=1e-12)


@pytest.mark.parametrize("rows", [5000, 61])
def test_ranks_are_evenly_spread(filled: Filled, rows: int) -> None:
    found = read.curve(filled.db, filled.sweep, 1, rows)
    for _, part in found.groupby("scale"):
        gaps = part.loc[~part["is_baseline"], "rank"].diff().dropna()
        assert gaps.max() <= 2 * max(gaps.min(), 1) + 1


def test_the_baseline_is_always_on_its_curves(filled: Filled, twin: pd.DataFrame) -> None:
    for finding in FINDINGS:
        own = twin[(twin["finding"] == finding) & twin["is_baseline"]]
        found = read.curve(filled.db, filled.sweep, finding, 40)
        held = found[found["is_baseline"]]
        assert len(own) == 1
        row = own.iloc[0]
        on_all = row["admissible"] and pd.notna(row["standardised_sum"])
        on_own = row["admissible"] and pd.notna(row["coefficient_sum"])
        assert (held["scale"] == "all").sum() == on_all
        assert (held["scale"] != "all").sum() == on_own
        assert set(held["specification"]) <= {row["specification"]}
        assert held["baseline_scale"].all()


def test_estimates_of_a_moving_baseline_are_those_of_its_last_position(tmp_path: Path) -> None:
    turned = LABELS | {"window": [LABELS["window"][2], LABELS["window"][0]]}
    with store.database.create(tmp_path / "x.duckdb") as db:
        filled = fill(db, 4, labels=turned)
        twin = plain_twin.judged_rows(db, filled.sweep)
        own = twin[(twin["finding"] == 0) & twin["is_baseline"] & twin["admissible"]]
        found = read.curve(db, filled.sweep, 0)
    last = own.sort_values("position").iloc[-1]
    held = found[found["is_baseline"]]["specification"]
    assert len(own) > 1
    assert set(held) <= {last["specification"]}


def test_without_weights_every_row_counts_alike(tmp_path: Path) -> None:
    """Designs that change few choices at a time give the windows no weight."""
    with store.database.create(tmp_path / "x.duckdb") as db:
        filled = fill(db, 2)
        weighted = read.pair_cells(db, filled.sweep, 0)
        db.execute("UPDATE sweep_choice SET weight = 0 WHERE axis = 'window'")
        found = read.pair_cells(db, filled.sweep, 0)
    counted = found["admissible"] > 0
    assert counted.all()
    np.testing.assert_allclose(found["share"], found["survived"] / found["admissible"], rtol=1e-15)
    assert found["weight"].tolist() == found["admissible"].tolist()
    assert (found["share"] != weighted["share"]).any()
