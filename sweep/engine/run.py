"""Running a plan into its store: what is missing, in waves, one writer."""

from __future__ import annotations

import time
from collections.abc import Callable
from concurrent.futures import Future, ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from store.database import open_writing
from sweep.engine.check import workers
from sweep.engine.group import make_tasks
from sweep.engine.prepare import Prepared
from sweep.engine.reasons import Status
from sweep.engine.sink import StoreSink
from sweep.engine.stop import StopRequest
from sweep.engine.task import Outcome, Task
from sweep.engine.waves import Broken, compute_in_waves
from sweep.errors import Interrupted
from sweep.notebook import specifications

__all__ = ["Progress", "RunReport", "run_prepared"]


@dataclass(frozen=True, slots=True)
class Progress:
    """How far a run is.

    Attributes
    ----------
    done, total : int
        Specifications computed in this run, and to compute.
    seconds : float
        Since computing began.
    stopping : bool
        True where the user asked for a stop and only the work in hand is finished.
    """

    done: int
    total: int
    seconds: float
    stopping: bool = False

    @property
    def rate(self) -> float:
        """Specifications a second."""
        return self.done / self.seconds if self.seconds > 0 else 0.0

    @property
    def remaining(self) -> float | None:
        """Seconds left at the present rate; None before there is one."""
        return (self.total - self.done) / self.rate if self.rate > 0 else None


@dataclass(frozen=True, slots=True)
class RunReport:
    """What a run did.

    Attributes
    ----------
    store : Path
    sweep : int
        Number of the sweep in its store.
    planned, stored, reused, ruled, computed, failed : int
        Specifications: in all, those of requests included; there before; taken over from
        another sweep; ruled out by the plan; computed now; of these, failed.
    seconds : float
    other_data : int or None
        Latest earlier sweep of the same plan, where data or numerics have changed since.
    changed : str
        Which of them, in words.
    added : int
        Of the specifications, those that requests added.
    """

    store: Path
    sweep: int
    planned: int
    stored: int
    reused: int
    ruled: int
    computed: int
    failed: int
    seconds: float
    other_data: int | None = None
    changed: str = ""
    added: int = 0

    @property
    def words(self) -> str:
        """Say how many specifications there are and how many of them requests added."""
        whole = specifications(self.planned)
        if not self.added:
            return f"{whole} planned"
        return (
            f"{whole}, {self.planned - self.added:,} planned and "
            f"{self.added:,} added by requests"
        )


def run_prepared(
    prepared: Prepared,
    store: Path,
    *,
    jobs: int | None = None,
    progress: Callable[[Progress], None] | None = None,
) -> RunReport:
    """Compute what the store does not have yet.

    Parameters
    ----------
    prepared : Prepared
    store : Path
        DuckDB file; made if there is none.
    jobs : int or None
        Worker processes; None for one a core.
    progress : callable or None
        Called after every wave.

    Returns
    -------
    RunReport

    Raises
    ------
    Interrupted
        On Ctrl-C; what was written stays.
    store.errors.StoreError
        If the store is locked, damaged or of another version.
    """
    began = time.monotonic()
    jobs = workers(jobs)
    stop = StopRequest()
    with stop.listening(), open_writing(store) as database:
        sink = StoreSink(database, prepared)
        try:
            details = _wants_lags(prepared)
            missing, stored, reused = sink.missing(details)
            tasks = make_tasks(prepared, missing, details)
            done, failed = _compute(sink, tasks, jobs, progress, stop)
        except KeyboardInterrupt:
            raise _interrupted(sink, store) from None
        if done < missing.size:
            raise _interrupted(sink, store)
        seconds = time.monotonic() - began
        ruled = int((prepared.rows.rule >= 0).sum())
        earlier, changed = sink.changed_since() or (None, "")
        report = RunReport(
            store, sink.sweep, prepared.rows.count, stored, reused, ruled, int(missing.size),
            failed, seconds, earlier, changed,
            int((prepared.rows.request > 0).sum()),
        )  # fmt: skip
        sink.finish(
            seconds,
            {"computed": report.computed, "reused": reused, "stored": stored, "ruled": ruled},
        )
    return report


def _interrupted(sink: StoreSink, store: Path) -> Interrupted:
    kept, planned = sink.kept(), sink.prepared.rows.count
    if not kept:
        return Interrupted("Stopped before anything was stored; run the same command to go on.")
    return Interrupted(
        f"Stopped. {kept:,} of {planned:,} specifications are stored in {store.name}; run the "
        "same command to go on."
    )


def _compute(
    sink: StoreSink,
    tasks: list[Task],
    jobs: int,
    progress: Callable[[Progress], None] | None,
    stop: StopRequest,
) -> tuple[int, int]:
    """Compute the tasks; return how many rows are done, and how many of them failed.

    One thread writes a wave while the workers compute the next: at most two are in memory.
    """
    began = time.monotonic()
    total = sum(task.row.size for task in tasks)
    done = failed = 0
    with ThreadPoolExecutor(max_workers=1) as thread:
        writing: Future[None] | None = None
        for wave in compute_in_waves(tasks, jobs, stop=stop):
            if writing is not None:
                writing.result()
            writing = thread.submit(_write, sink, wave)
            done += sum(_rows(item) for item in wave)
            failed += sum(_failed(item) for item in wave)
            if progress is not None:
                progress(Progress(done, total, time.monotonic() - began, bool(stop)))
        if writing is not None:
            writing.result()
    return done, failed


def _write(sink: StoreSink, wave: list[Outcome | Broken]) -> None:
    good = [item for item in wave if isinstance(item, Outcome)]
    if good:
        sink.write(good)
    for item in wave:
        if isinstance(item, Broken):
            sink.failed(item.task.row, item.text)


def _rows(item: Outcome | Broken) -> int:
    return int(item.task.row.size if isinstance(item, Broken) else item.row.size)


def _failed(item: Outcome | Broken) -> int:
    return _rows(item) if isinstance(item, Broken) else int((item.status == Status.FAILED).sum())


def _wants_lags(prepared: Prepared) -> NDArray[np.bool_]:
    """Say for which rows every lag's coefficient is kept."""
    rows, plan = prepared.rows, prepared.plan
    option = plan.document.sweep.coefficients
    if option in ("all", "none"):
        return np.full(rows.count, option == "all")
    if option == "fixed windows":
        moving = np.array([bool(getattr(c, "moving", "")) for c in plan.axes["window"]])
        return np.asarray(~moving[rows.codes["window"]])
    wanted = np.zeros(rows.count, bool)
    for finding in plan.findings:
        high, low = plan.baseline_id(finding)
        wanted |= (rows.high == np.uint64(high)) & (rows.low == np.uint64(low))
    return wanted
