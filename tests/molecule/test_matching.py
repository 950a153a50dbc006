"""Telling molecules apart by their bonds."""

import networkx as nx
from ase.collections import g2
from hypothesis import given, settings
from hypothesis import strategies as st

from rateloom.molecule.bonds import Bond, atomic_numbers, bonds
from rateloom.molecule.matching import Pattern, mappings, pattern, selections, signature

MOLECULES = {name: (g2[name].get_chemical_symbols(), g2[name].positions) for name in g2.names}


def _pattern(name: str) -> Pattern:
    atoms, geometry = MOLECULES[name]
    return pattern(atomic_numbers(atoms), bonds(atoms, geometry))


def _graph(molecule: Pattern) -> nx.Graph:
    graph = nx.Graph(sorted(molecule.bonds))
    graph.add_nodes_from((i, {"number": number}) for i, number in enumerate(molecule.numbers))
    return graph


@given(st.sampled_from(sorted(MOLECULES)), st.randoms())
def test_a_signature_does_not_depend_on_the_order_of_the_atoms(name: str, random) -> None:  # type: ignore[no-untyped-def]
    molecule = _pattern(name)
    order = list(range(len(molecule.numbers)))
    random.shuffle(order)
    place = {old: new for new, old in enumerate(order)}
    moved = {(min(place[i], place[j]), max(place[i], place[j])) for i, j in molecule.bonds}

    assert signature([molecule.numbers[old] for old in order], moved) == molecule.signature


def test_equal_signatures_are_equal_molecules_throughout_the_g2_set() -> None:
    # networkx's exact isomorphism test is the judge; the set holds many pairs of isomers.
    patterns = [_pattern(name) for name in MOLECULES]
    compared = 0
    for place, first in enumerate(patterns):
        for second in patterns[:place]:
            if sorted(first.numbers) == sorted(second.numbers):
                exact = nx.is_isomorphic(_graph(first), _graph(second), node_match=lambda a, b: a == b)
                assert (first.signature == second.signature) == exact
                compared += 1
    assert compared > 20


def test_one_ring_of_six_is_not_two_rings_of_three() -> None:
    ring = [(i, (i + 1) % 6) for i in range(6)]
    two: list[Bond] = [(0, 1), (1, 2), (0, 2), (3, 4), (4, 5), (3, 5)]

    assert signature([6] * 6, ring) != signature([6] * 6, two)


def test_selections_drop_the_weakest_bonds_that_make_the_molecule() -> None:
    methyl_and_hydrogen = pattern([6, 1, 1, 1, 1], [(0, 1), (0, 2), (0, 3)])
    pairs = [(0, 3), (0, 1), (0, 4), (0, 2)]  # C-H4 next to the weakest

    found, untried = selections([6, 1, 1, 1, 1], pairs, methyl_and_hydrogen, firm=(), limit=100)

    assert found[0] == {(0, 1), (0, 3), (0, 4)}
    assert len(found) == 4
    assert not untried


def test_a_limit_on_selections_is_reported_unless_it_spares_firm_bonds() -> None:
    wanted = pattern([6, 1, 1, 1, 1], [(0, 1), (0, 2)])
    pairs = [(0, 1), (0, 2), (0, 3), (0, 4)]

    found, untried = selections([6, 1, 1, 1, 1], pairs, wanted, firm=(), limit=3)
    spared, untried_of_them = selections([6, 1, 1, 1, 1], pairs, wanted, firm=pairs[:1], limit=3)

    assert untried
    assert not untried_of_them
    assert found == spared
    assert 1 <= len(found) <= 3


@settings(max_examples=20)
@given(st.integers(min_value=1, max_value=6))
def test_mappings_stop_at_their_limit(limit: int) -> None:
    methane = _pattern("CH4")

    ways = list(mappings(methane, methane, limit))

    assert len(ways) == limit
    assert all(sorted(way) == list(range(5)) for way in ways)
