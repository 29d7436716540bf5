"""A million specifications: wall time and total memory, interpreter start and store included.

Three findings, lags 1 to 12, three deterministic choices, four procedures, every window of
120 and of 160 rows of 800, two scales; run in a fresh process with two workers, stored, and
summarised once.  Screens: ``require = ["enough observations"]``.
"""

from __future__ import annotations

import json
import sys
from pathlib import Path

import measuring
import pytest

pytestmark = pytest.mark.bench

AXES = f"""
lags = {list(range(1, 13))}
deterministics = {list(measuring.TRENDS)}
windows = [{{ rolling = 120 }}, {{ rolling = 160 }}]
tests = ["F", "Wald", "LR", "LM"]
transformations = ["level", "difference"]
"""
SCRIPT = """
import json, sys
import sweep
if __name__ == "__main__":
    results = sweep.run(sweep.load_plan(sys.argv[1]), store=sys.argv[2], jobs=int(sys.argv[3]))
    survival = results.survival()
    whole = survival[survival["axis"] == "all"]
    print(json.dumps({name: int(whole[name].sum()) for name in ("planned", "failed")}))
"""


def test_million(tmp_path: Path) -> None:
    plan = measuring.write_plan(tmp_path, AXES)
    script = tmp_path / "million.py"
    script.write_text(SCRIPT, encoding="utf-8")
    store = tmp_path / "million.duckdb"
    command = [sys.executable, str(script), str(plan), str(store), str(measuring.CORES)]
    measured = measuring.run_measured(command, tmp_path)
    counts = json.loads(measured.output.strip().splitlines()[-1])
    assert counts["planned"] >= 1_000_000
    assert counts["failed"] == 0
    each = 1e6 * measured.seconds / counts["planned"]
    measuring.say(
        f"specifications   {counts['planned']:,}",
        f"wall             {measured.seconds:.1f} s on {measuring.CORES} jobs ({each:.1f} µs each)",
        f"peak memory      {measured.peak:.2f} GB, workers included",
        f"store            {store.stat().st_size / 1024**2:.0f} MB",
    )
