"""The rules of survival written row by row, the slow and obvious way, on the raw tables.

Nothing here is shared with the SQL of the views; the tests hold the two against each other.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pandas as pd

from store.database import Database
from store.schema import AXES

STATUS = ["ok", "not applicable", "infeasible", "failed"]
SIGNLESS = "the claim has a sign and this test gives none"


def judged_rows(db: Database, sweep: int) -> pd.DataFrame:
    """Judge every stored row of a sweep by the words of its claim."""
    significance = db.scalar("SELECT significance FROM sweep WHERE sweep = ?", [sweep])
    findings = {
        row["finding"]: row
        for row in db.frame("SELECT * FROM finding WHERE sweep = ?", [sweep]).to_dict("records")
    }
    choices = {
        (row["finding"], row["axis"], row["code"]): row
        for row in db.frame("SELECT * FROM sweep_choice WHERE sweep = ?", [sweep]).to_dict(
            "records"
        )
    }
    reasons = dict(db.execute("SELECT code, text FROM reason"))
    ruled = dict(db.execute("SELECT code, ruled FROM reason"))
    screens = db.execute("SELECT bit, name FROM screen ORDER BY bit")
    raw = db.frame("SELECT * FROM outcome WHERE sweep = ?", [sweep]).astype(object)
    rows = []
    for row in raw.where(raw.notna(), None).to_dict("records"):
        picks = {axis: choices[row["finding"], axis, row[axis]] for axis in AXES}
        verdict = judge(row, findings[row["finding"]], picks, significance)
        mask = verdict["counted_mask"]
        verdict["failed_screens"] = ", ".join(n for bit, n in screens if mask >> bit & 1)
        verdict["required_failed"] = ", ".join(
            n
            for bit, n in screens
            if mask >> bit & 1 and findings[row["finding"]]["required_mask"] >> bit & 1
        )
        verdict["reason_text"] = (
            SIGNLESS if verdict["lacks_sign"] else reasons.get(row["reason"], "")
        )
        verdict["ruled"] = bool(ruled.get(row["reason"], False)) and not verdict["lacks_sign"]
        verdict["is_baseline"] = row["request"] == 0 and all(
            p["is_baseline"] for p in picks.values()
        )
        verdict["changes"] = sum(not p["is_baseline"] for p in picks.values())
        for axis in AXES:
            verdict[f"{axis}_label"] = picks[axis]["label"]
        verdict["orientation"] = picks["measures"]["orientation"]
        verdict["form"] = picks["test"]["scale_group"]
        verdict["specification"] = f"{row['spec_high']:016x}{row['spec_low']:016x}"
        rows.append(row | verdict)
    return pd.DataFrame(rows)


def judge(
    row: dict[str, Any], finding: dict[str, Any], picks: dict[str, Any], level: float
) -> dict[str, Any]:
    """Judge one row."""
    claim = finding["claim"]
    two_way = claim in ("leads one way", "leads both ways")
    status = max(row["status"], row["reverse_status"]) if two_way else row["status"]
    orientation = picks["measures"]["orientation"]
    signs = []
    if claim != "does not lead" and finding["sign"]:
        signs.append((finding["sign"], row["coefficient_sum"]))
    if claim == "leads both ways" and finding["reverse_sign"]:
        signs.append((finding["reverse_sign"], row["reverse_coefficient_sum"]))
    lacks_sign = status == 0 and any(value is None for _, value in signs)
    if lacks_sign:
        status = 1
    mask = row["failed_mask"]
    if two_way:
        mask |= row["reverse_failed_mask"]
    screened = status == 0 and (mask & finding["required_mask"]) != 0
    signs_right = status == 0 and all(np.sign(v) * orientation == claimed for claimed, v in signs)

    def p_part(a: float) -> bool:
        forward, reverse = row["p_value"], row["reverse_p_value"]
        if claim == "leads":
            return forward <= a
        if claim == "leads one way":
            return forward <= a and reverse > a
        if claim == "leads both ways":
            return forward <= a and reverse <= a
        return forward > a

    survives = (p_part(level) and signs_right) if status == 0 else None
    if row["status"] or row["reverse_status"]:
        verdict = "undetermined"
    else:
        forward, reverse = row["p_value"] <= level, row["reverse_p_value"] <= level
        verdict = {
            (True, True): "both ways",
            (True, False): "one way",
            (False, True): "reverse",
            (False, False): "neither rejected",
        }[bool(forward), bool(reverse)]
    admissible = status == 0 and not screened
    return {
        "counted_status": status,
        "lacks_sign": lacks_sign,
        "counted_mask": mask,
        "counted_as": "screened out"
        if screened
        else "admissible"
        if admissible
        else STATUS[status],
        "admissible": admissible,
        "survives": survives,
        "other_sign": status == 0 and p_part(level) and not signs_right,
        "at": {a: status == 0 and p_part(a) and signs_right for a in (0.01, 0.05, 0.10)},
        "verdict": verdict,
        "weight": picks["window"]["weight"] * picks["test"]["weight"],
    }


def survival(judged: pd.DataFrame) -> pd.DataFrame:
    """Count survival over all and by choice from judged rows."""
    out = []
    kept = judged[judged["request"] == 0]
    for finding, part in kept.groupby("finding"):
        out.append({"finding": finding, "axis": "all", "choice": "all"} | _counts(part))
        for axis in AXES:
            for _, rows in part.groupby(axis):
                label = rows[f"{axis}_label"].iloc[0]
                out.append({"finding": finding, "axis": axis, "choice": label} | _counts(rows))
    return pd.DataFrame(out)


def _counts(rows: pd.DataFrame) -> dict[str, Any]:
    admissible = rows[rows["admissible"]]
    total = admissible["weight"].sum()
    survived = admissible["survives"].astype(bool)

    def share(flags: pd.Series) -> float:
        return admissible["weight"][flags].sum() / total if total else np.nan

    return {
        "planned": len(rows),
        "not_applicable": (rows["counted_as"] == "not applicable").sum(),
        "infeasible": (rows["counted_as"] == "infeasible").sum(),
        "failed": (rows["counted_as"] == "failed").sum(),
        "screened_out": (rows["counted_as"] == "screened out").sum(),
        "admissible": len(admissible),
        "survived": survived.sum(),
        "other_sign": admissible["other_sign"].sum(),
        "distinct": admissible["computation"].nunique(),
        "raw_share": survived.mean() if len(admissible) else np.nan,
        "headline_share": share(survived),
        **{
            f"share_at_{round(100 * a)}": share(admissible["at"].map(lambda at, a=a: at[a]) == True)  # noqa: E712
            for a in (0.01, 0.05, 0.10)
        },
        "median_p_value": admissible["p_value"].astype(float).median(),
    }
