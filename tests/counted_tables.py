"""Frames of the tables beside the report, to go with the invented sweeps of ``counted_frames``."""

from __future__ import annotations

from typing import Any

import pandas as pd


def alternatives_frame(single_changes: pd.DataFrame, baseline: pd.DataFrame) -> pd.DataFrame:
    """The baseline and every single change with their numbers."""
    home = baseline.iloc[0]
    labels = {
        "lags": "lags_choice", "deterministics": "deterministics", "window": "window_name",
        "transformation": "transformation", "test": "test", "conditioning": "conditioning",
        "measures": "measures",
    }  # fmt: skip
    own = {label: home[label] for label in labels.values()}
    rows = [_row("baseline", own, home.to_dict() | {"positions": 1, "flips": 0}, home)]
    for record in single_changes.to_dict("records"):
        changed = own | {labels[record["axis"]]: record["choice"]}
        rows.append(_row(record["axis"], changed, record, home))
    return pd.DataFrame(rows)


def _row(axis: str, labels: dict[str, Any], record: dict[Any, Any], home: Any) -> dict[str, Any]:
    one = record["positions"] == 1 and record["status"] == "ok"
    return {
        "axis": axis, **labels, "test_meaning": '{"statistic":"F","covariance":"HC3"}',
        "positions": record["positions"], "admissible": int(record["admissible"]),
        "survived": int(bool(record.get("survived", record.get("survives")))),
        "flips": record["flips"], "order_least": 4, "order_most": 4 if one else 8,
        "observations_least": 351, "observations_most": 351 if one else 355,
        "statistic": 3.42 if one else None, "reverse_statistic": 1.02 if one else None,
        "df_num": 4 if one else None, "df_den": 342 if one else None,
        "p_value": record["p_value"], "reverse_p_value": record["reverse_p_value"],
        "coefficient_sum": record["coefficient_sum"],
        "coefficient_sum_se": 0.08 if one else None, "reverse_coefficient_sum": -0.02,
        "window_start": home["window_start"], "window_end": home["window_end"],
        "status": record["status"], "reason": record["reason"],
        "specification": record["specification"],
    }  # fmt: skip


def lag_selection_frame() -> pd.DataFrame:
    """Four orders, of which two rules choose the third."""
    return pd.DataFrame(
        {
            "order": [1, 2, 3, 4], "log_likelihood": [-668.97, -647.05, -636.64, -624.7],
            "lr_statistic": [173.8, 43.8, 20.8, 23.8], "lr_df": 9,
            "lr_p_value": [0.0, 1e-6, 0.0134, 0.3], "fpe": [0.233, 2e-7, 0.2, 0.195],
            "aic": [-1.457, -1.591, -1.605, -1.636], "hq": [-1.37, -1.44, -1.4, -1.3],
            "bic": [-1.254, -1.236, -1.098, -0.9], "chosen_by": ["", "", "AIC, BIC", "FPE"],
            "observations": 193, "equations": 3, "terms": 1, "first": "1961-Q3",
            "last": "2009-Q3", "asked": 8, "scope": "system", "level": 0.05, "order_used": 4,
            "rule": "",
        }
    )  # fmt: skip


def list_size_frame(rows: int) -> pd.DataFrame:
    """The length of the long list."""
    return pd.DataFrame([{"rows": rows}])
