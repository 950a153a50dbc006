"""Molecular partition functions in the rigid-rotor, harmonic-oscillator approximation, as natural logarithms.

The zero of energy is the ground level of the species (lowest electronic level with zero-point energy). Nuclear spin
is left out. Translation is per volume, so that a product of partition functions has the unit of a concentration.
"""

from dataclasses import dataclass

import numpy as np
from scipy.constants import h, k, pi

from rateloom.arrays import FloatArray
from rateloom.statmech.species import Species


@dataclass(frozen=True, slots=True, kw_only=True)
class PartitionFunctions:
    """ln q over a temperature grid, by kind of motion; every array has the shape (n_temperatures,)."""

    temperatures: FloatArray
    """[K]"""
    log_translation: FloatArray
    """Of q/V [ln m-3]."""
    log_rotation: FloatArray
    """Symmetry number included [1]."""
    log_vibration: FloatArray
    """From the zero-point level [1]."""
    log_electronic: FloatArray
    """From the lowest level [1]."""
    log_optical: float
    """Of the number of optical isomers [1]."""

    @property
    def log_total(self) -> FloatArray:
        """Of q/V, all motions and optical isomers together [ln m-3], shape (n_temperatures,)."""
        return self.log_translation + self.log_rotation + self.log_vibration + self.log_electronic + self.log_optical


def partition_functions(species: Species, temperatures: FloatArray) -> PartitionFunctions:
    """Evaluate all partition functions of a species.

    Parameters
    ----------
    species
        In SI units.
    temperatures : ndarray, shape (n_temperatures,)
        [K], above zero.

    Returns
    -------
    PartitionFunctions
        Logarithms [1], of translation [ln m-3], each of shape (n_temperatures,).

    Raises
    ------
    ValueError
        A temperature, a frequency or a moment of inertia is not above zero.

    References
    ----------
    .. [1] D. A. McQuarrie, Statistical Mechanics, Harper & Row, 1976, ch. 5, 6 and 8 (from memory).
    """
    return PartitionFunctions(
        temperatures=temperatures,
        log_translation=log_translation(species.mass, temperatures),
        log_rotation=log_rotation(species.moments, species.symmetry_number, temperatures),
        log_vibration=log_vibration(species.frequencies, temperatures),
        log_electronic=log_electronic(species.degeneracies, species.level_energies, temperatures),
        log_optical=float(np.log(species.optical_isomers)),
    )


def _above_zero(values: FloatArray, what: str) -> None:
    if not np.all(values > 0.0):
        msg = f"{what} must be above zero, the lowest is {np.min(values):.6g}"
        raise ValueError(msg)


def log_translation(mass: float, temperatures: FloatArray) -> FloatArray:
    """Natural logarithm of the translational partition function per volume.

    Parameters
    ----------
    mass
        [kg]
    temperatures : ndarray, shape (n_temperatures,)
        [K], above zero.

    Returns
    -------
    ndarray, shape (n_temperatures,)
        ln(q/V) [ln m-3].

    Raises
    ------
    ValueError
        A temperature is not above zero.

    References
    ----------
    .. [1] D. A. McQuarrie, Statistical Mechanics, Harper & Row, 1976, eq. 5-20 (from memory).
    """
    _above_zero(temperatures, "temperatures [K]")
    return 1.5 * np.log(2.0 * pi * mass * k * temperatures / h**2)


