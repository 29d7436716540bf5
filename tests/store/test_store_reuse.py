"""Rows shared between sweeps: what is copied, what is renumbered, what is not shared."""

from __future__ import annotations

import dataclasses
from typing import Any

import numpy as np
import pytest
from store_samples import Sample, finding, outcomes, planned, sample

from store.database import Database
from store.records import FindingRecord
from store.write import SweepWriter


class Shared:
    """One full sweep to reuse from, and a way to begin others."""

    def __init__(self, writer: SweepWriter) -> None:
        self.writer = writer
        reasons = (
            writer.register_reason(1, "ruled out", ruled=True),
            writer.register_reason(1, "makes no sense"),
            writer.register_reason(2, "too few observations"),
        )
        self.content: Sample = sample(writer, [finding(0)])
        rows = planned(self.content, 0)
        self.rows = rows | {"details": np.ones(len(rows["row"]), dtype=bool)}
        self.batch = outcomes(self.rows, np.random.default_rng(0), (reasons[1], reasons[2]))
        ruled = (self.batch["status"] == 1) & (np.arange(len(self.rows["row"])) % 2 == 0)
        self.batch["reason"][ruled] = reasons[0]
        self.first = self.begin()
        writer.write(self.first, self.batch, self.details())
        failed = (self.batch["status"] == 3) | (self.batch["reverse_status"] == 3)
        self.shareable = ~failed & ~ruled

    def details(self) -> dict[str, np.ndarray]:
        size = len(self.rows["row"])
        return {name: self.batch[name] for name in ("finding", "spec_high", "spec_low")} | {
            "kind": np.full(size, "lag coefficient"),
            "position": np.arange(size),
            "date": np.full(size, "NaT", dtype="datetime64[D]"),
            **{
                name: np.arange(size, dtype=float)
                for name in ("value", "standard_error", "p_value", "critical_value")
            },
        }

    def begin(
        self,
        changes: dict[str, Any] | None = None,
        measures: dict[str, dict[str, Any]] | None = None,
        **sweep: Any,
    ) -> int:
        """Begin another sweep; ``measures`` changes the records of choices by their label."""
        number = (changes or {}).get("finding", 0)
        findings: list[FindingRecord] = [
            dataclasses.replace(self.content.findings[0], **(changes or {}))
        ]
        choices = [
            dataclasses.replace(c, finding=number, **(measures or {}).get(c.label, {}))
            for c in self.content.choices
        ]
        positions = self.content.positions | {
            "finding": np.full(len(self.content.positions["position"]), number)
        }
        record = dataclasses.replace(self.content.sweep, **sweep)
        return self.writer.begin(record, findings, choices, positions)


@pytest.fixture
def shared(writer: SweepWriter) -> Shared:
    return Shared(writer)


def test_rows_are_copied_and_renumbered(shared: Shared, db: Database) -> None:
    second = shared.begin({"finding": 4, "claim": "does not lead"}, plan_digest="other")
    size = len(shared.rows["row"])
    order = np.random.default_rng(2).permutation(size)
    rows = {name: column[order] for name, column in shared.rows.items()} | {
        "finding": np.full(size, 4, dtype=np.int16),
        "position": np.arange(size, dtype=np.int32) + 1000,
        "request": (np.arange(size) % 2).astype(np.int16),
    }
    filled = shared.writer.reuse(second, rows)
    assert (filled == shared.shareable[order]).all()
    assert 0 < filled.sum() < size
    assert (shared.writer.stored(second, rows) == filled).all()
    copies = db.frame("SELECT * FROM outcome WHERE sweep = ? ORDER BY position", [second])
    assert copies["position"].tolist() == rows["position"][filled].tolist()
    assert copies["request"].tolist() == rows["request"][filled].tolist()
    assert set(copies["finding"]) == {4}
    for name in ("spec_high", "spec_low", "computation", "lags", "window", "status", "reason"):
        assert copies[name].tolist() == shared.batch[name][order][filled].tolist(), name
    np.testing.assert_array_equal(
        copies["p_value"].to_numpy(float, na_value=np.nan), shared.batch["p_value"][order][filled]
    )
    copied = db.frame("SELECT finding, position FROM details WHERE sweep = ?", [second])
    assert sorted(copied["position"]) == sorted(np.arange(size)[order][filled])
    assert set(copied["finding"]) == {4}


