"""Worker processes by joblib's executor, begun anew when one dies.

The executor is our own, not the one that joblib keeps for whoever asks: what a user's session
does with joblib beside us must find that one as joblib left it.
"""

from __future__ import annotations

import signal
import time
from collections import deque
from collections.abc import Callable, Iterator
from concurrent.futures import FIRST_COMPLETED, Future, wait
from typing import Any

from joblib.externals.loky import ProcessPoolExecutor
from joblib.externals.loky.process_executor import BrokenProcessPool

from sweep.engine import waves
from sweep.engine.stop import StopRequest, interrupts_held
from sweep.engine.task import Outcome, Task
from sweep.engine.waves import Broken, _guarded

__all__ = ["WorkerPool", "end_workers"]

DIED = "a worker process died twice on this task"
IN_HAND = 2
"""Tasks that a worker has at once: one to compute and one so that it need not wait."""
LOOK_SECONDS = 0.1
"""Time between two looks at whether the user wants to stop."""
IDLE_SECONDS = 300
"""Time after which an idle worker ends."""
ONE_THREAD = dict.fromkeys(("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"), "1")

Done = Outcome | Broken

_kept: dict[int, Any] = {}
"""The executor of this process by its number of workers; one at a time."""


def end_workers() -> None:
    """End the workers that stay for a later run."""
    for executor in _kept.values():
        executor.shutdown(wait=True)
    _kept.clear()


class WorkerPool:
    """A pool that survives the death of a worker.

    The workers stay for the next run of this process and end with it.  They never hear of a
    Ctrl-C, which a terminal sends to every process: this one decides what is to be done.

    Parameters
    ----------
    jobs : int
        Worker processes.
    work : callable
        What they do with a task.
    """

    def __init__(self, jobs: int, work: Callable[[Task], Outcome]) -> None:
        self._jobs, self._work = jobs, work
        self._executor = self._open()

    def _open(self) -> Any:
        """Return the executor that is kept for as many workers, or a new one."""
        if self._jobs not in _kept:
            with interrupts_held():
                end_workers()
                _kept[self._jobs] = ProcessPoolExecutor(
                    max_workers=self._jobs, timeout=IDLE_SECONDS, initializer=_ignore_interrupts,
                    env=ONE_THREAD,
                )  # fmt: skip
        return _kept[self._jobs]

    def _anew(self) -> Any:
        """Let go of an executor whose worker died, and return another."""
        with interrupts_held():
            end_workers()
        return self._open()

    def _submit(self, task: Task) -> Future[Done]:
        # Workers are begun in here, whenever there are too few of them.
        with interrupts_held():
            try:
                future: Future[Done] = self._executor.submit(_work, self._work, task)
            except BrokenProcessPool:
                self._executor = self._anew()
                future = self._executor.submit(_work, self._work, task)
        return future

    def waves(self, tasks: list[Task], stop: StopRequest) -> Iterator[list[Done]]:
        """Yield what is finished about once a second; the order is that of finishing."""
        waiting, flying = deque(tasks), dict[Future[Done], Task]()
        wave: list[Done] = []
        began = time.monotonic()
        try:
            while flying or (waiting and not stop):
                while waiting and not stop and len(flying) < IN_HAND * self._jobs:
                    task = waiting.popleft()
                    flying[self._submit(task)] = task
                finished, _ = wait(flying, LOOK_SECONDS, FIRST_COMPLETED)
                wave += self._gathered(finished, flying)
                if wave and waves.is_full(len(wave), self._jobs, began):
                    yield wave
                    wave, began = [], time.monotonic()
            if wave:
                yield wave
        except KeyboardInterrupt:
            # A second Ctrl-C: nothing is waited for.  Every task in hand is in the workers'
            # queue already, so that the executor ends without a complaint.
            self._executor.shutdown(wait=True, kill_workers=True)
            _kept.clear()
            raise

    def _gathered(
        self, finished: set[Future[Done]], flying: dict[Future[Done], Task]
    ) -> list[Done]:
        """Return what came of finished tasks; where a worker died, of all tasks in flight."""
        done, lost = [], []
        for future in finished:
            task = flying.pop(future)
            try:
                done.append(future.result())
            except BrokenProcessPool:
                lost.append(task)
        if lost and flying:
            # The others in flight end with the pool, unless they were finished before.
            done += self._gathered(set(flying), flying)
        return done + [self._alone(task) for task in lost]

    def _alone(self, task: Task) -> Done:
        self._executor = self._anew()
        try:
            return self._submit(task).result()
        except BrokenProcessPool:
            self._executor = self._anew()
            return Broken(task, DIED)


def _ignore_interrupts() -> None:
    signal.signal(signal.SIGINT, signal.SIG_IGN)


def _work(work: Callable[[Task], Outcome], task: Task) -> Done:
    """Compute in a worker, its linear algebra on one thread as everywhere else."""
    from threadpoolctl import threadpool_limits

    with threadpool_limits(1):
        return _guarded(work, task)
