"""Small plans for the tests: a seeded data file and the text of a plan around it."""

from __future__ import annotations

from pathlib import Path

import numpy as np

HEAD = """
title = "A small plan"
[data]
file = "small.csv"
date = "month"
frequency = "monthly"
[[findings]]
name = "x leads y"
cause = "x"
effect = "y"
given = ["z"]
{finding}
[baseline]
lags = 2
transformation = "level"
{tail}
"""


def write_data(folder: Path, rows: int = 160, seed: int = 3) -> Path:
    """Write invented monthly series: y follows x, z drives neither, w and v are spare."""
    rng = np.random.default_rng(seed)
    noise = rng.standard_normal((rows, 5))
    values = np.empty((rows, 5))
    values[0] = noise[0]
    for t in range(1, rows):
        values[t] = 0.6 * values[t - 1] + noise[t]
        values[t, 1] += 0.25 * values[t - 1, 0]
    values = np.round(values + np.array([20, 30, 25, 40, 22]), 6)
    lines = ["month,x,y,z,w,v"]
    for t in range(rows):
        numbers = ",".join(f"{number:.6f}" for number in values[t])
        lines.append(f"{1990 + t // 12}-{t % 12 + 1:02d},{numbers}")
    path = folder / "small.csv"
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return path


def write_plan(folder: Path, tail: str = "", finding: str = "", name: str = "plan.toml") -> Path:
    """Write a plan beside its data; ``tail`` follows the baseline's first two keys."""
    if not (folder / "small.csv").exists():
        write_data(folder)
    path = folder / name
    path.write_text(HEAD.format(tail=tail, finding=finding), encoding="utf-8")
    return path
