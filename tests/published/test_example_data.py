"""The shipped data files are what their scripts write."""

from __future__ import annotations

import importlib.util
from pathlib import Path
from types import ModuleType

import numpy as np
import pandas as pd
import published_plans as plans
import pytest

DATA = plans.HERE.parents[1] / "configs" / "data"


def maker(name: str) -> ModuleType:
    """Load the script that writes a data file."""
    spec = importlib.util.spec_from_file_location(f"make_{name}", DATA / f"make_{name}.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.mark.parametrize("name", ["us_macro", "harbour"])
def test_script_writes_the_shipped_file(name: str, tmp_path: Path) -> None:
    written = maker(name).write(tmp_path)
    assert written.name == f"{name}.csv"
    assert written.read_bytes() == (DATA / f"{name}.csv").read_bytes()


def test_us_macro_is_the_published_data() -> None:
    """Cell by cell the copy in tests/published, but for the filler of 1959-Q1."""
    shipped = pd.read_csv(DATA / "us_macro.csv")
    source = pd.read_csv(plans.HERE / "data" / "macrodata.csv")
    assert np.isnan(shipped["inflation"].iloc[0])
    assert list(shipped["date"]) == plans.quarters("1959-Q1", 203)
    for name, column in maker("us_macro").COLUMNS.items():
        first = 1 if name == "inflation" else 0
        assert (shipped[name].iloc[first:] == source[column].iloc[first:]).all(), name


def test_harbour_holds_what_it_says() -> None:
    harbour = maker("harbour")
    assert sum(harbour.FREIGHT_SEASON) == pytest.approx(0.0, abs=1e-12)
    assert sum(harbour.CLOSURE_STEPS) == pytest.approx(0.0, abs=1e-12)
    shipped = pd.read_csv(DATA / "harbour.csv")
    assert list(shipped["month"]) == plans.months("1995-01", 360)
    assert shipped["month"][harbour.LINK_ENDS] == "2011-01"
    assert shipped["month"][harbour.CLOSURE] == "2020-03"
    assert shipped["month"][harbour.CLOSURE + len(harbour.CLOSURE_STEPS) - 1] == "2021-06"
    assert (shipped.drop(columns="month") > 0).all().all()  # logs exist
