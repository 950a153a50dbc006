"""Normal modes: from a Hessian, freed of rigid motion, and how much of a mode moves given coordinates.

A mode is a Cartesian displacement, one vector an atom, of any length and either sign. Weighting each atom by the
square root of its mass makes squared lengths shares of the kinetic energy.
"""

import numpy as np

from rateloom.arrays import FloatArray

RIGID_TOLERANCE = (
    1e-6  # of the largest singular value: below it a rotation does not exist, as about a straight molecule
)


def rigid_motions(masses: FloatArray, geometry: FloatArray) -> FloatArray:
    """Orthonormal translations and rotations in mass-weighted coordinates.

    Parameters
    ----------
    masses : ndarray, shape (n_atoms,)
        In any one unit.
    geometry : ndarray, shape (n_atoms, 3)
        In any one unit.

    Returns
    -------
    ndarray, shape (n_rigid, 3 n_atoms)
        6 rows, 5 for a straight molecule, 3 for an atom [1].
    """
    weights = np.sqrt(masses / masses.sum())[:, np.newaxis]
    centred = geometry - masses @ geometry / masses.sum()
    size = max(float(np.sqrt((centred**2).sum())), np.finfo(float).tiny)
    axes = np.eye(3)
    rows = [(weights * axis).ravel() for axis in axes]
    rows += [(weights * np.cross(axis, centred)).ravel() / size for axis in axes]
    _, singular, directions = np.linalg.svd(np.array(rows), full_matrices=False)
    return directions[singular > RIGID_TOLERANCE * singular[0]]


def normal_modes(hessian: FloatArray, masses: FloatArray, geometry: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Harmonic frequencies and displacements of a Hessian, translations and rotations projected out.

    Parameters
    ----------
    hessian : ndarray, shape (3 n_atoms, 3 n_atoms)
        Second derivatives of the energy [J/m2].
    masses : ndarray, shape (n_atoms,)
        [kg]
    geometry : ndarray, shape (n_atoms, 3)
        [m]

    Returns
    -------
    frequencies : ndarray, shape (n_modes,)
        [Hz], ascending, imaginary ones negative; 3 n_atoms - 6 of them, one more for a straight molecule.
    displacements : ndarray, shape (n_modes, n_atoms, 3)
        Cartesian displacements, each of length 1 [1].

    References
    ----------
    .. [1] E. B. Wilson, J. C. Decius, P. C. Cross, Molecular Vibrations, McGraw-Hill, 1955, ch. 2 (from memory).
    """
    weights = np.repeat(np.sqrt(masses), 3)
    rigid = rigid_motions(masses, geometry)
    internal = np.linalg.svd(rigid)[2][len(rigid) :]  # orthonormal rows: all that is not rigid
    weighted = internal @ ((hessian + hessian.T) / 2 / np.outer(weights, weights)) @ internal.T
    squares, vectors = np.linalg.eigh(weighted)
    cartesian = (vectors.T @ internal) / weights
    cartesian /= np.linalg.norm(cartesian, axis=1, keepdims=True)
    return np.sign(squares) * np.sqrt(np.abs(squares)) / (2 * np.pi), cartesian.reshape(-1, len(masses), 3)


def without_rigid_motion(mode: FloatArray, masses: FloatArray, geometry: FloatArray) -> FloatArray:
    """A mode without the translation and rotation that few printed digits leave in it.

    Parameters
    ----------
    mode : ndarray, shape (n_atoms, 3)
        Cartesian displacement, in any unit.
    masses : ndarray, shape (n_atoms,)
        In any one unit.
    geometry : ndarray, shape (n_atoms, 3)
        In any one unit.

    Returns
    -------
    ndarray, shape (n_atoms, 3)
        In the unit of the mode.
    """
    weights = np.sqrt(masses)[:, np.newaxis]
    weighted = (mode * weights).ravel()
    rigid = rigid_motions(masses, geometry)
    return (weighted - rigid.T @ (rigid @ weighted)).reshape(mode.shape) / weights


def motion_share(mode: FloatArray, masses: FloatArray, gradients: FloatArray) -> float:
    """Share of the kinetic energy of a mode in the motion along some internal coordinates.

    Parameters
    ----------
    mode : ndarray, shape (n_atoms, 3)
        Cartesian displacement, in any unit.
    masses : ndarray, shape (n_atoms,)
        In any one unit.
    gradients : ndarray, shape (n_coordinates, n_atoms, 3)
        Gradients of the coordinates, each in any unit.

    Returns
    -------
    float
        From 0 to 1 [1]: the squared projection of the mass-weighted mode on the space of the gradients.
    """
    weights = np.sqrt(masses)[:, np.newaxis]
    weighted = (mode * weights).ravel()
    total = float(weighted @ weighted)
    if len(gradients) == 0 or total == 0.0:
        return 0.0
    _, singular, directions = np.linalg.svd((gradients / weights).reshape(len(gradients), -1), full_matrices=False)
    kept = directions[singular > RIGID_TOLERANCE * singular[0]] if singular[0] > 0.0 else directions[:0]
    return float(np.sum((kept @ weighted) ** 2) / total)
