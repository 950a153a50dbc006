"""Bonds as a graph: which atoms of one geometry are bonded, judged by covalent radii.

Lengths are in angstrom, the unit of a calculation record. *Stretch* is a distance over the sum of the two covalent
radii: 0.8 to 1.1 in most molecules (H2 has 1.2), 1.1 to 2 for a bond that forms or breaks in a saddle.
"""

from collections.abc import Sequence
from functools import cache

import networkx as nx
import numpy as np
import periodictable

from rateloom.arrays import FloatArray

Bond = tuple[int, int]
"""Two atoms, counted from 0, the lower one first."""

BONDED_STRETCH = 1.3
BONDED_EXCESS = 0.30  # angstrom; lets the small radius of hydrogen breathe: H-H to 0.92, O-H to 1.27
FIRM_STRETCH = 1.15
FIRM_EXCESS = 0.15  # angstrom
RADIUS_WITHOUT_DATA = 1.6  # angstrom; elements beyond curium


@cache
def _element(symbol: str) -> tuple[int, float]:
    """Atomic number and covalent radius [angstrom]; D and T are hydrogen."""
    element = periodictable.elements.symbol("H" if symbol in ("D", "T") else symbol)
    return int(element.number), float(element.covalent_radius or RADIUS_WITHOUT_DATA)


def atomic_numbers(atoms: Sequence[str]) -> tuple[int, ...]:
    """Atomic number of every atom; isotopes count as their element."""
    return tuple(_element(symbol)[0] for symbol in atoms)


def distances(geometry: FloatArray) -> FloatArray:
    """Distances between all atoms [angstrom], shape (n_atoms, n_atoms), of a geometry of shape (n_atoms, 3)."""
    difference = geometry[:, np.newaxis] - geometry[np.newaxis]
    return np.sqrt(np.einsum("ijk,ijk->ij", difference, difference))


def radius_sums(atoms: Sequence[str]) -> FloatArray:
    """Sums of the two covalent radii of every pair of atoms.

    Parameters
    ----------
    atoms : sequence of str
        Element symbols.

    Returns
    -------
    ndarray, shape (n_atoms, n_atoms)
        [angstrom]

    References
    ----------
    .. [1] B. Cordero et al., Dalton Trans. 2008, 2832, as tabulated by the periodictable library.
    """
    radii = np.array([_element(symbol)[1] for symbol in atoms])
    return radii[:, np.newaxis] + radii


def pairs_below(lengths: FloatArray, limits: FloatArray) -> frozenset[Bond]:
    """Pairs of atoms whose distance is within their limit, both of shape (n_atoms, n_atoms) and in one unit."""
    first, second = np.nonzero(lengths <= limits)
    return frozenset((i, j) for i, j in zip(first.tolist(), second.tolist(), strict=True) if i < j)


def pairs_within(atoms: Sequence[str], geometry: FloatArray, stretch: float, excess: float) -> frozenset[Bond]:
    """Pairs of atoms within a stretch [1] or an excess over the sum of their radii [angstrom], whichever is wider.

    Parameters
    ----------
    atoms : sequence of str
        Element symbols.
    geometry : ndarray, shape (n_atoms, 3)
        [angstrom]
    stretch, excess : float
        Limits [1], [angstrom].

    Returns
    -------
    frozenset of (int, int)
    """
    sums = radius_sums(atoms)
    return pairs_below(distances(geometry), np.maximum(stretch * sums, sums + excess))


def bonded_limits(atoms: Sequence[str]) -> FloatArray:
    """Largest distances of bonded atoms [angstrom], shape (n_atoms, n_atoms)."""
    sums = radius_sums(atoms)
    return np.maximum(BONDED_STRETCH * sums, sums + BONDED_EXCESS)


def bonds(atoms: Sequence[str], geometry: FloatArray) -> frozenset[Bond]:
    """Bonds of a molecule in a minimum, and those of a saddle that are not far stretched.

    Parameters
    ----------
    atoms : sequence of str
        Element symbols.
    geometry : ndarray, shape (n_atoms, 3)
        [angstrom]

    Returns
    -------
    frozenset of (int, int)
        Pairs of atoms within 1.3 times the sum of their radii, or within 0.30 angstrom of that sum.
    """
    return pairs_below(distances(geometry), bonded_limits(atoms))


def firm_bonds(atoms: Sequence[str], geometry: FloatArray) -> frozenset[Bond]:
    """Bonds that are hardly stretched, if at all: those no reading of a saddle may overlook.

    Parameters
    ----------
    atoms : sequence of str
        Element symbols.
    geometry : ndarray, shape (n_atoms, 3)
        [angstrom]

    Returns
    -------
    frozenset of (int, int)
        Pairs of atoms within 1.15 times the sum of their radii, or within 0.15 angstrom of that sum.
    """
    return pairs_within(atoms, geometry, FIRM_STRETCH, FIRM_EXCESS)


def bond_graph(atoms: Sequence[str], geometry: FloatArray) -> nx.Graph:
    """Graph of a molecule: atoms labelled with their element, bonds with length and stretch.

    Parameters
    ----------
    atoms : sequence of str
        Element symbols; one atom is a graph of one node.
    geometry : ndarray, shape (n_atoms, 3)
        [angstrom]

    Returns
    -------
    networkx.Graph
        Node ``i`` has ``element`` and ``number``; an edge has ``length`` [angstrom] and ``stretch`` [1].
    """
    graph = nx.Graph()
    graph.add_nodes_from(
        (i, {"element": symbol, "number": number})
        for i, (symbol, number) in enumerate(zip(atoms, atomic_numbers(atoms), strict=True))
    )
    lengths, sums = distances(geometry), radius_sums(atoms)
    for i, j in sorted(bonds(atoms, geometry)):
        graph.add_edge(i, j, length=float(lengths[i, j]), stretch=float(lengths[i, j] / sums[i, j]))
    return graph


def chain_name(atoms: Sequence[str], members: Sequence[int]) -> str:
    """Name of a bond, angle or torsion with atoms counted from 1, e.g. ``H5-C1-C2-H8``."""
    return "-".join(f"{atoms[i]}{i + 1}" for i in members)


def bond_kind(atoms: Sequence[str], bond: Bond) -> str:
    """Name of a bond without atom numbers, hydrogen last, e.g. ``C-H``."""
    first, second = sorted((atoms[bond[0]], atoms[bond[1]]), key=lambda symbol: (symbol == "H", symbol))
    return f"{first}-{second}"
