"""Answers to requests, held against the raw rows."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import plain_twin
import pytest
from store_samples import RULES, fill

import store.database
from store import read
from store.schema import AXES

ASKED = {"window": "rolling 40", "test": "F, HC3"}


@pytest.mark.parametrize("finding", range(len(RULES)))
def test_numbers_are_those_of_admissible_positions(tmp_path: Path, finding: int) -> None:
    with store.database.create(tmp_path / "x.duckdb", threads=1) as db:
        filled = fill(db, 4)
        codes = {
            axis: db.scalar("SELECT code FROM choice WHERE axis = ? AND label = ?", [axis, label])
            for axis, label in ASKED.items()
        }
        for axis, code in codes.items():
            db.execute(
                "INSERT INTO request_choice VALUES (?, ?, 1, ?, ?, 0)",
                [filled.sweep, finding, axis, code],
            )
        frame = read.answers(db, filled.sweep, finding)
        rows = plain_twin.judged_rows(db, filled.sweep)
    rows = rows[rows["finding"] == finding]
    home = rows[rows["is_baseline"]].iloc[0]
    mixed = 0
    assert len(frame) == 3
    for found in frame.to_dict("records"):
        wanted = {axis: home[axis] for axis in AXES}
        wanted |= {axis: codes[axis] for axis in ASKED if axis in found["changed"]}
        own = rows[(rows[list(AXES)] == pd.Series(wanted)).all(axis=1)]
        shown = own[own["admissible"]]
        if shown.empty:
            shown = own[own["counted_status"] == 0]
        mixed += 0 < len(shown) < (own["counted_status"] == 0).sum()
        p = pd.to_numeric(shown["p_value"])
        total = pd.to_numeric(shown["coefficient_sum"]) * shown["orientation"].astype(float)
        assert found["positions"] == len(own)
        for name, value in (
            ("p_value", p.median()), ("p_low", p.min()), ("p_high", p.max()),
            ("reverse_p_value", pd.to_numeric(shown["reverse_p_value"]).median()),
            ("coefficient_sum", total.median()),
        ):  # fmt: skip
            np.testing.assert_equal(found[name], value)
    # The random rows of this finding hold admissible and screened-out positions side by side.
    assert mixed > 0 or finding != 1
