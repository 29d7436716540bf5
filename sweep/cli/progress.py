"""Progress on standard error: a bar on a terminal, a plain line now and then elsewhere."""

from __future__ import annotations

import sys
import time
from types import TracebackType
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from sweep.engine.run import Progress

__all__ = ["Reporter"]

PLAIN_SECONDS = 5.0
"""Seconds between two lines where standard error is no terminal."""

STOPPING = "Stopping: what is being computed is finished and stored. Ctrl-C again stops at once."


class Reporter:
    """Shows how far a run is.

    Parameters
    ----------
    quiet : bool
        Show nothing.
    """

    def __init__(self, *, quiet: bool = False) -> None:
        self._quiet = quiet
        self._terminal = sys.stderr.isatty()
        self._bar: Any = None
        self._task: Any = None
        self._last = time.monotonic()
        self._stopping = False

    def __enter__(self) -> Reporter:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        if self._bar is not None:
            self._bar.stop()

    def advance(self, progress: Progress) -> None:
        """Show a new state."""
        if self._quiet:
            return
        if progress.stopping and not self._stopping:
            self._stopping = True
            click.echo(STOPPING, err=True)
        if self._terminal:
            self._advance_bar(progress)
        elif time.monotonic() - self._last >= PLAIN_SECONDS:
            self._last = time.monotonic()
            click.echo(_line(progress), err=True)

    def _advance_bar(self, progress: Progress) -> None:
        if self._bar is None:
            from rich.console import Console
            from rich.progress import BarColumn, TextColumn
            from rich.progress import Progress as Bar

            self._bar = Bar(
                TextColumn("{task.fields[words]}"), BarColumn(), console=Console(stderr=True),
                transient=True,
            )  # fmt: skip
            self._bar.start()
            self._task = self._bar.add_task("", total=progress.total, words="")
        self._bar.update(self._task, completed=progress.done, words=_line(progress))


def _line(progress: Progress) -> str:
    words = f"{progress.done:,} of {progress.total:,} specifications, {progress.rate:,.0f} a second"
    left = progress.remaining
    return words if left is None else f"{words}, {_left(left)} left"


def _left(seconds: float) -> str:
    if seconds < 60:
        return f"{seconds:.0f} s"
    return f"{int(seconds // 60)} min {int(seconds % 60)} s"
