"""Samples of a plan: drawn without building the cross, the same whatever stands beside them."""

from __future__ import annotations

import tracemalloc
from collections import Counter
from pathlib import Path

import numpy as np
import pytest
import small_plans

import sweep
from sweep.engine.prepare import Prepared, prepare
from sweep.plan.canonical import hex_id

LAGS = "1, 2, 3, 4, 5, 6, 7, 8"
TERMS = '"constant", "linear trend", "quadratic trend"'
WINDOWS = '"full sample", { rolling = 60, step = 1 }, { expanding = 70, step = 5 }'
TESTS = '"F", "LR", "LM", { test = "F", covariance = "HC3" }'


def prepared(
    folder: Path, lags: str = LAGS, windows: str = WINDOWS, sample: int = 300, more: str = "",
    terms: str = TERMS,
) -> Prepared:  # fmt: skip
    tail = (
        f"[axes]\nlags = [{lags}]\ndeterministics = [{terms}]\nwindows = [{windows}]\n"
        f"tests = [{TESTS}]\n{more}[sweep]\ndesign = {{ sample = {sample} }}\n"
    )
    return prepare(sweep.load_plan(small_plans.write_plan(folder, tail)))


def drawn(whole: Prepared, window: str = "") -> set[str]:
    """Return the ids of the rows drawn, of one window entry if it is named."""
    rows = whole.rows
    labels = [choice.label for choice in whole.plan.axes["window"]]
    return {
        hex_id(int(high), int(low))
        for high, low, code in zip(rows.high, rows.low, rows.codes["window"], strict=True)
        if not window or labels[code] == window
    }


def test_entries_get_equal_shares_and_the_baseline_is_there_once(tmp_path: Path) -> None:
    whole = prepared(tmp_path)
    counts = Counter(whole.rows.codes["window"].tolist())
    # 96 rows of the full sample cross; the baseline is one of them and is not drawn.
    assert sorted(counts.values()) == [96, 100, 100]
    assert len(drawn(whole)) == whole.rows.count
    high, low = whole.plan.baseline_id(whole.plan.findings[0])
    assert hex_id(high, low) in drawn(whole)


def test_the_order_of_choices_and_entries_does_not_matter(tmp_path: Path) -> None:
    turned = ", ".join(reversed(LAGS.split(", ")))
    windows = '{ expanding = 70, step = 5 }, { rolling = 60, step = 1, name = "r" }, "full sample"'
    assert drawn(prepared(tmp_path)) == drawn(prepared(tmp_path, turned, windows))


def test_an_entry_keeps_its_draw_beside_others(tmp_path: Path) -> None:
    more = f"{WINDOWS}, {{ shrinking = 80, step = 3 }}"
    before, after = prepared(tmp_path), prepared(tmp_path, windows=more, sample=400)
    for window in ("rolling 60", "expanding 70, step 5"):
        assert drawn(before, window) == drawn(after, window)


def test_seeds_differ(tmp_path: Path) -> None:
    one = drawn(prepared(tmp_path))
    path = tmp_path / "plan.toml"
    path.write_text("seed = 7\n" + path.read_text(encoding="utf-8"), encoding="utf-8")
    other = drawn(prepare(sweep.load_plan(path)))
    assert len(one & other) < 0.7 * len(one)


def test_a_sample_of_everything_is_the_full_cross(tmp_path: Path) -> None:
    everything = prepared(tmp_path, sample=1_000_000)
    tail = (
        f"[axes]\nlags = [{LAGS}]\ndeterministics = [{TERMS}]\nwindows = [{WINDOWS}]\n"
        f"tests = [{TESTS}]\n"
    )
    full = prepare(sweep.load_plan(small_plans.write_plan(tmp_path, tail)))
    assert drawn(everything) == drawn(full)


@pytest.mark.parametrize("seed", range(3))
def test_every_row_has_the_same_chance(tmp_path: Path, seed: int) -> None:
    """Drawn choices are as frequent as their number says: χ² of 8 lags × 101 positions."""
    whole = prepared(tmp_path, sample=9000, windows='"full sample", { rolling = 60, step = 1 }')
    rows = whole.rows
    moving = rows.codes["window"] == 1
    for codes, kinds in ((rows.codes["lags"], 8), (rows.position, 101)):
        found = np.bincount(codes[moving], minlength=kinds)
        expected = moving.sum() / kinds
        left = 1 - moving.sum() / (8 * 3 * 4 * 101)  # without replacement
        assert ((found - expected) ** 2 / expected).sum() < left * (kinds + 5 * (2 * kinds) ** 0.5)
    del seed


def test_a_huge_cross_is_never_built(tmp_path: Path) -> None:
    """Some 5·10⁸ rows: a sample of it takes memory for the sample and for the data."""
    lags = ", ".join(f"{{ own = {o}, cause = {c}, given = {g} }}"
                     for o in range(1, 9) for c in range(1, 9) for g in range(1, 9))  # fmt: skip
    terms = ", ".join(f'{{ steps = ["{1994 + n // 12}-{n % 12 + 1:02d}"] }}' for n in range(72))
    scales = (
        'transformations = ["level", "log", "difference", "log difference", "yearly growth", '
        '"inverse hyperbolic sine"]\nconditioning = ["given", "pairwise"]\n'
        'measures = { x = ["x", "w", "v"] }\n'
    )
    tracemalloc.start()
    whole = prepared(tmp_path, lags, WINDOWS, 300, scales, f'"constant", {terms}')
    _, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    others = [len(choices) for axis, choices in whole.plan.axes.items() if axis != "window"]
    assert np.prod(others) * 121 > 5e8
    assert whole.rows.count == 301
    assert peak < 60e6


def test_a_request_beside_a_huge_cross(tmp_path: Path) -> None:
    lags = ", ".join(f"{{ own = {o}, cause = {c}, given = {g} }}"
                     for o in range(1, 9) for c in range(1, 9) for g in range(1, 9))  # fmt: skip
    request = (
        '[[requests]]\nname = "longer"\n'
        "axes = { lags = [12, 14], windows = [{ rolling = 90, step = 1 }] }\n"
    )
    tail = (
        f"[axes]\nlags = [{lags}]\ndeterministics = [{TERMS}]\nwindows = [{WINDOWS}]\n"
        f"tests = [{TESTS}]\ntransformations = [\"level\", \"difference\", \"log\"]\n"
        f"[sweep]\ndesign = {{ sample = 300 }}\n{request}"
    )
    tracemalloc.start()
    whole = prepare(sweep.load_plan(small_plans.write_plan(tmp_path, tail)))
    _, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    assert peak < 60e6
    rows = whole.rows
    assert len(drawn(whole)) == rows.count
    added = rows.request == 1
    labels = {axis: np.array([c.label for c in whole.plan.axes[axis]])[rows.codes[axis]]
              for axis in ("lags", "window")}  # fmt: skip
    new = np.isin(labels["lags"], ["12", "14"]) | (labels["window"] == "rolling 90")
    assert (new == added).all()
    # The baseline with each of its choices put in, whatever is drawn: 71 positions and 3 lags.
    answers = added & (labels["window"] == "rolling 90")
    answers &= np.isin(labels["lags"], ["2", "12", "14"])
    assert answers.sum() >= 3 * 71
