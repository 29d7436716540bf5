"""Parquet and CSV files, readable without the store and safe in spreadsheets."""

from __future__ import annotations

import csv
from pathlib import Path

import duckdb
import numpy as np
import pytest
from store_samples import Filled, finding, outcomes, planned, sample

from store.database import Database, open_reading
from store.export import export
from store.write import SweepWriter

NAMES = ["outcomes", "survival", "details", "choices", "findings", "windows"]


def test_files_hold_what_the_views_hold(filled: Filled, tmp_path: Path) -> None:
    files = export(filled.db, filled.sweep, tmp_path / "new" / "it's here")
    assert [file.name for file in files] == [
        f"{name}.{end}" for end in ("parquet", "csv") for name in NAMES
    ]
    assert sorted(p.name for p in files[0].parent.iterdir()) == sorted(f.name for f in files)
    for file in files:
        view = file.stem
        if view not in ("outcomes", "survival"):
            continue
        found = duckdb.execute("SELECT count(*), sum(admissible::INT) FROM read_csv(?)"
                               if file.suffix == ".csv" else
                               "SELECT count(*), sum(admissible::INT) FROM read_parquet(?)",
                               [str(file)]).fetchone()  # fmt: skip
        assert found == filled.db.execute(f"SELECT count(*), sum(admissible::INT) FROM {view}")[0]


def test_formats_are_chosen_and_checked(filled: Filled, tmp_path: Path) -> None:
    files = export(filled.db, filled.sweep, tmp_path, formats=["csv"])
    assert {file.suffix for file in files} == {".csv"}
    with pytest.raises(ValueError, match="No such format: xlsx"):
        export(filled.db, filled.sweep, tmp_path, formats=["csv", "xlsx"])


def test_a_store_open_for_reading_exports_too(db: Database, tmp_path: Path) -> None:
    db.close()
    with open_reading(db.path) as again:
        files = export(again, 1, tmp_path / "out", formats=["csv"])
    assert all(file.read_text().count("\n") == 1 for file in files)


def test_cells_that_would_run_as_formulas_are_neutralised(
    writer: SweepWriter, db: Database, tmp_path: Path
) -> None:
    labels = {
        axis: [{"label": label}]
        for axis, label in {
            "lags": "=1+1", "deterministics": "+cmd", "window": "-2", "transformation": "@SUM(A1)",
            "test": "\tF", "conditioning": "\r=1", "measures": 'a, "b" = c',
        }.items()
    }  # fmt: skip
    content = sample(writer, [finding(0, name='=HYPERLINK("x")')], labels=labels)
    sweep = writer.begin(content.sweep, content.findings, content.choices, content.positions)
    batch = outcomes(planned(content, 0), np.random.default_rng(0))
    for name in ("status", "reverse_status"):
        batch[name][:] = 0
    for name in ("p_value", "statistic", "reverse_p_value", "reverse_statistic"):
        batch[name][:] = 0.5
    batch["coefficient_sum"][:] = -0.25
    writer.write(sweep, batch)
    files = {file.name: file for file in export(db, sweep, tmp_path)}
    with files["outcomes.csv"].open(newline="") as handle:
        (row,) = csv.DictReader(handle)
    assert row["finding"] == '\'=HYPERLINK("x")'
    assert row["lags_choice"] == "'=1+1"
    assert row["deterministics"] == "'+cmd"
    assert row["window_name"] == "'-2"
    assert row["transformation"] == "'@SUM(A1)"
    assert row["test"] == "'\tF"
    assert row["conditioning"] == "'\r=1"
    assert row["measures"] == 'a, "b" = c'
    # Numbers stay numbers, and Parquet keeps the words as they are.
    assert row["coefficient_sum"] == "-0.25"
    assert row["window_start"] == "2000-01-01"
    words = duckdb.execute(
        "SELECT finding, lags_choice FROM read_parquet(?)", [str(files["outcomes.parquet"])]
    ).fetchone()
    assert words == ('=HYPERLINK("x")', "=1+1")


def test_a_failed_export_leaves_the_old_file(
    filled: Filled, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "outcomes.csv").write_text("older")
    monkeypatch.setattr("store.export._PARTS", {"outcomes": "SELECT error('no') AS x"})
    with pytest.raises(duckdb.Error):
        export(filled.db, filled.sweep, tmp_path, formats=["csv"])
    assert [p.name for p in tmp_path.iterdir()] == ["outcomes.csv"]
    assert (tmp_path / "outcomes.csv").read_text() == "older"
