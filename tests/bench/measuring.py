"""What the measurements share: drawn data, plans, the memory of a process and its children.

Nothing here asserts a time.  Machines differ; ratios measured in one run on one machine
travel better than seconds, and the figures go into DEVELOPERS.md by hand.
"""

from __future__ import annotations

import os
import subprocess
import threading
import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd

ROWS = 800
CORES = 2
ROOT = Path(__file__).resolve().parents[2]
SERIES = ("x", "y", "z")
TRENDS = {"constant": "c", "linear trend": "ct", "quadratic trend": "ctt"}


def drawn(rows: int = ROWS, seed: int = 5) -> pd.DataFrame:
    """Draw three linked monthly series."""
    rng = np.random.default_rng(seed)
    link = np.array([[0.5, 0.1, 0.0], [0.15, 0.4, 0.1], [0.0, 0.2, 0.6]])
    values = np.zeros((rows + 50, 3))
    for t in range(1, rows + 50):
        values[t] = link @ values[t - 1] + rng.standard_normal(3)
    frame = pd.DataFrame(values[50:] + 20.0, columns=SERIES)
    frame.insert(0, "date", [f"{1900 + row // 12}-{row % 12 + 1:02d}" for row in range(rows)])
    return frame


FINDINGS = """
[[findings]]
name = "x leads y"
cause = "x"
effect = "y"
given = ["z"]

[[findings]]
name = "x leads z"
cause = "x"
effect = "z"
given = ["y"]

[[findings]]
name = "y leads z"
cause = "y"
effect = "z"
given = ["x"]
"""


def write_plan(folder: Path, axes: str, rows: int = ROWS) -> Path:
    """Write the drawn data and a plan over them; return the plan's path."""
    folder.mkdir(exist_ok=True)
    drawn(rows).to_csv(folder / "drawn.csv", index=False)
    plan = folder / "plan.toml"
    plan.write_text(
        'title = "Measurement"\n\n'
        '[data]\nfile = "drawn.csv"\ndate = "date"\nfrequency = "monthly"\n'
        f"{FINDINGS}\n"
        '[baseline]\nlags = 1\ndeterministics = "constant"\nwindow = "full sample"\n'
        'transformation = "level"\ntest = "F"\n\n'
        f"[axes]\n{axes}\n\n"
        '[screens]\nrequire = ["enough observations"]\n\n'
        '[sweep]\ncoefficients = "none"\n',
        encoding="utf-8",
    )
    return plan


def timed(action: Callable[[], Any]) -> tuple[float, Any]:
    """Run an action; return wall seconds and its result."""
    start = time.perf_counter()
    result = action()
    return time.perf_counter() - start, result


@dataclass(frozen=True, slots=True)
class Measured:
    """One child process, measured from outside.

    Attributes
    ----------
    seconds : float
        Wall time, start of the interpreter included.
    peak : float
        Largest memory of the process and all its children, gigabytes; shared pages are
        counted once.  0 where /proc does not say.
    output : str
        What it wrote to standard output.
    """

    seconds: float
    peak: float
    output: str


def run_measured(command: Sequence[str], folder: Path, every: float = 0.05) -> Measured:
    """Run a command and sample the memory of its process tree.

    Raises
    ------
    RuntimeError
        If the command fails; the message holds what it wrote.
    """
    start = time.perf_counter()
    with (folder / "stderr.txt").open("w+", encoding="utf-8") as errors:
        process = subprocess.Popen(
            command,
            stdout=subprocess.PIPE,
            stderr=errors,
            cwd=folder,
            text=True,
            env=os.environ | {"PYTHONPATH": str(ROOT)},  # this tree, installed or not
        )
        peak = [0.0]
        done = threading.Event()

        def sample() -> None:
            while not done.wait(every):
                peak[0] = max(peak[0], tree_memory(process.pid))

        sampler = threading.Thread(target=sample, daemon=True)
        sampler.start()
        output, _ = process.communicate()
        seconds = time.perf_counter() - start
        done.set()
        sampler.join()
        errors.seek(0)
        if process.returncode:
            raise RuntimeError(f"{command}: exit {process.returncode}\n{errors.read()}")
    return Measured(seconds, peak[0], output)


def tree_memory(pid: int) -> float:
    """Return the proportional memory of a process and its descendants, gigabytes."""
    children: dict[int, list[int]] = {}
    for entry in os.listdir("/proc") if os.path.isdir("/proc") else []:
        if entry.isdigit():
            try:
                fields = Path(f"/proc/{entry}/stat").read_text().rsplit(")", 1)[1].split()
            except OSError:
                continue
            children.setdefault(int(fields[1]), []).append(int(entry))
    total, waiting = 0.0, [pid]
    while waiting:
        current = waiting.pop()
        waiting.extend(children.get(current, []))
        total += _proportional(current)
    return total


def _proportional(pid: int) -> float:
    try:
        lines = Path(f"/proc/{pid}/smaps_rollup").read_text().splitlines()
    except OSError:
        return 0.0
    for line in lines:
        if line.startswith("Pss:"):
            return int(line.split()[1]) / 1024**2
    return 0.0


def say(*lines: str) -> None:
    """Print measurements so that ``-s`` shows them."""
    print()
    for line in lines:
        print("   ", line)
