"""Stage: one output file, or the numbers of a paper, to a calculation record."""

from dataclasses import dataclass, replace

from rateloom.calculation import Calculation, read_calculation
from rateloom.engine import Outcome
from rateloom.errors import CalculationError, TooLargeError
from rateloom.remarks import Remark


@dataclass(frozen=True, slots=True)
class Reading:
    """How files are read."""

    sieve: bool = True
    """Whether lines at which nothing needed begins are kept from cclib, which changes no record."""


def read(options: Reading, path: str, data: bytes, *, largest: int | None) -> Outcome:
    """Read one output file.

    Raises
    ------
    TooLargeError
        It unpacks to more than ``largest`` bytes: a matter of the run's limits, so that no result is kept.
    """
    try:
        calculation = read_calculation(path, data, largest=largest, sieve=options.sieve)
    except TooLargeError:
        raise
    except CalculationError as error:
        return unreadable(error.message)
    return Outcome(replace(calculation, remarks=()), calculation.remarks)


def unreadable(reason: str) -> Outcome:
    """Remark on a file that cannot be opened or read."""
    return Outcome(None, (Remark("calculation-not-readable", reason),))


VALUE = Calculation
