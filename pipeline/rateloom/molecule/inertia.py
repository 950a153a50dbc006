"""Mass distribution of a molecule: centre, principal moments and axes, shape, rotational constants."""

import numpy as np
from scipy.constants import angstrom, h

from rateloom.arrays import FloatArray
from rateloom.calculation import LINEAR

LINEAR_TOLERANCE = LINEAR * angstrom
"""Largest distance of an atom from the axis of a molecule that counts as linear [m]: that of the reading room."""


def centre_of_mass(masses: FloatArray, positions: FloatArray) -> FloatArray:
    """Centre of mass.

    Parameters
    ----------
    masses : ndarray, shape (n_atoms,)
        Masses [kg].
    positions : ndarray, shape (n_atoms, 3)
        Positions [m].

    Returns
    -------
    ndarray, shape (3,)
        Position of the centre [m].

    References
    ----------
    .. [1] H. Goldstein, Classical Mechanics, Addison-Wesley, 1980, ch. 1 (from memory).
    """
    return masses @ positions / masses.sum()


def principal_axes(masses: FloatArray, positions: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Principal moments of inertia and the axes they belong to.

    Parameters
    ----------
    masses : ndarray, shape (n_atoms,)
        Masses [kg].
    positions : ndarray, shape (n_atoms, 3)
        Positions [m].

    Returns
    -------
    moments : ndarray, shape (3,)
        Ascending, not negative [kg m2].
    axes : ndarray, shape (3, 3)
        Unit vectors, one a row, in the order of the moments [1].

    References
    ----------
    .. [1] H. Goldstein, Classical Mechanics, Addison-Wesley, 1980, ch. 5 (from memory).
    """
    relative = positions - centre_of_mass(masses, positions)
    products = np.einsum("i,ia,ib->ab", masses, relative, relative)
    moments, axes = np.linalg.eigh(np.trace(products) * np.eye(3) - products)
    return np.maximum(moments, 0.0), axes.T  # rounding can leave the moment about a linear axis below zero


def shape_of(positions: FloatArray, tolerance: float = LINEAR_TOLERANCE) -> str:
    """Tell atom, linear and nonlinear molecules apart.

    Parameters
    ----------
    positions : ndarray, shape (n_atoms, 3)
        Positions [m].
    tolerance : float
        Largest distance of an atom from the best axis of a linear molecule [m].

    Returns
    -------
    str
        ``atom``, ``linear`` or ``nonlinear``.

    Raises
    ------
    ValueError
        There is no atom.

    References
    ----------
    .. [1] The best axis is that of least squares: K. Pearson, Phil. Mag. 2 (1901) 559 (from memory).
    """
    if len(positions) == 0:
        msg = "a molecule needs at least one atom"
        raise ValueError(msg)
    if len(positions) == 1:
        return "atom"
    relative = positions - positions.mean(axis=0)
    axis = np.linalg.svd(relative, full_matrices=False)[2][0]
    off_axis = relative - np.outer(relative @ axis, axis)
    return "linear" if np.linalg.norm(off_axis, axis=1).max() <= tolerance else "nonlinear"


def moments_of(masses: FloatArray, positions: FloatArray, shape: str) -> FloatArray:
    """Moments of inertia that the rotation of a molecule of this shape needs.

    Parameters
    ----------
    masses : ndarray, shape (n_atoms,)
        Masses [kg].
    positions : ndarray, shape (n_atoms, 3)
        Positions [m].
    shape : str
        ``atom``, ``linear`` or ``nonlinear``.

    Returns
    -------
    ndarray, shape (0,), (1,) or (3,)
        Principal moments, ascending [kg m2]; for a linear molecule the one of end-over-end rotation.

    Raises
    ------
    KeyError
        The shape is none of the three.

    References
    ----------
    .. [1] G. Herzberg, Infrared and Raman Spectra, Van Nostrand, 1945, ch. I (from memory).
    """
    moments, _ = principal_axes(masses, positions)
    # The two large moments of a linear molecule differ only by noise of the geometry.
    return {"atom": moments[:0], "linear": moments[1:].mean(keepdims=True), "nonlinear": moments}[shape]


def rotational_constants(moments: FloatArray) -> FloatArray:
    """Rotational constants as frequencies, h / (8 pi^2 I).

    Parameters
    ----------
    moments : ndarray, shape (n,)
        Principal moments of inertia, above zero, ascending [kg m2].

    Returns
    -------
    ndarray, shape (n,)
        Rotational constants, descending [Hz].

    References
    ----------
    .. [1] G. Herzberg, Infrared and Raman Spectra, Van Nostrand, 1945, ch. I (from memory).
    """
    return h / (8 * np.pi**2 * moments)
