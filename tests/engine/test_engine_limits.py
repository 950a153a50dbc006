"""A time limit stops what runs inside it and nothing after it."""

import re
import threading
import time
from collections.abc import Callable

import pytest

from rateloom.engine.limits import TimeIsUp, time_limit


def in_thread(work: Callable[[], None]) -> None:
    work()


def in_other_thread(work: Callable[[], None]) -> None:
    """Run in a thread that is not the main one and raise here what it raised."""
    raised: list[BaseException] = []

    def run() -> None:
        try:
            work()
        except BaseException as error:
            raised.append(error)

    thread = threading.Thread(target=run)
    thread.start()
    thread.join()
    if raised:
        raise raised[0]


def endless() -> None:
    with time_limit(0.1):
        while True:
            pass


def stubborn() -> None:
    """Swallow the first attempts."""
    left = 2
    with time_limit(0.1):
        while True:
            try:
                while True:
                    pass
            except TimeIsUp:
                left -= 1
                if not left:
                    raise


def quick() -> None:
    for _ in range(50):
        with time_limit(0.5):
            pass
    total = 0
    end = time.monotonic() + 0.8
    while time.monotonic() < end:
        total += 1


@pytest.mark.parametrize("where", [in_thread, in_other_thread])
@pytest.mark.parametrize("work", [endless, stubborn])
def test_a_loop_that_never_ends_is_stopped(work: Callable[[], None], where: Callable[..., None]) -> None:
    with pytest.raises(TimeIsUp):
        where(work)


@pytest.mark.parametrize("where", [in_thread, in_other_thread])
def test_what_was_in_time_is_left_in_peace_afterwards(where: Callable[..., None]) -> None:
    where(quick)


def test_the_main_thread_is_stopped_inside_a_library_written_in_c() -> None:
    with pytest.raises(TimeIsUp), time_limit(0.1):
        re.match(r"(a+)+$", "a" * 40 + "b")  # takes years


def test_no_limit_is_no_limit() -> None:
    with time_limit(None):
        time.sleep(0.01)
