"""Internal coordinates: values at shapes known by geometry, gradients against finite differences."""

import numpy as np
import pytest
from ase.build import molecule
from ase.collections import g2

from rateloom.molecule.bonds import bonds
from rateloom.molecule.internals import Coordinate, changes, coordinates, gradients, stretch_gradients, turning


def test_a_molecule_lists_its_angles_torsions_and_planes() -> None:
    ethane = g2["C2H6"]
    kinds = [c.kind for c in coordinates(ethane.positions, bonds(ethane.get_chemical_symbols(), ethane.positions))]

    assert (kinds.count("angle"), kinds.count("torsion"), kinds.count("out of plane")) == (12, 9, 0)


@pytest.mark.parametrize("name", ["H2O2", "CH3CH2OH", "NH3", "H2CO", "CH3ONO"])
def test_gradients_predict_changes_and_ase_agrees(name: str) -> None:
    atoms = molecule(name)
    geometry = atoms.positions
    listed = coordinates(geometry, bonds(atoms.get_chemical_symbols(), geometry))
    step = 1e-4 * np.random.default_rng(1).normal(size=geometry.shape)
    moved = atoms.copy()
    moved.positions = geometry + step

    predicted = np.einsum("kij,ij->k", gradients(geometry, listed, step), step)
    found = changes(geometry, geometry + step, listed)

    assert predicted == pytest.approx(
        found, abs=1e-6
    )  # second order: (1e-4)**2 times curvatures of a few 1/angstrom2
    for coordinate, change in zip(listed, found, strict=True):
        if coordinate.kind == "angle":
            change_of_ase = moved.get_angle(*coordinate.atoms) - atoms.get_angle(*coordinate.atoms)
        elif coordinate.kind == "torsion":
            change_of_ase = moved.get_dihedral(*coordinate.atoms) - atoms.get_dihedral(*coordinate.atoms)
        else:
            continue
        turned = (np.deg2rad(change_of_ase) + np.pi) % (2 * np.pi) - np.pi
        assert abs(turned) == pytest.approx(abs(change), abs=1e-8)  # ase counts torsions in its own sense


def test_gradients_feel_no_translation_and_no_rotation() -> None:
    atoms = molecule("CH3CH2OH")
    geometry = atoms.positions
    listed = coordinates(geometry, bonds(atoms.get_chemical_symbols(), geometry))
    slopes = np.concatenate([gradients(geometry, listed, geometry), stretch_gradients(geometry, [(0, 1), (2, 8)])])

    assert slopes.sum(axis=1) == pytest.approx(0.0, abs=1e-6)
    turn = np.cross([0.3, -0.5, 0.8], geometry)
    assert np.einsum("kij,ij->k", slopes, turn) == pytest.approx(0.0, abs=1e-6)


def test_the_angle_of_a_plane_of_ammonia_is_that_of_trigonometry() -> None:
    height, reach = 0.3, 1.0
    corners = [(reach * np.cos(a), reach * np.sin(a), 0.0) for a in 2 * np.pi * np.arange(3) / 3]
    flat, pyramid = (np.array([(0, 0, h), *corners]) for h in (0.0, height))

    change = changes(flat, pyramid, [Coordinate("out of plane", (0, 1, 2, 3))])

    assert abs(change[0]) == pytest.approx(np.arctan(height / reach))


def test_torsions_change_the_shorter_way_round() -> None:
    def chain(torsion: float) -> np.ndarray:
        return np.array([[1, 0, 0], [0, 0, 0], [0, 0, 1.5], [np.cos(torsion), np.sin(torsion), 1.5]])

    torsion = [Coordinate("torsion", (0, 1, 2, 3))]

    assert abs(changes(chain(np.deg2rad(170)), chain(np.deg2rad(-170)), torsion)[0]) == pytest.approx(np.deg2rad(20))


def test_a_straight_angle_bends_in_the_plane_of_the_motion_and_counts_both_sides() -> None:
    straight = np.array([[0, 0, -1.0], [0, 0, 0], [0, 0, 1.0]])
    sideways = np.array([[0.1, 0, 0], [-0.1, 0, 0], [0.1, 0, 0]])
    angle = [Coordinate("angle", (0, 1, 2))]

    slope = gradients(straight, angle, sideways)[0]

    assert (slope * sideways).sum() == pytest.approx(0.4)  # both arms of 1 angstrom turn by 0.2
    turned = turning(straight, straight + sideways, straight - sideways, angle)[0]
    assert turned == pytest.approx(4 * np.arctan(0.2))


def test_a_torsion_over_a_straight_angle_has_no_value() -> None:
    straight = np.array([[0, 0, -1.0], [0, 0, 0], [0, 0, 1.2], [0, 1, 1.5]])
    torsion = [Coordinate("torsion", (0, 1, 2, 3))]

    assert np.isnan(changes(straight, straight, torsion)[0])
    assert not gradients(straight, torsion, straight).any()


def test_torsions_reach_over_straight_chains() -> None:
    butyne = g2["2-butyne"]
    bonded = bonds(butyne.get_chemical_symbols(), butyne.positions)

    torsions = [c for c in coordinates(butyne.positions, bonded) if c.kind == "torsion"]

    ends = {
        (c.atoms[1], c.atoms[2]) for c in torsions if np.isfinite(changes(butyne.positions, butyne.positions, [c]))[0]
    }
    carbons = [i for i, atom in enumerate(butyne.get_chemical_symbols()) if atom == "C"]
    methyl = [i for i in carbons if sum(i in bond for bond in bonded) == 4]
    assert ends == {tuple(sorted(methyl))}
