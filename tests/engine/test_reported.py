"""Printed numbers in a plan: their digits say how near the baseline must come."""

from __future__ import annotations

from pathlib import Path

import pytest
import small_plans

import sweep
from sweep.errors import InputFault
from sweep.results import Results


@pytest.fixture(scope="module")
def baseline(tmp_path_factory: pytest.TempPathFactory) -> dict[str, float]:
    """Return statistic and p-value of the baseline of the small plan."""
    plan = small_plans.write_plan(tmp_path_factory.mktemp("baseline"))
    row = sweep.run(plan, jobs=1).specification("baseline")
    return {"statistic": float(row["statistic"]), "p_value": float(row["p_value"])}


def run(folder: Path, tail: str, name: str = "plan.toml") -> Results:
    return sweep.run(small_plans.write_plan(folder, f"[baseline.reported]\n{tail}", name=name))


def reproduced(results: Results) -> bool | None:
    return results.content().findings[0].reproduction.reproduced


def test_the_p_value_of_the_small_plan_is_small(baseline: dict[str, float]) -> None:
    """What the cases below assume: below 0.001, where 0.0005 would let anything pass."""
    assert 1e-6 < baseline["p_value"] < 1e-3


@pytest.mark.parametrize("quote", ["", '"'])
@pytest.mark.parametrize(("factor", "expected"), [(1, True), (100, False), (0.01, False)])
def test_small_p_values(
    tmp_path: Path, baseline: dict[str, float], quote: str, factor: float, expected: bool
) -> None:
    printed = f"{factor * baseline['p_value']:.2e}"
    results = run(tmp_path, f"p_value = {quote}{printed}{quote}")
    assert reproduced(results) is expected


@pytest.mark.parametrize("quote", ["", '"'])
@pytest.mark.parametrize("form", ["{:.1f}", "{:.1f}00"])
def test_trailing_zeros_count(
    tmp_path: Path, baseline: dict[str, float], quote: str, form: str
) -> None:
    printed = form.format(baseline["statistic"])
    near = abs(float(printed) - baseline["statistic"])
    assert 0.0005 < near < 0.05  # what one decimal forgives and three do not
    results = run(tmp_path, f"statistic = {quote}{printed}{quote}")
    assert reproduced(results) is not printed.endswith("00")
    sentence = results.content().findings[0].reproduction.sentence
    assert f"statistic {printed} reported" in sentence


def test_a_tolerance_takes_the_place_of_the_digits(
    tmp_path: Path, baseline: dict[str, float]
) -> None:
    off = f"statistic = {baseline['statistic'] + 0.2:.4f}"
    assert reproduced(run(tmp_path, off)) is False
    assert reproduced(run(tmp_path, f"{off}\ntolerance = 0.3", "wide.toml")) is True
    near = f"statistic = {baseline['statistic']:.1f}"
    assert reproduced(run(tmp_path, near, "near.toml")) is True
    assert reproduced(run(tmp_path, f"{near}\ntolerance = 1e-6", "narrow.toml")) is False


def test_digits_outlive_a_plan_that_extends_another(
    tmp_path: Path, baseline: dict[str, float]
) -> None:
    printed = f"{baseline['statistic']:.1f}00"
    small_plans.write_plan(tmp_path, f"[baseline.reported]\nstatistic = {printed}")
    later = tmp_path / "later.toml"
    later.write_text('extends = "plan.toml"\n[axes]\nlags = [1, 2]\n', encoding="utf-8")
    results = sweep.run(later, jobs=1)
    assert reproduced(results) is False
    assert f"statistic = {printed}" in str(results.info["plan_toml"])


def test_a_printed_zero_in_words_is_refused(tmp_path: Path) -> None:
    with pytest.raises(InputFault, match=r"a printed number is needed here"):
        run(tmp_path, 'p_value = "<.001"')
