"""A progress bar for work that lasts; any room may use it.

    with progress("walking ridges", total=n) as step:
        for ...:
            step(1)

Nothing appears unless standard error is a terminal and the work lasts over a second; only then is the
library that draws the bar imported.  Without a total the bar only says that work goes on.
"""

from __future__ import annotations

import sys
import threading
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import Any

__all__ = ["progress", "silence"]

PATIENCE = 1.0  # seconds before a bar appears

_silent: list[bool] = []


def silence() -> None:
    """Show no bar from now on (``--quiet``)."""
    _silent.append(True)


@contextmanager
def progress(label: str, total: float | None = None) -> Iterator[Callable[[float], None]]:
    """A bar on standard error while the block runs.

    Parameters
    ----------
    label : str
        What is being done, in a few words.
    total : float, optional
        How many steps there are.

    Yields
    ------
    callable
        ``step(n)`` tells that `n` more steps are done.
    """
    if _silent or sys.stderr is None or not sys.stderr.isatty():
        yield _nothing
        return
    bar = _Bar(label, total)
    try:
        yield bar.step
    finally:
        bar.close()


def _nothing(steps: float) -> None:
    """A step that nobody sees."""


class _Bar:
    """A bar that appears after a while."""

    def __init__(self, label: str, total: float | None) -> None:
        self.label = label
        self.total = total
        self.done = 0.0
        self.shown: Any = None
        self.closed = False
        self.lock = threading.Lock()
        self.timer = threading.Timer(PATIENCE, self.show)
        self.timer.daemon = True
        self.timer.start()

    def show(self) -> None:
        """Draw the bar; runs in the thread of the timer."""
        from rich.console import Console
        from rich.progress import BarColumn, Progress, TextColumn, TimeElapsedColumn

        with self.lock:
            if self.closed:
                return
            columns = (TextColumn("{task.description}"), BarColumn(), TimeElapsedColumn())
            # standard output and error stay as they are: a bar must not touch data
            self.shown = Progress(
                *columns,
                console=Console(stderr=True),
                transient=True,
                redirect_stdout=False,
                redirect_stderr=False,
            )
            self.shown.add_task(self.label, total=self.total, completed=self.done)
            self.shown.start()

    def step(self, steps: float) -> None:
        """Count steps."""
        self.done += steps
        if self.shown is not None:
            self.shown.update(self.shown.task_ids[0], completed=self.done)

    def close(self) -> None:
        """Take the bar away."""
        self.timer.cancel()
        with self.lock:
            self.closed = True
            if self.shown is not None:
                self.shown.stop()
