"""Stage: the calculations of one species or saddle, and what was made of them, to remarks."""

from dataclasses import dataclass
from typing import Any

from rateloom.audit import Limits, calculation_remarks, species_remarks
from rateloom.engine import Outcome


@dataclass(frozen=True, slots=True)
class CalculationsCheck:
    """Inputs are the calculations and then the assembly."""

    limits: Limits
    is_saddle: bool
    has_frequencies: bool
    """Whether the first input is the calculation of geometry and frequencies."""
    has_energy: bool
    """Whether the last input before the assembly is the calculation of the energy."""


VALUE = bool


def check(request: CalculationsCheck, *inputs: Any) -> Outcome:
    """Check an entity as far as it was read."""
    *calculations, assembly = inputs
    frequencies = calculations[0] if request.has_frequencies else None
    energy = calculations[-1] if request.has_energy else None
    species = None if assembly is None else assembly.species
    of_files = calculation_remarks(frequencies, energy, request.limits, is_saddle=request.is_saddle)
    of_species = species_remarks(frequencies, energy, species, request.limits, is_saddle=request.is_saddle)
    remarks = (*of_files, *of_species)
    return Outcome(not remarks, remarks)
