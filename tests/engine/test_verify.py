"""Recomputing stored rows: everything agrees as it was stored, and nothing changed escapes."""

from __future__ import annotations

import json
import shutil
from pathlib import Path

import duckdb
import pytest
import small_plans

import sweep
from store import read
from store.database import open_reading
from sweep.cli import main
from sweep.engine.outside_rows import LOCAL, WITHIN
from sweep.engine.verify import Verification
from sweep.errors import InputFault
from sweep.panel.transforms import TRANSFORMS
from sweep.results import Results

# Every test entry, transformation, kind of window, lag rule and conditioning, and ways to end
# without a number: terms idle in a window, a filter across an episode, a short window,
# a ruled-out combination.
BROAD = """
[axes]
lags = [
  1, { order = 2, sample = { common = 6 } }, { own = 3, cause = 2, given = 5 }, "HQ", "FPE",
  "sequential LR", { criterion = "AIC", maximum = 5, scope = "equation" },
  { criterion = "BIC", maximum = 4, sample = { common = 7 } },
]
deterministics = [
  "none", "constant", "quadratic trend", { trend = "linear trend", seasonal = true },
  { trend = "none", seasonal = true }, { trend = "constant", fourier = 2 },
  { trend = "constant", steps = ["1996-01"], pulses = ["1997-03"] },
]
windows = [
  "full sample", { without = [["1993-03", "1993-05"], ["1999-01", "1999-02"]] },
  { split = "1996-06" }, { name = "short", until = "1992-06" },
  { rolling = 90, step = 9 }, { rolling = 100, step = 13, without = ["1996-01", "1996-02"] },
  { expanding = 80, step = 17 }, { shrinking = 90, step = 13 },
  { drop_last = 0.1, from = "1991" },
]
transformations = [
  "level", "log", "difference", "log difference", "yearly growth", "seasonal difference",
  "inverse hyperbolic sine", "linearly detrended", "Hodrick-Prescott cycle", "Hamilton cycle",
  { default = "difference", series = { z = "Hamilton cycle", x = "yearly growth" } },
]
tests = [
  "F", "Wald", "LR", "LM", { test = "Wald", divisor = "T" }, { test = "F", covariance = "HC0" },
  { test = "F", covariance = "HC1" }, { test = "Wald", covariance = "HC2" },
  { test = "F", covariance = "HC3" },
]
conditioning = ["given", "pairwise"]
measures = { x = ["x", { series = "w", inverted = true }] }
[[rule_out]]
when = { transformation = ["yearly growth"], lags = [1] }
because = "growth over twelve months overlaps"
[sweep]
design = { sample = 4000 }
coefficients = "all"
"""
SMALL = (
    '[axes]\nlags = [2, "AIC"]\n'
    'windows = ["full sample", { rolling = 80, step = 40 }]\n'
    'tests = ["F", { test = "Wald", covariance = "HC3" }]\n'
    'deterministics = ["constant", { trend = "constant", steps = ["1990-06"] }]\n'
)
SMALL_ROWS = 2 * (1 + 3) * 2 * 2


@pytest.fixture(scope="module")
def broad(tmp_path_factory: pytest.TempPathFactory) -> Results:
    folder = tmp_path_factory.mktemp("broad")
    finding = 'exogenous = [{ series = "v", lags = 3 }]'
    return sweep.run(small_plans.write_plan(folder, BROAD, finding), jobs=1)


@pytest.fixture(scope="module")
def broadly(broad: Results) -> Verification:
    return broad.verify(rows=150, seed=1)


