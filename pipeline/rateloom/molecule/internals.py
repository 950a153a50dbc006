"""Internal coordinates of a molecule: their values, and how strongly a small displacement moves them.

A coordinate is named by its atoms: two for a bond length, three for an angle (the middle atom second), four for a
torsion, or for an atom out of the plane of its three neighbours (the central atom first). Its gradient, one vector an
atom, is what turns a displacement of the atoms into a change of the coordinate.
"""

from collections.abc import Callable, Collection, Sequence
from dataclasses import dataclass
from itertools import combinations

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.molecule.bonds import Bond

NEARLY_STRAIGHT = np.deg2rad(165.0)  # beyond it a torsion over the angle has no meaning
STEP = 1e-4  # angstrom; of the central differences


@dataclass(frozen=True, slots=True)
class Coordinate:
    """One internal coordinate."""

    kind: str
    """``angle``, ``torsion`` or ``out of plane``; bond lengths are given as bonds."""
    atoms: tuple[int, ...]


def coordinates(geometry: FloatArray, bonded: Collection[Bond]) -> list[Coordinate]:
    """Angles, torsions and out-of-plane coordinates of a molecule, in a fixed order.

    Parameters
    ----------
    geometry : ndarray, shape (n_atoms, 3)
        In any unit; it tells the straight chains.
    bonded : collection of (int, int)
        Its bonds.

    Returns
    -------
    list of Coordinate
        Every angle between bonds, every torsion about a bond or about a straight chain of atoms, and each atom with
        exactly three neighbours out of their plane.
    """
    n_atoms = len(geometry)
    near: list[list[int]] = [[] for _ in range(n_atoms)]
    for i, j in sorted(bonded):
        near[i].append(j)
        near[j].append(i)
    angles = [Coordinate("angle", (i, j, k)) for j in range(n_atoms) for i, k in combinations(sorted(near[j]), 2)]
    torsions = [
        Coordinate("torsion", (i, j, k, m))
        for j, k in [*sorted(bonded), *_straight_chains(geometry, angles)]
        for i in sorted(near[j])
        for m in sorted(near[k])
        if len({i, j, k, m}) == 4
    ]
    planes = [Coordinate("out of plane", (j, *sorted(near[j]))) for j in range(n_atoms) if len(near[j]) == 3]
    return angles + torsions + planes


def _straight_chains(geometry: FloatArray, angles: Sequence[Coordinate]) -> list[Bond]:
    """First and last atom of every chain of straight angles that goes on at neither end, the lower one first."""
    if not angles:
        return []
    members = np.array([angle.atoms for angle in angles])
    straight = members[_angle(*_columns(geometry[members])) > NEARLY_STRAIGHT].tolist()
    following = {(i, j): k for i, j, k in straight} | {(k, j): i for i, j, k in straight}
    ends = set()
    for first, middle in following:
        if any((j, k) == (first, middle) for (_, j), k in following.items()):
            continue  # the chain begins further back
        before, last = middle, following[first, middle]
        for _ in geometry:
            if (before, last) not in following:
                break
            before, last = last, following[before, last]
        ends.add((min(first, last), max(first, last)))
    return sorted(ends)


def changes(before: FloatArray, after: FloatArray, listed: Sequence[Coordinate]) -> FloatArray:
    """Changes of coordinates from one geometry to another.

    Parameters
    ----------
    before, after : ndarray, shape (n_atoms, 3)
        In any one unit.
    listed : sequence of Coordinate
        The coordinates.

    Returns
    -------
    ndarray, shape (n_coordinates,)
        [rad], the shorter way round; NaN for a torsion over a straight angle.
    """
    result = np.empty(len(listed))
    for kind, places in _by_kind(listed).items():
        atoms = np.array([listed[place].atoms for place in places])
        result[places] = _difference(kind, before[atoms], after[atoms])
    return result


def stretch_gradients(geometry: FloatArray, pairs: Sequence[Bond]) -> FloatArray:
    """Gradients of distances between atoms.

    Parameters
    ----------
    geometry : ndarray, shape (n_atoms, 3)
        In any unit.
    pairs : sequence of (int, int)
        Pairs of atoms.

    Returns
    -------
    ndarray, shape (n_pairs, n_atoms, 3)
        [1]
    """
    result = np.zeros((len(pairs), *geometry.shape))
    for k, (i, j) in enumerate(pairs):
        result[k, i] = _unit(geometry[i] - geometry[j])
        result[k, j] = -result[k, i]
    return result


