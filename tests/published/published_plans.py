"""What the outside checks share: data files, plans as TOML text, reference tables.

The checks go through the public interface only: a plan file is written, loaded and run into
a store, and the view of outcomes is read back.
"""

from __future__ import annotations

import csv
import functools
import json
import re
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest

import sweep

HERE = Path(__file__).parent
REFERENCE = HERE / "r_reference.json"
CASES = (
    "macro_gdp_cons",
    "macro_gdp_cons_inv",
    "macro_inv_gdp_cons",
    "macro_unemp_infl_tbill",
    "macro_tbill_unemp_infl",
    "e1_inc_cons_inv",
    "e1_inc_inv_cons",
    "e6_dp_r",
    "denmark_lrm_lry",
    "e4_inc_cons_seas",
)

# The reference's short names of deterministic terms, as choices of a plan.  Every choice here
# carries its own name, so that the checks don't depend on the wording of labels.
DETERMINISTICS: dict[str, dict[str, Any]] = {
    "n": {"trend": "none", "name": "n"},
    "c": {"trend": "constant", "name": "c"},
    "ct": {"trend": "linear trend", "name": "ct"},
    "cs": {"trend": "constant", "seasonal": True, "name": "cs"},
    "cts": {"trend": "linear trend", "seasonal": True, "name": "cts"},
}


def procedure(
    statistic: str, covariance: str = "classical", divisor: str = "T-k"
) -> dict[str, str]:
    """Return a choice of procedure under a name such as ``F``, ``Wald HC3`` or ``Wald T``."""
    entry = {"test": statistic, "covariance": covariance, "divisor": divisor}
    extra = [word for word in (covariance, divisor) if word not in ("classical", "T-k")]
    return entry | {"name": " ".join([statistic, *extra])}


def criterion(rule: str, maximum: int, **options: Any) -> dict[str, Any]:
    """Return a lag choice that leaves the order to a rule, under the rule's name."""
    return {"criterion": rule, "maximum": maximum, "name": rule} | options


@functools.cache
def reference() -> dict[str, Any]:
    """Read the reference file once."""
    content: dict[str, Any] = json.loads(REFERENCE.read_text(encoding="utf-8"))
    return content


def table(block: Mapping[str, Any]) -> pd.DataFrame:
    """Turn a block of columns and rows of the reference file into a frame."""
    return pd.DataFrame(block["rows"], columns=block["columns"])


# --------------------------------------------------------------------------- data


def quarters(first: str, count: int) -> list[str]:
    """Name consecutive quarters, from a label such as 1959-Q2."""
    year, quarter = int(first[:4]), int(first[-1])
    numbers = range(4 * year + quarter - 1, 4 * year + quarter - 1 + count)
    return [f"{number // 4}-Q{number % 4 + 1}" for number in numbers]


def months(first: str, count: int) -> list[str]:
    """Name consecutive months, from a label such as 1990-01."""
    year, month = int(first[:4]), int(first[-2:])
    numbers = range(12 * year + month - 1, 12 * year + month - 1 + count)
    return [f"{number // 12}-{number % 12 + 1:02d}" for number in numbers]


