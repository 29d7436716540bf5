"""Ctrl-C during a run: the work in hand is finished and stored, then the run ends."""

from __future__ import annotations

import signal
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from multiprocessing import resource_tracker
from types import FrameType

__all__ = ["StopRequest", "interrupts_held"]


class StopRequest:
    """Whether the user has asked the run to stop.

    The first Ctrl-C only sets this; nothing is torn in the middle.  The second raises
    ``KeyboardInterrupt`` as usual.
    """

    def __init__(self) -> None:
        self._asked = False

    def __bool__(self) -> bool:
        return self._asked

    @contextmanager
    def listening(self) -> Iterator[None]:
        """Take Ctrl-C as a request for the length of a ``with`` block.

        Does nothing outside the main thread, which alone is told of signals, and where the
        caller has set a handler of its own or ignores the signal.
        """
        if (
            threading.current_thread() is not threading.main_thread()
            or signal.getsignal(signal.SIGINT) is not signal.default_int_handler
        ):
            yield
            return
        signal.signal(signal.SIGINT, self._hear)
        try:
            yield
        finally:
            signal.signal(signal.SIGINT, signal.default_int_handler)

    def _hear(self, number: int, frame: FrameType | None) -> None:
        if self._asked:
            raise KeyboardInterrupt
        self._asked = True


@contextmanager
def interrupts_held() -> Iterator[None]:
    """Hold Ctrl-C back for the length of a ``with`` block; it arrives afterwards.

    A process begun in the block never hears it, from its first instruction on.
    """
    if not hasattr(signal, "pthread_sigmask"):
        yield
        return
    # Python 3.11 begins this helper with the first worker and lifts the hold while doing so.
    resource_tracker.ensure_running()
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)
