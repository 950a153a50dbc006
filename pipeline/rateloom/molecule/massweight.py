"""Harmonic frequencies of a molecule with other masses: force constants do not depend on the isotope.

Force constants come from a Hessian, or are put together again from the normal modes and frequencies of a
calculation and the masses it used. Translations and rotations are projected out with the new masses.
"""

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.molecule.inertia import centre_of_mass, principal_axes

_OVERLAP = 0.1  # printed digits leave 0.02 or less; displacements that are mass-weighted already, far more


def force_constants_from_modes(
    displacements: FloatArray, frequencies: FloatArray, masses: FloatArray, positions: FloatArray, shape: str
) -> FloatArray:
    """Put the Cartesian force constants together from normal modes.

    Parameters
    ----------
    displacements : ndarray, shape (n_modes, n_atoms, 3)
        Cartesian displacements of the modes, each with any normalisation [1].
    frequencies : ndarray, shape (n_modes,)
        Harmonic frequencies, unscaled, imaginary ones negative [Hz].
    masses : ndarray, shape (n_atoms,)
        Masses that the modes were calculated with [kg].
    positions : ndarray, shape (n_atoms, 3)
        Positions, axes as in the displacements [m].
    shape : str
        ``atom``, ``linear`` or ``nonlinear``.

    Returns
    -------
    ndarray, shape (3 n_atoms, 3 n_atoms)
        Force constants; translations and rotations have none [J/m2].

    Raises
    ------
    ValueError
        The mass-weighted displacements are far from orthogonal to each other or to translation and rotation: they
        are no normal modes of these masses.

    References
    ----------
    .. [1] E. B. Wilson, J. C. Decius, P. C. Cross, Molecular Vibrations, McGraw-Hill, 1955, ch. 2 (from memory).
    """
    roots = np.repeat(np.sqrt(masses), 3)
    modes = displacements.reshape(len(displacements), -1) * roots
    lengths = np.linalg.norm(modes, axis=1, keepdims=True)
    if not np.all(lengths > 0):
        msg = "a normal mode has no displacements"
        raise ValueError(msg)
    modes = modes / lengths
    internal = _internal_motions(masses, positions, shape)
    modes = modes @ internal.T  # digits lost in print leave a little rotation, which would cost force constants
    overlap = float(np.abs(modes @ modes.T - np.eye(len(modes))).max())
    if overlap > _OVERLAP:
        msg = f"the mass-weighted displacements miss being orthonormal by up to {overlap:.2g}"
        raise ValueError(msg)
    left, _, right = np.linalg.svd(modes, full_matrices=False)
    modes = left @ right @ internal  # the nearest orthonormal set
    eigenvalues = np.sign(frequencies) * (2 * np.pi * frequencies) ** 2
    return roots[:, np.newaxis] * ((modes.T * eigenvalues) @ modes) * roots


def frequencies_for_masses(
    force_constants: FloatArray, masses: FloatArray, positions: FloatArray, shape: str
) -> FloatArray:
    """Harmonic vibrations of a stationary point for the masses given.

    Parameters
    ----------
    force_constants : ndarray, shape (3 n_atoms, 3 n_atoms)
        Second derivatives of the energy, axes as in the positions [J/m2].
    masses : ndarray, shape (n_atoms,)
        Masses [kg].
    positions : ndarray, shape (n_atoms, 3)
        Positions [m].
    shape : str
        ``atom``, ``linear`` or ``nonlinear``.

    Returns
    -------
    ndarray, shape (n_modes,)
        3N-6 frequencies (3N-5 where linear, none for an atom), imaginary ones negative, ascending [Hz].

    Raises
    ------
    KeyError
        The shape is none of the three.

    References
    ----------
    .. [1] W. H. Miller, N. C. Handy, J. E. Adams, J. Chem. Phys. 72 (1980) 99, for the projection (from memory).
    """
    roots = np.repeat(np.sqrt(masses), 3)
    internal = _internal_motions(masses, positions, shape)
    weighted = force_constants / roots[:, np.newaxis] / roots
    symmetric = (weighted + weighted.T) / 2
    eigenvalues = np.linalg.eigvalsh(internal @ symmetric @ internal.T)
    return np.sign(eigenvalues) * np.sqrt(np.abs(eigenvalues)) / (2 * np.pi)


def _internal_motions(masses: FloatArray, positions: FloatArray, shape: str) -> FloatArray:
    """Orthonormal basis of what is neither translation nor rotation, mass-weighted, shape (n_modes, 3 n_atoms).

    Working in it, no zero has to be told from a soft mode.
    """
    roots = np.sqrt(masses)[:, np.newaxis]
    relative = positions - centre_of_mass(masses, positions)
    axes = principal_axes(masses, positions)[1][::-1]  # the rotation about the long axis last
    translations = [(roots * axis).ravel() for axis in axes]
    rotations = [(roots * np.cross(axis, relative)).ravel() for axis in axes]
    external = np.array(translations + rotations)[: {"atom": 3, "linear": 5, "nonlinear": 6}[shape]]
    external /= np.linalg.norm(external, axis=1, keepdims=True)
    return np.linalg.svd(external)[2][len(external) :]
