"""Gas-kinetic limit of a bimolecular rate coefficient."""

import numpy as np
from scipy.constants import k, pi

from rateloom.arrays import FloatArray


def hard_sphere_rate_coefficient(reduced_mass: float, diameter: float, temperatures: FloatArray) -> FloatArray:
    """Rate coefficient of collisions of two unlike hard spheres: mean relative speed times cross-section.

    Parameters
    ----------
    reduced_mass : float
        m1 m2/(m1 + m2) of the partners [kg].
    diameter : float
        Distance of the centres at contact, the mean of the two diameters [m].
    temperatures : ndarray, shape (n_temperatures,)
        Temperatures [K], above zero.

    Returns
    -------
    ndarray, shape (n_temperatures,)
        Z in Z [A][B], molecules per volume [m3 s-1]. For identical partners the collisions per volume and time are
        half of Z [A]^2.

    Raises
    ------
    ValueError
        A mass, diameter or temperature is not above zero.

    References
    ----------
    .. [1] D. A. McQuarrie, J. D. Simon, Physical Chemistry: A Molecular Approach, University Science Books, 1997,
       ch. 30 (from memory).
    """
    return mean_relative_speed(reduced_mass, temperatures) * _cross_section(diameter)


def mean_relative_speed(reduced_mass: float, temperatures: FloatArray) -> FloatArray:
    """Mean relative speed of two molecules of a gas.

    Parameters
    ----------
    reduced_mass : float
        m1 m2/(m1 + m2) of the partners [kg].
    temperatures : ndarray, shape (n_temperatures,)
        Temperatures [K], above zero.

    Returns
    -------
    ndarray, shape (n_temperatures,)
        (8 k T/pi mu)^(1/2) [m s-1].

    Raises
    ------
    ValueError
        The mass or a temperature is not above zero.

    References
    ----------
    .. [1] D. A. McQuarrie, J. D. Simon, Physical Chemistry: A Molecular Approach, University Science Books, 1997,
       ch. 27 (from memory).
    """
    if not (reduced_mass > 0 and np.all(temperatures > 0)):
        msg = f"mass and temperatures must be above 0, not {reduced_mass:.4g} kg and {np.min(temperatures):.4g} K"
        raise ValueError(msg)
    return np.sqrt(8 * k * temperatures / (pi * reduced_mass))


def _cross_section(diameter: float) -> float:
    if not diameter > 0:
        msg = f"the collision diameter must be above 0 m, not {diameter:.4g} m"
        raise ValueError(msg)
    return pi * diameter**2
