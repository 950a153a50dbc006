"""The same shape is the same in any order and orientation; another shape is told apart."""

import numpy as np
import pytest
from ase.build import molecule
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from rateloom.arrays import FloatArray
from rateloom.audit.geometries import shape_difference

MOLECULES = ("CH3OH", "C2H6", "H2O2", "CH3CHO", "C6H6", "N2H4", "isobutane", "SiH4", "bicyclobutane")
TOLERANCE = 0.01


def shape(name: str) -> tuple[tuple[str, ...], FloatArray]:
    atoms = molecule(name)
    return tuple(atoms.symbols), atoms.positions


@settings(max_examples=60, deadline=None)
@given(st.sampled_from(MOLECULES), st.integers(0, 2**32 - 1), st.booleans())
def test_order_rotation_translation_and_reflection_change_nothing(name: str, seed: int, mirrored: bool) -> None:
    labels, positions = shape(name)
    random = np.random.default_rng(seed)
    order = random.permutation(len(labels))
    turned = Rotation.random(rng=random).apply(positions * (-1 if mirrored else 1)) + random.normal(size=3)

    difference = shape_difference(labels, positions, [labels[i] for i in order], turned[order], TOLERANCE)

    assert difference < 1e-5  # these geometries are symmetric to 1e-6, and any assignment may be found first


@settings(max_examples=60, deadline=None)
@given(st.sampled_from(MOLECULES), st.integers(0, 2**32 - 1))
def test_noise_below_the_tolerance_is_the_same_shape_in_any_order(name: str, seed: int) -> None:
    labels, positions = shape(name)
    random = np.random.default_rng(seed)
    order = random.permutation(len(labels))
    noise = random.uniform(-1, 1, size=positions.shape)
    noise *= 0.45 * TOLERANCE / np.linalg.norm(noise, axis=1).max()  # a distance changes by twice this at most

    difference = shape_difference(
        labels, positions, [labels[i] for i in order], (positions + noise)[order], TOLERANCE
    )

    assert difference <= TOLERANCE


@settings(max_examples=60, deadline=None)
@given(st.sampled_from(MOLECULES), st.integers(0, 2**32 - 1))
def test_a_stretched_molecule_is_another_shape_in_any_order(name: str, seed: int) -> None:
    labels, positions = shape(name)
    order = np.random.default_rng(seed).permutation(len(labels))

    difference = shape_difference(labels, positions, [labels[i] for i in order], 1.05 * positions[order], TOLERANCE)

    assert difference > TOLERANCE  # bonds of 0.95 angstrom and more become longer by 0.047


def test_isomers_are_told_apart() -> None:
    assert shape_difference(*shape("CH3CHO"), *shape("H2CCO"), TOLERANCE) == np.inf
    assert shape_difference(*shape("CH3CH2OH"), *shape("CH3OCH3"), TOLERANCE) > 0.1


def test_isotopes_are_other_atoms() -> None:
    labels, positions = shape("H2O")

    assert shape_difference(labels, positions, ("O", "H", "D"), positions, TOLERANCE) == np.inf


def test_equal_distances_between_other_atoms_are_another_shape() -> None:
    # Two sets of points on a line that have all 15 distances in common and are no mirror images of one another:
    # G. S. Bloom, J. Comb. Theory A 22, 378 (1977).
    first, second = ([[x, 0.0, 0.0] for x in points] for points in ((0, 1, 4, 10, 12, 17), (0, 1, 8, 11, 13, 17)))
    labels = ("H",) * 6

    assert shape_difference(labels, np.array(first), labels, np.array(second), TOLERANCE) > TOLERANCE


@pytest.mark.parametrize("count", [1, 2])
def test_one_and_two_atoms_have_a_shape(count: int) -> None:
    positions = np.zeros((count, 3))
    positions[:, 0] = np.arange(count)

    assert shape_difference(("H",) * count, positions, ("H",) * count, positions + 1, TOLERANCE) < 1e-12
