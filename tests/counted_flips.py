"""Changes away from the baseline of a synthetic sweep, counted by enumeration with plain pandas."""

from __future__ import annotations

from itertools import combinations, product
from statistics import NormalDist
from typing import Any

import numpy as np
import pandas as pd

AXES = ("lags", "deterministics", "window", "transformation", "test", "conditioning", "measures")
TWO_WAY = ("leads one way", "leads both ways")
KINDS = {
    "joint": "two changes, neither turns alone",
    "contained": "two changes, one turns alone",
    "unsettled": "two changes, one cannot be judged alone",
}

COLUMNS = {
    "singles": """axis choice entry_kind positions rows_ok admissible survived flips flips_forward
        flips_reverse flips_sign p_value p_low p_high reverse_p_value z_change reverse_z_change
        coefficient_sum status reason specification baseline_p_value baseline_reverse_p_value
        baseline_survives axis_position choice_position""",
    "flips": """changes kind first_axis first_from first_to second_axis second_from second_to
        entry_kind positions rows_ok admissible survived flips joint contained unsettled
        flips_forward flips_reverse flips_sign p_value p_low p_high reverse_p_value z_change
        reverse_z_change first_p_value second_p_value window_start window_end specification
        baseline_p_value baseline_reverse_p_value baseline_survives""",
    "counts": "changes sets admissible turning joint contained unsettled rows flips",
    "shortest": """changes changed positions admissible flips p_value reverse_p_value window_start
        window_end specification""",
}
SINGLES, FLIPS, COUNTS, SHORTEST = (names.split() for names in COLUMNS.values())


def _z(p: Any) -> float:
    if p is None or p != p:
        return np.nan
    return min(37.0, -NormalDist().inv_cdf(min(max(float(p), 1e-300), 1 - 1e-15)))


def _base(rows: pd.DataFrame) -> pd.Series:
    return rows[rows["is_baseline"]].iloc[0]


def _turning(rows: pd.DataFrame, base: pd.Series) -> pd.Series:
    if not base["admissible"]:
        return rows["admissible"] & False
    return rows["admissible"] & (rows["survives"] != base["survives"])


class Around:
    """The rows of a sweep by their choices, seen from the baseline."""

    def __init__(self, rows: pd.DataFrame) -> None:
        self.base = _base(rows)
        self.rows = rows.assign(turns=_turning(rows, self.base))
        self.places = self.rows.groupby(list(AXES), sort=False).indices

    def at(self, changed: dict[str, str]) -> pd.DataFrame:
        """Return the rows with these choices and all others as in the baseline."""
        key = tuple(changed.get(axis, self.base[axis]) for axis in AXES)
        return self.rows.iloc[self.places.get(key, [])]

    def sets(self, sweep: Any, size: int) -> Any:
        """Yield (changed choices, their rows) for every set of that size, in plan order."""
        for axes in combinations(AXES, size):
            for choices in product(*(sweep.axes[axis][1:] for axis in axes)):
                changed = dict(zip(axes, choices, strict=True))
                yield changed, self.at(changed)

    def kinds(self, changed: dict[str, str], own: pd.DataFrame) -> dict[str, int]:
        """Count the turning rows of a pair by what its two changes do alone."""
        counts = dict.fromkeys(KINDS, 0)
        singles = {axis: self.at({axis: choice}) for axis, choice in changed.items()}
        for position in own.loc[own["turns"], "position"]:
            alone = pd.concat(
                one[one["position"] == position] if axis == "window" else one
                for axis, one in singles.items()
            )
            if alone["turns"].any():
                counts["contained"] += 1
            else:
                counts["joint" if alone["admissible"].all() else "unsettled"] += 1
        return counts


def _summed(sweep: Any, own: pd.DataFrame, base: pd.Series) -> dict[str, Any]:
    """What the rows of one set of changed choices do, over its positions."""
    ok, turns = own[own["status"] == "ok"], own[own["turns"]]
    level = sweep.significance
    numbers = {}
    for name, side in (("", "p_value"), ("reverse_", "reverse_p_value")):
        z = [_z(p) for p in ok[side]]
        numbers[side] = ok[side].median() if len(ok) else None
        numbers[f"{name}z_change"] = float(np.median(z)) - _z(base[side]) if z else None
        differs = (turns[side] <= level) != (base[side] <= level) if len(turns) else turns["turns"]
        counted = name == "" or sweep.claim in TWO_WAY
        numbers["flips_" + ("reverse" if name else "forward")] = int(differs.sum()) * counted
    return numbers | {
        "entry_kind": own["entry_kind"].iloc[0],
        "positions": len(own),
        "rows_ok": len(ok),
        "admissible": int(own["admissible"].sum()),
        "survived": int(own["survives"].sum()),
        "flips": len(turns),
        "flips_sign": 0,
        "p_low": ok["p_value"].min() if len(ok) else None,
        "p_high": ok["p_value"].max() if len(ok) else None,
        "specification": own["specification"].iloc[0] if len(own) == 1 else None,
        "baseline_p_value": base["p_value"],
        "baseline_reverse_p_value": base["reverse_p_value"],
        "baseline_survives": bool(base["survives"]) if base["admissible"] else None,
    }


