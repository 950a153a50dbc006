"""Where tasks are carried out: in this process, or in worker processes of joblib's loky (``cluster``: on a cluster).

All take batches of tasks and give futures. Workers hold their linear-algebra libraries to one thread each, so that
any number of workers gives the same bytes.
"""

import contextlib
import importlib
import os
import signal
import threading
import time
from collections.abc import Iterator, Mapping, Sequence
from concurrent.futures import BrokenExecutor, Future
from functools import cache
from typing import Any, Protocol

from rateloom.engine.limits import hold_to_one_thread
from rateloom.engine.stage import Done, Stage, Task, Undone, run_task

ONE_THREAD = {
    "OMP_NUM_THREADS": "1",
    "OPENBLAS_NUM_THREADS": "1",
    "MKL_NUM_THREADS": "1",
    "VECLIB_MAXIMUM_THREADS": "1",
    "NUMEXPR_NUM_THREADS": "1",
}

Results = list[Done | Undone]


class Workers(Protocol):
    """Somewhere to send tasks."""

    @property
    def count(self) -> int:
        """How many batches are worked on at the same time."""

    @property
    def room(self) -> int:
        """How many batches to hand over before the first comes back."""

    def submit(self, tasks: Sequence[Task]) -> "Future[Results]":
        """Begin a batch. The future raises a ``RateloomError`` where there is no going on, and anything else where
        the worker was lost over the batch."""

    def close(self, *, now: bool) -> None:
        """Let the workers go, at once or after what they have begun."""


@cache
def table_of(stages: str) -> Mapping[str, Stage]:
    """Import a table of stages, once per process."""
    module, name = stages.split(":")
    table: Mapping[str, Stage] = getattr(importlib.import_module(module), name)
    hold_to_one_thread()
    return table


def run_batch(stages: str, tasks: Sequence[Task]) -> Results:
    """Carry out a batch in a worker.

    Parameters
    ----------
    stages
        ``module:name`` of the table of stages, so that no function travels.
    tasks
        Carried out in order.
    """
    table = table_of(stages)
    return [run_task(task, table) for task in tasks]


class InProcess:
    """The calling process itself."""

    count = 1
    room = 1  # what was handed over is finished: keep it before going on

    def __init__(self, stages: str) -> None:
        self._stages = stages

    def submit(self, tasks: Sequence[Task]) -> "Future[Results]":
        """Carry out a batch at once."""
        future: Future[Results] = Future()
        future.set_result(run_batch(self._stages, tasks))
        return future

    def close(self, *, now: bool) -> None:
        """Nothing is left to close."""


def _settle_in(parent: int) -> None:
    """Prepare a worker process: the parent alone is interrupted from the terminal, and none outlives it."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)

    def watch() -> None:
        while os.getppid() == parent:
            time.sleep(1.0)
        os._exit(1)

    threading.Thread(target=watch, name="parent watch", daemon=True).start()


@contextlib.contextmanager
def _interrupt_held_back() -> Iterator[None]:
    """Hold SIGINT back while processes are started: these inherit it and are deaf to the terminal from birth."""
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


class Processes:
    """Worker processes on this machine, started when the first batch comes."""

    def __init__(self, stages: str, count: int) -> None:
        self._stages = stages
        self.count = count
        self.room = 2 * count
        self._executor: Any = None

    def submit(self, tasks: Sequence[Task]) -> "Future[Results]":
        """Send a batch to the next free process."""
        if self._executor is None:
            from joblib.externals.loky import ProcessPoolExecutor

            self._executor = ProcessPoolExecutor(
                max_workers=self.count, env=ONE_THREAD, initializer=_settle_in, initargs=(os.getpid(),)
            )
        try:
            with _interrupt_held_back():
                return self._executor.submit(run_batch, self._stages, list(tasks))
        except BrokenExecutor:
            # A process died since the last batch; the futures of the batches it took along say so.
            self.close(now=True)
            return self.submit(tasks)

    def close(self, *, now: bool) -> None:
        """Stop the processes."""
        if self._executor is not None:
            self._executor.shutdown(wait=True, kill_workers=now)
            self._executor = None
