"""Isomerisations that change no bond: which angles, torsions or planes lead from reactant over saddle to product.

Each minimum is laid on the saddle atom by atom so that the atoms lie nearest, as its mirror image where that is
nearer; the coordinates that then differ most are those the mode has to move.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.molecule.internals import Coordinate, changes, coordinates, gradients
from rateloom.molecule.matching import Pattern, mappings
from rateloom.molecule.modes import motion_share

LEAST_CHANGE = np.deg2rad(10.0)  # between a minimum and the saddle; less is no change of shape
COMPARABLE = 0.5  # coordinates that change by this share of the largest change belong to the change of shape
MIRROR_TIE = 0.05  # relative; a minimum as near as its mirror image: the saddle has a plane of symmetry
LEAST_MISFIT = 0.01  # angstrom2; misfits as near as this count as equal
MIRROR = np.array([-1.0, 1.0, 1.0])
ROUNDING = 1e-9  # angstrom2
TRIED_MAPPINGS = 12_000  # divided by the number of atoms, with which each one costs more


@dataclass(frozen=True, slots=True)
class ShapeChange:
    """What a change of shape moves, and whether a mode moves it."""

    moving: tuple[Coordinate, ...]
    """The coordinates that tell the minima from the saddle, the largest change first; empty where none does."""
    amount: float
    """Largest change between a minimum and the saddle [rad]."""
    share: float
    """Of the kinetic energy of the mode along these coordinates [1]."""
    opposite: bool
    """Whether reactant and product lie on opposite sides of the saddle along the mode, as far as that can be told."""


def shape_change(
    reading: Pattern,
    geometry: FloatArray,
    mode: FloatArray,
    masses: FloatArray,
    minima: Sequence[tuple[Pattern, FloatArray]],
) -> ShapeChange:
    """Find what distinguishes the minima from the saddle and compare it with a mode.

    Parameters
    ----------
    reading : Pattern
        The saddle with its bonds.
    geometry, mode : ndarray, shape (n_atoms, 3)
        Of the saddle [angstrom]; the mode in any unit, free of rigid motion.
    masses : ndarray, shape (n_atoms,)
        In any one unit.
    minima : sequence of (Pattern, ndarray), shape (n_atoms, 3)
        Reactant and product with their geometries [angstrom], the same molecule as the saddle in any atom order.

    Returns
    -------
    ShapeChange
        Without coordinates where the minima look like the saddle.
    """
    listed = coordinates(geometry, reading.bonds)
    laid = [_laid_on(reading, geometry, minimum, shape) for minimum, shape in minima]
    images = [[np.nan_to_num(changes(geometry, image, listed)) for image in near] for near in laid]
    differences = [near[0] for near in images]
    sizes = np.abs(differences).max(axis=0) if listed else np.zeros(0)
    amount = float(sizes.max(initial=0.0))
    # An atom that goes through a plane closes the angles around it a little: only the kind that changes most counts.
    kinds = [coordinate.kind for coordinate in listed]
    order = [
        k
        for k in np.argsort(-sizes, kind="stable")
        if sizes[k] >= max(COMPARABLE * amount, LEAST_CHANGE) and kinds[k] == kinds[int(sizes.argmax())]
    ]
    if not order:
        return ShapeChange((), amount, 0.0, opposite=False)
    slopes = gradients(geometry, [listed[k] for k in order], mode)
    along = np.einsum("kij,ij->k", slopes, mode)
    # Where a minimum is as near as its mirror image, either may be the one on the other side.
    towards = [[float(along @ difference[order]) for difference in near] for near in images]
    either_side = any(one * other < 0 for one in towards[0] for other in towards[-1])
    alike = np.abs(differences[0] - differences[-1]).max() < LEAST_CHANGE  # the same minimum: nothing to tell apart
    return ShapeChange(
        moving=tuple(listed[k] for k in order),
        amount=amount,
        share=motion_share(mode, masses, slopes),
        opposite=bool(either_side or alike),
    )


def _laid_on(reading: Pattern, geometry: FloatArray, minimum: Pattern, shape: FloatArray) -> list[FloatArray]:
    """A minimum in the atom order of the saddle, or its mirror image where that is nearer; both where equally near.

    Among all mappings the one with the smallest distance after the best rotation, from the singular values of the
    covariance of the two point sets.

    References
    ----------
    .. [1] W. Kabsch, Acta Cryst. A 34, 827 (1978) (from memory).
    """
    ways = np.array(list(mappings(reading, minimum, max(1, TRIED_MAPPINGS // len(reading.numbers)))))
    fixed = geometry - geometry.mean(axis=0)
    moving = (shape - shape.mean(axis=0))[ways]
    covariances = np.einsum("wni,nj->wij", moving, fixed)
    singular = np.linalg.svd(covariances, compute_uv=False)
    hands = np.where(np.linalg.det(covariances) < 0, -1.0, 1.0)
    overlaps = singular[:, 0] + singular[:, 1] + np.multiply.outer([1.0, -1.0], hands * singular[:, 2])
    squares = (fixed**2).sum() + (moving[0] ** 2).sum() - 2 * overlaps  # row 0: as it is, row 1: its mirror image
    best = squares.min(axis=1)
    near = [row for row in (0, 1) if best[row] <= best.min() + max(MIRROR_TIE * best.min(), LEAST_MISFIT)]
    # The first of equally near mappings: which one, is a matter of symmetry and of no consequence.
    chosen = [ways[int(np.flatnonzero(squares[row] <= best[row] + ROUNDING)[0])] for row in near]
    return [(shape * (1.0, MIRROR)[row])[way] for row, way in zip(near, chosen, strict=True)]


def describe_shape_change(shape: ShapeChange) -> str:
    """Name the kind of a change of shape after its leading coordinate."""
    kinds = {"torsion": "internal rotation", "angle": "bending", "out of plane": "inversion"}
    return kinds[shape.moving[0].kind] if shape.moving else "change of shape"