def gradients(geometry: FloatArray, listed: Sequence[Coordinate], direction: FloatArray) -> FloatArray:
    """Gradients of angles, torsions and out-of-plane coordinates.

    Parameters
    ----------
    geometry : ndarray, shape (n_atoms, 3)
        [angstrom]
    listed : sequence of Coordinate
        The coordinates.
    direction : ndarray, shape (n_atoms, 3)
        A displacement in any unit; it chooses the plane in which a straight angle bends, and only that.

    Returns
    -------
    ndarray, shape (n_coordinates, n_atoms, 3)
        [rad/angstrom]; zero where a coordinate is undefined.
    """
    result = np.zeros((len(listed), *geometry.shape))
    for kind, places in _by_kind(listed).items():
        atoms = np.array([listed[place].atoms for place in places])
        size = atoms.shape[1]
        steps = (STEP * np.eye(3 * size)).reshape(3 * size, 1, size, 3)  # one component of one atom at a time
        points = geometry[atoms]
        slopes = _difference(kind, points - steps, points + steps) / (2 * STEP)
        rows = np.nan_to_num(slopes).T.reshape(len(places), size, 3)
        for place, members, row in zip(places, atoms, rows, strict=True):
            result[place, members] = row
        if kind == "angle":
            straight = _angle(*_columns(points)) > NEARLY_STRAIGHT
            for place in np.array(places)[straight]:
                result[place] = _straight_gradient(geometry, listed[place].atoms, direction)
    return result


def turning(
    geometry: FloatArray, forward: FloatArray, backward: FloatArray, listed: Sequence[Coordinate]
) -> FloatArray:
    """How far coordinates turn between two geometries on either side of a middle one.

    Parameters
    ----------
    geometry, forward, backward : ndarray, shape (n_atoms, 3)
        The middle geometry and the two displaced ones, in any one unit.
    listed : sequence of Coordinate
        The coordinates.

    Returns
    -------
    ndarray, shape (n_coordinates,)
        [rad], not negative; zero for a torsion over a straight angle. A straight angle, which closes on both sides,
        counts both.
    """
    onward, back = changes(geometry, forward, listed), changes(geometry, backward, listed)
    closing = np.array([coordinate.kind == "angle" for coordinate in listed], dtype=bool) & (onward < 0) & (back < 0)
    return np.nan_to_num(np.abs(np.where(closing, onward + back, onward - back)))


def _by_kind(listed: Sequence[Coordinate]) -> dict[str, list[int]]:
    places: dict[str, list[int]] = {}
    for place, coordinate in enumerate(listed):
        places.setdefault(coordinate.kind, []).append(place)
    return places


def _difference(kind: str, before: FloatArray, after: FloatArray) -> FloatArray:
    """Change of one kind of coordinate for points of shape (..., n_points, 3) [rad]."""
    measures: dict[str, Callable[..., FloatArray]] = {
        "angle": _angle,
        "torsion": _torsion,
        "out of plane": _out_of_plane,
    }
    difference = measures[kind](*_columns(after)) - measures[kind](*_columns(before))
    return (difference + np.pi) % (2 * np.pi) - np.pi if kind == "torsion" else difference


def _columns(points: FloatArray) -> tuple[FloatArray, ...]:
    return tuple(points[..., k, :] for k in range(points.shape[-2]))


def _straight_gradient(geometry: FloatArray, atoms: Sequence[int], direction: FloatArray) -> FloatArray:
    """Bend of a straight angle in the plane in which the displacement bends it: its atoms move across the line."""
    i, j, k = atoms
    result = np.zeros_like(geometry)
    line = _unit(geometry[k] - geometry[i])
    first, second = np.linalg.norm(geometry[i] - geometry[j]), np.linalg.norm(geometry[k] - geometry[j])
    bend = (direction[i] - direction[j]) / first + (direction[k] - direction[j]) / second
    across = bend - line * (bend @ line)
    if np.linalg.norm(across) < 1e-12:
        return result
    across = _unit(across)
    result[i], result[k] = across / first, across / second
    result[j] = -result[i] - result[k]
    return result


def _unit(vectors: FloatArray) -> FloatArray:
    return vectors / np.linalg.norm(vectors, axis=-1, keepdims=True)


def _dot(first: FloatArray, second: FloatArray) -> FloatArray:
    return np.einsum("...i,...i->...", first, second)


def _angle(first: FloatArray, middle: FloatArray, last: FloatArray) -> FloatArray:
    """Angle at the middle point, 0 to pi."""
    one, other = first - middle, last - middle
    return np.arctan2(np.linalg.norm(np.cross(one, other), axis=-1), _dot(one, other))


def _torsion(first: FloatArray, second: FloatArray, third: FloatArray, fourth: FloatArray) -> FloatArray:
    """Torsion about the middle pair, -pi to pi, clockwise positive; NaN where an angle is nearly straight."""
    axis = third - second
    left, right = np.cross(second - first, axis), np.cross(axis, fourth - third)
    torsion = np.arctan2(np.linalg.norm(axis, axis=-1) * _dot(second - first, right), _dot(left, right))
    bends = np.stack([_angle(first, second, third), _angle(second, third, fourth)])
    straight = np.any((bends > NEARLY_STRAIGHT) | (bends < np.pi - NEARLY_STRAIGHT), axis=0)
    return np.where(straight, np.nan, torsion)


def _out_of_plane(centre: FloatArray, first: FloatArray, second: FloatArray, third: FloatArray) -> FloatArray:
    """Elevation of the centre above the plane of its neighbours, the arc sine of the mean over the three bonds."""
    normal = _unit(np.cross(second - first, third - first))
    sines = [_dot(_unit(centre - point), normal) for point in (first, second, third)]
    return np.arcsin(np.clip(np.mean(sines, axis=0), -1.0, 1.0))
