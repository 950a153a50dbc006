"""Are two geometries the same molecule in the same shape? Judged by interatomic distances, in angstrom.

Distances know neither orientation nor handedness: mirror images are the same. The order of the atoms is first taken
as it stands, then by sorted distances of each pair of elements, which no order can bring closer than they are, and
only where those agree an assignment of the atoms is searched.
"""

from collections import defaultdict
from collections.abc import Sequence
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from rateloom.arrays import FloatArray
from rateloom.molecule.bonds import distances

STEPS = 5_000  # atoms placed at most in search of an assignment; where it ends, sorted distances have the say


def shape_difference(
    first_labels: Sequence[str], first: FloatArray, second_labels: Sequence[str], second: FloatArray, tolerance: float
) -> float:
    """Largest difference of an interatomic distance between two geometries, whatever the order of their atoms.

    Parameters
    ----------
    first_labels, second_labels : sequence of str
        Element symbols or isotopes; atoms with the same label are interchangeable.
    first, second : ndarray, shape (n_atoms, 3)
        Positions [angstrom].
    tolerance : float
        What counts as the same geometry [angstrom].

    Returns
    -------
    float
        [angstrom]: at most the tolerance where the geometries are the same, above it where they are not, infinite
        where the atoms are not the same.

    References
    ----------
    .. [1] Geometry alone: distances determine a shape but for its mirror image.
    """
    if sorted(first_labels) != sorted(second_labels):
        return np.inf
    one, other = distances(first), distances(second)
    if tuple(first_labels) == tuple(second_labels):
        in_order = float(np.abs(one - other).max(initial=0.0))
        if in_order <= tolerance:
            return in_order
    ascending = sorted_distances(first_labels, one), sorted_distances(second_labels, other)
    at_least = float(np.abs(ascending[0] - ascending[1]).max(initial=0.0))
    if at_least > tolerance:
        return at_least
    return _assigned(first_labels, one, second_labels, other, tolerance, at_least)


def sorted_distances(labels: Sequence[str], lengths: FloatArray) -> FloatArray:
    """Distances of every pair of labels in turn, ascending within each: the same for any order of the atoms.

    Parameters
    ----------
    labels : sequence of str
        Element symbols or isotopes.
    lengths : ndarray, shape (n_atoms, n_atoms)
        Distances [angstrom].

    Returns
    -------
    ndarray, shape (n_atoms (n_atoms - 1) / 2,)
        [angstrom]

    References
    ----------
    .. [1] No physics.
    """
    first, second, kinds = _pairs(tuple(labels))
    found = lengths[first, second]
    return found[np.lexsort((found, kinds))]


@lru_cache(maxsize=256)
def _pairs(labels: tuple[str, ...]) -> tuple[NDArray[np.intp], NDArray[np.intp], NDArray[np.intp]]:
    """Pairs of atoms and a number for the labels of each, equal for equal labels in any order."""
    codes = np.searchsorted(np.array(sorted(set(labels))), np.array(labels))
    first, second = np.triu_indices(len(labels), k=1)
    low, high = np.minimum(codes[first], codes[second]), np.maximum(codes[first], codes[second])
    return first, second, low * (len(labels) + 1) + high


def _assigned(
    first_labels: Sequence[str],
    one: FloatArray,
    second_labels: Sequence[str],
    other: FloatArray,
    tolerance: float,
    at_least: float,
) -> float:
    """Search an assignment of atoms whose distances agree within the tolerance; depth first, rare atoms first."""
    candidates = _candidates(first_labels, one, second_labels, other, tolerance)
    order = sorted(range(len(first_labels)), key=lambda atom: (len(candidates[atom]), atom))
    placed: list[int] = []
    steps = 0

    def place() -> bool:
        nonlocal steps
        if len(placed) == len(order):
            return True
        atom = order[len(placed)]
        done = order[: len(placed)]
        for candidate in candidates[atom]:
            steps += 1
            if steps > STEPS:
                return True
            if candidate not in placed and (
                np.abs(one[atom, done] - other[candidate, placed]).max(initial=0.0) <= tolerance
            ):
                placed.append(candidate)
                if place():
                    return True
                placed.pop()
        return False

    if not place():
        return float(np.nextafter(tolerance, np.inf))
    if len(placed) < len(order):
        return at_least
    return float(np.abs(one[np.ix_(order, order)] - other[np.ix_(placed, placed)]).max(initial=0.0))


def _candidates(
    first_labels: Sequence[str], one: FloatArray, second_labels: Sequence[str], other: FloatArray, tolerance: float
) -> list[list[int]]:
    """Atoms of the second geometry that see the others at the same distances as each atom of the first."""
    profiles = []
    for labels, lengths in ((first_labels, one), (second_labels, other)):
        members: dict[str, list[int]] = defaultdict(list)
        for atom, label in enumerate(labels):
            members[label].append(atom)
        parts = [np.sort(lengths[:, members[label]], axis=1) for label in sorted(members)]
        profiles.append(np.concatenate(parts, axis=1))
    near = np.abs(profiles[0][:, np.newaxis] - profiles[1]).max(axis=2) <= tolerance
    near &= np.array(first_labels)[:, np.newaxis] == np.array(second_labels)
    return [np.flatnonzero(row).tolist() for row in near]
