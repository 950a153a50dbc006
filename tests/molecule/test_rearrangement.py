"""Bonds that break and form, read from saddles whose answer a chemist knows."""

import numpy as np
import pytest
from ase.collections import g2

from rateloom.molecule.edits import smallest_edit
from rateloom.molecule.matching import Pattern
from rateloom.molecule.rearrangement import read_saddle, side_by_side

LIMIT = 40_000
ATOM = {name: ([name], np.zeros((1, 3))) for name in ("H", "O", "F", "Cl")}
# Names of the G2 set of ASE for molecules; N2O linear, HNC and CH3OO are not needed elsewhere.
OWN = {
    "HNC": (["H", "N", "C"], [[0, 0, 0], [0, 0, 1.0], [0, 0, 2.17]]),
    "HF": (["H", "F"], [[0, 0, 0], [0, 0, 0.92]]),
    "N2O": (["N", "N", "O"], [[0, 0, 0], [0, 0, 1.13], [0, 0, 2.32]]),
}
METHYL = [[0.05, 1.06, 0.2], [0.05, -0.53, 1.02], [0.05, -0.53, -0.82]]


def _molecules(names: str) -> Pattern:
    members = []
    for seed, name in enumerate(names.split(" + ")):
        if name in ATOM:
            members.append(ATOM[name])
            continue
        atoms, geometry = OWN.get(name) or (g2[name].get_chemical_symbols(), g2[name].positions)
        order = np.random.default_rng(seed).permutation(len(atoms))  # no order of atoms to lean on
        members.append(([atoms[i] for i in order], np.array(geometry)[order]))
    return side_by_side(members)


SADDLES = {
    # H-H distances of the exchange: 0.930 angstrom, the saddle of every accurate H3 surface (from memory).
    "symmetric exchange": ("HHH", [[0, 0, 0], [0, 0, 0.93], [0, 0, 1.86]], "H2 + H", "H + H2", [(0, 1)], [(1, 2)]),
    # Early: the bond that breaks is hardly stretched (H-H 0.77, F-H 1.5 angstrom).
    "hydrogen transfer": ("FHH", [[0, 0, 0], [0, 0, 1.5], [0.3, 0, 2.2]], "F + H2", "HF + H", [(1, 2)], [(0, 1)]),
    "hydrogen shift": ("CNH", [[0, 0, 0], [0, 0, 1.19], [1.15, 0, 0.3]], "HCN", "HNC", [(0, 2)], [(1, 2)]),
    "substitution": (
        "NNOH",
        [[0, 0, 0], [0, 0, 1.13], [0.2, 0, 2.35], [-0.9, 0, 3.2]],
        "H + N2O",
        "N2 + OH",
        [(1, 2)],
        [(2, 3)],
    ),
    # Loose: the carbon-hydrogen distance is 2.0 angstrom, less than 0.2 from that of the hydrogen atoms next door.
    "addition": (
        "CCHHHHH",
        [
            [0, 0, 0],
            [0, 0, 1.34],
            [0, 0.92, -0.57],
            [0, -0.92, -0.57],
            [0, 0.92, 1.91],
            [0, -0.92, 1.91],
            [1.92, 0, -0.5],
        ],
        "H + C2H4",
        "C2H5",
        [],
        [(0, 6)],
    ),
    "dissociation": ("COH", [[0, 0, 0], [0, 0, 1.13], [1.55, 0, -0.8]], "HCO", "H + CO", [(0, 2)], []),
}


@pytest.mark.parametrize("kind", SADDLES)
def test_the_bonds_of_a_saddle_are_read(kind: str) -> None:
    atoms, geometry, reactants, products, broken, formed = SADDLES[kind]

    reading = read_saddle(list(atoms), np.array(geometry, float), _molecules(reactants), _molecules(products), LIMIT)

    assert reading.complete
    assert reading.rearrangement is not None
    assert reading.rearrangement.kind == kind
    assert {reading.rearrangement.broken, reading.rearrangement.formed} == {tuple(broken), tuple(formed)} or (
        kind == "symmetric exchange" and {*reading.rearrangement.changed} == {*broken, *formed}
    )


@pytest.mark.parametrize("kind", SADDLES)
def test_the_reverse_reaction_changes_the_same_bonds(kind: str) -> None:
    atoms, geometry, reactants, products, broken, formed = SADDLES[kind]

    reading = read_saddle(list(atoms), np.array(geometry, float), _molecules(products), _molecules(reactants), LIMIT)

    assert reading.rearrangement is not None
    assert {*reading.rearrangement.changed} == {*broken, *formed}


