"""Synthetic sweeps, counted into the frames that the store hands to charts and reports.

A sweep is made one specification at a time and counted with plain pandas, so that the
frames agree with each other the way real ones do.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass, field
from statistics import NormalDist

import counted_flips
import counted_tables
import numpy as np
import pandas as pd
from counted_requests import answers_frame, requests_frame
from counted_windows import window_paths_frame

AXES = ("lags", "deterministics", "window", "transformation", "test", "conditioning", "measures")
STATUS = {"na": "not applicable", "infeasible": "infeasible", "failed": "failed"}


@dataclass
class Sweep:
    """Axes (first choice of each is the baseline's) and how p-values come about."""

    lags: list[str] = field(default_factory=lambda: ["4", "1", "2", "8", "AIC"])
    deterministics: list[str] = field(
        default_factory=lambda: ["constant", "linear trend", "constant and seasonal dummies"]
    )
    window: list[str] = field(
        default_factory=lambda: [
            "full sample",
            "before 2009",
            "without 2020-03 to 2021-06",
            "rolling 120",
        ]
    )
    transformation: list[str] = field(
        default_factory=lambda: ["log difference", "log", "yearly growth"]
    )
    test: list[str] = field(default_factory=lambda: ["F", "F, HC3 covariance", "Wald"])
    conditioning: list[str] = field(default_factory=lambda: ["given", "pairwise"])
    measures: list[str] = field(default_factory=lambda: ["as named"])
    moving: dict[str, tuple[str, int, int]] = field(
        default_factory=lambda: {"rolling 120": ("rolling", 120, 40)}
    )
    cause: str = "freight"
    effect: str = "rents"
    given: str = "diesel"
    claim: str = "leads"
    significance: float = 0.05
    centre: float = 2.9
    spread: float = 0.9
    seed: int = 7
    weak: tuple[str, ...] = ("F, HC3 covariance", "pairwise")
    not_applicable: tuple[str, ...] = ()
    changes: int = len(AXES)
    reported: tuple[str | None, str | None, int | None] = (None, None, None)

    @property
    def axes(self) -> dict[str, list[str]]:
        return {axis: getattr(self, axis) for axis in AXES}


def rows_of(sweep: Sweep) -> pd.DataFrame:
    """One row a specification, all axes crossed and moving windows laid out by position."""
    rng = np.random.default_rng(sweep.seed)
    normal = NormalDist()
    shift = {c: rng.normal(0, 0.35) for choices in sweep.axes.values() for c in choices}
    start, end = pd.Timestamp("1995-01-01"), pd.Timestamp("2024-12-01")
    found = []
    for number, combination in enumerate(itertools.product(*sweep.axes.values())):
        choices = dict(zip(AXES, combination, strict=True))
        if sum(choices[axis] != sweep.axes[axis][0] for axis in AXES) > sweep.changes:
            continue
        kind, length, positions = sweep.moving.get(choices["window"], ("fixed", 0, 1))
        for position in range(positions):
            z = (
                sweep.centre
                + sum(shift[c] for c in combination)
                + rng.normal(0, sweep.spread * 0.3)
            )
            z -= sum(0.9 for c in combination if c in sweep.weak)
            first, last = start, end
            if kind != "fixed":
                z += sweep.spread * np.sin(position / max(positions, 1) * 6)
                last = start + pd.DateOffset(months=length + 5 * position)
                first = last - pd.DateOffset(months=length)
            p = float(np.clip(2 * (1 - normal.cdf(max(z, 0.001))), 1e-12, 1))
            status = "ok"
            if any(c in sweep.not_applicable for c in combination):
                status = "not applicable"
            elif choices["lags"] in ("8", "12") and kind == "rolling" and position < 3:
                status = "infeasible"
            elif number % 211 == 17:
                status = "failed"
            ok = status == "ok"
            found.append(
                choices
                | {
                    "specification": f"{number * 1000 + position:032x}",
                    "entry_kind": kind,
                    "length": length or None,
                    "positions": positions,
                    "position": position,
                    "window_start": first,
                    "window_end": last,
                    "status": status,
                    "reason": None if ok else f"{status} for an invented reason",
                    "p_value": p if ok else None,
                    "reverse_p_value": float(rng.uniform(0, 1)) if ok else None,
                    "coefficient_sum": float(rng.normal(0.2, 0.1)) if ok else None,
                    # Designs that change few choices at a time pool nothing.
                    "weight": 1.0 / positions if sweep.changes == len(AXES) else 0.0,
                    "computation": number * 1000 + position,
                    "order_used": 4,
                }
            )
    rows = pd.DataFrame(found)
    a = sweep.significance
    rows["admissible"] = (rows["status"] == "ok") & ~(rows["specification"].str[-1] == "7")
    rows["screened_out"] = (rows["status"] == "ok") & ~rows["admissible"]
    forward, backward = rows["p_value"] <= a, rows["reverse_p_value"] <= a
    holds = {
        "leads": forward,
        "leads one way": forward & ~backward,
        "leads both ways": forward & backward,
        "does not lead": ~forward,
    }[sweep.claim]
    rows["survives"] = holds & rows["admissible"]
    rows["verdict"] = np.select(
        [rows["status"] != "ok", forward & backward, forward, backward],
        ["undetermined", "both ways", "one way", "reverse"],
        "neither rejected",
    )
    rows["is_baseline"] = np.logical_and.reduce(
        [rows[axis] == sweep.axes[axis][0] for axis in AXES]
    ) & (rows["position"] == 0)
    return rows


def _counts(rows: pd.DataFrame) -> dict[str, object]:
    good = rows[rows["admissible"]]
    weight = good["weight"].sum()

    def share(level: float) -> float | None:
        return (
            float((good["weight"] * (good["p_value"] <= level)).sum() / weight) if weight else None
        )

    return {
        "planned": len(rows),
        "not_applicable": int((rows["status"] == "not applicable").sum()),
        "infeasible": int((rows["status"] == "infeasible").sum()),
        "failed": int((rows["status"] == "failed").sum()),
        "screened_out": int(rows["screened_out"].sum()),
        "not_run": 0,
        "admissible": len(good),
        "survived": int(good["survives"].sum()),
        "other_sign": 0,
        "distinct": int(good["computation"].nunique()),
        "raw_share": float(good["survives"].mean()) if len(good) else None,
        "headline_share": float((good["weight"] * good["survives"]).sum() / weight)
        if weight
        else None,
        "share_at_1": share(0.01),
        "share_at_5": share(0.05),
        "share_at_10": share(0.10),
        "median_p_value": float(good["p_value"].median()) if len(good) else None,
    }


def survival_frame(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    head = {"sweep": 1, "finding": 1}
    found = [
        head
        | {"axis": "all", "choice": "all", "code": 0, "choice_position": 0, "is_baseline": False}
        | _counts(rows)
    ]
    for axis, choices in sweep.axes.items():
        for place, choice in enumerate(choices):
            own = {
                "axis": axis,
                "choice": choice,
                "code": place,
                "choice_position": place,
                "is_baseline": place == 0,
            }
            found.append(head | own | _counts(rows[rows[axis] == choice]))
    return pd.DataFrame(found)


def baseline_frame(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    row = rows[rows["is_baseline"]].iloc[0]
    ok = row["status"] == "ok"
    return pd.DataFrame(
        [
            {
                "sweep": 1,
                "finding": 1,
                "cause": sweep.cause,
                "effect": sweep.effect,
                "given": sweep.given,
                "claim": sweep.claim,
                "specification": row["specification"],
                "origin": "planned",
                "lags_choice": row["lags"],
                "deterministics": row["deterministics"],
                "window_name": row["window"],
                "window_entry": row["entry_kind"],
                "window_start": row["window_start"],
                "window_end": row["window_end"],
                "transformation": row["transformation"],
                "test": row["test"],
                "conditioning": row["conditioning"],
                "measures": row["measures"],
                "lags": 4,
                "observations": 355,
                "statistic": 3.4217 if ok else None,
                "df_num": 4,
                "df_den": 342,
                "p_value": row["p_value"],
                "coefficient_sum": row["coefficient_sum"],
                "coefficient_sum_se": 0.08,
                "signed_partial_r2": 0.038,
                "standardised_sum": 0.21,
                "reverse_statistic": 1.02,
                "reverse_p_value": row["reverse_p_value"],
                "request": None,
                "computation": row["computation"],
                "solver": "cholesky",
                "reverse_status": "ok",
                "status": row["status"],
                "reason": row["reason"],
                "admissible": bool(row["admissible"]),
                "failed_screens": "",
                "survives": bool(row["survives"]) if ok else None,
                "verdict": row["verdict"],
                "is_baseline": True,
            }
        ]
    )


def windows_frame(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    found = []
    for name in sweep.window:
        for position, own in rows[rows["window"] == name].groupby("position"):
            good = own[own["admissible"]]
            found.append(
                {
                    "window_name": name,
                    "entry_kind": own["entry_kind"].iloc[0],
                    "length": own["length"].iloc[0],
                    "window_start": own["window_start"].iloc[0],
                    "window_end": own["window_end"].iloc[0],
                    "position": position,
                    "planned": len(own),
                    "admissible": len(good),
                    "survived": int(good["survives"].sum()),
                    "share": float(good["survives"].mean()) if len(good) else None,
                    "median_p": good["p_value"].median() if len(good) else None,
                    "p_low": good["p_value"].quantile(0.25) if len(good) else None,
                    "p_high": good["p_value"].quantile(0.75) if len(good) else None,
                    "pooled": 1,
                }
            )
    return pd.DataFrame(found)


def _at_levels(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    """The rows with one column of zeros and ones for everything that the cube counts."""
    counted = rows.assign(planned=1, undetermined=rows["verdict"] == "undetermined")
    for status in ("not applicable", "infeasible", "failed"):
        counted[status.replace(" ", "_")] = rows["status"] == status
    counted["undetermined"] &= rows["admissible"]
    levels = {"": sweep.significance, "_1": 0.01, "_5": 0.05, "_10": 0.10}
    for tail, level in levels.items():
        forward = rows["admissible"] & (rows["p_value"] <= level)
        backward = rows["admissible"] & (rows["reverse_p_value"] <= level)
        counted[f"survived{tail}"] = forward
        counted[f"other_sign{tail}"] = False
        counted[f"one_way{tail}"] = forward & ~backward
        counted[f"reverse{tail}"] = backward & ~forward
        counted[f"both_ways{tail}"] = forward & backward
    for axis, choices in sweep.axes.items():
        counted[f"{axis}_place"] = (
            [choices.index(choice) for choice in rows[axis]] if len(choices) > 1 else -1
        )
    return counted


AT_LEVELS = [
    f"{name}{tail}"
    for tail in ("", "_1", "_5", "_10")
    for name in ("survived", "other_sign", "one_way", "reverse", "both_ways")
]


def cube_frame(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    losses = ["planned", "not_applicable", "infeasible", "failed", "screened_out", "admissible"]
    keys = [f"{axis}_place" for axis in AXES]
    counted = _at_levels(sweep, rows).groupby([*keys, "weight"], as_index=False)
    summed = counted[[*losses, "undetermined", *AT_LEVELS]].sum()
    return summed.rename(columns=dict(zip(keys, AXES, strict=True)))


def cube_windows_frame(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    counted = _at_levels(sweep, rows)
    counted["window_place"] = [sweep.window.index(name) for name in rows["window"]]
    counted["pooled"] = 1
    keys = ["window_place", "entry_kind", "position", "window_start", "window_end", "pooled"]
    others = [f"{axis}_place" for axis in AXES if axis != "window"]
    counts = ["admissible", "survived", "survived_1", "survived_5", "survived_10"]
    summed = counted.groupby([*keys, *others], as_index=False)[counts].sum()
    return summed.rename(
        columns={f"{axis}_place": axis for axis in AXES} | {"position": "pool"}
    )


def directions_frame(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    found = []
    rows = rows[rows["admissible"]].assign(all="all")
    for axis, choices in {"all": ["all"], **sweep.axes}.items():
        for choice in choices:
            own = rows[rows[axis] == choice]
            for verdict, count in own["verdict"].value_counts().items():
                found.append(
                    {
                        "axis": axis,
                        "choice": choice,
                        "verdict": verdict,
                        "rows": int(count),
                        "share": count / len(own),
                    }
                )
    return pd.DataFrame(found)


def _shared(rows: pd.DataFrame) -> dict[str, object]:
    good = rows[rows["admissible"]]
    if not good["weight"].sum():
        good = good.assign(weight=1.0)
    weight = float(good["weight"].sum())
    return {
        "planned": len(rows),
        "not_applicable": int((rows["status"] == "not applicable").sum()),
        "screened_out": int(rows["screened_out"].sum()),
        "admissible": len(good),
        "survived": int(good["survives"].sum()),
        "weight": weight,
        "share": float((good["weight"] * good["survives"]).sum()) / weight if weight else None,
    }


def pair_cells_frame(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    """Cells of every pair of axes, with an additive fit by dummies and least squares."""
    found: list[dict[str, object]] = []
    several = [axis for axis in AXES if len(sweep.axes[axis]) > 1]
    for row_axis, column_axis in itertools.combinations(several, 2):
        own = []
        for (row, column), part in rows.groupby([row_axis, column_axis], sort=False):
            places = sweep.axes[row_axis].index(row), sweep.axes[column_axis].index(column)
            own.append(
                {
                    "row_axis": row_axis,
                    "column_axis": column_axis,
                    "row_choice": row,
                    "column_choice": column,
                    "row_position": places[0],
                    "column_position": places[1],
                    "row_is_baseline": places[0] == 0,
                    "column_is_baseline": places[1] == 0,
                    "row_pooled": 1,
                    "column_pooled": 1,
                }
                | _shared(part)
            )
        found += _with_fit(own)
    columns = ["row_axis", "column_axis", "departure"]
    return pd.DataFrame(found) if found else pd.DataFrame(columns=columns)


def _with_fit(cells: list[dict[str, object]]) -> list[dict[str, object]]:
    cells = sorted(cells, key=lambda one: (one["row_position"], one["column_position"]))
    counted = [one for one in cells if one["share"] is not None]
    if not counted:
        return [one | {"expected": None, "departure": 0.0} for one in cells]
    rows = pd.get_dummies([one["row_choice"] for one in counted], dtype=float).to_numpy()
    columns = pd.get_dummies([one["column_choice"] for one in counted], dtype=float).to_numpy()
    root = np.sqrt([one["weight"] for one in counted])
    share = np.array([one["share"] for one in counted], dtype=float)
    design = np.hstack([rows, columns])
    effects = np.linalg.lstsq(design * root[:, None], share * root, rcond=None)[0]
    fitted = np.clip(design @ effects, 0, 1)
    gap = float(np.sqrt((root**2 * (share - fitted) ** 2).sum() / (root**2).sum()))
    fits = iter(fitted)
    return [
        one
        | {"expected": None if one["share"] is None else float(next(fits)), "departure": gap}
        for one in cells
    ]


def curve_frame(sweep: Sweep, rows: pd.DataFrame, points: int = 240) -> pd.DataFrame:
    """Estimates in order over all scales and within each, thinned by rank."""
    good = rows[rows["admissible"]]
    base = good[good["is_baseline"]]
    parts = [("all", good, good["coefficient_sum"] / 4, 0.02)]
    parts += [
        (f"{name} · as named", part, part["coefficient_sum"], 0.08)
        for name, part in good.groupby("transformation", sort=False)
    ]
    found = []
    for scale, part, estimate, error in parts:
        own = part.assign(estimate=estimate).sort_values(["estimate", "specification"])
        own = own.assign(rank=np.arange(1, len(own) + 1))
        whole = {
            "scale": scale,
            "standard_error": error,
            "admissible": len(own),
            "rows": len(own),
            "survived": int(own["survives"].sum()),
            "positive": int((own["estimate"] > 0).sum()),
            "median": own["estimate"].median(),
            "baseline_scale": scale.startswith(f"{sweep.transformation[0]} ·"),
        }
        kept = np.unique(np.round(np.linspace(0, len(own) - 1, min(points, len(own)))).astype(int))
        held = own.iloc[kept]
        if len(base) and scale in ("all", f"{sweep.transformation[0]} · as named"):
            held = own[own.index.isin([*held.index, base.index[0]])]
        found.append(held.assign(**whole))
    columns = [
        "scale", "rank", "estimate", "standard_error", "p_value", "survives", "is_baseline", *AXES,
        "specification", "admissible", "rows", "survived", "positive", "median", "baseline_scale",
    ]  # fmt: skip
    frames = [frame for frame in found if len(frame)]
    return pd.concat(frames)[columns] if frames else pd.DataFrame(columns=columns)


def _spread(values: pd.Series) -> dict[str, float]:
    return {
        "minimum": values.min(),
        "lower_quartile": values.quantile(0.25),
        "median": values.median(),
        "upper_quartile": values.quantile(0.75),
        "maximum": values.max(),
    }


def effects_frame(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    good = rows[rows["admissible"]]
    found = []
    for (transformation, measures, form), own in good.groupby(
        ["transformation", "measures", "test"]
    ):
        values = own["coefficient_sum"]
        found.append(
            {
                "scale": f"{transformation}; {measures}; {form}",
                "transformation": transformation,
                "measures": measures,
                "rows": len(own),
                "positive": int((values > 0).sum()),
                "negative": int((values < 0).sum()),
                **_spread(values),
                "is_baseline": bool(own["is_baseline"].any()),
            }
        )
    return pd.DataFrame(found)


def effects_overall_frame(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    values = rows.loc[rows["admissible"], "coefficient_sum"] / 4
    found = [
        {
            "quantity": name,
            "rows": len(values),
            "positive": int((values > 0).sum()),
            **_spread(values * factor),
        }
        for name, factor in (("signed partial R²", 0.5), ("standardised sum", 1.0))
    ]
    return pd.DataFrame(found)


def attrition_frame(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    found = []
    for status in ("not applicable", "infeasible", "failed"):
        own = rows[rows["status"] == status]
        for reason, count in own["reason"].value_counts().items():
            found.append({"status": status, "reason": reason, "rows": int(count), "ruled": False})
    screened = int(rows["screened_out"].sum())
    if screened:
        found.append(
            {
                "status": "screened out",
                "reason": "enough observations",
                "rows": screened,
                "ruled": False,
            }
        )
    return pd.DataFrame(found, columns=["status", "reason", "rows", "ruled"])


def strata_frame(sweep: Sweep, rows: pd.DataFrame) -> pd.DataFrame:
    """Rows by window entry and weight, as if half of the cross had been drawn."""
    found = []
    for (window, baseline, weight), part in rows.groupby(
        ["window", "is_baseline", "weight"], sort=False
    ):
        found.append(
            {
                "window_name": window,
                "is_baseline": bool(baseline),
                "weight": weight,
                "rows": len(part),
                "admissible": int(part["admissible"].sum()),
                "survived": int(part["survives"].sum()),
                "size": 2.0 * int((rows["window"] == window).sum()),
            }
        )
    return pd.DataFrame(found)


# Counting a sweep in pandas takes seconds, and many tests read the same few sweeps.
_COUNTED: dict[str, dict[str, pd.DataFrame]] = {}


def frames_of(sweep: Sweep) -> dict[str, pd.DataFrame]:
    """All frames of one finding, named as the functions that read them; the caller's own."""
    name = repr(sweep)
    if name not in _COUNTED:
        _COUNTED[name] = _frames_of(sweep)
    return {frame: held.copy() for frame, held in _COUNTED[name].items()}


def _frames_of(sweep: Sweep) -> dict[str, pd.DataFrame]:
    rows = rows_of(sweep)
    makers = {
        "survival": survival_frame,
        "baseline": baseline_frame,
        **counted_flips.MAKERS,
        "windows": windows_frame,
        "cube": cube_frame,
        "cube_windows": cube_windows_frame,
        "directions": directions_frame,
        "pair_cells": pair_cells_frame,
        "curve": curve_frame,
        "effects": effects_frame,
        "effects_overall": effects_overall_frame,
        "attrition": attrition_frame,
        "strata": strata_frame,
    }
    frames = {name: make(sweep, rows) for name, make in makers.items()}
    frames["requests"] = requests_frame(frames["survival"])
    frames["answers"] = answers_frame(frames["single_changes"])
    frames["window_paths"] = window_paths_frame(rows)
    frames["alternatives"] = counted_tables.alternatives_frame(
        frames["single_changes"], frames["baseline"]
    )
    frames["lag_selection"] = counted_tables.lag_selection_frame()
    frames["list_size"] = counted_tables.list_size_frame(len(rows))
    return frames


def finding_of(sweep: Sweep) -> dict[str, object]:
    """The finding's record as the store keeps it."""
    statistic, p_value, observations = sweep.reported
    return {
        "finding": 1,
        "name": f"{sweep.cause} leads {sweep.effect}",
        "cause": sweep.cause,
        "effect": sweep.effect,
        "given": sweep.given,
        "exogenous": "",
        "claim": sweep.claim,
        "sign": 0,
        "reverse_sign": 0,
        "data_high": 0x0123456789ABCDEF,
        "data_low": 0xFEDCBA9876543210,
        "required_mask": 1,
        "baseline_high": 1,
        "baseline_low": 2,
        "reported_statistic": statistic,
        "reported_p_value": p_value,
        "reported_observations": observations,
        "reported_tolerance": None,
    }


def crowded(count: int, **changes: object) -> Sweep:
    """A sweep whose lag axis has ``count`` choices and whose other axes are short."""
    return Sweep(
        lags=[str(order) for order in range(1, count + 1)],
        window=["full sample", "before 2009"],
        transformation=["log difference"],
        test=["F", "F, HC3 covariance"],
        conditioning=["given"],
        moving={},
        **changes,
    )
