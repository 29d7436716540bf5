"""The cube and its part over time, held against the plain twin; both stay within their bound."""

from __future__ import annotations

import itertools
from pathlib import Path

import numpy as np
import pandas as pd
import plain_twin
import pytest
from store_samples import LABELS, Filled, finding, sample

import store.database
from store import read
from store.database import Database
from store.read_cube import CUBE_CELLS, WINDOW_CELLS
from store.schema import AXES
from store.write import SweepWriter

LEVELS = {"": None, "_1": 0.01, "_5": 0.05, "_10": 0.10}
SEVERAL = [axis for axis in AXES if len(LABELS[axis]) > 1]


def direction(row: pd.Series, level: float) -> str:
    """Say which direction rejects at a level."""
    if row["status"] or row["reverse_status"]:
        return "undetermined"
    forward, reverse = row["p_value"] <= level, row["reverse_p_value"] <= level
    return {(1, 1): "both_ways", (1, 0): "one_way", (0, 1): "reverse", (0, 0): "neither"}[
        int(forward), int(reverse)
    ]


def judged_at(db: Database, sweep: int, number: int) -> pd.DataFrame:
    """Return the planned rows of a finding with one flag column for each count of the cube."""
    rules = db.frame("SELECT * FROM finding WHERE finding = ?", [number]).iloc[0]
    own = db.scalar("SELECT significance FROM sweep WHERE sweep = ?", [sweep])
    rows = plain_twin.judged_rows(db, sweep)
    rows = rows[(rows["finding"] == number) & (rows["request"] == 0)].copy()
    rows["planned"] = 1
    for name in ("not applicable", "infeasible", "failed", "screened out", "admissible"):
        rows[name.replace(" ", "_")] = (rows["counted_as"] == name).astype(int)
    counts = rows["admissible"] == 1
    rows["undetermined"] = (counts & (rows["verdict"] == "undetermined")).astype(int)
    choices = db.frame("SELECT * FROM sweep_choice WHERE finding = ?", [number]).to_dict("records")
    picked = {(c["axis"], c["code"]): c for c in choices}
    for tail, fixed in LEVELS.items():
        level = own if fixed is None else fixed
        found = []
        for _, row in rows.iterrows():
            picks = {axis: picked[axis, row[axis]] for axis in AXES}
            found.append(plain_twin.judge(row.to_dict(), rules.to_dict(), picks, level))
        rows[f"survived{tail}"] = [int(bool(one["survives"])) for one in found]
        rows[f"other_sign{tail}"] = [int(bool(one["other_sign"])) for one in found]
        ways = rows.apply(direction, axis=1, level=level)
        for way in ("one_way", "reverse", "both_ways"):
            rows[f"{way}{tail}"] = (ways == way).astype(int)
        for name in ("survived", "other_sign", "one_way", "reverse", "both_ways"):
            rows[f"{name}{tail}"] *= counts.astype(int)
    for axis in AXES:
        rows[axis] = [picked[axis, code]["position"] for code in rows[axis]]
    return rows


COUNTS = [
    "planned", "not_applicable", "infeasible", "failed", "screened_out", "admissible",
    "undetermined",
    *(f"{name}{tail}" for tail in LEVELS
      for name in ("survived", "other_sign", "one_way", "reverse", "both_ways")),
]  # fmt: skip


def crosses(frame: pd.DataFrame, axes: list[str]) -> dict[tuple[str, ...], pd.DataFrame]:
    """Part a frame of cells by the axes that they do not sum over."""
    held = (
        frame[axes]
        .ge(0)
        .apply(lambda row: tuple(axis for axis in axes if row[axis]), axis=1, result_type="reduce")
    )
    return {own: frame[held == own] for own in held.unique()}


def agree(cube: pd.DataFrame, rows: pd.DataFrame, several: list[str], size: int) -> None:
    """Hold every cross of a cube against grouped rows."""
    found = crosses(cube, list(AXES))
    assert set(found) == set(itertools.combinations(several, size))
    for axes, part in found.items():
        keys = [*axes, "weight"]
        expected = rows.groupby(keys)[COUNTS].sum().reset_index()
        same = part.sort_values(keys)[[*keys, *COUNTS]].reset_index(drop=True)
        pd.testing.assert_frame_equal(same, expected, check_dtype=False)


@pytest.mark.parametrize("number", [0, 2, 4, 6, 8])
def test_the_full_cross_agrees_with_the_twin(filled: Filled, number: int) -> None:
    cube = read.cube(filled.db, filled.sweep, number)
    assert len(cube) <= 288 < CUBE_CELLS // 9
    agree(cube, judged_at(filled.db, filled.sweep, number), SEVERAL, 6)


