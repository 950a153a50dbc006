"""The imaginary mode of a calculation: as printed, or from its Hessian."""

from dataclasses import dataclass

import numpy as np
from scipy.constants import physical_constants

from rateloom.arrays import FloatArray
from rateloom.calculation import Calculation
from rateloom.molecule import (
    atomic_masses,
    normal_modes,
    without_rigid_motion,
)

ATOMIC_MASS = physical_constants["atomic mass constant"][0]  # kg
HARTREE = physical_constants["Hartree energy"][0]  # J
BOHR = physical_constants["Bohr radius"][0]  # m
ANGSTROM = 1e-10  # m
LEAST_LEFT = 0.1  # of the length of a mode; if taking out rigid motion leaves less, no vibration was printed


@dataclass(frozen=True, slots=True)
class ImaginaryMode:
    """The most negative frequency of a calculation with its displacement."""

    frequency_per_cm: float
    """Negative."""
    displacement: FloatArray
    """Shape (n_atoms, 3): Cartesian, free of rigid motion, of any length [1]."""
    masses: FloatArray
    """Shape (n_atoms,) [kg]"""


def lowest_frequency(calculation: Calculation) -> float | None:
    """Give the imaginary frequency of largest magnitude [cm-1], negative; None where there is none."""
    frequencies = calculation.frequencies_per_cm
    if frequencies is None or len(frequencies) == 0 or not np.nanmin(frequencies) < 0:
        return None
    return float(np.nanmin(frequencies))


def imaginary_mode(calculation: Calculation) -> ImaginaryMode | None:
    """Find how the atoms move in the imaginary mode.

    Parameters
    ----------
    calculation
        A frequency calculation of two or more atoms.

    Returns
    -------
    ImaginaryMode or None
        The displacement printed, else the one of the Hessian; None where the calculation has neither or no imaginary
        frequency.
    """
    frequency = lowest_frequency(calculation)
    if frequency is None or calculation.frequencies_per_cm is None:
        return None
    masses = _masses(calculation)
    printed = calculation.displacements
    if printed is not None and printed.shape == (len(calculation.frequencies_per_cm), len(calculation.atoms), 3):
        mode = printed[int(np.nanargmin(calculation.frequencies_per_cm))]
    elif calculation.hessian is not None:
        mode = _from_hessian(calculation.hessian, masses, calculation.geometry_angstrom)
    else:
        return None
    if not np.all(np.isfinite(mode)):
        return None
    clean = without_rigid_motion(mode, masses, calculation.geometry_angstrom)
    if not np.linalg.norm(clean) > LEAST_LEFT * np.linalg.norm(mode):
        return None
    return ImaginaryMode(frequency, clean, masses)


def _masses(calculation: Calculation) -> FloatArray:
    """Masses of the program, or of the most abundant isotopes where it prints none or nonsense [kg]."""
    printed = calculation.masses_u
    if printed is None or printed.shape != (len(calculation.atoms),) or not np.all(printed > 0):
        return atomic_masses(calculation.atoms)
    return printed * ATOMIC_MASS


def _from_hessian(hessian: FloatArray, masses: FloatArray, geometry_angstrom: FloatArray) -> FloatArray:
    """Displacement of the lowest mode of a Hessian [hartree/bohr2]."""
    _, displacements = normal_modes(hessian * HARTREE / BOHR**2, masses, geometry_angstrom * ANGSTROM)
    return displacements[0]
