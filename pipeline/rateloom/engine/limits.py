"""Limits on what a stage may use of its worker: seconds and threads.

In the main thread of a worker the time limit is a timer of the system, which also breaks into a library's waiting;
in another thread (a Dask worker) it is an exception that the interpreter raises between two of its own steps. Both
come again until the stage gives way, for a stage may swallow one.
"""

import contextlib
import ctypes
import signal
import threading
from collections.abc import Iterator
from types import FrameType

AGAIN = 0.5
"""Between two attempts to stop a stage [s]."""


class TimeIsUp(BaseException):
    """Raised inside a stage that took too long; no ``except Exception`` of a library holds it up."""


@contextlib.contextmanager
def time_limit(seconds: float | None) -> Iterator[None]:
    """Raise ``TimeIsUp`` in what runs inside once ``seconds`` have passed; None sets no limit."""
    if seconds is None:
        yield
    elif threading.current_thread() is threading.main_thread():
        with _timer(seconds):
            yield
    else:
        with _watcher(seconds):
            yield


@contextlib.contextmanager
def _timer(seconds: float) -> Iterator[None]:
    """Limit the main thread."""
    running = True

    def stop(_number: int, _frame: FrameType | None) -> None:
        if running:
            raise TimeIsUp

    before = signal.signal(signal.SIGALRM, stop)
    try:
        try:
            signal.setitimer(signal.ITIMER_REAL, seconds, AGAIN)
            yield
        finally:
            running = False
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0)
        signal.signal(signal.SIGALRM, before)


@contextlib.contextmanager
def _watcher(seconds: float) -> Iterator[None]:
    """Limit another thread."""
    thread = ctypes.c_ulong(threading.get_ident())
    lock = threading.Lock()
    ended = threading.Event()

    def watch() -> None:
        pause = seconds
        while not ended.wait(pause):
            pause = AGAIN
            with lock:
                if not ended.is_set():
                    ctypes.pythonapi.PyThreadState_SetAsyncExc(thread, ctypes.py_object(TimeIsUp))

    threading.Thread(target=watch, name="time limit", daemon=True).start()
    try:
        yield
    finally:
        with lock:
            ended.set()
            # One that was asked for but has not come must not come later, in the worker's own code.
            ctypes.pythonapi.PyThreadState_SetAsyncExc(thread, None)


def hold_to_one_thread() -> None:
    """Let the linear-algebra libraries loaded so far use one thread: sums in one order, the same bytes anywhere."""
    from threadpoolctl import threadpool_limits  # type: ignore[import-untyped]

    threadpool_limits(limits=1)
