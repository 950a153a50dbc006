"""Stage: the calculations of one species or saddle, and what the job says of it, to the physical species."""

from dataclasses import dataclass

from rateloom.calculation import Calculation
from rateloom.engine import Outcome
from rateloom.statmech import Assembly, Choices, assemble

VALUE = Assembly


@dataclass(frozen=True, slots=True)
class SpeciesRequest:
    """What the job says, and which of the inputs is what."""

    choices: Choices
    is_saddle: bool
    has_frequencies: bool
    """Whether the first input is the calculation of geometry and frequencies."""
    has_energy: bool
    """Whether the last input is the calculation of the energy."""


def make(request: SpeciesRequest, *calculations: Calculation | None) -> Outcome:
    """Assemble a species; without one of its calculations there is none."""
    if any(calculation is None for calculation in calculations):
        return Outcome(None)
    frequencies = calculations[0] if request.has_frequencies else None
    energy = calculations[-1] if request.has_energy else None
    assembly = assemble(frequencies, energy, request.choices, is_saddle=request.is_saddle)
    return Outcome(assembly, assembly.remarks)
