"""Frequencies recalculated from the force constants of a calculation: for other isotopes, or where one was lost."""

import numpy as np
from numpy.typing import NDArray
from scipy.constants import c, centi, physical_constants

from rateloom.arrays import FloatArray
from rateloom.calculation.record import Calculation
from rateloom.molecule import force_constants_from_modes, frequencies_for_masses
from rateloom.statmech.identity import Framework

PER_CM = c / centi  # Hz
ZERO = 1e-3  # cm-1: what is printed below this is no vibration
_HESSIAN = physical_constants["Hartree energy"][0] / physical_constants["Bohr radius"][0] ** 2  # J/m2


def modes_for_isotopes(
    calculation: Calculation, framework: Framework, printed: FloatArray
) -> tuple[FloatArray | None, str]:
    """Recalculate the frequencies for other isotopes than the calculation's.

    Parameters
    ----------
    calculation : Calculation
        With a Hessian [hartree/bohr2] or the displacements of the modes [1].
    framework : Framework
        Positions [m], new masses and those of the modes [kg].
    printed : ndarray, shape (n_modes,)
        Frequencies of the calculation, which the force constants must give back [cm-1].

    Returns
    -------
    ndarray, shape (n_modes,), or None
        Frequencies, ascending, imaginary ones negative [cm-1].
    str
        From what they come, or why there are none.

    References
    ----------
    .. [1] E. B. Wilson, J. C. Decius, P. C. Cross, Molecular Vibrations, McGraw-Hill, 1955, ch. 8 (from memory).
    """
    reasons = []
    for name, force_constants in _force_constants(calculation, framework, printed):
        if isinstance(force_constants, str):
            reasons.append(force_constants)
            continue
        place = framework.positions, framework.shape
        again = frequencies_for_masses(force_constants, framework.masses_of_modes, *place) / PER_CM
        worst = float(np.abs(again - np.sort(printed)).max())
        if _agree(again, np.sort(printed)).all():
            new = frequencies_for_masses(force_constants, framework.masses, *place) / PER_CM
            return new, f"recalculated for the isotopes from the {name}"
        reasons.append(f"the {name} miss the printed frequencies by {worst:.3g} cm-1")
    why = "; ".join(reasons) or "the output prints neither"
    message = (
        "Other isotopes than the calculation's need its Hessian or its normal modes with all digits, and "
        f"these cannot be used: {why}."
    )
    return None, message


def _agree(again: FloatArray, printed: FloatArray) -> NDArray[np.bool_]:
    """Whether force constants give printed frequencies [cm-1] back, as well as their digits and constants allow."""
    return np.isclose(again, printed, atol=3.0, rtol=0.01)


def _force_constants(
    calculation: Calculation, framework: Framework, printed: FloatArray
) -> list[tuple[str, FloatArray | str]]:
    """Force constants [J/m2] by every way there is, the most exact first; a reason in their place where one fails."""
    ways: list[tuple[str, FloatArray | str]] = []
    masses, positions, shape = framework.masses_of_modes, framework.positions, framework.shape
    size = 3 * len(masses)
    hessian = calculation.hessian
    if hessian is not None and hessian.shape == (size, size) and np.all(np.isfinite(hessian)):
        ways.append(("Hessian", hessian * _HESSIAN))
    displacements = calculation.displacements
    if displacements is not None and displacements.shape == (len(printed), len(masses), 3):
        try:
            rebuilt = force_constants_from_modes(displacements, printed * PER_CM, masses, positions, shape)
            ways.append(("normal modes", rebuilt))
        except ValueError as error:
            ways.append(("normal modes", str(error)))
    return ways


def recovered_modes(calculation: Calculation, framework: Framework, printed: FloatArray) -> FloatArray | None:
    """Recalculate all vibrations from the Hessian where the output lacks some.

    A program that takes a nearly linear molecule for bent projects the rotation about its axis out of the Hessian,
    and one bend with it.

    Parameters
    ----------
    calculation : Calculation
        With a Hessian [hartree/bohr2].
    framework : Framework
        Positions [m] and masses of the modes [kg].
    printed : ndarray, shape (n_modes,)
        Frequencies of the calculation, zeros among them perhaps [cm-1].

    Returns
    -------
    ndarray, shape (n_modes,), or None
        All frequencies, ascending, imaginary ones negative [cm-1]; None where there is no Hessian that gives back
        the printed ones.

    References
    ----------
    .. [1] W. H. Miller, N. C. Handy, J. E. Adams, J. Chem. Phys. 72 (1980) 99, for the projection (from memory).
    """
    present = np.sort(printed[np.abs(printed) > ZERO])
    for name, force_constants in _force_constants(calculation, framework, printed):
        if name != "Hessian" or isinstance(force_constants, str):
            continue
        place = framework.positions, framework.shape
        every = frequencies_for_masses(force_constants, framework.masses_of_modes, *place) / PER_CM
        remaining = every
        for frequency in present:
            if not len(remaining) or not _agree(remaining, frequency).any():
                return None
            remaining = np.delete(remaining, np.abs(remaining - frequency).argmin())
        if len(present) and np.all(np.abs(every) > ZERO):
            return every
    return None
