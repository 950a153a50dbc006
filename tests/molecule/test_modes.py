"""Normal modes of a Hessian and shares of motion."""

import numpy as np
import pytest
from ase.build import molecule
from ase.vibrations import VibrationsData
from scipy.constants import atomic_mass, c, e

from rateloom.molecule.internals import stretch_gradients
from rateloom.molecule.modes import motion_share, normal_modes, rigid_motions, without_rigid_motion

ANGSTROM = 1e-10  # m


def _springs(geometry: np.ndarray, strengths: np.ndarray) -> np.ndarray:
    """Hessian of springs between all pairs at rest [unit of the strengths]."""
    n_atoms = len(geometry)
    hessian = np.zeros((3 * n_atoms, 3 * n_atoms))
    for i in range(n_atoms):
        for j in range(i):
            slope = stretch_gradients(geometry, [(j, i)])[0].ravel()
            hessian += strengths[i, j] * np.outer(slope, slope)
    return hessian


def test_the_modes_of_springs_agree_with_ase() -> None:
    atoms = molecule("CH3OH")
    strengths = 10 + 30 * np.random.default_rng(3).random((6, 6))  # eV/angstrom2
    hessian = _springs(atoms.positions, strengths)
    judge = VibrationsData.from_2d(atoms, hessian)

    frequencies, displacements = normal_modes(
        hessian * e / ANGSTROM**2, atoms.get_masses() * atomic_mass, atoms.positions * ANGSTROM
    )

    expected = np.sort(judge.get_frequencies().real)[-12:]
    assert frequencies / c / 100 == pytest.approx(expected, rel=1e-6)  # the constants of ase are of CODATA 2014
    of_ase = judge.get_modes(all_atoms=True)[-1].ravel()
    assert abs(displacements[-1].ravel() @ of_ase) / np.linalg.norm(of_ase) == pytest.approx(1.0, abs=1e-6)


def test_a_diatomic_molecule_has_the_frequency_of_its_reduced_mass() -> None:
    force_constant, masses = 500.0, np.array([1.0, 35.0]) * atomic_mass
    geometry = np.array([[0, 0, 0], [0, 0, 1.27e-10]])
    hessian = force_constant * np.kron([[1, -1], [-1, 1]], np.diag([0, 0, 1.0]))

    frequencies, displacements = normal_modes(hessian, masses, geometry)

    reduced = masses.prod() / masses.sum()
    assert frequencies == pytest.approx([np.sqrt(force_constant / reduced) / (2 * np.pi)])
    assert displacements[0, :, 2] @ masses == pytest.approx(0.0, abs=1e-38)  # the centre of mass rests


def test_a_negative_curvature_is_a_negative_frequency() -> None:
    geometry = np.array([[0, 0, 0], [0, 0, 1e-10]])
    hessian = -np.kron([[1, -1], [-1, 1]], np.diag([0, 0, 1.0]))

    frequencies, _ = normal_modes(hessian, np.ones(2) * atomic_mass, geometry)

    assert frequencies[0] < 0


@pytest.mark.parametrize(("name", "count"), [("CH4", 6), ("CO2", 5), ("H", 3)])
def test_rigid_motions_are_counted_by_shape(name: str, count: int) -> None:
    atoms = molecule(name)

    rows = rigid_motions(atoms.get_masses(), atoms.positions)

    assert rows @ rows.T == pytest.approx(np.eye(count), abs=1e-12)


def test_rigid_motion_is_taken_out_of_a_mode() -> None:
    atoms = molecule("CH3OH")
    masses, geometry = atoms.get_masses(), atoms.positions
    stretch = without_rigid_motion(stretch_gradients(geometry, [(0, 1)])[0], masses, geometry)
    rigid = np.array([0.1, -0.2, 0.3]) + np.cross([0.2, 0.1, -0.3], geometry)

    assert without_rigid_motion(stretch + rigid, masses, geometry) == pytest.approx(stretch, abs=1e-12)


def test_shares_add_up_over_independent_coordinates() -> None:
    masses = np.array([1.0, 1.0, 1.0])
    geometry = np.array([[0, 0, -0.93], [0, 0, 0], [0, 0, 0.93]])
    mode = np.array([[0, 0, 1], [0, 0, -2], [0, 0, 1]])
    slopes = stretch_gradients(geometry, [(0, 1), (1, 2)])

    assert motion_share(mode, masses, slopes) == pytest.approx(1.0)
    assert motion_share(mode, masses, slopes[:1]) == pytest.approx(0.75)  # (3 / sqrt 2)**2 / 6
    assert motion_share(mode, masses, slopes[:0]) == 0.0
