"""Calculations: one output file of a quantum-chemistry program to one ``Calculation`` record.

Takes a path (and the bytes, where the caller has them) or the numbers of a paper; gives what the output says in the
units it prints, with remarks on what was repaired, assumed or chosen. cclib reads, with repairs in one place for what
it cannot; nothing is imported of it before a file is read. What the numbers mean for a rate is left to the rooms
above: no scaling, no symmetry, no judgement beyond whether the file is complete.
"""

from rateloom.calculation.description import as_json_dict, describe
from rateloom.calculation.given import given_calculation
from rateloom.calculation.motion import LINEAR
from rateloom.calculation.reading import read_calculation
from rateloom.calculation.record import Calculation, Level

__all__ = [
    "LINEAR",
    "READER_VERSION",
    "Calculation",
    "Level",
    "as_json_dict",
    "describe",
    "given_calculation",
    "read_calculation",
]

READER_VERSION = 3
"""Raised by hand when reading the same file gives another record."""
