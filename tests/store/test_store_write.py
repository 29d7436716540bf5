"""Writing: dictionaries, begin and resume, batches that are refused, NULLs."""

from __future__ import annotations

import dataclasses
import json
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from store_samples import Sample, finding, outcomes, planned, sample

from store import read
from store.database import Database
from store.errors import BadBatch
from store.records import ChoiceRecord
from store.write import SweepWriter

Batch = dict[str, np.ndarray]


@pytest.fixture
def content(writer: SweepWriter) -> Sample:
    return sample(writer, [finding(0)])


@pytest.fixture
def sweep(writer: SweepWriter, content: Sample) -> int:
    return writer.begin(content.sweep, content.findings, content.choices, content.positions)


@pytest.fixture
def batch(content: Sample) -> Batch:
    return outcomes(planned(content, 0), np.random.default_rng(0))


def test_choice_codes_grow_and_are_found_by_token(writer: SweepWriter, db: Database) -> None:
    first = [ChoiceRecord(2**64 - 1, 0, "1", "{}"), ChoiceRecord(2, 0, "2", "{}")]
    assert writer.register_choices("lags", first) == [1, 2]
    again = [ChoiceRecord(9, 9, "12", "{}"), first[1], dataclasses.replace(first[0], label="one")]
    assert writer.register_choices("lags", again) == [3, 2, 1]
    assert writer.register_choices("test", [first[0]]) == [1]
    assert db.execute("SELECT axis, code, label FROM choice ORDER BY axis, code") == [
        ("lags", 1, "1"), ("lags", 2, "2"), ("lags", 3, "12"), ("test", 1, "1"),
    ]  # fmt: skip
    with pytest.raises(ValueError, match="'lag' is no axis"):
        writer.register_choices("lag", first)


def test_one_call_with_a_token_twice_adds_it_once(writer: SweepWriter) -> None:
    record = ChoiceRecord(1, 1, "1", "{}")
    assert writer.register_choices("lags", [record, record]) == [1, 1]


def test_reasons_and_screens(writer: SweepWriter, db: Database) -> None:
    assert writer.register_reason(1, "x") == 1
    assert writer.register_reason(1, "x", ruled=True) == 2
    assert writer.register_reason(1, "x") == 1
    writer.register_screen(0, "stable roots")
    writer.register_screen(0, "stable roots")
    with pytest.raises(ValueError, match="Bit 0 is the screen 'stable roots'"):
        writer.register_screen(0, "normality")
    assert db.execute("SELECT bit, name FROM screen") == [(0, "stable roots")]


def test_begin_twice_resumes(writer: SweepWriter, content: Sample, db: Database) -> None:
    def begin(**changes: Any) -> int:
        record = dataclasses.replace(content.sweep, **changes)
        return writer.begin(record, content.findings, content.choices, content.positions)

    assert begin() == 1
    tables = ("sweep", "finding", "sweep_choice", "window_position", "choice")
    sizes = [db.scalar(f"SELECT count(*) FROM {table}") for table in tables]
    assert begin() == 1
    assert [db.scalar(f"SELECT count(*) FROM {table}") for table in tables] == sizes
    assert db.execute("SELECT sweep, kind FROM event ORDER BY happened") == [
        (1, "begun"), (1, "resumed"),
    ]  # fmt: skip
    assert begin(plan_digest="other") == 2
    assert begin(numerics="2") == 3
    content.findings[0] = dataclasses.replace(content.findings[0], data_low=8)
    assert begin() == 4
    assert begin() == 4
    assert begin(plan_digest="other") == 5


def test_begin_is_one_transaction(writer: SweepWriter, content: Sample, db: Database) -> None:
    content.positions["window_start"] = content.positions["window_start"].astype(str)
    content.positions["window_start"][-1] = "no date"
    with pytest.raises(Exception, match="no date"):
        writer.begin(content.sweep, content.findings, content.choices, content.positions)
    for table in ("sweep", "finding", "sweep_choice", "window_position", "event"):
        assert db.scalar(f"SELECT count(*) FROM {table}") == 0


