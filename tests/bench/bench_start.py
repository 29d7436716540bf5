"""Start-up: ``crosswind --help``, ``crosswind check`` and the README's example run.

Each command runs in a fresh process; the best of several counts, since the first one pays
for reading the files from disk.
"""

from __future__ import annotations

import shutil
import sys
from pathlib import Path

import measuring
import pytest

pytestmark = pytest.mark.bench

EXAMPLE = measuring.ROOT / "configs" / "us_macro.toml"


def crosswind() -> list[str]:
    """Return the installed command, or what it calls where this tree is not installed."""
    command = shutil.which("crosswind", path=str(Path(sys.executable).parent))
    return [command] if command else [sys.executable, "-c", "from sweep.cli import main; main()"]


def best(command: list[str], folder: Path, times: int) -> float:
    return min(measuring.run_measured(command, folder).seconds for _ in range(times))


def test_start(tmp_path: Path) -> None:
    command = crosswind()
    bare = best([sys.executable, "-c", "pass"], tmp_path, 5)
    help_ = best([*command, "--help"], tmp_path, 5)
    check = best([*command, "check", str(EXAMPLE)], tmp_path, 3)
    store = tmp_path / "us_macro.duckdb"
    run = measuring.run_measured([*command, "run", str(EXAMPLE), "--store", str(store)], tmp_path)
    bare_store = tmp_path / "no_report.duckdb"
    numbers = measuring.run_measured(
        [*command, "run", str(EXAMPLE), "--store", str(bare_store), "--no-report"], tmp_path
    )
    again = best([*command, "run", str(EXAMPLE), "--store", str(store)], tmp_path, 2)
    measuring.say(
        f"an empty interpreter         {bare:.2f} s",
        f"crosswind --help             {help_:.2f} s ({help_ / bare:.1f} times that)",
        f"crosswind check us_macro     {check:.2f} s",
        f"crosswind run us_macro       {run.seconds:.2f} s, peak memory {run.peak:.2f} GB",
        f"the same without report      {numbers.seconds:.2f} s",
        f"the same run, all stored     {again:.2f} s",
    )
