"""What the page counts from: columns that read back, crosses that hold the frames' numbers."""

from __future__ import annotations

import json

import counted_frames
import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from sweep.charts.context import context_of
from sweep.report.cube import chooser, packed, unpacked


def chosen(sweep: counted_frames.Sweep, **changes):
    """The frames of a sweep and what the page gets of them."""
    frames = counted_frames.frames_of(sweep) | changes.pop("frames", {})
    context = context_of(
        counted_frames.finding_of(sweep), frames["survival"], significance=sweep.significance,
        title="x", **changes,
    )  # fmt: skip
    return frames, chooser(frames, context)


@given(st.lists(st.integers(0, 2**53), max_size=40))
def test_columns_read_back(values):
    assert unpacked(packed(values), len(values)) == values


def test_equal_values_are_written_once():
    assert packed([7] * 1000) == 7
    assert len(packed([1, *[0] * 999])) == 1000


def cells_of(cross, axes, name, inner=1):
    """Return (choices by axis, value) of every cell of a cross, read the plain way."""
    number, found = -1, []
    steps = unpacked(cross["cell"], cross["size"])
    values = unpacked(name(cross), cross["size"])
    for step, value in zip(steps, values, strict=True):
        number += step
        rest, places = number // inner, []
        for axis in reversed(cross["axes"]):
            many = len(axes[axis]["choices"])
            places.append(rest % many)
            rest //= many
        assert rest == 0
        found.append(((*reversed(places), number % inner), value))
    return found


SWEEP = counted_frames.Sweep(not_applicable=("log",))
OWN = ("lags", "deterministics", "window", "transformation", "test", "conditioning")


def test_the_cross_holds_the_frame():
    frames, data = chosen(SWEEP)
    assert [axis["name"] for axis in data["axes"]] == list(OWN)
    assert data["axes"][0] == {"name": "lags", "choices": SWEEP.lags, "baseline": 0}
    assert data["fixed"] == [["measures", "as named"]]
    assert data["weights"] == [1 / 40, 1.0]
    (cross,) = data["crosses"]
    cube = frames["cube"]
    assert cross["axes"] == [0, 1, 2, 3, 4, 5]
    for name in ("planned", "not_applicable", "failed", "admissible", "undetermined"):
        cells = cells_of(cross, data["axes"], lambda one, name=name: one["counts"][name])
        expected = dict(zip(cube[list(OWN)].itertuples(index=False), cube[name], strict=True))
        assert {places[:-1]: value for places, value in cells} == expected
    weights = cells_of(cross, data["axes"], lambda one: one["weight"])
    assert [data["weights"][place] for _, place in weights] == cube["weight"].tolist()
    for level, tail in enumerate(("_1", "", "_10")):
        for name in ("survived", "one_way", "reverse", "both_ways"):
            cells = cells_of(
                cross, data["axes"], lambda one, at=level, name=name: one["at"][at][name]
            )
            assert [value for _, value in cells] == cube[name + tail].tolist()


def test_the_part_over_time_holds_the_frame():
    frames, data = chosen(SWEEP)
    windows = data["windows"]
    entries = windows["entries"]
    assert [entry["name"] for entry in entries] == SWEEP.window
    assert [len(entry["spans"]) for entry in entries] == [1, 1, 1, 40]
    assert entries[3]["dates"][0] == ["1995-01-01", "2005-01-01"]
    (cross,) = windows["crosses"]
    cells = cells_of(cross, data["axes"], lambda one: one["survived"][1], inner=43)
    frame = frames["cube_windows"]
    others = [axis for axis in OWN if axis != "window"]
    first = np.array([0, 1, 2, 3])
    place = first[frame["window"]] + frame["pool"]
    expected = dict(
        zip(frame[others].assign(place=place).itertuples(index=False), frame["survived"],
            strict=True)
    )  # fmt: skip
    assert dict(cells) == expected


@pytest.mark.parametrize(
    ("significance", "levels", "own"),
    [(0.05, ["1%", "5%", "10%"], 1), (0.1, ["1%", "5%", "10%"], 2),
     (0.025, ["1%", "2.5%", "5%", "10%"], 1)],
)  # fmt: skip
def test_the_plans_level_is_among_the_levels(significance, levels, own):
    frames, data = chosen(counted_frames.Sweep(significance=significance))
    assert (data["levels"], data["level"]) == (levels, own)
    (cross,) = data["crosses"]
    survived = unpacked(cross["at"][own]["survived"], cross["size"])
    assert sum(survived) == frames["cube"]["survived"].sum()


def test_smaller_crosses_name_their_axes():
    frames, _ = chosen(SWEEP)
    cube = frames["cube"]
    parts = []
    for kept in (["lags", "window"], ["lags", "test"]):
        rest = [axis for axis in counted_frames.AXES if axis not in kept]
        part = cube.assign(**dict.fromkeys(rest, -1))
        keys = [*counted_frames.AXES, "weight"]
        parts.append(part.groupby(keys, as_index=False).sum())
    _, data = chosen(SWEEP, frames={"cube": pd.concat(parts)})
    assert sorted(cross["axes"] for cross in data["crosses"]) == [[0, 2], [0, 4]]
    for cross in data["crosses"]:
        assert sum(unpacked(cross["counts"]["planned"], cross["size"])) == cube["planned"].sum()


def test_episodes_of_fixed_windows_are_gaps():
    frames, _ = chosen(SWEEP)
    windows = frames["windows"].assign(
        episodes=["2020-03-01/2021-06-30" if "without" in name or "rolling" in name else ""
                  for name in frames["windows"]["window_name"]]
    )  # fmt: skip
    _, data = chosen(SWEEP, frames={"windows": windows})
    gaps = [entry["gaps"] for entry in data["windows"]["entries"]]
    assert gaps == [[], [], [[18322.0, 18808.0]], []]


def test_an_empty_cube_gives_nothing_to_choose():
    frames, _ = chosen(SWEEP)
    _, data = chosen(SWEEP, frames={"cube": frames["cube"].iloc[:0]})
    assert data is None
    _, data = chosen(SWEEP, frames={"cube_windows": frames["cube_windows"].iloc[:0]})
    assert data["windows"] is None


@pytest.mark.parametrize(
    ("design", "pooled", "sampled"),
    [("full", True, False), ("one change", False, False), ("sample of 50", True, True)],
)
def test_designs_say_what_they_pool(design, pooled, sampled):
    _, data = chosen(counted_frames.crowded(3), design=design)
    assert (data["pooled"], data["sampled"]) == (pooled, sampled)


def test_the_text_is_compact():
    frames, data = chosen(SWEEP)
    text = json.dumps(data, separators=(",", ":"))
    # 1,080 cells of 22 columns and 11,610 cells of four: about a character a number; names,
    # dates and the spans of 43 positions take a few thousand.
    assert len(text) < 22 * len(frames["cube"]) + 4 * len(frames["cube_windows"]) + 5000
