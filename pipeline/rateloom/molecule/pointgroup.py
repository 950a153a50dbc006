"""Schoenflies' name of a finite point group, from its operations as permutations of the atoms."""

import numpy as np
from numpy.typing import NDArray

from rateloom.arrays import FloatArray

_CUBIC = {(12, 3): "T", (24, 4): "O", (60, 5): "I"}  # (number of rotations, highest order of one)


def point_group_name(permutations: NDArray[np.intp], handedness: NDArray[np.intp], matrices: FloatArray) -> str:
    """Name the point group of a molecule that is not linear.

    Parameters
    ----------
    permutations : ndarray, shape (n_operations, n_atoms)
        Where each operation sends each atom; together they are a group.
    handedness : ndarray, shape (n_operations,)
        1 for a proper rotation, -1 for an improper one.
    matrices : ndarray, shape (n_operations, 3, 3)
        The operations in space, not exact where the geometry is noisy [1].

    Returns
    -------
    str
        Schoenflies symbol, e.g. ``D3h``, ``Td``, ``S4``.

    References
    ----------
    .. [1] F. A. Cotton, Chemical Applications of Group Theory, Wiley, 1990, ch. 3 (from memory).
    """
    proper = handedness > 0
    count = int(proper.sum())
    highest = max(_order(permutation) for permutation in permutations[proper])
    identity = np.arange(permutations.shape[1])
    involutions = ~proper & (np.take_along_axis(permutations, permutations, axis=1) == identity).all(axis=1)
    traces = np.trace(matrices, axis1=1, axis2=2)  # 1 for a mirror plane, -3 for an inversion
    mirrors = int((involutions & (traces > -1)).sum())
    inversion = bool((involutions & (traces < -1)).any())
    if not (~proper).any():
        return _rotations(count, highest)
    if (count, highest) in _CUBIC:
        name = _CUBIC[count, highest]
        return name + ("d" if name == "T" and not inversion else "h")
    if count == 1:
        return "Ci" if inversion else "Cs"
    if count == highest:
        return {0: f"S{2 * count}", 1: f"C{count}h"}.get(mirrors, f"C{count}v")
    return f"D{highest}" + ("h" if mirrors == highest + 1 else "d")


def _rotations(count: int, highest: int) -> str:
    if (count, highest) in _CUBIC:
        return _CUBIC[count, highest]
    return f"C{count}" if count == highest else f"D{highest}"


def _order(permutation: NDArray[np.intp]) -> int:
    identity = np.arange(len(permutation))
    power, order = permutation, 1
    while not np.array_equal(power, identity):
        power, order = permutation[power], order + 1
    return order
