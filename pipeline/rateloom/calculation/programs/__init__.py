"""The programs whose output can be read: one module each, one line each in the table."""

from rateloom.calculation.programs.gamess import GAMESS
from rateloom.calculation.programs.gaussian import GAUSSIAN
from rateloom.calculation.programs.molpro import MOLPRO
from rateloom.calculation.programs.nwchem import NWCHEM
from rateloom.calculation.programs.orca import ORCA
from rateloom.calculation.programs.others import OTHERS
from rateloom.calculation.programs.program import PrintedEnergy, Program
from rateloom.calculation.programs.psi4 import PSI4
from rateloom.calculation.programs.qchem import QCHEM
from rateloom.calculation.programs.turbomole import TURBOMOLE

__all__ = ["PROGRAMS", "PrintedEnergy", "Program", "recognise"]

PROGRAMS: tuple[Program, ...] = (NWCHEM, PSI4, ORCA, GAUSSIAN, QCHEM, MOLPRO, GAMESS, TURBOMOLE, *OTHERS)


def recognise(text: str) -> Program | None:
    """Tell the program by the first heading in a text; outputs quote the names of others further down."""
    first, found = len(text), None
    for program in PROGRAMS:
        for phrase in program.phrases:
            # What stands further down than the first heading so far need not be searched.
            place = text.find(phrase, 0, first + len(phrase) - 1)
            if place >= 0:
                first, found = place, program
    return found
