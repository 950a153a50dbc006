"""One output file to one record: bytes, text, lines, cclib, record, checks."""

from collections.abc import Iterable
from typing import TYPE_CHECKING

from rateloom.calculation.output import LARGEST, Output, load, open_output
from rateloom.calculation.programs import PROGRAMS, Program, recognise
from rateloom.calculation.record import Calculation
from rateloom.errors import CalculationError

if TYPE_CHECKING:
    from rateloom.calculation.track import Track


def read_calculation(
    path: str, data: bytes | None = None, largest: int | None = LARGEST, *, sieve: bool = True
) -> Calculation:
    """Read one output file of a quantum-chemistry program.

    Parameters
    ----------
    path : str
        Path of the output, plain or compressed with gzip, bzip2 or xz; it stands in messages.
    data : bytes, optional
        Content of the file where the caller has read it already.
    largest : int, optional
        How many bytes it may unpack to; None sets no limit.
    sieve : bool, optional
        Whether lines at which nothing needed begins are kept from cclib, which takes time and changes no record.

    Returns
    -------
    Calculation
        What the output says. Defects that do not keep it from being read are remarks of the record.

    Raises
    ------
    CalculationError
        The file is missing, empty, binary, damaged, of no known program, or reading it stops.
    TooLargeError
        It unpacks to more than ``largest`` bytes.
    """
    output = open_output(path, load(path, largest) if data is None else data, largest)
    program = recognise(output.text)
    if program is None:
        raise unknown(output)
    # cclib takes a second to load: commands that read no file shall not wait for it.
    from rateloom.calculation.build import build
    from rateloom.calculation.checks import absurd

    track = follow_sieved(output, program) if sieve else follow_all(output, program)
    try:
        record = build(output, program, track)
    except (ArithmeticError, AttributeError, LookupError, TypeError, ValueError) as error:
        raise contradictory(output, program, error) from error
    if fault := absurd(record):
        raise impossible(output, program, fault)
    return record


def follow_all(output: Output, program: Program) -> "Track":
    """Let cclib look at every line."""
    from rateloom.calculation.track import follow

    return follow(output, program, numbered(output, program))


def follow_sieved(output: Output, program: Program) -> "Track":
    """Keep idle lines from cclib; should it stop for want of one of them, let it look at every line."""
    from rateloom.calculation.sieve import sieve_of
    from rateloom.calculation.track import follow

    idle = sieve_of(program)
    if idle is None:
        return follow_all(output, program)
    try:
        return follow(output, program, numbered(output, program), idle)
    except CalculationError:
        return follow_all(output, program)


def numbered(output: Output, program: Program) -> Iterable[tuple[int, str]]:
    """Give the lines, mended for cclib, with their numbers."""
    lines = output.lines()
    return enumerate(lines if program.mend is None else map(program.mend, lines), start=1)


def impossible(output: Output, program: Program, fault: str) -> CalculationError:
    """Say that a number cannot be."""
    return CalculationError(
        f"{output.name}: this {program.name} output prints {fault}, which no molecule has. "
        "Look there whether the file is damaged or the calculation diverged."
    )


def contradictory(output: Output, program: Program, error: Exception) -> CalculationError:
    """Say that what was read does not fit together, as after damage to a file."""
    return CalculationError(
        f"{output.name}: the parts of this {program.name} output contradict each other ({type(error).__name__}: "
        f"{str(error)[:120]}). If it was edited or joined from several files, take the original outputs one by one."
    )


def unknown(output: Output) -> CalculationError:
    """Say that no program is recognised."""
    first = next((line.strip() for line in output.lines() if line.strip()), "")
    names = ", ".join(program.name for program in PROGRAMS)
    return CalculationError(
        f"{output.name}: no known program printed this file (it begins {first[:60]!r}). Name the main output with "
        f"its heading, of one of: {names}."
    )
