"""Harmonic vibrations of a printed Hessian, for an output whose own list leaves one out."""

import numpy as np
from scipy.constants import c, physical_constants, pi

from rateloom.arrays import FloatArray
from rateloom.calculation.motion import rigid_motions

HARTREE = physical_constants["Hartree energy"][0]
BOHR = physical_constants["Bohr radius"][0]
MASS_UNIT = physical_constants["atomic mass constant"][0]
PER_CM = np.sqrt(HARTREE / MASS_UNIT) / BOHR / (2 * pi * c * 100)
"""cm-1 for one root of hartree/(bohr2 u)."""


def modes_of_hessian(hessian: FloatArray, geometry: FloatArray, masses: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Compute harmonic frequencies and displacements, translations and rotations projected out.

    Parameters
    ----------
    hessian : ndarray, shape (3 n_atoms, 3 n_atoms)
        Cartesian second derivatives of the energy [hartree/bohr2].
    geometry : ndarray, shape (n_atoms, 3)
        Positions [angstrom].
    masses : ndarray, shape (n_atoms,)
        Masses [u].

    Returns
    -------
    tuple of ndarray, shapes (n_modes,) and (n_modes, n_atoms, 3)
        Frequencies, imaginary ones negative, ascending [cm-1], and Cartesian displacements of unit length [1].

    References
    ----------
    .. [1] E. B. Wilson, J. C. Decius, P. C. Cross, Molecular Vibrations, McGraw-Hill, 1955, ch. 2 (from memory).
    """
    roots = np.sqrt(np.repeat(masses, 3))
    rigid = rigid_motions(geometry, masses)
    # The complement of the rigid motions, so that exactly the vibrations are left.
    vibrations = np.linalg.svd(rigid, full_matrices=True)[2][len(rigid) :]
    values, vectors = np.linalg.eigh(vibrations @ (hessian / np.outer(roots, roots)) @ vibrations.T)
    displacements = vectors.T @ vibrations / roots
    displacements /= np.linalg.norm(displacements, axis=1, keepdims=True)
    return np.sign(values) * np.sqrt(np.abs(values)) * PER_CM, displacements.reshape(len(values), -1, 3)
