"""Symmetry number, chirality and point group of a nuclear framework, with tolerance for the noise of a geometry.

Operations near the tolerance could be found in part, and a part of a group is no group: what is counted is always
a set closed under multiplication.
"""

from dataclasses import dataclass

import numpy as np
from scipy.constants import angstrom

from rateloom.arrays import FloatArray
from rateloom.molecule.inertia import shape_of
from rateloom.molecule.operations import find_operations

SYMMETRY_TOLERANCE = 0.05 * angstrom
"""Deviation that still counts as symmetric [m]: above the largest that a noise of 5e-3 angstrom per coordinate
makes in 60 atoms (five standard deviations of a difference), below real distortions."""
STRICT_TOLERANCE = 0.005 * angstrom
"""Deviation of a geometry that was converged with its symmetry [m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Symmetry:
    """Symmetry of a molecule as far as its partition function needs it."""

    symmetry_number: int
    """Number of proper rotations, identity included; the reversal alone for a linear molecule."""
    optical_isomers: int
    """2 for a chiral framework, else 1."""
    point_group: str
    """In Schoenflies' notation, e.g. ``C3v``, ``D*h`` for a symmetric linear molecule, ``Kh`` for an atom."""
    worst_deviation: float
    """Largest deviation of an operation counted [m]."""
    closed: bool
    """Whether the operations within the tolerance were a group at once; if not, see ``symmetry_of``."""
    strict_symmetry_number: int
    """Symmetry number at the strict tolerance; smaller where noise breaks the point group."""
    strict_point_group: str


def symmetry_of(
    positions: FloatArray,
    labels: tuple[str, ...],
    tolerance: float = SYMMETRY_TOLERANCE,
    strict_tolerance: float = STRICT_TOLERANCE,
) -> Symmetry:
    """Find the operations that map a nuclear framework onto itself.

    Where the operations within the tolerance are no group, the smallest group that holds all of them is taken if
    none of its members deviates more than twice the tolerance (the product of two operations may deviate by the sum
    of theirs); failing that, the largest tolerance below that gives a group.

    Parameters
    ----------
    positions : ndarray, shape (n_atoms, 3)
        Positions [m].
    labels : tuple of str
        One name per atom; atoms are interchangeable where the names are equal (isotopes differ).
    tolerance : float
        Largest deviation of an operation [m].
    strict_tolerance : float
        The same for the strict symmetry number [m].

    Returns
    -------
    Symmetry
        Numbers of operations [1] and their deviation [m].

    Raises
    ------
    ValueError
        There is no atom, or the number of labels is another.

    References
    ----------
    .. [1] G. Herzberg, Infrared and Raman Spectra, Van Nostrand, 1945, pp. 5-12 and 508 (from memory).
    """
    if len(labels) != len(positions):
        msg = f"{len(positions)} atoms have {len(labels)} labels"
        raise ValueError(msg)
    shape = shape_of(positions)
    if shape == "atom":
        return _simple(1, "Kh", 0.0, 1, "Kh")
    centred = positions - positions.mean(axis=0)
    if shape == "linear":
        return _linear(centred, labels, tolerance, strict_tolerance)
    operations = find_operations(centred, np.unique(labels, return_inverse=True)[1], 2 * tolerance)
    chosen, closed = operations.group_within(tolerance)
    strict, _ = operations.group_within(strict_tolerance)
    name = chosen.name()
    return Symmetry(
        symmetry_number=chosen.proper_count,
        optical_isomers=1 if chosen.proper_count < len(chosen.deviations) else 2,
        point_group=name,
        worst_deviation=float(chosen.deviations.max()),
        closed=closed,
        strict_symmetry_number=strict.proper_count,
        strict_point_group=name if len(strict.deviations) == len(chosen.deviations) else strict.name(),
    )


def _simple(number: int, group: str, deviation: float, strict: int, strict_group: str) -> Symmetry:
    return Symmetry(
        symmetry_number=number,
        optical_isomers=1,
        point_group=group,
        worst_deviation=deviation,
        closed=True,
        strict_symmetry_number=strict,
        strict_point_group=strict_group,
    )


def _linear(centred: FloatArray, labels: tuple[str, ...], tolerance: float, strict_tolerance: float) -> Symmetry:
    axis = np.linalg.svd(centred, full_matrices=False)[2][0]
    along = centred @ axis
    order = np.argsort(along)
    names = [labels[index] for index in order]
    deviation = float(np.abs(along[order] + along[order][::-1]).max()) if names == names[::-1] else np.inf
    number, strict = (2 if deviation <= limit else 1 for limit in (tolerance, strict_tolerance))
    groups = {1: "C*v", 2: "D*h"}
    return _simple(number, groups[number], deviation if number == 2 else 0.0, strict, groups[strict])
