"""Worker processes by joblib, restarted when one dies."""

from __future__ import annotations

from collections.abc import Callable

from joblib import Parallel, delayed
from joblib.externals.loky import get_reusable_executor
from joblib.externals.loky.process_executor import TerminatedWorkerError

from sweep.engine.task import Outcome, Task
from sweep.engine.waves import Broken, _guarded

__all__ = ["WorkerPool"]

DIED = "a worker process died twice on this task"


class WorkerPool:
    """A pool that survives the death of a worker.

    The workers stay for what comes next (the report's figures) and end with the process.

    Parameters
    ----------
    jobs : int
        Worker processes.
    work : callable
        What they do with a task.
    """

    def __init__(self, jobs: int, work: Callable[[Task], Outcome]) -> None:
        self._jobs, self._work = jobs, work
        self._pool = self._open()

    def _open(self) -> Parallel:
        return Parallel(n_jobs=self._jobs, backend="loky", batch_size=1, pre_dispatch="all")

    def wave(self, tasks: list[Task]) -> list[Outcome | Broken]:
        """Compute one wave; if a worker dies, its wave is retried task by task."""
        try:
            return list(self._pool(delayed(_work)(self._work, task) for task in tasks))
        except TerminatedWorkerError:
            return [self._alone(task) for task in tasks]
        except KeyboardInterrupt:
            get_reusable_executor(max_workers=self._jobs).shutdown(wait=True, kill_workers=True)
            raise

    def _alone(self, task: Task) -> Outcome | Broken:
        self._pool = self._open()
        try:
            done: list[Outcome | Broken] = list(self._pool([delayed(_work)(self._work, task)]))
        except TerminatedWorkerError:
            return Broken(task, DIED)
        return done[0]


def _work(work: Callable[[Task], Outcome], task: Task) -> Outcome | Broken:
    """Compute in a worker, its linear algebra on one thread as everywhere else."""
    from threadpoolctl import threadpool_limits

    with threadpool_limits(1):
        return _guarded(work, task)