def test_an_early_abstraction_takes_the_hydrogen_that_is_on_its_way() -> None:
    # OH + CH4: the C-H bond has grown by a tenth of an angstrom, the O-H bond is 1.3 angstrom long.
    atoms = ["C", "H", "H", "H", "H", "O", "H"]
    geometry = np.array([[0, 0, 0], *METHYL, [-1.2, 0, 0], [-2.5, 0.1, 0], [-2.7, 1.0, 0]])

    reading = read_saddle(atoms, geometry, _molecules("CH4 + OH"), _molecules("CH3 + H2O"), LIMIT)

    assert reading.rearrangement is not None
    assert (reading.rearrangement.broken, reading.rearrangement.formed) == (((0, 4),), ((4, 5),))


def test_a_molecule_that_keeps_its_bonds_changes_its_shape() -> None:
    flat = [[0, 0, 0], *(np.array(METHYL) * [0, 1, 1]).tolist()]

    reading = read_saddle(["N", "H", "H", "H"], np.array(flat), _molecules("NH3"), _molecules("NH3"), LIMIT)

    assert reading.rearrangement is not None
    assert reading.rearrangement.kind == "change of shape"
    assert reading.rearrangement.changed == ()


def _methanol_losing_hydrogen_of_carbon() -> tuple[list[str], np.ndarray, tuple[int, int]]:
    methanol = g2["CH3OH"]
    atoms = [*methanol.get_chemical_symbols(), "H"]
    carbon, hydrogen = atoms.index("C"), 5
    axis = methanol.positions[hydrogen] - methanol.positions[carbon]
    axis /= np.linalg.norm(axis)
    geometry = np.vstack([methanol.positions, methanol.positions[carbon] + 2.3 * axis])
    geometry[hydrogen] = methanol.positions[carbon] + 1.38 * axis
    return atoms, geometry, (carbon, hydrogen)


def test_a_saddle_of_another_reaction_is_not_read() -> None:
    atoms, geometry, bond = _methanol_losing_hydrogen_of_carbon()

    right = read_saddle(atoms, geometry, _molecules("CH3OH + H"), _molecules("H2COH + H2"), LIMIT)
    wrong = read_saddle(atoms, geometry, _molecules("CH3OH + H"), _molecules("CH3O + H2"), LIMIT)

    assert right.rearrangement is not None
    assert right.rearrangement.broken == (bond,)
    assert wrong.rearrangement is None
    assert wrong.complete


def test_a_search_that_is_cut_short_says_so() -> None:
    atoms, geometry, reactants, products, *_ = SADDLES["symmetric exchange"]

    reading = read_saddle(list(atoms), np.array(geometry), _molecules(reactants), _molecules(products), limit=3)

    assert reading.rearrangement is None
    assert not reading.complete


def test_other_atoms_are_not_read() -> None:
    reading = read_saddle(["H", "H"], np.array([[0, 0, 0], [0, 0, 1.0]]), _molecules("HF"), _molecules("HF"), LIMIT)

    assert reading.rearrangement is None


@pytest.mark.parametrize(
    ("reactants", "products", "edit"),
    [
        ("CH4 + OH", "CH3 + H2O", ([(1, 6)], [(1, 8)])),
        ("H2 + H", "H + H2", ([], [])),
        ("HCN", "HNC", ([(1, 6)], [(1, 7)])),
        ("H + C2H4", "C2H5", ([], [(1, 6)])),
        ("C2H6", "CH3 + CH3", ([(6, 6)], [])),
        ("H2CO", "CO + H2", ([(1, 6), (1, 6)], [(1, 1)])),
    ],
)
def test_the_smallest_edit_is_known_from_the_molecules(
    reactants: str, products: str, edit: tuple[list[tuple[int, int]], list[tuple[int, int]]]
) -> None:
    assert smallest_edit(_molecules(reactants), _molecules(products)) == edit


def test_the_smallest_edit_gives_up_at_its_limit_and_where_atoms_differ() -> None:
    assert smallest_edit(_molecules("H2CO"), _molecules("CO + H2"), limit=2) is None
    assert smallest_edit(_molecules("H2"), _molecules("HF")) is None
