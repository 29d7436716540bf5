"""Flips of one and two changes against enumeration, whatever the claim and the baseline's window.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import pandas as pd
import plain_twin
import pytest
from flip_twin import Neighbourhood
from store_samples import LABELS, RULES, Filled, fill

import store.database
from store import read
from store.read_changes import z_value
from store.schema import AXES

KINDS = ("joint", "contained", "unsettled")
# The same choices with a moving window as the baseline's.
MOVING_FIRST = LABELS | {"window": [LABELS["window"][2], LABELS["window"][0], LABELS["window"][3]]}


@pytest.fixture(scope="module", params=["fixed baseline", "moving baseline"])
def swept(
    request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory
) -> Iterator[Filled]:
    labels = LABELS if request.param == "fixed baseline" else MOVING_FIRST
    path = tmp_path_factory.mktemp("flips") / "flips.duckdb"
    with store.database.create(path, threads=1) as database:
        yield fill(database, seed=11, labels=labels)


@pytest.fixture(scope="module")
def twin(swept: Filled) -> pd.DataFrame:
    rows = plain_twin.judged_rows(swept.db, swept.sweep)
    return rows[rows["request"] == 0]


def around(twin: pd.DataFrame, finding: int) -> Neighbourhood:
    return Neighbourhood(twin[twin["finding"] == finding])


def numbers(rows: list[dict[str, object]], name: str) -> pd.Series:
    """Return the numbers of admissible rows; of all that were run where none is admissible."""
    kept = [row[name] for row in rows if row["admissible"]]
    kept = kept or [row[name] for row in rows if row["counted_status"] == 0]
    return pd.Series(kept, dtype="float64").dropna()


@pytest.mark.parametrize("finding", range(len(RULES)))
def test_flips_agree_with_enumeration(swept: Filled, twin: pd.DataFrame, finding: int) -> None:
    near = around(twin, finding)
    frame = read.flips(swept.db, swept.sweep, finding)
    found = {
        (row["first_axis"], row["first_to"], row["second_axis"], row["second_to"]): row
        for row in frame.astype(object).where(frame.notna(), None).to_dict("records")
    }
    labels = {axis: dict(zip(twin[axis], twin[f"{axis}_label"], strict=True)) for axis in AXES}
    turned = 0
    for size in (1, 2):
        for each in near.sets(size):
            steps = [(axis, labels[axis][code]) for axis, code in each.changed.items()]
            key = (*steps[0], *(steps[1] if size == 2 else (None, None)))
            flips = sum(near.turns(row) for row in each.rows)
            assert (key in found) == (flips > 0), key
            if not flips:
                continue
            turned += 1
            row = found[key]
            assert row["changes"] == size
            assert row["positions"] == len(each.rows)
            assert row["rows_ok"] == sum(r["counted_status"] == 0 for r in each.rows)
            assert row["admissible"] == sum(r["admissible"] for r in each.rows)
            assert row["flips"] == flips
            kinds = near.kinds(each) if size == 2 else dict.fromkeys(KINDS, 0)
            assert {name: row[name] for name in KINDS} == kinds
            assert ("neither" in row["kind"]) == (kinds["joint"] > 0)
            p = numbers(each.rows, "p_value")
            assert row["p_value"] == p.median()
            assert (row["p_low"], row["p_high"]) == (p.min(), p.max())
            z = np.median([z_value(v) for v in p]) - z_value(near.home["p_value"])
            assert row["z_change"] == pytest.approx(z, rel=1e-12, abs=1e-12)
            starts = [r for r in each.rows if near.turns(r)]
            assert row["window_start"] == _start(swept, starts[0])
    assert turned == len(frame)


def _start(swept: Filled, row: dict[str, object]) -> pd.Timestamp:
    return pd.Timestamp(
        swept.db.scalar(
            'SELECT window_start FROM window_position WHERE finding = ? AND "window" = ? '
            "AND position = ?",
            [row["finding"], row["window"], row["position"]],
        )
    )


@pytest.mark.parametrize("finding", range(len(RULES)))
def test_counts_of_sets_agree_with_enumeration(
    swept: Filled, twin: pd.DataFrame, finding: int
) -> None:
    near = around(twin, finding)
    frame = read.flip_counts(swept.db, swept.sweep, finding).set_index("changes")
    distances = read.flip_distances(swept.db, swept.sweep, finding).set_index("changes")
    for size in range(1, 5):
        sets = list(near.sets(size))
        judged = [s for s in sets if any(r["admissible"] for r in s.rows)]
        turning = [s for s in sets if any(near.turns(r) for r in s.rows)]
        rows = sum(r["admissible"] for s in sets for r in s.rows)
        flips = sum(near.turns(r) for s in sets for r in s.rows)
        assert distances.loc[size].to_dict() == {
            "rows": rows, "flips": flips, "sets": len(judged), "turning": len(turning)
        }  # fmt: skip
        if size > 2:
            continue
        kinds = [near.kinds(s) for s in turning] if size == 2 else []
        first = [next(name for name in KINDS if kind[name]) for kind in kinds]
        assert frame.loc[size].to_dict() == {
            "sets": len(sets), "admissible": len(judged), "turning": len(turning),
            **{name: first.count(name) for name in KINDS}, "rows": rows, "flips": flips,
        }  # fmt: skip


def test_all_kinds_of_pairs_occur(swept: Filled) -> None:
    """The random rows hold every case, so that the tests above have something to compare."""
    frames = [read.flips(swept.db, swept.sweep, finding) for finding in range(len(RULES) - 1)]
    every = pd.concat(frames)
    assert len(every) > 50
    for name in KINDS:
        assert (every[name] > 0).any(), name
    for name in ("flips_forward", "flips_reverse", "flips_sign"):
        assert (every[name] > 0).any(), name


@pytest.mark.parametrize("finding", range(len(RULES)))
def test_what_turned_is_named(swept: Filled, twin: pd.DataFrame, finding: int) -> None:
    claim, sign, reverse_sign = RULES[finding]
    near, level = around(twin, finding), 0.05
    home = near.home
    frame = read.single_changes(swept.db, swept.sweep, finding)
    for _, found in frame.iterrows():
        code = twin.loc[twin[f"{found['axis']}_label"] == found["choice"], found["axis"]].iloc[0]
        rows = [row for row in near.at({found["axis"]: code}) if near.turns(row)]
        forward = sum((r["p_value"] <= level) != (home["p_value"] <= level) for r in rows)
        reverse = sum(
            (r["reverse_p_value"] <= level) != (home["reverse_p_value"] <= level) for r in rows
        )
        two_way = claim in ("leads one way", "leads both ways")
        assert found["flips"] == len(rows)
        assert found["flips_forward"] == forward
        assert found["flips_reverse"] == (reverse if two_way else 0)
        both_signed = claim == "leads both ways" and reverse_sign
        if claim == "does not lead" or not (sign or both_signed):
            assert found["flips_sign"] == 0
        # Something always made a row turn.
        named = found["flips_forward"] + found["flips_reverse"] + found["flips_sign"]
        assert named >= found["flips"]


@pytest.mark.parametrize("finding", range(len(RULES)))
def test_shortest_flips_agree_with_enumeration(
    swept: Filled, twin: pd.DataFrame, finding: int
) -> None:
    near = around(twin, finding)
    frame = read.shortest_flips(swept.db, swept.sweep, finding, limit=25)
    expected = []
    for size in range(1, len(AXES) + 1):
        for each in near.sets(size):
            flips = sum(near.turns(row) for row in each.rows)
            if flips:
                share = flips / sum(r["admissible"] for r in each.rows)
                distance = abs(numbers(each.rows, "p_value").median() - near.home["p_value"])
                first = each.rows[0]
                words = "; ".join(
                    f"{a}: {near.home[f'{a}_label']} → {first[f'{a}_label']}" for a in each.changed
                )
                expected.append((size, -share, distance, words, flips, len(each.rows)))
    expected = sorted(expected)[:25]
    assert frame["changes"].tolist() == [e[0] for e in expected]
    shares = frame["flips"] / frame["admissible"]
    np.testing.assert_allclose(shares, [-e[1] for e in expected])
    by_words = {e[3]: e for e in expected}
    for row in frame.to_dict("records"):
        # Sets that tie in every respect may swap at the end of the list.
        if row["changed"] in by_words:
            assert (row["flips"], row["positions"]) == by_words[row["changed"]][4:]
        assert pd.isna(row["specification"]) == (row["positions"] > 1)
    assert len(set(frame["changed"]) & set(by_words)) >= len(frame) - 3
    assert frame["changed"].is_unique


def test_a_limit_keeps_the_first_and_the_counts_say_the_rest(swept: Filled) -> None:
    every = read.flips(swept.db, swept.sweep, 0)
    some = read.flips(swept.db, swept.sweep, 0, limit=9)
    pd.testing.assert_frame_equal(some, every.head(9), check_dtype=False)
    assert read.flip_counts(swept.db, swept.sweep, 0)["turning"].sum() == len(every)


def test_another_position_of_the_baseline_is_no_change(swept: Filled) -> None:
    frame = read.single_changes(swept.db, swept.sweep, 0)
    fixed = frame[frame["axis"] != "window"]
    assert (fixed["positions"] == 1).all()
