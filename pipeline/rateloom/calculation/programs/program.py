"""What reading needs to know of one program: how to recognise its output, and where it prints results."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy.constants import c, centi, giga

from rateloom.arrays import FloatArray
from rateloom.calculation.programs.search import matches
from rateloom.calculation.record import Level
from rateloom.remarks import Remark

NUMBER = r"([-+]?\d*\.\d+(?:[DdEe][-+]?\d+)?)"
"""A decimal number as one group."""
GHZ_PER_CM = c / centi / giga
"""Frequency of one cm-1 [GHz]."""


@dataclass(frozen=True, slots=True)
class PrintedEnergy:
    """An energy where it is printed."""

    kind: str
    position: int
    value: float
    """[hartree]"""


LevelReader = Callable[[str, str, dict[str, Any]], Level]
"""(text up to the energy taken, kind of that energy, what cclib says of the run) to the level of theory."""
EnergyReader = Callable[[str], list[PrintedEnergy]]
"""Text to the energies in it, for a program whose lines do not say by themselves what they are."""
SpanReader = Callable[[str], list[tuple[int, int]]]
"""Text to parts of it, as first position and the one behind the last."""
SearchReader = Callable[[str], list[tuple[int, bool]]]
"""Text to the places where optimisations ended, and whether they converged."""
MultiplicityReader = Callable[[str], int | None]
"""Text to the last spin multiplicity in it, None where it prints none."""
ArrayReader = Callable[[str], FloatArray | None]
"""Part of a text to an array, None where it is not printed."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Program:
    """One program; patterns are regular expressions in which ``^`` and ``$`` match at every line."""

    name: str
    reader: str
    """Class that reads the output, as ``module:class``: cclib's own or the repaired one."""
    phrases: tuple[str, ...]
    """Words of its heading, any one of which tells the program."""
    level: LevelReader
    begins: str = ""
    """A job or run begins; empty where a file holds one only."""
    ends: str = ""
    """A job ended normally."""
    fails: str = ""
    """A job was given up."""
    version: str = ""
    """Version as one group; empty where what cclib says is good."""
    energies: tuple[tuple[str, str], ...] = ()
    """(kind, pattern with the number as its one group)."""
    special_energies: EnergyReader | None = None
    mend: Callable[[str], str] | None = None
    """Corrects one line before cclib sees it; the number of lines stays."""
    idle_rows: tuple[str, ...] = ()
    """Labels, at the beginning of a line, of rows of numbers at which nothing begins that cclib must read."""
    idle_headings: tuple[str, ...] = ()
    """Beginnings of lines that head what cclib would read and no record needs."""
    masses: str = ""
    """Mass of one atom as one group, where cclib reads none [u]."""
    ends_of_search: SearchReader | None = None
    """Where optimisations ended, for a program in which lines alone do not tell."""
    converged: str = ""
    not_converged: str = ""
    geometry_follows: bool = False
    """The geometry in which an optimisation ended is printed behind the line that says so."""
    spin_squared: str = ""
    """<S**2> of the reference before annihilation as one group."""
    multiplicity: MultiplicityReader | None = None
    """Spin multiplicity where cclib's is missing or not to be trusted."""
    displaced: SpanReader | None = None
    """Parts of a text that belong to the displaced geometries of a numerical differentiation."""
    gradient: ArrayReader | None = None
    """Gradient, shape (n, 3) [hartree/bohr], of the last such block in a text."""
    rotational_constants: ArrayReader | None = None
    """[cm-1] of the last such block in a text."""
    hessian: ArrayReader | None = None
    """Shape (3 n_atoms, 3 n_atoms) [hartree/bohr2] of the last such block in a text."""
    hessian_is_mass_weighted: bool = False
    """The Hessian is divided by the square root of both masses [u], in units of 1/1000."""
    caution: Callable[[str], tuple[Remark, ...]] | None = None
    """What is to be said of a text."""
    no_geometry_advice: str = ""
    """What to do where the output holds no geometry."""


def positions(expression: str, text: str) -> list[int]:
    """Positions at which an expression matches; none for an empty expression."""
    return [match.start() for match in matches(expression, text)] if expression else []


def last_group(expression: str, text: str) -> str:
    """First group of the last match, empty where there is none."""
    group = ""
    for match in matches(expression, text):
        group = match.group(1)
    return group


def first_group(expression: str, text: str) -> str:
    """First group of the first match, empty where there is none."""
    match = next(matches(expression, text), None)
    return match.group(1) if match else ""


def last_table(expression: str, text: str, columns: slice) -> FloatArray | None:
    """Columns of the last table that an expression (with the rows as its one group) matches, None without one."""
    rows = [line.split()[columns] for line in last_group(expression, text).splitlines() if line.strip()]
    return np.array([[number(word) for word in row] for row in rows]) if rows else None


def number(word: str) -> float:
    """Read a decimal number, also with the exponent letter D of Fortran."""
    return float(word.replace("D", "E").replace("d", "e"))
