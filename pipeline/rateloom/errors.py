"""What stops a command. A defect expected in a batch is a remark (see ``remarks``), not an exception.

::

    RateloomError
    ├── JobError          the job file cannot be used: every problem of it at once
    ├── CalculationError  one output file cannot be read
    │   └── TooLargeError     it is larger than what may be read
    ├── StoreError        the store cannot be used
    │   ├── StoreBusyError    another run holds it
    │   └── StoreVersionError it was written by a newer version
    ├── ClusterError      the cluster cannot be used, or not any more
    ├── OutputError       the output folder cannot be written
    └── UnknownCodeError  no finding has the code that was asked for
"""

from dataclasses import dataclass


class RateloomError(Exception):
    """Root of the errors that reach a user as a message."""


@dataclass(frozen=True, slots=True)
class Problem:
    """One fault of a job file: where it is, what it is and what to do."""

    file: str
    line: int
    """Counted from 1; 0 where the fault is the whole file."""
    key: str
    """Path of keys, e.g. ``reactions.ch4-h.transition_state``; empty for the whole file."""
    message: str
    advice: str = ""

    def __str__(self) -> str:
        """Write ``file:line: key: message`` and the advice indented below it."""
        place = f"{self.file}:{self.line}" if self.line else self.file
        key = f"{self.key}: " if self.key else ""
        advice = f"\n    {self.advice}" if self.advice else ""
        return f"{place}: {key}{self.message}{advice}"


class JobError(RateloomError):
    """The job file cannot be used.

    Parameters
    ----------
    problems
        Every fault found, in the order of the file.
    """

    def __init__(self, problems: tuple[Problem, ...]) -> None:
        super().__init__(problems)
        self.problems = problems

    def __str__(self) -> str:
        """Write all problems, one a paragraph."""
        return "\n".join(str(problem) for problem in self.problems)


class CalculationError(RateloomError):
    """One output file cannot be read.

    Parameters
    ----------
    message
        What happened, with the program and line where known, and what to do.
    """

    def __init__(self, message: str) -> None:
        super().__init__(message)
        self.message = message


class TooLargeError(CalculationError):
    """An output file is larger, perhaps only when it is unpacked, than what may be read."""


class StoreError(RateloomError):
    """The store of stage results cannot be used."""


class StoreBusyError(StoreError):
    """Another run holds the store."""


class StoreVersionError(StoreError):
    """The store was written by a newer version of the program."""


class ClusterError(RateloomError):
    """The cluster cannot be used, or not any more."""


class OutputError(RateloomError):
    """The output folder cannot be written."""


class UnknownCodeError(RateloomError):
    """No finding has the code that was asked for.

    Parameters
    ----------
    code
        As it was asked for.
    closest
        Codes there are that look like it.
    """

    def __init__(self, code: str, closest: tuple[str, ...]) -> None:
        super().__init__(code, closest)
        self.code = code
        self.closest = closest

    def __str__(self) -> str:
        """Name the code and the closest ones."""
        hint = f" Closest: {', '.join(self.closest)}." if self.closest else ""
        return f"no finding is called '{self.code}'.{hint}"
