"""From calculations to the physical species, its partition functions and its thermochemistry.

Takes calculation records and the job file's choices, gives the species in SI units with remarks on it, and its
functions over a temperature grid. Reading outputs is left to ``calculation``, geometry to ``molecule``, reactions to
``rates``.
"""

from rateloom.statmech.assemble import Assembly, Facts, assemble
from rateloom.statmech.choices import Choices, choices_of
from rateloom.statmech.levels import GROUND_TERMS, GroundTerm, ground_term, spin_orbit_lowering
from rateloom.statmech.partition import PartitionFunctions, log_vibration_by_mode, partition_functions
from rateloom.statmech.species import Species
from rateloom.statmech.thermochemistry import Thermochemistry, thermochemistry

__all__ = [
    "GROUND_TERMS",
    "Assembly",
    "Choices",
    "Facts",
    "GroundTerm",
    "PartitionFunctions",
    "Species",
    "Thermochemistry",
    "assemble",
    "choices_of",
    "ground_term",
    "log_vibration_by_mode",
    "partition_functions",
    "spin_orbit_lowering",
    "thermochemistry",
]
