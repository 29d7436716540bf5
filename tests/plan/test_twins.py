"""Choices that come down to one another are named, whatever they are called."""

from __future__ import annotations

from pathlib import Path

import pytest
import small_plans

import sweep

LAGS = """
[axes]
lags = [
  1, 2, { order = 2, sample = { common = 2 }, name = "two, own rows" },
  { order = 2, sample = { common = 3 } }, { criterion = "AIC", maximum = 1, name = "as it likes" },
  { criterion = "BIC", maximum = 1, sample = { common = 4 } },
  { own = 4, cause = 4, given = 2, name = "short given" }, 4,
]
"""
SCALES = """
[axes]
transformations = [
  { default = "level", name = "as it is" },
  { default = "linearly detrended", name = "off the line" },
  { default = "level", series = { z = "linearly detrended" }, name = "z off the line" },
  "difference",
]
"""


def notes(folder: Path, tail: str, finding: str = "") -> list[str]:
    return list(sweep.check(small_plans.write_plan(folder, tail, finding)).notes)


def test_lag_choices(tmp_path: Path) -> None:
    assert notes(tmp_path, LAGS) == [
        '"2" and "two, own rows" use the same lags on the same rows.',
        '"as it likes" can only choose 1 lag, as "1" does.',
    ]
    pairwise = notes(tmp_path, LAGS + 'conditioning = ["given", "pairwise"]')
    assert '"short given" and "4" use the same lags where there is no given series.' in pairwise


@pytest.mark.parametrize(
    ("terms", "said"),
    [
        ('["constant"]', []),
        (
            '["constant", { trend = "linear trend", name = "a line" }]',
            ['"as it is", "off the line" and "z off the line" give the same tests under "a line", '
             "which takes the line out anyway."],
        ),
        (
            '["constant", "linear trend", "quadratic trend"]',
            ['"as it is", "off the line" and "z off the line" give the same tests under each of '
             '"linear trend", "quadratic trend", which takes the line out anyway.'],
        ),
    ],
)  # fmt: skip
def test_a_line_taken_out_twice(tmp_path: Path, terms: str, said: list[str]) -> None:
    assert notes(tmp_path, f"{SCALES}deterministics = {terms}\n") == said


def test_transformations_that_coincide_at_a_frequency(tmp_path: Path) -> None:
    lines = ["year,x,y,z"]
    lines += [f"{1950 + t},{5 + t * 7 % 11},{6 + t * 5 % 13},{4 + t * 3 % 7}" for t in range(60)]
    (tmp_path / "yearly.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
    tail = """
[axes]
transformations = [
  "level",
  { default = "yearly growth", name = "growth over a year" },
  { default = "log difference", name = "growth" },
  { default = "log difference", series = { x = "difference", z = "yearly growth" }, name = "mix" },
  { default = "yearly growth", series = { x = "seasonal difference" }, name = "other mix" },
]
"""
    plan = small_plans.write_plan(tmp_path, tail)
    text = plan.read_text(encoding="utf-8")
    text = text.replace("small.csv", "yearly.csv")
    text = text.replace('"month"', '"year"').replace("monthly", "annual")
    plan.write_text(text, encoding="utf-8")
    assert list(sweep.check(plan).notes) == [
        '"growth over a year" and "growth" give the same numbers in annual data.',
        '"mix" and "other mix" give the same numbers in annual data.',
    ]


def test_columns_of_equal_values(tmp_path: Path) -> None:
    data = small_plans.write_data(tmp_path)
    lines = data.read_text(encoding="utf-8").splitlines()
    copied = [f"{line},{'copy' if n == 0 else line.split(',')[1]}" for n, line in enumerate(lines)]
    data.write_text("\n".join(copied) + "\n", encoding="utf-8")
    tail = '[axes]\nmeasures = { x = ["x", "copy"] }'
    assert notes(tmp_path, tail) == ['The columns "x" and "copy" hold the same values.']
