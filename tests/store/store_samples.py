"""Invented sweeps for the tests of the store: every claim, status, window and test group."""

from __future__ import annotations

import json
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from store.database import Database
from store.records import (
    ChoiceRecord,
    FindingRecord,
    RequestRecord,
    SweepChoiceRecord,
    SweepRecord,
)
from store.schema import AXES
from store.write import SweepWriter

# label, entry kind, positions, length, orientation, test group size, scale group
LABELS: dict[str, list[dict[str, Any]]] = {
    "lags": [{"label": "1"}, {"label": "2"}, {"label": "AIC"}],
    "deterministics": [{"label": "constant"}, {"label": "linear trend"}],
    "window": [
        {"label": "full sample"},
        {"label": "before 2009"},
        {"label": "rolling 40", "entry_kind": "rolling", "positions": 7, "length": 40},
        {"label": "expanding 30", "entry_kind": "expanding", "positions": 4, "length": 30},
    ],
    "transformation": [{"label": "log"}, {"label": "=log difference"}],
    "test": [
        {"label": "F", "group": 2, "scale_group": "plain"},
        {"label": "Wald", "group": 2, "scale_group": "plain"},
        {"label": "F, HC3", "scale_group": "plain"},
    ],
    "conditioning": [{"label": "given"}],
    "measures": [{"label": "as named"}, {"label": "freight: tonnes", "orientation": -1}],
}
CLAIMS = ("leads", "leads one way", "leads both ways", "does not lead")


@dataclass
class Sample:
    """What one call of begin() needs, and the codes that it used."""

    sweep: SweepRecord
    findings: list[FindingRecord]
    choices: list[SweepChoiceRecord]
    positions: dict[str, np.ndarray]
    codes: dict[str, list[int]] = field(default_factory=dict)


def token(axis: str, index: int) -> tuple[int, int]:
    rng = np.random.default_rng([AXES.index(axis), index])
    high, low = rng.integers(0, 2**64, size=2, dtype=np.uint64)
    return int(high), int(low)


def finding(number: int = 0, **changes: Any) -> FindingRecord:
    values: dict[str, Any] = {
        "finding": number, "name": f"freight leads rents {number}", "cause": "freight",
        "effect": "rents", "given": "diesel", "exogenous": "", "claim": "leads", "sign": 0,
        "reverse_sign": 0, "data_high": 2**64 - 1, "data_low": 7, "required_mask": 0b011,
        "baseline_high": 0, "baseline_low": 0,
    }  # fmt: skip
    return FindingRecord(**values | changes)


def sample(
    writer: SweepWriter,
    findings: list[FindingRecord],
    labels: dict[str, list[dict[str, Any]]] = LABELS,
    **changes: Any,
) -> Sample:
    """Register the choices and return what begin() needs."""
    values: dict[str, Any] = {
        "plan_digest": "digest", "plan_toml": "title = 'x'", "title": "Harbour", "seed": 1,
        "significance": 0.05, "numerics": "1", "design": "full", "data_note": "{}",
        "versions": "{}",
    }  # fmt: skip
    codes = {}
    choices = []
    position_rows = []
    for axis in AXES:
        entries = labels[axis]
        records = [
            ChoiceRecord(*token(axis, i), entry["label"], json.dumps({"n": i}))
            for i, entry in enumerate(entries)
        ]
        codes[axis] = writer.register_choices(axis, records)
        for f in findings:
            for i, entry in enumerate(entries):
                positions = entry.get("positions", 1)
                weight = 1 / positions if axis == "window" else 1 / entry.get("group", 1)
                data = (f.data_high, f.data_low + i) if axis == "measures" else (0, 0)
                choices.append(
                    SweepChoiceRecord(
                        f.finding,
                        axis,
                        codes[axis][i],
                        entry["label"],
                        "",
                        i == 0,
                        i,
                        weight,
                        entry.get("orientation", 1),
                        entry.get("entry_kind", ""),
                        positions,
                        entry.get("scale_group", ""),
                        entry.get("length", 0),
                        0,
                        *data,
                    )
                )
                if axis == "window":
                    position_rows += [(f.finding, codes[axis][i], p, i) for p in range(positions)]
    table = np.array(position_rows, dtype=np.int64)
    start = np.datetime64("2000-01-01") + 31 * table[:, 2]
    positions_ = {
        "finding": table[:, 0].astype(np.int16),
        "window": table[:, 1].astype(np.int16),
        "position": table[:, 2].astype(np.int32),
        "window_start": start,
        "window_end": start + 1000 * (table[:, 3] + 1),
    }
    return Sample(SweepRecord(**values | changes), findings, choices, positions_, codes)