def test_stored_says_which_rows_are_there(
    writer: SweepWriter, content: Sample, sweep: int, batch: Batch
) -> None:
    rows = planned(content, 0)
    assert not writer.stored(sweep, rows).any()
    half = np.arange(len(rows["row"])) % 2 == 0
    writer.write(sweep, {name: column[half] for name, column in batch.items()})
    assert (writer.stored(sweep, rows) == half).all()
    order = np.random.default_rng(1).permutation(len(half))
    assert (writer.stored(sweep, {n: c[order] for n, c in rows.items()}) == half[order]).all()
    assert not writer.stored(sweep + 1, rows).any()
    with pytest.raises(BadBatch, match="Planned rows lack spec_low"):
        writer.stored(sweep, {n: c for n, c in rows.items() if n != "spec_low"})


def test_numbers_come_back_and_missing_ones_are_null(
    writer: SweepWriter, sweep: int, batch: Batch, db: Database
) -> None:
    writer.write(sweep, batch)
    stored = db.frame("SELECT * FROM outcome ORDER BY spec_high, spec_low")
    order = np.lexsort((batch["spec_low"], batch["spec_high"]))
    for name, column in batch.items():
        expected = column[order].astype(float)
        if name in ("order_used", "observations", "df_num", "df_den"):
            expected = np.where(expected < 0, np.nan, expected)
        if column.dtype == np.uint64:
            assert (stored[name].to_numpy() == column[order]).all(), name
        else:
            found = stored[name].astype("Float64").to_numpy(float, na_value=np.nan)
            np.testing.assert_array_equal(found, expected, err_msg=name)
    floats = [name for name, column in batch.items() if column.dtype.kind == "f"]
    for name in floats:
        assert db.scalar(f"SELECT count(*) FROM outcome WHERE isnan({name}::DOUBLE)") == 0
    assert db.scalar("SELECT count(*) FROM outcome WHERE p_value IS NULL") > 0


def test_masked_integers_are_null(
    writer: SweepWriter, sweep: int, batch: Batch, db: Database
) -> None:
    batch["df_den"] = np.ma.masked_array(np.full(len(batch["status"]), 60), mask=True)
    writer.write(sweep, batch)
    assert db.scalar("SELECT count(df_den) FROM outcome") == 0


def _set(name: str, value: Any, where: str = "status") -> Callable[[Batch], None]:
    """Return a change of one number of the first row whose status is ok."""

    def change(batch: Batch) -> None:
        row = int(np.flatnonzero(batch[where] == 0)[0])
        batch[name] = batch[name].copy()
        batch[name][row] = value

    return change


def _replace(name: str, make: Callable[[np.ndarray], Any]) -> Callable[[Batch], None]:
    return lambda batch: batch.__setitem__(name, make(batch[name]))


def _p_on_a_failed_row(batch: Batch) -> None:
    batch["p_value"][np.flatnonzero(batch["status"] == 3)[0]] = 0.5


def _repeat(batch: Batch) -> None:
    for name in ("spec_high", "spec_low"):
        batch[name][5] = batch[name][2]


FAULTS: dict[str, tuple[Callable[[Batch], Any], str]] = {
    "p missing": (_set("p_value", np.nan), "p_value is missing in row .* although status is ok"),
    "statistic missing": (_set("statistic", np.nan), "statistic is missing"),
    "reverse p missing": (
        _set("reverse_p_value", np.nan, "reverse_status"),
        "reverse_p_value is missing in row .* although reverse_status is ok",
    ),
    "p on a failed row": (_p_on_a_failed_row, "p_value is given in row .* status is not ok"),
    "p above 1": (_set("p_value", 1.01), "p_value lies outside 0 to 1"),
    "infinite": (_set("statistic", np.inf), "statistic holds an infinite number"),
    "status 4": (_replace("status", lambda a: a + 4), "status holds a code outside 0 to 3"),
    "short column": (_replace("lags", lambda a: a[1:]), "Columns differ in length"),
    "missing column": (lambda b: b.pop("solver"), "missing columns: solver"),
    "unknown column": (_replace("sweep", np.asarray), "unknown columns: sweep"),
    "signed half": (
        _replace("spec_low", lambda a: a.astype(np.int64)), "spec_low has type int64"
    ),
    "float code": (_replace("test", lambda a: a.astype(float)), "test has type float64"),
    "half a lag": (_replace("order_used", lambda a: a + 0.5), "not whole"),
    "a table": (_replace("p_value", lambda a: a[:, None]), "p_value has 2 dimensions"),
    "twice": (_repeat, "Row 5 repeats specification"),
    "strange code": (_set("lags", 77), "no lags choice with code 77"),
    "strange finding": (_set("finding", 3), "no lags choice with code"),
}  # fmt: skip


