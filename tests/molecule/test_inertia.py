"""Inertia against closed formulas, measured constants and ASE."""

import numpy as np
import pytest
from ase.build import molecule
from hypothesis import given
from hypothesis import strategies as st
from scipy.constants import angstrom, atomic_mass, c, centi
from scipy.spatial.transform import Rotation

from rateloom.molecule import (
    atomic_masses,
    centre_of_mass,
    moments_of,
    principal_axes,
    rotational_constants,
    shape_of,
)


def test_a_diatomic_has_reduced_mass_times_square_of_the_bond() -> None:
    masses = atomic_masses(("H", "Cl"))
    positions = np.array([[0, 0, 0], [0.3, -0.4, 1.2]]) * angstrom

    moments = moments_of(masses, positions, "linear")

    bond = np.linalg.norm(positions[1])
    assert moments == pytest.approx([masses.prod() / masses.sum() * bond**2], rel=1e-12)  # rounding alone


def test_carbon_monoxide_rotates_as_measured() -> None:
    """B_e = 1.93128 cm-1 with r_e = 1.128323 angstrom: K. P. Huber and G. Herzberg 1979 (from memory)."""
    positions = np.array([[0, 0, 0], [0, 0, 1.128323]]) * angstrom

    constant = rotational_constants(moments_of(atomic_masses(("C", "O")), positions, "linear"))[0] * centi / c

    assert constant == pytest.approx(1.93128, rel=5e-5)  # nuclear or atomic masses: the electrons make 2e-5


@pytest.mark.parametrize("name", ["H2O", "CH3CH2OH", "C6H6", "CH4", "NH3", "CH3NO2"])
def test_moments_agree_with_ase(name: str) -> None:
    atoms = molecule(name)
    masses = atomic_masses(tuple(atoms.symbols))
    atoms.set_masses(masses / atomic_mass)

    moments, axes = principal_axes(masses, atoms.positions * angstrom)

    assert moments / (atomic_mass * angstrom**2) == pytest.approx(atoms.get_moments_of_inertia(), rel=1e-9)
    assert axes @ axes.T == pytest.approx(np.eye(3), abs=1e-12)


@given(st.integers(0, 2**32 - 1))
def test_moments_do_not_see_rotation_translation_or_order(seed: int) -> None:
    generator = np.random.default_rng(seed)
    atoms = molecule("CH3CH2OH")
    masses, positions = atomic_masses(tuple(atoms.symbols)), atoms.positions * angstrom
    order = generator.permutation(len(masses))
    moved = Rotation.random(random_state=seed % 1000).apply(positions) + generator.normal(size=3) * angstrom

    again = moments_of(masses[order], moved[order], "nonlinear")

    assert again == pytest.approx(moments_of(masses, positions, "nonlinear"), rel=1e-9)


def test_the_centre_of_mass_balances() -> None:
    masses = np.array([1.0, 3.0]) * atomic_mass
    positions = np.array([[0.0, 0, 0], [4, 0, 0]]) * angstrom

    assert centre_of_mass(masses, positions) == pytest.approx(np.array([3.0, 0, 0]) * angstrom)


@pytest.mark.parametrize(
    ("name", "shape"),
    [
        ("H", "atom"),
        ("N2", "linear"),
        ("HCN", "linear"),
        ("C2H2", "linear"),
        ("H2O", "nonlinear"),
        ("CH4", "nonlinear"),
    ],
)
@pytest.mark.parametrize("seed", range(5))
def test_shapes_survive_noise(name: str, shape: str, seed: int) -> None:
    positions = molecule(name).positions
    noisy = positions + np.random.default_rng(seed).normal(scale=5e-3, size=positions.shape)

    assert shape_of(noisy * angstrom) == shape


@pytest.mark.parametrize(("bend", "shape"), [(2.0, "linear"), (8.0, "nonlinear")])
def test_a_triatomic_is_linear_up_to_a_few_degrees(bend: float, shape: str) -> None:
    angle = np.radians(bend)
    positions = np.array([[-1.1, 0, 0], [0, 0, 0], [1.1 * np.cos(angle), 1.1 * np.sin(angle), 0]]) * angstrom

    assert shape_of(positions) == shape


def test_no_atoms_are_no_molecule() -> None:
    with pytest.raises(ValueError, match="at least one atom"):
        shape_of(np.zeros((0, 3)))
