from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest
from store_samples import Sample, finding, outcomes, planned, sample

import store.database
from store.database import Database
from store.write import SweepWriter

# Claim, claimed sign, claimed sign of the reverse: every kind that the rules tell apart.
RULES = [
    ("leads", 0, 0),
    ("leads", 1, 0),
    ("leads", -1, 1),
    ("leads one way", 0, 0),
    ("leads one way", 1, 0),
    ("leads both ways", 0, 0),
    ("leads both ways", 1, -1),
    ("leads both ways", 0, 1),
    ("does not lead", 0, 0),
]


@pytest.fixture
def db(tmp_path: Path) -> Iterator[Database]:
    with store.database.create(tmp_path / "x.duckdb", threads=1) as database:
        yield database


@pytest.fixture
def writer(db: Database) -> SweepWriter:
    return SweepWriter(db)


@dataclass
class Filled:
    """A store with one random sweep of nine findings."""

    db: Database
    sweep: int
    content: Sample


def fill(db: Database, seed: int, significance: float = 0.05) -> Filled:
    """Write one random sweep: all claims, signs, statuses, screens, windows and requests."""
    writer = SweepWriter(db)
    rng = np.random.default_rng(seed)
    for bit, name in enumerate(("enough observations", "stable roots", "normality")):
        writer.register_screen(bit, name)
    reasons = (
        writer.register_reason(1, "yearly growth with short lags", ruled=True),
        writer.register_reason(2, "too few observations"),
    )
    rules = [
        finding(i, claim=claim, sign=sign, reverse_sign=reverse, required_mask=(0, 3, 5)[i % 3])
        for i, (claim, sign, reverse) in enumerate(RULES)
    ]
    content = sample(writer, rules, significance=significance)
    sweep = writer.begin(content.sweep, content.findings, content.choices, content.positions)
    writer.register_request(sweep, 1, "longer lags", "referee 2", "What about 12 lags?")
    for record in rules:
        rows = planned(content, record.finding, record.finding)
        size = len(rows["row"])
        rows["request"] = (rng.random(size) < 0.1).astype(np.int16)
        # The baseline is always planned.
        rows["request"][0] = 0
        batch = outcomes(rows, rng, reasons)
        if record.finding != 8:
            _make_baseline_ok(batch)
        writer.write(sweep, batch)
    return Filled(db, sweep, content)


def _make_baseline_ok(batch: dict[str, np.ndarray]) -> None:
    """Give the baseline, the first row, numbers in both directions."""
    for name in ("status", "reverse_status", "reason", "failed_mask", "reverse_failed_mask"):
        batch[name][0] = 0
    for name, value in (("p_value", 0.03), ("reverse_p_value", 0.4)):
        batch[name][0] = value
    for name in ("statistic", "reverse_statistic", "coefficient_sum", "reverse_coefficient_sum"):
        batch[name][0] = 1.5


@pytest.fixture(scope="module")
def filled(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Filled]:
    path = tmp_path_factory.mktemp("filled") / "filled.duckdb"
    with store.database.create(path, threads=1) as database:
        yield fill(database, seed=3)
