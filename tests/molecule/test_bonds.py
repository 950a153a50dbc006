"""Bonds of real molecules, judged by covalent radii."""

import networkx as nx
import numpy as np
import pytest
from ase.collections import g2, s22

from rateloom.molecule.bonds import bond_graph, bond_kind, bonds, chain_name, firm_bonds

# Most neighbours an element of the G2 set has; ClF3 is hypervalent.
MOST_NEIGHBOURS = {
    "H": 1,
    "Li": 1,
    "Be": 2,
    "B": 3,
    "C": 4,
    "N": 4,
    "O": 2,
    "F": 1,
    "Na": 1,
    "Al": 3,
    "Si": 4,
    "P": 4,
}


@pytest.mark.parametrize("name", tuple(g2.names))
def test_every_molecule_of_the_g2_set_is_one_molecule_with_the_usual_valences(name: str) -> None:
    # MP2/6-31G(d) geometries of L. A. Curtiss et al., J. Chem. Phys. 106, 1063 (1997), as ASE ships them: radicals,
    # rings, cages, H2, Li2, Na2 and alkali halides among them.
    molecule = g2[name]

    graph = bond_graph(molecule.get_chemical_symbols(), molecule.positions)

    assert nx.is_connected(graph)
    for atom, data in graph.nodes(data=True):
        assert graph.degree(atom) <= MOST_NEIGHBOURS.get(data["element"], 4)


@pytest.mark.parametrize("name", tuple(s22.names))
def test_hydrogen_bonds_and_stacking_join_no_molecules(name: str) -> None:
    # Complexes of P. Jurecka et al., Phys. Chem. Chem. Phys. 8, 1985 (2006): each is two molecules.
    dimer = s22[name]

    graph = bond_graph(dimer.get_chemical_symbols(), dimer.positions)

    assert nx.number_connected_components(graph) == 2


@pytest.mark.parametrize(
    ("name", "count"), [("cyclobutene", 10), ("bicyclobutane", 11), ("C6H6", 12), ("CCl4", 4), ("P2", 1), ("O3", 2)]
)
def test_rings_have_their_bonds_and_no_diagonals(name: str, count: int) -> None:
    molecule = g2[name]

    assert len(bonds(molecule.get_chemical_symbols(), molecule.positions)) == count


def test_one_atom_is_a_graph_of_one_node() -> None:
    graph = bond_graph(["O"], np.zeros((1, 3)))

    assert list(graph.nodes(data="element")) == [(0, "O")]
    assert graph.number_of_edges() == 0


def test_a_stretched_bond_is_bonded_but_not_firm() -> None:
    atoms, geometry = ["C", "H"], np.array([[0, 0, 0], [0, 0, 1.30]])

    assert bonds(atoms, geometry) == {(0, 1)}
    assert firm_bonds(atoms, geometry) == frozenset()
    assert bond_graph(atoms, geometry).edges[0, 1]["stretch"] == pytest.approx(1.30 / (0.76 + 0.31))  # Cordero radii


def test_the_bihalide_ion_has_two_bonds() -> None:
    # F-H in FHF-: 1.146 angstrom, K. Kawaguchi, E. Hirota, J. Chem. Phys. 84, 2953 (1986) (from memory).
    assert bonds(["F", "H", "F"], np.array([[0, 0, -1.146], [0, 0, 0], [0, 0, 1.146]])) == {(0, 1), (1, 2)}


def test_names_count_atoms_from_one_and_put_hydrogen_last() -> None:
    assert chain_name(["H", "C", "O"], (0, 1, 2)) == "H1-C2-O3"
    assert bond_kind(["H", "C"], (0, 1)) == "C-H"
