"""Ideal-gas thermochemistry of a species from its partition functions, by analytic derivatives.

Enthalpy and Gibbs energy are relative to the enthalpy at 0 K, the ground level of the species.
"""

from dataclasses import dataclass

import numpy as np
from scipy.constants import N_A, R, h, k

from rateloom.arrays import FloatArray
from rateloom.statmech.partition import PartitionFunctions, partition_functions
from rateloom.statmech.species import Species


@dataclass(frozen=True, slots=True, kw_only=True)
class Thermochemistry:
    """Molar functions over a temperature grid; every array has the shape (n_temperatures,)."""

    temperatures: FloatArray
    """[K]"""
    pressure: float
    """Standard pressure [Pa]"""
    heat_capacity: FloatArray
    """Cp [J/mol/K]"""
    entropy: FloatArray
    """S at the standard pressure [J/mol/K]"""
    enthalpy: FloatArray
    """H(T) - H(0) [J/mol]"""
    gibbs_energy: FloatArray
    """G(T) - H(0) [J/mol]"""


def thermochemistry(
    species: Species,
    temperatures: FloatArray,
    pressure: float,
    partition: PartitionFunctions | None = None,
) -> Thermochemistry:
    """Evaluate heat capacity, entropy, enthalpy and Gibbs energy of an ideal gas.

    Parameters
    ----------
    species
        In SI units.
    temperatures : ndarray, shape (n_temperatures,)
        [K], above zero.
    pressure
        Standard pressure [Pa], above zero.
    partition
        Of the same species at the same temperatures, where they have been evaluated already.

    Returns
    -------
    Thermochemistry
        Molar functions [J/mol, J/mol/K], each of shape (n_temperatures,).

    Raises
    ------
    ValueError
        The pressure, a temperature, a frequency or a moment of inertia is not above zero.

    References
    ----------
    .. [1] D. A. McQuarrie, Statistical Mechanics, Harper & Row, 1976, ch. 8 (from memory).
    """
    if not pressure > 0.0:
        msg = f"the standard pressure must be above 0 Pa, not {pressure:.6g} Pa"
        raise ValueError(msg)
    if partition is None:
        partition = partition_functions(species, temperatures)
    vibration_energy, vibration_capacity = _vibration(species.frequencies, temperatures)
    electronic_energy, electronic_capacity = _electronic(species, temperatures)
    # Halves of R T for translation and rotation; one R T more from p V.
    degrees = 3 + species.moments.size + (species.moments.size == 1)
    enthalpy = R * temperatures * (degrees / 2.0 + 1.0) + N_A * (vibration_energy + electronic_energy)
    capacity = R * (degrees / 2.0 + 1.0 + vibration_capacity + electronic_capacity)
    # q per molecule in the volume k T / p that it has at the standard pressure.
    log_q = partition.log_total + np.log(k * temperatures / pressure)
    gibbs = -R * temperatures * log_q
    return Thermochemistry(
        temperatures=temperatures,
        pressure=pressure,
        heat_capacity=capacity,
        entropy=(enthalpy - gibbs) / temperatures,
        enthalpy=enthalpy,
        gibbs_energy=gibbs,
    )


def _vibration(frequencies: FloatArray, temperatures: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Mean energy above the zero-point level [J] and heat capacity in units of k."""
    reduced = h * frequencies / (k * temperatures[:, np.newaxis])
    # x / (e^x - 1), written with e^-x so that stiff modes at low temperature underflow to zero.
    decay = np.exp(-reduced)
    occupation = decay / -np.expm1(-reduced)
    energy = (h * frequencies * occupation).sum(axis=1)
    capacity = (reduced**2 * occupation / -np.expm1(-reduced)).sum(axis=1)
    return energy, capacity


def _electronic(species: Species, temperatures: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Mean energy above the lowest level [J] and heat capacity in units of k."""
    thermal = k * temperatures[:, np.newaxis]
    weights = species.degeneracies * np.exp(-species.level_energies / thermal)
    weights /= weights.sum(axis=1, keepdims=True)
    mean = (weights * species.level_energies).sum(axis=1)
    spread = (weights * (species.level_energies - mean[:, np.newaxis]) ** 2).sum(axis=1)
    return mean, spread / thermal[:, 0] ** 2
