"""Stage: the numbers of a paper, as they stand in a job file, to a calculation record."""

from dataclasses import replace

from rateloom.calculation import Calculation, given_calculation
from rateloom.engine import Outcome
from rateloom.job import Given

VALUE = Calculation


def take(given: Given) -> Outcome:
    """Make the record that an output file with these numbers would give."""
    calculation = given_calculation(
        energy_hartree=given.energy_hartree,
        frequencies_per_cm=given.frequencies_per_cm,
        atoms=given.atoms,
        geometry_angstrom=given.geometry_angstrom,
        charge=given.charge,
        multiplicity=given.multiplicity,
        level=given.level,
    )
    return Outcome(replace(calculation, remarks=()), calculation.remarks)