@pytest.mark.parametrize("name", FAULTS)
def test_a_bad_batch_is_refused_whole(
    writer: SweepWriter, sweep: int, batch: Batch, db: Database, name: str
) -> None:
    change, message = FAULTS[name]
    if name == "unknown column":
        batch["sweep"] = np.ones(len(batch["status"]))
    else:
        change(batch)
    with pytest.raises(BadBatch, match=message):
        writer.write(sweep, batch)
    assert db.scalar("SELECT count(*) FROM outcome") == 0


def _details(batch: Batch) -> dict[str, np.ndarray]:
    return {
        "finding": batch["finding"][:4],
        "spec_high": batch["spec_high"][:4],
        "spec_low": batch["spec_low"][:4],
        "kind": np.array(["lag coefficient"] * 4),
        "position": np.arange(4),
        "date": np.array(["2000-01-01", "NaT"] * 2, dtype="datetime64[D]"),
        "value": np.array([0.1, 0.2, np.nan, 0.4]),
        "standard_error": np.full(4, 0.1),
        "p_value": np.full(4, 0.5),
        "critical_value": np.full(4, np.nan),
    }


def test_details_are_kept_by_specification(
    writer: SweepWriter, sweep: int, batch: Batch, db: Database
) -> None:
    writer.write(sweep, batch, _details(batch))
    name = f"{batch['spec_high'][1]:016x}{batch['spec_low'][1]:016x}"
    frame = read.details(db, sweep, 0, name)
    assert frame["kind"].tolist() == ["lag coefficient"]
    assert frame["value"].tolist() == [0.2]
    assert frame["date"].isna().all()
    assert frame["critical_value"].isna().all()
    assert str(db.scalar("SELECT min(date) FROM details")) == "2000-01-01"


def test_bad_details_undo_the_batch(
    writer: SweepWriter, sweep: int, batch: Batch, db: Database
) -> None:
    details = _details(batch) | {"value": np.full(4, "x")}
    with pytest.raises(BadBatch, match="value has type"):
        writer.write(sweep, batch, details)
    # An integer that the table's type cannot hold fails inside the transaction.
    details = _details(batch) | {"position": np.full(4, 2**40)}
    with pytest.raises(Exception, match="out of range"):
        writer.write(sweep, batch, details)
    assert db.scalar("SELECT count(*) FROM outcome") == 0
    assert db.scalar("SELECT count(*) FROM details") == 0
    writer.write(sweep, batch, _details(batch))
    assert db.scalar("SELECT count(*) FROM outcome") == len(batch["status"])


def test_finish_and_log(writer: SweepWriter, sweep: int, db: Database) -> None:
    writer.log("note", "of the store")
    writer.finish(sweep, 12.5, {"computed": 7, "reused": 1})
    info = read.sweep_info(db, sweep)
    assert (info["wall_seconds"], info["counts"]) == (12.5, {"computed": 7, "reused": 1})
    assert info["finished"] >= info["started"]
    assert info["title"] == "Harbour"
    assert json.loads(info["data_note"]) == {}
    assert read.sweeps(db)["finished"].notna().all()
    assert db.execute("SELECT sweep, text FROM event WHERE kind = 'note'") == [
        (None, "of the store")
    ]