def write_data(path: Path, dates: Sequence[str], columns: Mapping[str, Iterable[float]]) -> Path:
    """Write a data file with a date column; NaN becomes an empty cell."""
    with path.open("w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(["date", *columns])
        for date, *values in zip(dates, *columns.values(), strict=True):
            cells = ["" if np.isnan(value) else repr(float(value)) for value in values]
            writer.writerow([date, *cells])
    return path


def _statsmodels_file(name: str) -> pd.DataFrame:
    """Read one of Lütkepohl's files from the installed statsmodels.

    The layout is a comment, the first quarter as ``<1960 Q1>``, the names and the rows.
    """
    import statsmodels

    folder = Path(statsmodels.__file__).parent / "tsa" / "vector_ar" / "tests" / "results"
    path = folder / f"{name}.dat"
    if not path.exists():
        pytest.skip(f"the installed statsmodels does not carry {name}.dat")
    text = re.sub(r"/\*.*?\*/", "", path.read_text(encoding="utf-8"), flags=re.DOTALL)
    first = re.search(r"<(\d{4})\s+Q(\d)>", text)
    assert first is not None
    lines = [line.split() for line in text[first.end() :].splitlines() if line.strip()]
    frame = pd.DataFrame(lines[1:], columns=lines[0]).astype(float)
    frame.insert(0, "date", quarters(f"{first[1]}-Q{first[2]}", len(frame)))
    return frame


def _own_file(name: str) -> pd.DataFrame:
    frame = pd.read_csv(HERE / "data" / f"{name}.csv")
    frame["date"] = [f"{date[:4]}-Q{(int(date[5:7]) + 2) // 3}" for date in frame["date"]]
    return frame


def source_frame(case: Mapping[str, Any]) -> pd.DataFrame:
    """Return the raw data of a reference case, dates as quarters."""
    source = str(case["source"])
    for name in ("e1", "e4", "e6"):
        if f"Luetkepohl {name}" in source:
            return _statsmodels_file(name)
    return _own_file("denmark" if "denmark" in source else "macrodata")


# --------------------------------------------------------------------------- plans

NAMES = (
    "lags_choice",
    "deterministics",
    "window_name",
    "window_entry",
    "transformation",
    "test",
    "conditioning",
    "status",
    "reverse_status",
)


def toml(value: Any) -> str:
    """Write one value as TOML, tables inline.

    >>> toml({"rolling": 60, "name": "five years"})
    '{ rolling = 60, name = "five years" }'
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return json.dumps(value, ensure_ascii=False)
    if isinstance(value, Mapping):
        return "{ " + ", ".join(f"{key} = {toml(item)}" for key, item in value.items()) + " }"
    if isinstance(value, Sequence):
        return "[" + ", ".join(toml(item) for item in value) + "]"
    return repr(value)


def _section(name: str, keys: Mapping[str, Any]) -> str:
    return "\n".join([name, *(f"{key} = {toml(value)}" for key, value in keys.items()), ""])


def plan_text(
    data: str,
    findings: Sequence[Mapping[str, Any]],
    axes: Mapping[str, Sequence[Any] | Mapping[str, Any]],
    baseline: Mapping[str, Any] | None = None,
    frequency: str = "quarterly",
) -> str:
    """Write a plan; whatever is not said is one lag, a constant, levels and F."""
    usual: dict[str, Any] = {
        "lags": 1,
        "deterministics": DETERMINISTICS["c"],
        "window": "full sample",
        "transformation": "level",
        "test": procedure("F"),
    }
    parts = [
        _section("", {"title": "Outside check", "significance": 0.05, "seed": 1}).lstrip(),
        _section(
            "[data]",
            {"file": data, "date": "date", "frequency": frequency, "source": "see README.md"},
        ),
        *(_section("[[findings]]", {"claim": "leads", **finding}) for finding in findings),
        _section("[baseline]", usual | dict(baseline or {})),
        _section("[axes]", axes),
        _section("[screens]", {"require": ["enough observations"]}),
    ]
    return "\n".join(parts)


def run_plan(folder: Path, text: str, name: str = "plan") -> pd.DataFrame:
    """Run a plan through the public interface and return its outcomes."""
    path = folder / f"{name}.toml"
    path.write_text(text, encoding="utf-8")
    plan = sweep.load_plan(path)
    results = sweep.run(plan, store=folder / f"{name}.duckdb", jobs=1)
    outcomes = results.outcomes()
    # Names arrive as categories of the whole store; plain words are easier to look up.
    return outcomes.astype(dict.fromkeys(NAMES, str))


def case_plan(folder: Path, case: Mapping[str, Any], axes: Mapping[str, Any]) -> str:
    """Write a reference case's data file and the plan of its finding."""
    frame = source_frame(case)
    expressions: dict[str, str] = case["transforms"]
    columns: dict[str, pd.Series[float]] = {}
    for name, expression in expressions.items():
        inside = re.fullmatch(r"dlog\((\w+)\)", expression)
        columns[name] = frame[inside[1] if inside else expression].astype(float)
    if "infl" in columns:  # a filler, not an observation
        columns["infl"] = columns["infl"].where(frame["date"] != "1959-Q1")
    write_data(folder / "data.csv", list(frame["date"]), columns)
    logs = all(expression.startswith("dlog") for expression in expressions.values())
    window: dict[str, Any] | str = "full sample"
    bounds = {"from": case["from"], "until": case["to"]}
    if any(bounds.values()):
        window = {
            key: f"{date[:4]}-Q{(int(date[5:7]) + 2) // 3}" for key, date in bounds.items() if date
        }
    finding = {"name": "outside check", "cause": case["cause"], "effect": case["effect"]}
    if case["conditioning"]:
        finding["given"] = list(case["conditioning"])
    baseline = {
        "transformation": "log difference" if logs else "level",
        "window": window,
    }
    return plan_text("data.csv", [finding], axes, baseline)


# --------------------------------------------------------------------------- regressors


def exogenous_columns(
    values: np.ndarray[Any, np.dtype[np.float64]], lags: int, rows: np.ndarray[Any, Any]
) -> list[np.ndarray[Any, np.dtype[np.float64]]]:
    """Return what ``exogenous = [{ series, lags }]`` adds: the current value and its lags."""
    return [values[rows - lag] for lag in range(lags + 1)]