@pytest.mark.parametrize(("cells", "size"), [(1440, 6), (1439, 3), (1257, 3), (1256, 2), (308, 2)])
def test_smaller_crosses_agree_with_the_twin(tmp_path: Path, cells: int, size: int) -> None:
    sizes = {"lags": 5, "deterministics": 4, "window": 4, "transformation": 3, "test": 3,
             "conditioning": 1, "measures": 2}  # fmt: skip
    labels = {axis: [{"label": f"{i}"} for i in range(n)] for axis, n in sizes.items()}
    labels["test"][0]["group"] = 2
    with store.database.create(tmp_path / "x.duckdb", threads=1) as db:
        writer = SweepWriter(db)
        content = sample(writer, [finding(0)], labels)
        sweep = writer.begin(content.sweep, content.findings, content.choices, content.positions)
        _insert(db, sweep, content.codes, "range(1)")
        cube = read.cube(db, sweep, 0, cells)
        rows = judged_at(db, sweep, 0)
    # Without the tests, cells of both weights stand side by side.
    assert len(cube) <= cells
    agree(cube, rows, [axis for axis in AXES if sizes[axis] > 1], size)


def test_the_cube_sums_to_survival_and_directions(filled: Filled) -> None:
    for number in range(9):
        cube = read.cube(filled.db, filled.sweep, number)
        whole = read.survival(filled.db, filled.sweep, number, "all").iloc[0]
        for name in COUNTS[:6]:
            assert cube[name].sum() == whole[name]
        assert cube["survived"].sum() == whole["survived"]
        assert cube["other_sign"].sum() == whole["other_sign"]
        weighted = (cube["weight"] * cube["admissible"]).sum()
        # Sums of the same few fractions in another order: rounding only.
        for name, share in (("survived", "headline_share"), ("survived_1", "share_at_1"),
                            ("survived_10", "share_at_10")):  # fmt: skip
            own = (cube["weight"] * cube[name]).sum() / weighted
            assert own == pytest.approx(whole[share], rel=1e-12)
        ways = read.directions(filled.db, filled.sweep, number)
        ways = ways[ways["axis"] == "all"].set_index("verdict")["rows"]
        for name in ("one way", "reverse", "both ways", "undetermined"):
            assert cube[name.replace(" ", "_")].sum() == ways.get(name, 0), name


