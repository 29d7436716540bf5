"""Tasks in waves: workers compute, the caller writes before the next wave goes out.

joblib's generators have no back-pressure: a slow writer would pile up results.  A wave is
eight tasks a worker, so memory stays bounded and an interrupted run loses little.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from sweep.engine.compute import compute_task
from sweep.engine.task import Outcome, Task

__all__ = ["Broken", "compute_in_waves"]

TASKS_A_WORKER = 8
INLINE_SECONDS = 1.0
"""Work below which starting workers costs more than it saves."""


@dataclass(frozen=True, slots=True)
class Broken:
    """A task that could not be computed, and why."""

    task: Task
    text: str


def compute_in_waves(
    tasks: list[Task], jobs: int, work: Callable[[Task], Outcome] | None = None
) -> Iterator[list[Outcome | Broken]]:
    """Compute tasks and yield one list a wave.

    Parameters
    ----------
    tasks : list of Task
    jobs : int
        Worker processes; 1 computes in this process.
    work : callable
        What a worker does; :func:`compute_task` unless a test says otherwise.

    Yields
    ------
    list of Outcome or Broken
        In the order of the tasks.
    """
    work = work or compute_task
    if jobs == 1 or sum(task.cost for task in tasks) < INLINE_SECONDS:
        from threadpoolctl import threadpool_limits

        for start in range(0, len(tasks), TASKS_A_WORKER):
            with threadpool_limits(1):
                wave = [_guarded(work, task) for task in tasks[start : start + TASKS_A_WORKER]]
            yield wave
        return
    from sweep.engine.pool import WorkerPool

    pool = WorkerPool(jobs, work)
    size = TASKS_A_WORKER * jobs
    for start in range(0, len(tasks), size):
        yield pool.wave(tasks[start : start + size])


def _guarded(work: Callable[[Task], Outcome], task: Task) -> Outcome | Broken:
    """Compute a task; a fault of ours becomes failed rows instead of ending the run."""
    try:
        return work(task)
    except Exception as error:  # noqa: BLE001  (any fault here is ours; the rows say failed)
        return Broken(task, f"{type(error).__name__}: {error}")
