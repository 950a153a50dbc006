"""What modes move, in words, and what the two sides of a saddle look like."""

import numpy as np
import pytest
from ase.collections import g2

from rateloom.molecule.isotopes import atomic_masses
from rateloom.molecule.motion import displaced, leading_motion, sides, stretch_rates

H3 = np.array([[0, 0, -0.93], [0, 0, 0], [0, 0, 0.93]])
EXCHANGE = np.array([[0, 0, 1.0], [0, 0, -2.0], [0, 0, 1.0]])


def test_the_fastest_atom_goes_the_amplitude() -> None:
    assert displaced(H3, EXCHANGE, 0.3)[1] == pytest.approx([0, 0, -0.3])


def test_rates_are_those_of_the_distances() -> None:
    assert stretch_rates(H3, EXCHANGE, [(0, 1), (1, 2)]) == pytest.approx([-1.5, 1.5])


def test_reactants_and_products_appear_on_the_two_sides() -> None:
    left, right = frozenset({(0, 1)}), frozenset({(1, 2)})

    forward, backward = sides(["H"] * 3, H3, EXCHANGE, (left, right))

    assert forward == (True, False)
    assert backward == (False, True)


def test_an_exchange_is_told_as_stretches() -> None:
    motion = leading_motion(["H"] * 3, H3, EXCHANGE, atomic_masses(("H",) * 3))

    assert motion.words == "H1-H2 (stretch), H2-H3 (shortening)"
    assert motion.share == pytest.approx(0.75)  # one of two equal bonds of an antisymmetric motion: (3/sqrt 2)**2 / 6


def test_a_methyl_rotation_is_told_as_a_torsion_with_its_angle() -> None:
    methanol = g2["CH3OH"]
    atoms, geometry = tuple(methanol.get_chemical_symbols()), methanol.positions
    carbon, oxygen = atoms.index("C"), atoms.index("O")
    axis = geometry[oxygen] - geometry[carbon]
    axis /= np.linalg.norm(axis)
    mode = np.zeros_like(geometry)
    for i in range(len(atoms)):
        if atoms[i] == "H" and np.linalg.norm(geometry[i] - geometry[carbon]) < 1.2:
            mode[i] = np.cross(axis, geometry[i] - geometry[carbon])

    motion = leading_motion(atoms, geometry, mode, atomic_masses(atoms))

    assert motion.kind == "torsion"
    radius = np.sqrt((mode**2).sum(axis=1).max())
    degrees = int(motion.words.split(", ")[1].split(" ")[0])
    assert degrees == pytest.approx(
        2 * np.rad2deg(np.arctan(0.3 / radius)), abs=2
    )  # the three hydrogens differ a little
    assert motion.words.count("-") == 3


def test_a_molecule_without_bonds_moves_nothing_that_is_bonded() -> None:
    far = np.array([[0, 0, 0], [0, 0, 9.0]])

    assert leading_motion(["He", "He"], far, far, np.ones(2)).words == "nothing that is bonded"
