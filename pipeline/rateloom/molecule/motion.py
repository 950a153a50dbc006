"""What a mode does to a molecule: the coordinates it moves most, and the bonds on both sides of a saddle along it."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.molecule.bonds import Bond, bonded_limits, bonds, chain_name, distances, pairs_below, radius_sums
from rateloom.molecule.internals import Coordinate, coordinates, gradients, stretch_gradients, turning
from rateloom.molecule.modes import motion_share

SHOWN = 0.3  # angstrom; how far the fastest atom goes each way when a motion is put into words
AMPLITUDES = np.arange(0.1, 1.05, 0.1)  # angstrom; of the fastest atom, in the search for reactants and products
STRETCHED = 1.6  # pairs within this stretch may be bonds that form or break ...
FAR_STRETCHED = 2.1  # ... and these, unless both are bonded to the same atom
COMPARABLE = 0.4  # coordinates with this share of the leading one's are worth a look or a word
LARGEST_LIST = 3  # stretches named in one sentence


@dataclass(frozen=True, slots=True)
class Motion:
    """The leading part of a mode."""

    kind: str
    """``stretch``, ``angle``, ``torsion`` or ``out of plane``."""
    share: float
    """Of the kinetic energy of the mode [1]."""
    atoms: tuple[int, ...]
    """Of the coordinate that leads."""
    words: str
    """E.g. ``H5-C1-C2-H8 (torsion, 38 deg)`` or ``C1-H2 (stretch), H2-O7 (shortening)``."""


def displaced(geometry: FloatArray, mode: FloatArray, amplitude: float) -> FloatArray:
    """Geometry, shape (n_atoms, 3), with its fastest atom moved along a mode by the amplitude, all in one unit."""
    return geometry + mode * (amplitude / np.sqrt((mode**2).sum(axis=1).max()))


def stretch_rates(geometry: FloatArray, mode: FloatArray, changing: Sequence[Bond]) -> FloatArray:
    """How fast distances grow along a mode.

    Parameters
    ----------
    geometry, mode : ndarray, shape (n_atoms, 3)
        The mode in any unit.
    changing : sequence of (int, int)
        Pairs of atoms.

    Returns
    -------
    ndarray, shape (n_pairs,)
        Per displacement of the fastest atom [1].
    """
    largest = np.sqrt((mode**2).sum(axis=1).max())
    return np.einsum("kij,ij->k", stretch_gradients(geometry, changing), mode) / largest


def sides(
    atoms: Sequence[str], geometry: FloatArray, mode: FloatArray, wanted: Iterable[frozenset[Bond]]
) -> tuple[tuple[bool, ...], tuple[bool, ...]]:
    """Which sets of bonds appear on either side of a saddle as it moves along its mode.

    Straight displacements distort a molecule when they are long and change nothing when they are short, so a range of
    amplitudes is tried.

    Parameters
    ----------
    atoms : sequence of str
        Element symbols.
    geometry, mode : ndarray, shape (n_atoms, 3)
        Geometry in angstrom, mode in any unit.
    wanted : iterable of frozenset of (int, int)
        Bonds of the reactants, of the products, ...

    Returns
    -------
    forward, backward : tuple of bool
        Whether each wanted set was seen at some amplitude.
    """
    limits = bonded_limits(atoms)
    wanted = tuple(wanted)
    seen = []
    for sign in (1.0, -1.0):
        moved = [displaced(geometry, mode, sign * amplitude) for amplitude in AMPLITUDES]
        found = {pairs_below(distances(one), limits) for one in moved}
        seen.append(tuple(group in found for group in wanted))
    return seen[0], seen[1]


def leading_motion(atoms: Sequence[str], geometry: FloatArray, mode: FloatArray, masses: FloatArray) -> Motion:
    """Put into words what a mode moves most.

    Parameters
    ----------
    atoms : sequence of str
        Element symbols.
    geometry, mode : ndarray, shape (n_atoms, 3)
        Geometry in angstrom; mode in any unit, free of rigid motion.
    masses : ndarray, shape (n_atoms,)
        In any one unit.

    Returns
    -------
    Motion
        Its amount is the change from one side to the other when the fastest atom goes 0.3 angstrom each way.
    """
    forward, backward = displaced(geometry, mode, SHOWN), displaced(geometry, mode, -SHOWN)
    stretches = _stretches(atoms, geometry, mode, masses)
    turns = _turns(atoms, geometry, mode, masses, forward, backward)
    if not stretches and not turns:
        return Motion("none", 0.0, (), "nothing that is bonded")
    if not turns or (stretches and stretches[0][0] >= turns[0][0]):
        named = [entry for entry in stretches if entry[0] >= COMPARABLE * stretches[0][0]][:LARGEST_LIST]
        words = ", ".join(
            f"{chain_name(atoms, bond)} ({'stretch' if rate > 0 else 'shortening'})" for _, bond, rate in named
        )
        return Motion("stretch", stretches[0][0], stretches[0][1], words)
    share, coordinate, amount = turns[0]
    words = f"{chain_name(atoms, coordinate.atoms)} ({coordinate.kind}, {np.rad2deg(amount):.0f} deg)"
    return Motion(coordinate.kind, share, coordinate.atoms, words)


def _moving_pairs(atoms: Sequence[str], geometry: FloatArray) -> list[Bond]:
    """Bonds of a saddle, stretched ones among them, ascending."""
    stretch = distances(geometry) / radius_sums(atoms)
    adjacent = np.zeros(stretch.shape, dtype=bool)
    for i, j in bonds(atoms, geometry):
        adjacent[i, j] = adjacent[j, i] = True
    near = (stretch <= STRETCHED) | ((stretch <= FAR_STRETCHED) & ~(adjacent @ adjacent))
    first, second = np.nonzero(np.triu(near | adjacent, 1))
    return list(zip(first.tolist(), second.tolist(), strict=True))


def _stretches(
    atoms: Sequence[str], geometry: FloatArray, mode: FloatArray, masses: FloatArray
) -> list[tuple[float, Bond, float]]:
    """Share, pair and rate of every bonded or stretched pair, the largest share first; the first one lengthens."""
    pairs = _moving_pairs(atoms, geometry)
    slopes = stretch_gradients(geometry, pairs)
    found = [
        (motion_share(mode, masses, slope[np.newaxis]), pair, float((slope * mode).sum()))
        for pair, slope in zip(pairs, slopes, strict=True)
    ]
    found.sort(key=lambda entry: (-round(entry[0], 6), entry[1]))
    sign = 1.0 if found and found[0][2] >= 0 else -1.0
    return [(share, pair, sign * rate) for share, pair, rate in found]


def _turns(
    atoms: Sequence[str],
    geometry: FloatArray,
    mode: FloatArray,
    masses: FloatArray,
    forward: FloatArray,
    backward: FloatArray,
) -> list[tuple[float, Coordinate, float]]:
    """Share, representative and amount [rad] of every angle, out-of-plane motion and rotation about a bond."""
    listed = coordinates(geometry, _moving_pairs(atoms, geometry))
    amounts = turning(geometry, forward, backward, listed)
    moving = np.flatnonzero((amounts > 0) & (amounts >= COMPARABLE * amounts.max(initial=0.0)))
    slopes = gradients(geometry, [listed[place] for place in moving], mode)
    groups: dict[tuple[str, tuple[int, ...]], list[int]] = {}
    for row, place in enumerate(moving):
        kind, members = listed[place].kind, listed[place].atoms
        about = tuple(sorted(members[1:3])) if kind == "torsion" else members
        groups.setdefault((kind, about), []).append(row)
    found = []
    for rows in groups.values():
        share = motion_share(mode, masses, slopes[rows].sum(axis=0)[np.newaxis])
        farthest = int(moving[max(rows, key=lambda row: (round(float(amounts[moving[row]]), 6), -row))])
        found.append((share, listed[farthest], float(amounts[farthest])))
    found.sort(key=lambda entry: (-round(entry[0], 6), entry[1].kind, entry[1].atoms))
    return found