@pytest.fixture(scope="module")
def kept(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("small")
    return sweep.run(small_plans.write_plan(folder, SMALL), jobs=1).store


@pytest.fixture
def small(kept: Path, tmp_path: Path) -> Path:
    """A copy of a store, beside its plan and data, to tamper with."""
    shutil.copytree(kept.parent, tmp_path / "copy")
    return tmp_path / "copy" / kept.name


def call(*arguments: object) -> int:
    with pytest.raises(SystemExit) as left:
        main([str(argument) for argument in arguments])
    return int(left.value.code or 0)


def tamper(store: Path, sql: str) -> None:
    with duckdb.connect(str(store)) as connection:
        connection.execute(sql)


def test_every_kind_of_row_comes_out_again(broadly: Verification) -> None:
    assert broadly.disagreements == ()
    assert broadly.agrees
    assert broadly.rows == 150


def test_differences_are_those_of_sound_computations(broadly: Verification) -> None:
    """Three computations of these small regressions agree to 2e-9, half a digit from the bound."""
    assert 0 < broadly.largest < 2e-9
    for quantity in broadly.quantities:
        assert quantity.compared > 80, quantity.name
        assert quantity.differing == 0


def test_everything_that_occurs_is_represented(broad: Results, broadly: Verification) -> None:
    assert [name for name, held, occurring in broadly.represented if held != occurring] == []
    occurring = {name: count for name, _, count in broadly.represented}
    assert (occurring["lags"], occurring["test"], occurring["transformation"]) == (9, 9, 11)
    assert (occurring["window"], occurring["conditioning"], occurring["measures"]) == (10, 2, 2)
    reasons = set(broad.outcomes(["reason"])["reason"].cat.categories) - {""}
    assert occurring["status"] >= len(reasons) >= 5


def test_pulses_beside_covariances_that_divide_by_one_less_the_leverage(tmp_path: Path) -> None:
    tail = (
        "[axes]\nlags = [1, 4]\n"
        'deterministics = [{ pulses = ["1996-07"] }, { seasonal = true, pulses = ["1994-01"] }]\n'
        'windows = ["full sample", { rolling = 80, step = 20 }]\n'
        'tests = [{ test = "F", covariance = "HC2" }, { test = "Wald", covariance = "HC3" }]\n'
    )
    found = sweep.run(small_plans.write_plan(tmp_path, tail), jobs=1).verify(rows=60, seed=2)
    assert found.agrees
    assert {quantity.name: quantity.differing for quantity in found.quantities}["statistic"] == 0
    assert min(quantity.compared for quantity in found.quantities) > 30


def test_a_filter_across_an_episode_is_not_applicable_under_a_criterion_too(
    broad: Results,
) -> None:
    sql = "transformation = 'Hodrick-Prescott cycle' AND window_name LIKE 'without 19%'"
    rows = broad.outcomes(["lags_choice", "status", "reason"], sql)
    assert len(set(rows["lags_choice"])) > 4
    assert set(rows["status"]) == {"not applicable"}
    assert all("Hodrick-Prescott" in reason for reason in rows["reason"])


def test_every_transformation_is_written_a_second_time() -> None:
    assert set(LOCAL) | set(WITHIN) == set(TRANSFORMS)


def test_the_sample_is_that_of_its_seed(broad: Results, kept: Path, tmp_path: Path) -> None:
    with open_reading(broad.store) as database:
        first = read.sample(database, 1, 60, 5)["specification"].tolist()
        again = read.sample(database, 1, 60, 5)["specification"].tolist()
        other = read.sample(database, 1, 60, 6)["specification"].tolist()
    assert first == again
    assert len(set(first) & set(other)) < 20
    turned = tmp_path / "turned.duckdb"
    shutil.copyfile(broad.store, turned)
    tamper(
        turned,
        "CREATE TABLE a AS FROM outcome; DELETE FROM outcome; "
        "INSERT INTO outcome FROM a ORDER BY p_value",
    )
    with open_reading(turned) as database:
        assert read.sample(database, 1, 60, 5)["specification"].tolist() == first


def test_a_sample_is_never_too_small_for_what_occurs(broad: Results) -> None:
    with open_reading(broad.store) as database:
        drawn = read.sample(database, 1, 1, 0)
        strata = read.sample_strata(database, 1)
    assert len(drawn) > max(strata.values())
    assert drawn["test"].nunique() == strata["test"]


def test_a_whole_small_sweep(kept: Path) -> None:
    found = sweep.open_results(kept).verify(rows=10_000)
    assert found.agrees
    assert found.rows == found.stored == SMALL_ROWS


@pytest.mark.parametrize(
    ("column", "quantity"),
    [
        ("statistic", "statistic"),
        ("p_value", "p_value"),
        ("coefficient_sum", "coefficient_sum"),
        ("coefficient_sum_se", "coefficient_sum_se"),
        ("signed_partial_r2", "signed_partial_r2"),
        ("standardised_sum", "standardised_sum"),
        ("reverse_statistic", "reverse_statistic"),
        ("reverse_p_value", "reverse_p_value"),
        ("reverse_coefficient_sum", "reverse_coefficient_sum"),
    ],
)
@pytest.mark.parametrize("change", ["{0} * (1 + 1e-6)", "-{0}", "NULL"])
def test_a_changed_number_is_found(small: Path, column: str, quantity: str, change: str) -> None:
    where = "WHERE spec_low = (SELECT min(spec_low) FROM outcome WHERE status = 0)"
    tamper(small, f"UPDATE outcome SET {column} = {change.format(column)} {where}")
    found = sweep.open_results(small).verify()
    assert not found.agrees
    assert {item.quantity for item in found.disagreements} == {quantity}
    assert len({item.specification for item in found.disagreements}) == 1


@pytest.mark.parametrize("column", ["order_used", "observations", "df_num"])
def test_a_changed_count_is_found(small: Path, column: str) -> None:
    tamper(small, f"UPDATE outcome SET {column} = {column} + 1 WHERE status = 0")
    found = sweep.open_results(small).verify()
    assert {item.quantity for item in found.disagreements} == {column}


@pytest.mark.parametrize(
    ("sql", "quantity"),
    [
        ("UPDATE outcome SET status = 2, reason = 1, statistic = NULL, p_value = NULL, "
         "coefficient_sum = NULL, coefficient_sum_se = NULL WHERE status = 0", "status"),
        ("UPDATE outcome SET reason = 1, status = 2 WHERE status = 1", "status"),
        ("UPDATE outcome SET p_value = 0.01 WHERE status = 1", "p_value"),
        ("UPDATE window_position SET window_end = window_end - INTERVAL 2 MONTH", "window"),
        ("UPDATE details SET value = value + 1e-3 WHERE position = 1", "lag_coefficient, lag 1"),
        ("UPDATE details SET standard_error = standard_error * 1.01 WHERE position = 2 AND "
         "kind = 'reverse lag coefficient'", "lag_standard_error, lag -2"),
    ],
)  # fmt: skip
def test_other_changes_are_found(small: Path, sql: str, quantity: str) -> None:
    tamper(small, sql)
    found = sweep.open_results(small).verify()
    assert quantity in {item.quantity for item in found.disagreements}


def test_the_tolerance_is_where_it_says(small: Path) -> None:
    """Changes of 1e-10 pass and of 3e-8 do not; a wider tolerance lets those pass too."""
    tamper(small, "UPDATE outcome SET statistic = statistic * (1 + 1e-10) WHERE status = 0")
    assert sweep.open_results(small).verify().agrees
    tamper(small, "UPDATE outcome SET statistic = statistic * (1 + 3e-8) WHERE status = 0")
    assert not sweep.open_results(small).verify().agrees
    assert sweep.open_results(small).verify(tolerance=1e-7).agrees


def test_the_command(small: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert call("verify", small) == 0
    shown = capsys.readouterr()
    assert "Every stored value came out again." in shown.out
    assert f"{SMALL_ROWS} of {SMALL_ROWS} rows recomputed" in shown.out
    assert not shown.err
    tamper(small, "UPDATE outcome SET p_value = p_value / 2 WHERE status = 0")
    assert call("verify", small, "--format", "json") == 4
    shown = capsys.readouterr()
    found = json.loads(shown.out)
    assert found["agrees"] is False
    assert {item["quantity"] for item in found["disagreements"]} == {"p_value"}
    assert "do not hold what their plan and data give" in shown.err
    assert call("verify", small) == 4
    text = capsys.readouterr().out
    assert f"{found['disagreements'][0]['specification']} (x leads y), p-value: stored" in text
    assert "more (--format json lists them all)" in text


def test_data_gone_or_changed(small: Path, capsys: pytest.CaptureFixture[str]) -> None:
    data = small.parent / "small.csv"
    moved = small.parent / "moved.csv"
    data.rename(moved)
    assert call("verify", small) == 2
    assert "the data file is not there. Name it with --data FILE." in capsys.readouterr().err
    assert call("verify", small, "--data", moved) == 0
    text = moved.read_text(encoding="utf-8")
    data.write_text(text.replace("1990-02,", "1990-02,1", 1), encoding="utf-8")
    assert call("verify", small) == 2
    assert "the data have changed since this sweep was run" in capsys.readouterr().err


def test_bad_requests(kept: Path) -> None:
    assert call("verify", kept, "--rows", 0) == 2
    assert call("verify", kept, "--tolerance", 0) == 2
    with pytest.raises(InputFault, match="is no number of rows"):
        sweep.open_results(kept).verify(rows=0)
    with pytest.raises(InputFault, match="is no relative difference"):
        sweep.open_results(kept).verify(tolerance=2)


def test_progress_is_told(kept: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    ticks = iter(range(10_000))
    monkeypatch.setattr("sweep.engine.verify.time.monotonic", lambda: float(next(ticks)))
    told: list[tuple[int, int]] = []
    results = sweep.open_results(kept)
    found = results.verify(rows=10, progress=lambda done, rows: told.append((done, rows)))
    assert told == [(done, found.rows) for done in range(found.rows)]
