"""Tasks in waves: workers compute, the caller writes before they run far ahead.

joblib's generators have no back-pressure: a slow writer would pile up results.  Here each
worker has two tasks at the most, and a wave holds what was finished within about a second,
so memory stays bounded, progress is seen and an interrupted run loses little.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass

from sweep.engine.compute import compute_task
from sweep.engine.stop import StopRequest
from sweep.engine.task import Outcome, Task

__all__ = ["Broken", "compute_in_waves", "is_full"]

TASKS_A_WORKER = 8
"""Tasks of a worker that a wave holds at the most."""
WAVE_SECONDS = 1.0
"""Time after which a wave is handed over, however few tasks it holds."""
INLINE_SECONDS = 1.0
"""Work below which starting workers costs more than it saves."""


@dataclass(frozen=True, slots=True)
class Broken:
    """A task that could not be computed, and why."""

    task: Task
    text: str


def is_full(tasks: int, jobs: int, began: float) -> bool:
    """Say whether a wave is handed over: it holds enough, or has taken long enough."""
    return tasks >= TASKS_A_WORKER * jobs or time.monotonic() - began >= WAVE_SECONDS


def compute_in_waves(
    tasks: list[Task],
    jobs: int,
    work: Callable[[Task], Outcome] | None = None,
    stop: StopRequest | None = None,
) -> Iterator[list[Outcome | Broken]]:
    """Compute tasks and yield one list a wave.

    Parameters
    ----------
    tasks : list of Task
    jobs : int
        Worker processes; 1 computes in this process.
    work : callable
        What a worker does; :func:`compute_task` unless a test says otherwise.
    stop : StopRequest
        Where it comes true, no further task is begun; those in hand are finished.

    Yields
    ------
    list of Outcome or Broken
        In the order in which they were finished.
    """
    work = work or compute_task
    stop = StopRequest() if stop is None else stop
    if jobs == 1 or sum(task.cost for task in tasks) < INLINE_SECONDS:
        return _here(tasks, work, stop)
    from sweep.engine.pool import WorkerPool

    return WorkerPool(jobs, work).waves(tasks, stop)


def _here(
    tasks: list[Task], work: Callable[[Task], Outcome], stop: StopRequest
) -> Iterator[list[Outcome | Broken]]:
    from threadpoolctl import threadpool_limits

    wave: list[Outcome | Broken] = []
    began = time.monotonic()
    for task in tasks:
        if stop:
            break
        with threadpool_limits(1):
            wave.append(_guarded(work, task))
        if is_full(len(wave), 1, began):
            yield wave
            wave, began = [], time.monotonic()
    if wave:
        yield wave


def _guarded(work: Callable[[Task], Outcome], task: Task) -> Outcome | Broken:
    """Compute a task; a fault of ours becomes failed rows instead of ending the run."""
    try:
        return work(task)
    except Exception as error:  # noqa: BLE001  (any fault here is ours; the rows say failed)
        return Broken(task, f"{type(error).__name__}: {error}")