def single_changes_frame(sweep: Any, rows: pd.DataFrame) -> pd.DataFrame:
    near, found = Around(rows), []
    for changed, own in near.sets(sweep, 1):
        ((axis, choice),) = changed.items()
        ok = own[own["status"] == "ok"]
        found.append(
            _summed(sweep, own, near.base)
            | {
                "axis": axis,
                "choice": choice,
                "coefficient_sum": ok["coefficient_sum"].median() if len(ok) else None,
                "status": "ok" if len(ok) else own["status"].iloc[0],
                "reason": None if len(ok) else own["reason"].iloc[0],
                "axis_position": AXES.index(axis),
                "choice_position": sweep.axes[axis].index(choice),
            }
        )
    return pd.DataFrame(found, columns=SINGLES)


def flips_frame(sweep: Any, rows: pd.DataFrame) -> pd.DataFrame:
    near, found = Around(rows), []
    for size in (1, 2):
        for changed, own in near.sets(sweep, size):
            turns = own[own["turns"]]
            if turns.empty:
                continue
            kinds = near.kinds(changed, own) if size == 2 else dict.fromkeys(KINDS, 0)
            words = (words for name, words in KINDS.items() if kinds[name])
            record = _summed(sweep, own, near.base) | kinds
            record |= {
                "changes": size,
                "kind": next(words, "one change"),
                "window_start": turns["window_start"].min(),
                "window_end": turns["window_end"].max(),
            }
            for which, (axis, choice) in zip(("first", "second"), changed.items(), strict=False):
                record[f"{which}_axis"] = axis
                record[f"{which}_from"], record[f"{which}_to"] = near.base[axis], choice
                if size == 2:
                    record[f"{which}_p_value"] = near.at({axis: choice})["p_value"].median()
            share = kinds["joint"] or len(turns)
            moved = abs(np.log(record["p_value"]) - np.log(near.base["p_value"]))
            order = (size, record["kind"] != KINDS["joint"], -share / record["admissible"], -moved)
            found.append((order, record))
    found.sort(key=lambda one: one[0])
    return pd.DataFrame([record for _, record in found], columns=FLIPS)


def flip_counts_frame(sweep: Any, rows: pd.DataFrame) -> pd.DataFrame:
    near, every, found = Around(rows), flips_frame(sweep, rows), []
    for size in (1, 2):
        sets = [own for _, own in near.sets(sweep, size) if len(own)]
        own = every[every["changes"] == size]
        record = {
            "changes": size,
            "sets": len(sets),
            "admissible": sum(bool(one["admissible"].any()) for one in sets),
            "turning": len(own),
            "rows": sum(int(one["admissible"].sum()) for one in sets),
            "flips": int(own["flips"].sum()),
        }
        record |= {name: int((own["kind"] == words).sum()) for name, words in KINDS.items()}
        if sets:
            found.append(record)
    return pd.DataFrame(found, columns=COUNTS)


def _by_distance(rows: pd.DataFrame) -> pd.DataFrame:
    base = _base(rows)
    moved = rows.assign(
        turns=_turning(rows, base), changes=sum((rows[a] != base[a]).astype(int) for a in AXES)
    )
    return moved[moved["changes"] > 0]


def shortest_flips_frame(sweep: Any, rows: pd.DataFrame, limit: int = 20) -> pd.DataFrame:
    base, found = _base(rows), []
    for _, own in _by_distance(rows).groupby(list(AXES), sort=False):
        turns, first = own[own["turns"]], own.iloc[0]
        if turns.empty:
            continue
        found.append(
            {
                "changes": first["changes"],
                "changed": "; ".join(
                    f"{axis}: {base[axis]} → {first[axis]}"
                    for axis in AXES
                    if first[axis] != base[axis]
                ),
                "positions": len(own),
                "admissible": int(own["admissible"].sum()),
                "flips": len(turns),
                "p_value": own["p_value"].median(),
                "reverse_p_value": own["reverse_p_value"].median(),
                "window_start": turns["window_start"].iloc[0],
                "window_end": turns["window_end"].iloc[-1],
                "specification": first["specification"] if len(own) == 1 else None,
                "share": -len(turns) / own["admissible"].sum(),
                "far": abs(own["p_value"].median() - base["p_value"]),
            }
        )
    frame = pd.DataFrame(found, columns=[*SHORTEST, "share", "far"])
    frame = frame.sort_values(["changes", "share", "far"])
    return frame[SHORTEST].head(limit).reset_index(drop=True)


def flip_distances_frame(sweep: Any, rows: pd.DataFrame) -> pd.DataFrame:
    near = _by_distance(rows)
    near = near[near["admissible"]]
    sets = near.groupby(["changes", *AXES], as_index=False).agg(
        rows=("turns", "size"), flips=("turns", "sum"), turning=("turns", "any")
    )
    return sets.groupby("changes", as_index=False).agg(
        rows=("rows", "sum"), flips=("flips", "sum"), sets=("rows", "size"),
        turning=("turning", "sum"),
    )  # fmt: skip


MAKERS = {
    "single_changes": single_changes_frame,
    "flips": flips_frame,
    "flip_counts": flip_counts_frame,
    "shortest_flips": shortest_flips_frame,
    "flip_distances": flip_distances_frame,
}