@pytest.mark.parametrize("cells", [None, 200, 60])
def test_the_part_over_time_agrees_with_the_twin(filled: Filled, cells: int | None) -> None:
    number = 4
    frame = read.cube_windows(filled.db, filled.sweep, number, cells)
    rows = judged_at(filled.db, filled.sweep, number)
    assert 0 < len(frame) <= (cells or WINDOW_CELLS // 9)
    others = [axis for axis in AXES if axis != "window"]
    found = crosses(frame, others)
    # 13 positions and 3·2·2·3·2 other choices: everything, all pairs (56 · 13) no more, singles.
    size = {None: 5, 200: 1, 60: 0}[cells]
    assert set(found) == set(itertools.combinations([a for a in SEVERAL if a != "window"], size))
    counts = ["admissible", "survived", "survived_1", "survived_5", "survived_10"]
    for axes, part in found.items():
        keys = ["window", "pool", *axes]
        expected = rows.rename(columns={"position": "pool"}).groupby(keys)[counts].sum()
        same = part.sort_values(keys)[[*keys, *counts]].reset_index(drop=True)
        pd.testing.assert_frame_equal(same, expected.reset_index(), check_dtype=False)
    assert (frame["pooled"] == 1).all()
    windows = read.windows(filled.db, filled.sweep, number)
    one = frame.drop_duplicates(["window", "pool"])
    assert one["window_start"].tolist() == windows["window_start"].tolist()
    assert one["window_end"].tolist() == windows["window_end"].tolist()
    assert one["entry_kind"].tolist() == windows["entry_kind"].tolist()


def test_positions_are_pooled_where_they_are_many(filled: Filled) -> None:
    frame = read.cube_windows(filled.db, filled.sweep, 0, 9)
    # 7 and 4 positions in pools of 2 or 3, and two fixed windows.
    assert len(frame) <= 9
    rows = judged_at(filled.db, filled.sweep, 0)
    assert frame["admissible"].sum() == rows["admissible"].sum()
    assert frame["pooled"].max() > 1
    per_entry = frame.groupby("window")["pooled"].sum()
    assert per_entry.tolist() == [1, 1, 7, 4]


def test_too_many_choices_give_an_empty_cube(filled: Filled) -> None:
    whole = read.cube(filled.db, filled.sweep, 0)
    empty = read.cube(filled.db, filled.sweep, 0, 20)
    assert empty.empty
    assert list(empty.columns) == list(whole.columns)
    none = read.cube_windows(filled.db, filled.sweep, 0, 3)
    assert none.empty


def test_rows_of_requests_are_left_out(filled: Filled) -> None:
    added = filled.db.scalar("SELECT count(*) FROM outcome WHERE finding = 0 AND request > 0")
    planned = filled.db.scalar("SELECT count(*) FROM outcome WHERE finding = 0 AND request = 0")
    assert added > 0
    assert read.cube(filled.db, filled.sweep, 0)["planned"].sum() == planned


def test_one_specification_is_one_cell(tmp_path: Path) -> None:
    single = {axis: entries[:1] for axis, entries in LABELS.items()}
    with store.database.create(tmp_path / "x.duckdb", threads=1) as db:
        writer = SweepWriter(db)
        content = sample(writer, [finding(0)], single)
        sweep = writer.begin(content.sweep, content.findings, content.choices, content.positions)
        _insert(db, sweep, content.codes, "range(1)")
        cube = read.cube(db, sweep, 0)
        path = read.cube_windows(db, sweep, 0)
    assert cube[list(AXES)].to_numpy().tolist() == [[-1] * 7]
    assert cube["planned"].tolist() == [1]
    assert len(path) == 1


def _insert(db: Database, sweep: int, codes: dict[str, list[int]], positions: str) -> None:
    """Insert one row for every combination of codes and position, numbers drawn by hashing."""
    froms = ", ".join(
        f"unnest([{', '.join(str(code) for code in codes[axis])}]) AS t{i}(c{i})"
        for i, axis in enumerate(AXES)
    ).replace("unnest(", "(SELECT unnest(").replace("]) AS", "])) AS")  # fmt: skip
    columns = ", ".join(f'"{axis}"' for axis in AXES)
    picks = ", ".join(f"c{i}" for i in range(len(AXES)))
    db.execute(
        f"INSERT INTO outcome (sweep, finding, spec_high, spec_low, computation, request, "
        f"{columns}, position, p_value, reverse_p_value, coefficient_sum, status, "
        "reverse_status, reason, solver, failed_mask, reverse_failed_mask) "
        f"SELECT {sweep}, 0, 0, row, row, 0, {picks}, position, "
        "(hash(row) % 1000) / 1000, (hash(row + 7) % 1000) / 1000, 1.0, "
        "CASE WHEN row % 17 = 3 THEN 2 ELSE 0 END, 0, 0, 1, 0, 0 "
        f"FROM (SELECT *, row_number() OVER () AS row FROM {froms}, {positions} AS p(position))"
    )


@pytest.mark.parametrize("positions", [1, pytest.param(10, marks=pytest.mark.slow)])
def test_large_sweeps_stay_within_the_bound(tmp_path: Path, positions: int) -> None:
    sizes = {"lags": 12, "deterministics": 4, "window": 7, "transformation": 4, "test": 5,
             "conditioning": 3, "measures": 5}  # fmt: skip
    labels = {axis: [{"label": f"{axis} {i}"} for i in range(size)] for axis, size in sizes.items()}
    # Up to ten positions a window make a million rows; tests in groups of 1 and 2, two weights.
    labels["window"] = [
        entry | {"entry_kind": "rolling", "positions": positions, "length": 40 + i}
        for i, entry in enumerate(labels["window"])
    ]
    labels["test"][0]["group"] = 2
    with store.database.create(tmp_path / "x.duckdb") as db:
        writer = SweepWriter(db)
        content = sample(writer, [finding(0)], labels)
        sweep = writer.begin(content.sweep, content.findings, content.choices, content.positions)
        _insert(db, sweep, content.codes, f"range({positions})")
        rows = int(np.prod(list(sizes.values()))) * positions
        assert rows == 100_800 * positions
        cube = read.cube(db, sweep, 0)
        path = read.cube_windows(db, sweep, 0)
        survival = read.survival(db, sweep, 0)
    assert len(cube) <= CUBE_CELLS
    assert len(path) <= WINDOW_CELLS
    found = crosses(cube, list(AXES))
    assert {len(axes) for axes in found} == {3}
    assert len(found) == 35
    assert all(part["planned"].sum() == rows for part in found.values())
    # Every triple counts each choice as the store's own view does.
    chosen = survival[survival["axis"] == "test"].set_index("choice_position")
    for axes, part in found.items():
        if "test" in axes:
            own = part.groupby("test")[["admissible", "survived"]].sum()
            assert own["survived"].tolist() == chosen["survived"].tolist()
            assert own["admissible"].tolist() == chosen["admissible"].tolist()
