"""Toy stages that worker processes import by name: sums, files, and every way to misbehave.

What a stage did is told by files in the folder named by TOY_DIARY, for results must not depend on it.
"""

import contextlib
import os
import signal
import sys
import time
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.engine import Outcome, Stage
from rateloom.errors import TooLargeError
from rateloom.remarks import Remark


@dataclass(frozen=True, slots=True)
class Shift:
    """How much a stage adds."""

    by: float = 0.0
    mode: str = ""


@dataclass(frozen=True, slots=True)
class Numbers:
    """A value."""

    values: FloatArray


def diary(line: str) -> None:
    """Note what happens, in one atomic write."""
    folder = os.environ.get("TOY_DIARY")
    if folder:
        with (Path(folder) / "diary.txt").open("a", encoding="utf-8") as file:
            file.write(line + "\n")


def read(shift: Shift, name: str, data: bytes, *, largest: int | None) -> Outcome:
    """Read numbers from text, the last digit rounded away."""
    diary(f"read {name}")
    _misbehave(shift.mode)
    if largest is not None and len(data) > largest:
        msg = f"{name} is larger than {largest} bytes"
        raise TooLargeError(msg)
    values = np.array([round(float(word), 3) for word in data.split()]) + shift.by
    remarks = (Remark("empty", "no numbers"),) if not len(values) else ()
    return Outcome(Numbers(values), remarks)


def unreadable(reason: str) -> Outcome:
    """Say why there are no numbers."""
    return Outcome(None, (Remark("not-read", reason),))


def add(shift: Shift, *numbers: Numbers | None) -> Outcome:
    """Add arrays."""
    diary(f"add {shift.by:g}")
    _misbehave(shift.mode)
    if any(n is None for n in numbers):
        return Outcome(None, (Remark("missing", "an input is missing"),))
    total = sum((n.values.sum() for n in numbers if n is not None), shift.by)
    return Outcome(Numbers(np.array([total])))


def _misbehave(mode: str) -> None:
    """Do what a bad stage, library or machine might do."""
    if mode == "raise":
        msg = "no such luck"
        raise ValueError(msg)
    if mode == "exit":
        sys.exit(3)
    if mode == "die":
        diary(f"died {os.getpid()}")
        os.kill(os.getpid(), signal.SIGKILL)
    if mode == "die once":
        marker = Path(os.environ["TOY_DIARY"]) / "died"
        if not marker.exists():
            marker.touch()
            os.kill(os.getpid(), signal.SIGKILL)
    if mode == "memory":
        import resource

        resource.setrlimit(resource.RLIMIT_AS, (2**31, resource.getrlimit(resource.RLIMIT_AS)[1]))
        try:
            np.ones(2**30)  # 8 GB
        finally:
            resource.setrlimit(resource.RLIMIT_AS, (-1, resource.getrlimit(resource.RLIMIT_AS)[1]))
    if mode == "sleep":
        time.sleep(0.2)
    if mode == "hang":
        _hang()
    if mode == "ill once":
        marker = Path(os.environ["TOY_DIARY"]) / "ill"
        if not marker.exists():
            marker.touch()
            msg = "ill today"
            raise RuntimeError(msg)


def _hang() -> None:
    """Never end, and let no ordinary handler end it."""
    while True:
        with contextlib.suppress(Exception):
            time.sleep(0.01)


STAGES = {
    "read": Stage("read", 1, read, Shift, Numbers, unreadable),
    "add": Stage("add", 1, add, Shift, Numbers),
}