def test_rows_whose_details_are_wanted_come_from_a_sweep_that_kept_them(
    shared: Shared, db: Database
) -> None:
    second = shared.begin(plan_digest="other")
    plain = {name: column for name, column in shared.rows.items() if name != "details"}
    assert (shared.writer.reuse(second, plain) == shared.shareable).all()
    assert db.scalar("SELECT count(*) FROM details WHERE sweep = ?", [second]) == 0
    db.execute("DELETE FROM details WHERE sweep = ? AND position % 3 > 0", [shared.first])
    third = shared.begin(plan_digest="third")
    kept = np.arange(len(shared.rows["row"])) % 3 == 0
    bare = (shared.batch["status"] > 0) & (shared.batch["reverse_status"] > 0)
    filled = shared.writer.reuse(third, shared.rows)
    assert (filled == shared.shareable & (kept | bare)).all()
    assert (shared.shareable & bare & ~kept).any()
    count = db.scalar("SELECT count(*) FROM details WHERE sweep = ?", [third])
    assert count == (shared.shareable & kept & ~bare).sum()


def test_reuse_twice_adds_nothing(shared: Shared, db: Database) -> None:
    second = shared.begin(plan_digest="other")
    shared.writer.reuse(second, shared.rows)
    sizes = [db.scalar(f"SELECT count(*) FROM {table}") for table in ("outcome", "details")]
    assert not shared.writer.reuse(second, shared.rows).any()
    assert sizes == [db.scalar(f"SELECT count(*) FROM {t}") for t in ("outcome", "details")]


def test_a_row_of_several_sweeps_is_copied_once(shared: Shared, db: Database) -> None:
    second = shared.begin(plan_digest="other")
    shared.writer.reuse(second, shared.rows)
    third = shared.begin(plan_digest="third")
    assert (shared.writer.reuse(third, shared.rows) == shared.shareable).all()
    for table in ("outcome", "details"):
        count = db.scalar(f"SELECT count(*) FROM {table} WHERE sweep = ?", [third])
        assert count == shared.shareable.sum()


@pytest.mark.parametrize(
    ("changes", "sweep"),
    [({"data_high": 5}, {}), ({"data_low": 5}, {}), ({}, {"numerics": "2"})],
)
def test_other_data_or_numerics_share_nothing(
    shared: Shared, db: Database, changes: dict[str, Any], sweep: dict[str, Any]
) -> None:
    every = dict.fromkeys(("as named", "freight: tonnes"), changes)
    second = shared.begin(changes, every, plan_digest="other", **sweep)
    assert not shared.writer.reuse(second, shared.rows).any()
    assert db.scalar("SELECT count(*) FROM outcome WHERE sweep = ?", [second]) == 0


def test_rows_are_shared_by_the_data_of_their_own_measures(shared: Shared, db: Database) -> None:
    changed = {"freight: tonnes": {"data_low": 99}}
    second = shared.begin({"data_low": 99}, changed, plan_digest="other")
    filled = shared.writer.reuse(second, shared.rows)
    kept = shared.rows["measures"] == shared.content.codes["measures"][0]
    assert (filled == (shared.shareable & kept)).all()
    assert filled.sum() > 0


def test_unknown_specifications_are_left(shared: Shared) -> None:
    second = shared.begin(plan_digest="other")
    rows = shared.rows | {"spec_low": shared.rows["spec_low"] + np.uint64(1)}
    assert not shared.writer.reuse(second, rows).any()


def test_a_failed_copy_is_undone(shared: Shared, db: Database) -> None:
    second = shared.begin(plan_digest="other")
    rows = shared.rows | {"position": np.full(len(shared.rows["row"]), 2**40)}
    with pytest.raises(Exception, match="out of range"):
        shared.writer.reuse(second, rows)
    assert db.scalar("SELECT count(*) FROM outcome WHERE sweep = ?", [second]) == 0
    assert (shared.writer.reuse(second, shared.rows) == shared.shareable).all()
