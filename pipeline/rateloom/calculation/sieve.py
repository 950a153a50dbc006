"""The sieve in front of cclib: lines at which nothing begins that is needed are not offered to it.

cclib tries some hundred phrases on every line that no block before it has taken, which is most of its time. Rows of
numbers, and the headings of tables that no part of a record is made of, are let through only to a block that reads
on by itself. What a program's table does not name as idle is offered as ever; every line stays in the text, in which
our own expressions look, and keeps its number.
"""

import re
from collections.abc import Callable

from rateloom.calculation.programs.program import Program

ROWS = r"(?=[^A-Za-z\n]*+(?:[A-Za-z][^A-Za-z\n]++)*+$)[^\n]*?\d\.\d"
"""Numbers, one of them decimal, with single letters at most (exponents, element symbols)."""
Sieve = Callable[[str], object]
"""A line to something true where it is idle."""


def sieve_of(program: Program) -> Sieve | None:
    """Make the sieve of a program; None where its table names no idle lines."""
    if not program.idle_rows and not program.idle_headings:
        return None
    rows = (rf"{row}[^A-Za-z\n]*$" for row in program.idle_rows)
    return re.compile("|".join((r"\s*$", ROWS, *rows, *program.idle_headings))).match