def planned(content: Sample, number: int, index: int = 0) -> dict[str, np.ndarray]:
    """Return the full cross of one finding with its specification ids."""
    windows = {c.code: c.positions for c in content.choices if c.axis == "window"}
    grids = np.meshgrid(*[np.arange(len(content.codes[axis])) for axis in AXES], indexing="ij")
    picks = {axis: grid.ravel() for axis, grid in zip(AXES, grids, strict=True)}
    repeats = np.array([windows[c] for c in content.codes["window"]])[picks["window"]]
    rows = np.repeat(np.arange(len(repeats)), repeats)
    position = np.concatenate([np.arange(r) for r in repeats])
    columns = {
        axis: np.array(content.codes[axis], dtype=np.int16)[picks[axis]][rows] for axis in AXES
    }
    high = np.full(len(rows), index, dtype=np.uint64)
    low = position.astype(np.uint64) * np.uint64(1_000_003)
    for axis in AXES:
        tokens = np.array([token(axis, i) for i in range(len(content.codes[axis]))], np.uint64)
        high += tokens[picks[axis][rows], 0]
        low += tokens[picks[axis][rows], 1]
    return columns | {
        "row": np.arange(len(rows)), "finding": np.full(len(rows), number, dtype=np.int16),
        "spec_high": high, "spec_low": low, "position": position.astype(np.int32),
    }  # fmt: skip


def outcomes(
    rows: dict[str, np.ndarray], rng: np.random.Generator, reasons: tuple[int, int] = (0, 0)
) -> dict[str, np.ndarray]:
    """Return random outcomes for planned rows: all statuses, screens, missing signs."""
    size = len(rows["row"])
    status = rng.choice([0, 0, 0, 0, 0, 0, 1, 2, 3], size=size).astype(np.int8)
    reverse = np.where(rng.random(size) < 0.1, 2, status).astype(np.int8)
    levels = np.array([0.0, 0.005, 0.01, 0.03, 0.05, 0.07, 0.1, 0.4, 1.0])

    def number(okay: np.ndarray, values: np.ndarray) -> np.ndarray:
        return np.where(okay, values, np.nan)

    okay, back = status == 0, reverse == 0
    signed = okay & (rng.random(size) < 0.9)
    batch = {name: rows[name] for name in ("finding", "spec_high", "spec_low", "position", *AXES)}
    return batch | {
        "request": rows.get("request", np.zeros(size, dtype=np.int16)),
        "computation": rng.integers(0, max(size * 2 // 3, 1), size).astype(np.uint64),
        "order_used": np.where(okay, rng.integers(1, 5, size), -1).astype(np.int16),
        "observations": number(okay, rng.integers(50, 90, size)),
        "statistic": number(okay, rng.exponential(size=size)),
        "df_num": np.where(okay, 2, -1), "df_den": number(okay & (rng.random(size) < 0.5),
                                                          np.full(size, 60)),
        "p_value": number(okay, rng.choice(levels, size)),
        "coefficient_sum": number(signed, rng.normal(size=size)),
        "coefficient_sum_se": number(signed, rng.exponential(size=size)),
        "signed_partial_r2": number(signed, rng.normal(size=size) / 10),
        "standardised_sum": number(signed, rng.normal(size=size)),
        "reverse_statistic": number(back, rng.exponential(size=size)),
        "reverse_p_value": number(back, rng.choice(levels, size)),
        "reverse_coefficient_sum": number(back, rng.normal(size=size)),
        "status": status, "reverse_status": reverse,
        "reason": np.choose(status, [0, reasons[0], reasons[1], 0]).astype(np.int16),
        "solver": np.where(okay, 1, 0), "failed_mask": np.where(okay, rng.choice([0, 0, 1, 2, 4, 5],
                                                                                 size), 0),
        "reverse_failed_mask": np.where(back, rng.choice([0, 0, 0, 2], size), 0),
    }  # fmt: skip


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


@dataclass
class Filled:
    """A store with one random sweep of nine findings."""

    db: Database
    sweep: int
    content: Sample


def fill(
    db: Database,
    seed: int,
    significance: float = 0.05,
    labels: dict[str, list[dict[str, Any]]] = LABELS,
) -> Filled:
    """Write one random sweep: all claims, signs, statuses, screens, windows and requests.

    The first label of each axis is the baseline's; of a moving window the last position.
    """
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
    content = sample(writer, rules, labels, significance=significance)
    home = labels["window"][0].get("positions", 1) - 1
    requests = [RequestRecord(1, "longer lags", "referee 2", "What about 12 lags?")]
    sweep = writer.begin(
        content.sweep, content.findings, content.choices, content.positions, requests
    )
    for record in rules:
        rows = planned(content, record.finding, record.finding)
        size = len(rows["row"])
        rows["request"] = (rng.random(size) < 0.1).astype(np.int16)
        # The baseline is always planned.
        rows["request"][home] = 0
        batch = outcomes(rows, rng, reasons)
        if record.finding != 8:
            _make_baseline_ok(batch, home)
        writer.write(sweep, batch)
    return Filled(db, sweep, content)


def _make_baseline_ok(batch: dict[str, np.ndarray], home: int) -> None:
    """Give the baseline numbers in both directions."""
    for name in ("status", "reverse_status", "reason", "failed_mask", "reverse_failed_mask"):
        batch[name][home] = 0
    for name, value in (("p_value", 0.03), ("reverse_p_value", 0.4)):
        batch[name][home] = value
    for name in ("statistic", "reverse_statistic", "coefficient_sum", "reverse_coefficient_sum"):
        batch[name][home] = 1.5
