"""Translations and rotations of a printed geometry, to tell them from vibrations and to prove a common frame."""

import numpy as np

from rateloom.arrays import FloatArray

LINEAR = 0.03
"""Largest distance of an atom from the axis of a geometry that counts as linear [angstrom], here and in the room of
molecules, so that both count the same vibrations: six standard deviations of a noise of 5e-3 angstrom per coordinate,
and about 4 degrees of bend in a triatomic."""


def is_linear(geometry: FloatArray) -> bool:
    """Tell whether all atoms lie on a line.

    Parameters
    ----------
    geometry : ndarray, shape (n_atoms, 3)
        Positions [angstrom].
    """
    return len(geometry) > 1 and bool(np.linalg.norm(off_axis(geometry)[0], axis=1).max() <= LINEAR)


def off_axis(geometry: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Give the parts of the positions perpendicular to the best axis, and all three axes, the best first."""
    arms = geometry - geometry.mean(axis=0)
    axes = np.linalg.svd(arms, full_matrices=True)[2]
    return arms - np.outer(arms @ axes[0], axes[0]), axes


def rigid_motions(geometry: FloatArray, masses: FloatArray) -> FloatArray:
    """Make an orthonormal basis of mass-weighted translations and rotations.

    Parameters
    ----------
    geometry : ndarray, shape (n_atoms, 3)
        Positions [angstrom].
    masses : ndarray, shape (n_atoms,)
        Masses, in any unit, above zero.

    Returns
    -------
    ndarray, shape (3, 5 or 6, 3 n_atoms)
        Rows of unit length: 3 for an atom, 5 for a linear, 6 for another geometry [1].
    """
    roots = np.sqrt(masses)[:, np.newaxis]
    arms = geometry - (masses[:, np.newaxis] * geometry).sum(axis=0) / masses.sum()
    axes = off_axis(geometry)[1]
    if len(masses) == 1:
        axes = axes[:0]
    elif is_linear(geometry):
        axes = axes[1:]
    rows = [(np.tile(axis, (len(masses), 1)) * roots).ravel() for axis in np.eye(3)]
    rows += [(np.cross(axis, arms) * roots).ravel() for axis in axes]
    return np.linalg.qr(np.array(rows).T)[0].T


def count_rigid(geometry: FloatArray) -> int:
    """Count translations and rotations of a geometry [angstrom]: 3 (atom), 5 (linear) or 6."""
    return 3 if len(geometry) == 1 else 5 if is_linear(geometry) else 6


def rigid_share(displacements: FloatArray, geometry: FloatArray, masses: FloatArray) -> FloatArray:
    """Give the share of translation and rotation in each mode.

    Parameters
    ----------
    displacements : ndarray, shape (n_modes, n_atoms, 3)
        Cartesian displacements, not mass-weighted.
    geometry : ndarray, shape (n_atoms, 3)
        Positions in the frame of the displacements [angstrom].
    masses : ndarray, shape (n_atoms,)
        Masses.

    Returns
    -------
    ndarray, shape (n_modes,)
        Between 0 (a vibration) and 1 (a translation or rotation) [1]; 0 for a mode without displacements.
    """
    weighted = (displacements * np.sqrt(masses)[:, np.newaxis]).reshape(len(displacements), -1)
    norms = np.einsum("ij,ij->i", weighted, weighted)
    inside = weighted @ rigid_motions(geometry, masses).T
    return np.divide(np.einsum("ij,ij->i", inside, inside), norms, out=np.zeros(len(norms)), where=norms > 0)


def same_shape(first: FloatArray, second: FloatArray, tolerance: float) -> bool:
    """Tell whether all distances between atoms agree, whatever the frame.

    Parameters
    ----------
    first, second : ndarray, shape (n_atoms, 3)
        Positions.
    tolerance : float
        Largest difference of a distance, in the same unit.
    """
    if first.shape != second.shape:
        return False
    return bool(np.abs(distances(first) - distances(second)).max(initial=0.0) <= tolerance)


def distances(geometry: FloatArray) -> FloatArray:
    """Give all distances between atoms, shape (n_atoms, n_atoms)."""
    return np.linalg.norm(geometry[:, np.newaxis] - geometry[np.newaxis], axis=-1)
