"""Operations that map a nuclear framework onto itself within a tolerance.

An operation is a permutation of the atoms together with a handedness (proper or improper). Its deviation is the
largest distance between an atom, moved by the best-fitting rotation (and inversion), and the place it should reach.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rateloom.arrays import FloatArray
from rateloom.molecule.pointgroup import point_group_name

IntArray = NDArray[np.intp]

_CHUNK = 400_000  # distances held at once


@dataclass(frozen=True, slots=True)
class Operations:
    """Operations in ascending order of their deviation; the first is the identity."""

    permutations: IntArray
    """Shape (n, n_atoms): atom i moves to the place of atom permutations[:, i]."""
    matrices: FloatArray
    """Shape (n, 3, 3)"""
    handedness: IntArray
    """Shape (n,): 1 proper, -1 improper."""
    deviations: FloatArray
    """Shape (n,) [m]"""

    @property
    def proper_count(self) -> int:
        """Number of proper rotations, identity included."""
        return int((self.handedness > 0).sum())

    def first(self, count: int) -> "Operations":
        """Take those with the smallest deviations."""
        return Operations(
            self.permutations[:count], self.matrices[:count], self.handedness[:count], self.deviations[:count]
        )

    def is_group(self) -> bool:
        """Whether every product of two operations is among them."""
        keys = np.column_stack((self.permutations, self.handedness)).astype(np.int16)
        known = _rows(keys)
        # The last operation first: in most sets that are no group, it is the one whose products lie outside.
        parts = (keys[-1:], keys)
        return all(_rows(_products(part, self.permutations, keys)) <= known for part in parts)

    def group_within(self, tolerance: float) -> tuple["Operations", bool]:
        """Take the group that fits the tolerance best; tell whether it took no widening or narrowing."""
        within = int(np.searchsorted(self.deviations, tolerance, side="right"))
        wider = int(np.searchsorted(self.deviations, 2 * tolerance, side="right"))
        for count in (*range(within, wider + 1), *range(within - 1, 0, -1)):
            group = self.first(count)
            if group.is_group():
                return group, count == within
        return self.first(1), False

    def name(self) -> str:
        """Name the point group."""
        return point_group_name(self.permutations, self.handedness, self.matrices)


def _products(left: NDArray[np.int16], permutations: IntArray, right: NDArray[np.int16]) -> NDArray[np.int16]:
    """Multiply each operation on the left with each on the right, handedness in the last column."""
    products = np.empty((len(left), *right.shape), dtype=np.int16)
    products[..., :-1] = left[:, :-1][:, permutations]
    products[..., -1] = left[:, -1:] * right[:, -1]
    return products


def _rows(array: NDArray[np.int16]) -> set[bytes]:
    data, width = array.tobytes(), array.shape[-1] * array.itemsize
    return {data[begin : begin + width] for begin in range(0, len(data), width)}


def find_operations(centred: FloatArray, kinds: IntArray, limit: float) -> Operations:
    """Find all operations of a molecule that is not linear.

    Parameters
    ----------
    centred : ndarray, shape (n_atoms, 3)
        Positions from their centre [m].
    kinds : ndarray, shape (n_atoms,)
        Equal numbers for interchangeable atoms.
    limit : float
        Largest deviation [m].

    Returns
    -------
    Operations
        All operations within the limit; not always a group.

    References
    ----------
    .. [1] W. Kabsch, Acta Cryst. A 32 (1976) 922, for the best-fitting rotation (from memory).
    """
    same_kind = kinds[:, np.newaxis] == kinds
    starts = _starting_rotations(centred, same_kind, limit)
    permutations = _permutations(centred, same_kind, starts)
    both = np.concatenate([permutations, permutations])
    hands = np.repeat(np.array([1, -1]), len(permutations))
    matrices = _best_rotations(centred, both, hands)
    moved = centred @ matrices.transpose(0, 2, 1)
    deviations = np.linalg.norm(moved - centred[both], axis=2).max(axis=1)
    identity = (hands > 0) & (both == np.arange(len(centred))).all(axis=1)
    deviations[identity] = 0.0
    keep = np.flatnonzero(deviations <= limit)
    # Ties, and the identity among them, in an order that does not come from rounding.
    order = keep[np.lexsort((~identity[keep], deviations[keep]))]
    return Operations(both[order], matrices[order], hands[order], deviations[order])


def _starting_rotations(centred: FloatArray, same_kind: NDArray[np.bool_], limit: float) -> FloatArray:
    """Rotations and rotation-reflections that carry two reference atoms onto two others, shape (m, 3, 3).

    The centre stays where it is, so two atoms that are not in line with it settle an operation of either handedness.
    """
    radii = np.linalg.norm(centred, axis=1)
    alike = same_kind & (np.abs(radii[:, np.newaxis] - radii) <= limit)
    counts = alike.sum(axis=1)
    first = int(np.argmax(np.where(radii > 0.3 * radii.max(), radii / counts, 0.0)))
    axis = centred[first] / radii[first]
    off_axis = np.linalg.norm(centred - np.outer(centred @ axis, axis), axis=1)
    second = int(np.argmax(np.where(off_axis > 0.3 * off_axis.max(), off_axis / counts, 0.0)))
    images, partners = np.nonzero(alike[first][:, np.newaxis] & alike[second])
    spread = np.linalg.norm(centred[images] - centred[partners], axis=1)
    fits = np.abs(spread - np.linalg.norm(centred[first] - centred[second])) <= 2 * limit
    frames = _frames(centred[images[fits]], centred[partners[fits]])
    origin = _frames(centred[[first]], centred[[second]])[0]
    mirrored = origin * np.array([1.0, 1.0, -1.0])
    return np.concatenate([frames @ origin.T, frames @ mirrored.T])


def _frames(first: FloatArray, second: FloatArray) -> FloatArray:
    """Right-handed orthonormal frames, shape (m, 3, 3), axes as columns, from pairs of vectors."""
    x = first / np.linalg.norm(first, axis=1, keepdims=True)
    y = second - (second * x).sum(axis=1, keepdims=True) * x
    length = np.linalg.norm(y, axis=1, keepdims=True)
    y = y / np.where(length > 0, length, 1.0)
    frames = np.empty((len(x), 3, 3))
    frames[:, :, 0], frames[:, :, 1], frames[:, :, 2] = x, y, np.cross(x, y)
    return frames


def _permutations(centred: FloatArray, same_kind: NDArray[np.bool_], starts: FloatArray) -> IntArray:
    """Distinct permutations of atoms that the starting operations come near to, shape (m, n_atoms)."""
    step = max(1, _CHUNK // len(centred) ** 2)
    found = [np.arange(len(centred))[np.newaxis]]
    for begin in range(0, len(starts), step):
        rotations = starts[begin : begin + step]
        nearest = _nearest(centred, same_kind, rotations)
        # Two atoms alone can leave the far ones off by several times their noise: fit all, then assign anew.
        refined = _best_rotations(centred, nearest, np.sign(np.linalg.det(rotations)))
        nearest = _nearest(centred, same_kind, refined)
        found.append(nearest[(np.sort(nearest, axis=1) == np.arange(len(centred))).all(axis=1)])
    return np.unique(np.concatenate(found), axis=0)


def _nearest(centred: FloatArray, same_kind: NDArray[np.bool_], rotations: FloatArray) -> IntArray:
    """For each rotation and atom the nearest atom of its kind, shape (m, n_atoms)."""
    moved = centred @ rotations.transpose(0, 2, 1)
    # |a - b|^2 without |a|^2, which does not change which b is nearest.
    squares = (centred**2).sum(axis=1) - 2 * (moved @ centred.T)
    return np.where(same_kind, squares, np.inf).argmin(axis=2)


def _best_rotations(centred: FloatArray, permutations: IntArray, handedness: NDArray[np.generic]) -> FloatArray:
    """Orthogonal matrices of a handedness that best carry each atom i to permutations[:, i], shape (m, 3, 3)."""
    left, _, right = np.linalg.svd(centred[permutations].transpose(0, 2, 1) @ centred)
    flip = np.ones((len(permutations), 3))
    flip[:, 2] = np.sign(np.linalg.det(left @ right)) * handedness
    return (left * flip[:, np.newaxis]) @ right
