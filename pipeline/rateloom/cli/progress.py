"""Progress on stderr: a bar on a terminal, a plain line now and then elsewhere."""

import contextlib
import sys
import time
from collections.abc import Iterator
from typing import Protocol

SECONDS_BETWEEN_LINES = 5.0


class Report(Protocol):
    """Called with how many stages are done, how many there are to do as far as known, and the last one's name."""

    def __call__(self, done: int, total: int, last: str) -> None:
        """Show it."""


@contextlib.contextmanager
def progress() -> Iterator[Report]:
    """Give a function that shows progress while the context lasts."""
    yield from _bar() if sys.stderr.isatty() else _lines()


def _bar() -> Iterator[Report]:
    from rich.console import Console
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeRemainingColumn

    columns = (BarColumn(), MofNCompleteColumn(), TimeRemainingColumn(), TextColumn("{task.description}"))
    with Progress(*columns, console=Console(stderr=True), transient=True) as bars:
        task = bars.add_task("", total=None)

        def show(done: int, total: int, last: str) -> None:
            bars.update(task, completed=done, total=total, description=last)

        yield show


def _lines() -> Iterator[Report]:
    due = [time.monotonic() + SECONDS_BETWEEN_LINES]

    def show(done: int, total: int, last: str) -> None:
        if time.monotonic() >= due[0]:
            due[0] = time.monotonic() + SECONDS_BETWEEN_LINES
            print(f"{done} of {total} stages done ({last})", file=sys.stderr, flush=True)

    yield show
