"""A small report with friendly and with hostile names."""

from __future__ import annotations

import datetime
import json

import counted_frames

from sweep.report.content import content_of
from sweep.report.page import page

HOSTILE = '<script>window.hit=1</script>"\'</script><img src=x onerror="window.hit=2">{{7*7}}\u2028'


def sweep_info(**changes: object) -> dict[str, object]:
    """What the store records about a sweep."""
    return {
        "title": "Does harbour freight lead warehouse rents?",
        "significance": 0.05,
        "design": "full",
        "data_note": json.dumps({"file": "harbour.csv", "source": "Invented", "rows": 360}),
        "versions": json.dumps({"crosswind": "0.1.0", "numpy": "2.4.6"}),
        "plan_digest": "ab" * 16,
        "plan_toml": 'title = "A <plan>"\n',
        "seed": 20260401,
        "numerics": "lagged regression 1",
        "started": datetime.datetime(2026, 12, 1, 6, 0),
        "finished": None,
        "wall_seconds": 2.5,
        "rows": 600,
    } | changes


def content(hostile: bool = False, **changes: object):
    """A report's content with one finding, or with a second one whose names are hostile."""
    moving = {"rolling 120": ("rolling", 120, 6)}
    friendly = counted_frames.Sweep(
        lags=["4", "1", "8"],
        window=["full sample", "rolling 120"],
        moving=moving,
        transformation=["log difference", "log"],
        not_applicable=("log",),
        reported=("3.42", None, 355),
    )
    sweeps = [friendly]
    if hostile:
        sweeps.append(
            counted_frames.Sweep(
                cause=HOSTILE,
                effect=HOSTILE,
                given=HOSTILE,
                lags=["4", HOSTILE],
                window=["full sample", HOSTILE],
                moving={HOSTILE: ("rolling", 60, 4)},
                transformation=["log", HOSTILE],
                deterministics=["constant"],
                not_applicable=(),
            )
        )
        changes = {
            "title": HOSTILE,
            "plan_toml": HOSTILE,
            "data_note": json.dumps({HOSTILE: HOSTILE}),
        } | changes
    records = [
        counted_frames.finding_of(one) | {"finding": number}
        for number, one in enumerate(sweeps, start=1)
    ]
    frames = {number: counted_frames.frames_of(one) for number, one in enumerate(sweeps, start=1)}
    return content_of(
        sweep_info(**changes),
        records,
        frames,
        redundancies={1: ["LR and LM with the classical covariance are F in other dress."]},
        ruled_out=[f"{HOSTILE}: 12 rows, because the author holds it indefensible."]
        if hostile
        else [],
    )


def written(hostile: bool = False, **changes: object) -> str:
    """The page of that content."""
    return page(content(hostile, **changes))