def log_rotation(moments: FloatArray, symmetry_number: int, temperatures: FloatArray) -> FloatArray:
    """Natural logarithm of the classical rotational partition function of a rigid rotor.

    Parameters
    ----------
    moments : ndarray, shape (0,), (1,) or (3,)
        Principal moments of inertia of an atom, a linear or a nonlinear molecule [kg m2].
    symmetry_number
        Rotations that bring the molecule onto itself [1].
    temperatures : ndarray, shape (n_temperatures,)
        [K], above zero.

    Returns
    -------
    ndarray, shape (n_temperatures,)
        ln q [1]; zero for an atom.

    Raises
    ------
    ValueError
        A temperature or a moment is not above zero.

    References
    ----------
    .. [1] D. A. McQuarrie, Statistical Mechanics, Harper & Row, 1976, eqs. 6-26 and 8-17 (from memory).
    """
    _above_zero(temperatures, "temperatures [K]")
    if moments.size == 0:
        return np.zeros_like(temperatures)
    _above_zero(moments, "moments of inertia [kg m2]")
    # T over the rotational temperature of each axis, h2 / (8 pi2 I k).
    reduced = 8.0 * pi**2 * k * temperatures[:, np.newaxis] * moments / h**2
    if moments.size == 1:
        return np.log(reduced[:, 0] / symmetry_number)
    return 0.5 * (np.log(pi) + np.log(reduced).sum(axis=1)) - np.log(symmetry_number)


def log_vibration_by_mode(frequencies: FloatArray, temperatures: FloatArray) -> FloatArray:
    """Natural logarithm of the partition function of each harmonic vibration, energies from the zero-point level.

    Parameters
    ----------
    frequencies : ndarray, shape (n_modes,)
        Real frequencies [Hz], already scaled, the reaction coordinate left out.
    temperatures : ndarray, shape (n_temperatures,)
        [K], above zero.

    Returns
    -------
    ndarray, shape (n_temperatures, n_modes)
        ln q [1].

    Raises
    ------
    ValueError
        A frequency or a temperature is not above zero.

    References
    ----------
    .. [1] D. A. McQuarrie, Statistical Mechanics, Harper & Row, 1976, eq. 6-20 (from memory).
    """
    _above_zero(temperatures, "temperatures [K]")
    if frequencies.size:
        _above_zero(frequencies, "frequencies [Hz]")
    reduced = h * frequencies / (k * temperatures[:, np.newaxis])
    # expm1 keeps the digits of soft modes, log1p those of stiff ones
    soft, stiff = np.log(-np.expm1(-reduced)), np.log1p(-np.exp(-np.maximum(reduced, 1.0)))
    return -np.where(reduced < 1.0, soft, stiff)


def log_vibration(frequencies: FloatArray, temperatures: FloatArray) -> FloatArray:
    """Natural logarithm of the harmonic vibrational partition function, energies from the zero-point level.

    Parameters
    ----------
    frequencies : ndarray, shape (n_modes,)
        As for ``log_vibration_by_mode`` [Hz].
    temperatures : ndarray, shape (n_temperatures,)
        [K], above zero.

    Returns
    -------
    ndarray, shape (n_temperatures,)
        ln q [1].

    Raises
    ------
    ValueError
        A frequency or a temperature is not above zero.

    References
    ----------
    .. [1] D. A. McQuarrie, Statistical Mechanics, Harper & Row, 1976, eq. 6-20 (from memory).
    """
    return log_vibration_by_mode(frequencies, temperatures).sum(axis=1)


def log_electronic(degeneracies: FloatArray, level_energies: FloatArray, temperatures: FloatArray) -> FloatArray:
    """Natural logarithm of the electronic partition function, a sum over levels.

    Parameters
    ----------
    degeneracies : ndarray, shape (n_levels,)
        [1]
    level_energies : ndarray, shape (n_levels,)
        Above the lowest level [J].
    temperatures : ndarray, shape (n_temperatures,)
        [K], above zero.

    Returns
    -------
    ndarray, shape (n_temperatures,)
        ln q [1].

    Raises
    ------
    ValueError
        A temperature is not above zero.

    References
    ----------
    .. [1] D. A. McQuarrie, Statistical Mechanics, Harper & Row, 1976, eq. 5-8 (from memory).
    """
    _above_zero(temperatures, "temperatures [K]")
    return np.log((degeneracies * np.exp(-level_energies / (k * temperatures[:, np.newaxis]))).sum(axis=1))
