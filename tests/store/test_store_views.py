"""The views, held against the plain twin on random rows."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import plain_twin
import pytest
from store_samples import LABELS, RULES, fill, finding, outcomes, planned, sample

import store.database
from store import read
from store.records import ChoiceRecord
from store.write import SweepWriter

COUNTS = [
    "planned", "not_applicable", "infeasible", "failed", "screened_out", "admissible",
    "survived", "other_sign", "distinct",
]  # fmt: skip
SHARES = [
    "raw_share", "headline_share", "share_at_1", "share_at_5", "share_at_10", "median_p_value",
]  # fmt: skip


@pytest.mark.parametrize(("seed", "significance"), [(1, 0.05), (2, 0.01), (3, 0.10)])
def test_views_agree_with_the_twin(tmp_path: Path, seed: int, significance: float) -> None:
    with store.database.create(tmp_path / "x.duckdb", threads=1) as db:
        filled = fill(db, seed, significance)
        twin = plain_twin.judged_rows(db, filled.sweep)
        view = db.frame("SELECT * FROM outcomes WHERE sweep = ?", [filled.sweep])
        survival = read.survival(db, filled.sweep)
    keys = ["finding_number", "specification"]
    twin = twin.rename(columns={"finding": "finding_number"}).sort_values(keys)
    view = view.sort_values(keys)
    assert len(view) == len(twin) == 9 * 3 * 2 * 13 * 2 * 3 * 2
    for name in ("counted_as", "verdict", "failed_screens", "admissible", "other_sign",
                 "is_baseline", "weight"):  # fmt: skip
        assert view[name].tolist() == twin[name].tolist(), name
    assert view["reason"].tolist() == twin["reason_text"].tolist()
    assert view["survives"].astype(object).where(view["survives"].notna(), None).tolist() == (
        twin["survives"].tolist()
    )
    assert set(view["counted_as"]) == {
        "admissible", "screened out", "not applicable", "infeasible", "failed",
    }  # fmt: skip
    assert set(view["verdict"]) == {
        "one way", "both ways", "reverse", "neither rejected", "undetermined",
    }  # fmt: skip

    plain = plain_twin.survival(twin.rename(columns={"finding_number": "finding"}))
    both = survival.merge(plain, on=["finding", "axis", "choice"], suffixes=("", "_plain"))
    assert len(both) == len(survival) == len(plain) == 9 * (1 + sum(map(len, LABELS.values())))
    for name in COUNTS:
        assert both[name].tolist() == both[f"{name}_plain"].tolist(), name
    for name in SHARES:
        np.testing.assert_allclose(both[name], both[f"{name}_plain"], rtol=1e-12, err_msg=name)
    lost = both["not_applicable"] + both["infeasible"] + both["failed"] + both["screened_out"]
    assert (lost + both["admissible"] == both["planned"]).all()
    # Every rule must have something that survives and something that does not.
    overall = survival[survival["axis"] == "all"]
    assert len(overall) == len(RULES)
    assert (overall["survived"] > 0).all()
    assert (overall["survived"] < overall["admissible"]).all()


def test_codes_without_a_bit_are_counted_too(tmp_path: Path) -> None:
    with store.database.create(tmp_path / "x.duckdb", threads=1) as db:
        others = [ChoiceRecord(i, i, f"other {i}", "{}") for i in range(61)]
        SweepWriter(db).register_choices("lags", others)
        filled = fill(db, 5)
        codes = filled.content.codes["lags"]
        assert min(codes) < 63 <= max(codes)
        twin = plain_twin.survival(plain_twin.judged_rows(db, filled.sweep))
        both = read.survival(db, filled.sweep).merge(
            twin, on=["finding", "axis", "choice"], suffixes=("", "_plain")
        )
    assert len(both) == len(twin)
    assert both["distinct"].tolist() == both["distinct_plain"].tolist()


def test_sweeps_are_counted_apart(tmp_path: Path) -> None:
    with store.database.create(tmp_path / "x.duckdb", threads=1) as db:
        first = fill(db, 1)
        alone = read.survival(db, first.sweep)
        writer = SweepWriter(db)
        content = first.content
        record = type(content.sweep)(
            **{name: getattr(content.sweep, name) for name in content.sweep.__slots__}
            | {"plan_digest": "another", "significance": 0.9}
        )
        second = writer.begin(record, content.findings, content.choices, content.positions)
        db.execute(
            "INSERT INTO outcome SELECT * REPLACE (CAST(? AS INTEGER) AS sweep) FROM outcome",
            [second],
        )
        pd.testing.assert_frame_equal(read.survival(db, first.sweep), alone)
        other = read.survival(db, second)
    assert (other["planned"] == alone["planned"]).all()
    assert (other["survived"] != alone["survived"]).any()


def test_shares_have_the_same_digits_whatever_the_threads(tmp_path: Path) -> None:
    with store.database.create(tmp_path / "x.duckdb", threads=1) as db:
        sweep = fill(db, 6).sweep
        expected = read.survival(db, sweep)
    for threads in (1, 2, 4):
        with store.database.open_reading(tmp_path / "x.duckdb", threads=threads) as db:
            pd.testing.assert_frame_equal(read.survival(db, sweep), expected, check_exact=True)


def test_a_share_of_one_is_exact(tmp_path: Path) -> None:
    with store.database.create(tmp_path / "x.duckdb") as db:
        writer = SweepWriter(db)
        content = sample(writer, [finding(0)])
        sweep = writer.begin(content.sweep, content.findings, content.choices, content.positions)
        batch = outcomes(planned(content, 0), np.random.default_rng(0))
        batch["failed_mask"][:] = 0
        okay = batch["status"] == 0
        batch["p_value"][okay] = 1e-9
        writer.write(sweep, batch)
        frame = read.survival(db, sweep)
    assert (frame["survived"] == frame["admissible"]).all()
    for name in ("raw_share", "headline_share", "share_at_1", "share_at_10"):
        assert (frame[name] == 1.0).all(), name
