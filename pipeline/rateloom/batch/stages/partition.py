"""Stage: a species to its partition functions and thermochemistry over a temperature grid."""

from dataclasses import dataclass

import numpy as np

from rateloom.engine import Outcome
from rateloom.statmech import (
    Assembly,
    PartitionFunctions,
    Thermochemistry,
    partition_functions,
    thermochemistry,
)


@dataclass(frozen=True, slots=True)
class Grid:
    """Where it is wanted."""

    temperatures: tuple[float, ...]
    """[K]"""
    pressure: float
    """Standard pressure [Pa]."""


@dataclass(frozen=True, slots=True)
class Tabulated:
    """Both over the grid."""

    partition: PartitionFunctions
    thermochemistry: Thermochemistry


VALUE = Tabulated


def tabulate(grid: Grid, assembly: Assembly | None) -> Outcome:
    """Evaluate both; there are none without a species."""
    if assembly is None or assembly.species is None:
        return Outcome(None)
    temperatures = np.array(grid.temperatures)
    return Outcome(
        Tabulated(
            partition_functions(assembly.species, temperatures),
            thermochemistry(assembly.species, temperatures, grid.pressure),
        )
    )
