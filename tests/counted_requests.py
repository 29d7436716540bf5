"""Frames of requests to go with the invented sweeps of ``counted_frames``."""

from __future__ import annotations

import pandas as pd

# Who asks, the name, the question, and the axes whose changes it asks for.
ASKED = (
    ("Referee 2", "comment 4", "Does it hold with other lags?", ("lags",)),
    ("", "a=b & <c>", "", ("test", "window")),
    ("Referee 3", "all as reported", "Is it reproduced?", ()),
)
_TAKEN = (
    "positions", "admissible", "survived", "p_value", "p_low", "p_high", "reverse_p_value",
    "coefficient_sum", "status", "reason", "specification", "baseline_p_value",
    "baseline_survives",
)  # fmt: skip


def answers_frame(single_changes: pd.DataFrame) -> pd.DataFrame:
    """The single changes of the asked axes, as the answers to requests."""
    found = []
    for number, (asked_by, name, asks, axes) in enumerate(ASKED, start=1):
        own = single_changes[single_changes["axis"].isin(axes)]
        for row in own.to_dict("records"):
            words = {
                "request": number, "request_name": name, "asked_by": asked_by, "asks": asks,
                "changes": 1, "changed": f"{row['axis']} {row['choice']}", "planned": number == 1,
            }  # fmt: skip
            one = row["positions"] == 1 and row["status"] == "ok"
            numbers = {
                "order_used": 4 if one else None, "observations": 150 if one else None,
                "statistic": 3.2 if one else None, "df_num": 4 if one else None,
                "df_den": 138 if one else None, "coefficient_sum_se": 0.2 if one else None,
            }  # fmt: skip
            found.append(words | numbers | {key: row[key] for key in _TAKEN})
    columns = [
        "request", "request_name", "asked_by", "asks", "changes", "changed", "planned",
        "order_used", "observations", "statistic", "df_num", "df_den", "coefficient_sum_se",
        *_TAKEN,
    ]  # fmt: skip
    return pd.DataFrame(found, columns=columns)


def requests_frame(survival: pd.DataFrame) -> pd.DataFrame:
    """Counts of the rows that each request added; the last one added none."""
    whole = survival[survival["axis"] == "all"].iloc[0]
    found = []
    for number, (asked_by, name, asks, axes) in enumerate(ASKED, start=1):
        some = bool(axes)
        admissible = int(whole["admissible"]) if some else 0
        survived = int(whole["survived"]) if some else 0
        found.append(
            {
                "request": number, "request_name": name, "asked_by": asked_by, "asks": asks,
                "added": int(whole["planned"]) if some else 0,
                "not_applicable": int(whole["not_applicable"]) if some else 0,
                "infeasible": int(whole["infeasible"]) if some else 0,
                "failed": int(whole["failed"]) if some else 0,
                "screened_out": int(whole["screened_out"]) if some else 0,
                "admissible": admissible, "survived": survived, "distinct": admissible,
                "raw_share": survived / admissible if admissible else None,
                "weighted_share": survived / admissible if admissible else None,
                "concerned": True,
            }
        )  # fmt: skip
    return pd.DataFrame(found)
