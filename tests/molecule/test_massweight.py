"""Frequencies for other masses: the product rule, closed formulas, ASE and real Hessians."""

import logging
from pathlib import Path

import numpy as np
import pytest
from ase import Atoms
from ase.build import molecule
from ase.vibrations import VibrationsData
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import angstrom, atomic_mass, c, centi, e, physical_constants

from rateloom.arrays import FloatArray
from rateloom.molecule import (
    atomic_masses,
    force_constants_from_modes,
    frequencies_for_masses,
    moments_of,
    shape_of,
)

PER_CM = c / centi  # Hz
HESSIAN = physical_constants["Hartree energy"][0] / physical_constants["Bohr radius"][0] ** 2


def springs(positions: FloatArray, generator: np.random.Generator | None = None) -> FloatArray:
    """Force constants [J/m2] of springs at rest between all atoms: they feel neither translation nor rotation."""
    count = len(positions)
    total = np.zeros((count, 3, count, 3))
    for i in range(count):
        for j in range(i):
            bond = positions[i] - positions[j]
            length = np.linalg.norm(bond)
            stiffness = 500 * np.exp(-length / angstrom) * (generator.uniform(0.5, 2) if generator else 1)
            block = stiffness * np.outer(bond, bond) / length**2
            for first, second, sign in ((i, i, 1), (j, j, 1), (i, j, -1), (j, i, -1)):
                total[first, :, second] += sign * block
    return total.reshape(3 * count, 3 * count)


def bending_too(positions: FloatArray) -> FloatArray:
    """Springs and a linear bend of three atoms along z, which springs leave free."""
    first, second = 1 / np.diff(positions[:, 2])
    constants = springs(positions)
    for axis in (0, 1):
        bend = np.zeros((3, 3))
        bend[:, axis] = first, -first - second, second
        constants += 3e-19 * np.outer(bend.ravel(), bend.ravel())
    return constants


def modes_of(constants: FloatArray, masses: FloatArray, count: int) -> tuple[FloatArray, FloatArray]:
    """Cartesian displacements and frequencies [Hz] by diagonalising all 3N coordinates."""
    roots = np.repeat(np.sqrt(masses), 3)
    values, vectors = np.linalg.eigh(constants / np.outer(roots, roots))
    displacements = (vectors / roots[:, np.newaxis]).T[-count:].reshape(count, -1, 3)
    lengths = np.linalg.norm(displacements, axis=(1, 2), keepdims=True)
    return displacements / lengths, np.sqrt(values[-count:]) / (2 * np.pi)


def redlich_product(masses: FloatArray, heavier: FloatArray, positions: FloatArray, shape: str) -> float:
    """O. Redlich, Z. phys. Chem. B 28 (1935) 371: product of the frequency ratios, heavy to light."""
    inertia, heavier_inertia = (moments_of(m, positions, shape) for m in (masses, heavier))
    rotation = (heavier_inertia / inertia) ** (1 if shape == "linear" else 0.5)
    return float((masses / heavier).prod() ** 1.5 * (heavier.sum() / masses.sum()) ** 1.5 * rotation.prod())


@settings(deadline=None, max_examples=30)
@given(st.sampled_from(["H2O", "NH3", "CH4", "CH3OH", "H2O2"]), st.integers(0, 2**32 - 1))
def test_any_substitution_obeys_the_product_rule(name: str, seed: int) -> None:
    generator = np.random.default_rng(seed)
    positions = molecule(name).positions * angstrom
    masses = atomic_masses(tuple(molecule(name).symbols))
    heavier = masses * generator.uniform(1.0, 3.0, size=len(masses))
    light, constants = masses, springs(positions, generator)
    displacements, frequencies = modes_of(constants, light, 3 * len(masses) - 6)

    rebuilt = force_constants_from_modes(displacements, frequencies, light, positions, "nonlinear")
    heavy = frequencies_for_masses(rebuilt, heavier, positions, "nonlinear")

    assert rebuilt == pytest.approx(constants, abs=1e-9 * np.abs(constants).max())
    product = redlich_product(masses, heavier, positions, "nonlinear")
    assert np.prod(heavy / frequencies) == pytest.approx(product, rel=1e-8)  # rounding, soft modes amplify it


def test_a_linear_molecule_obeys_the_product_rule() -> None:
    positions = np.array([[0, 0, 0], [0, 0, 1.06], [0, 0, 2.22]]) * angstrom  # HCN
    atoms = ("H", "C", "N")
    masses, heavier = atomic_masses(atoms), atomic_masses(atoms, ((1, "D"), (2, "13C")))
    constants = bending_too(positions)

    light, heavy = (frequencies_for_masses(constants, m, positions, "linear") for m in (masses, heavier))

    assert len(light) == 4
    assert light.min() > 0
    product = redlich_product(masses, heavier, positions, "linear")
    assert np.prod(heavy / light) == pytest.approx(product, rel=1e-9)  # rounding alone


def test_the_breathing_mode_of_methane_slows_by_the_root_of_the_mass() -> None:
    """Only the hydrogens move in it: G. Herzberg, Infrared and Raman Spectra, 1945, ch. II (from memory)."""
    positions = molecule("CH4").positions * angstrom
    atoms = ("C", "H", "H", "H", "H")
    light_m, heavy_m = atomic_masses(atoms), atomic_masses(atoms, tuple((i, "D") for i in range(2, 6)))
    constants = springs(positions)
    breathing = positions.ravel() / np.linalg.norm(positions)
    stiffness = breathing @ constants @ breathing

    light, heavy = (frequencies_for_masses(constants, m, positions, "nonlinear") for m in (light_m, heavy_m))

    for masses, frequencies in ((light_m, light), (heavy_m, heavy)):
        expected = np.sqrt(stiffness / masses[1]) / (2 * np.pi)
        assert np.abs(frequencies / expected - 1).min() < 1e-4  # the geometry's last digits leave the carbon moving


def test_ase_gives_the_same_vibrations_for_new_masses() -> None:
    atoms: Atoms = molecule("CH3OH")
    positions = atoms.positions * angstrom
    masses = atomic_masses(tuple(atoms.symbols), ((2, "18O"), (3, "D")))
    constants = springs(positions)
    atoms.set_masses(masses / atomic_mass)
    size = len(atoms)
    hessian = (constants * angstrom**2 / e).reshape(size, 3, size, 3)

    ours = frequencies_for_masses(constants, masses, positions, "nonlinear") / PER_CM

    theirs = np.sort(VibrationsData(atoms, hessian).get_frequencies().real)[-len(ours) :]
    assert ours == pytest.approx(theirs, rel=1e-6)  # ASE carries CODATA 2014 constants


def test_an_imaginary_mode_stays_negative() -> None:
    positions = molecule("H2O").positions * angstrom
    masses = atomic_masses(("O", "H", "H"))
    displacements, frequencies = modes_of(springs(positions), masses, 3)
    frequencies[0] *= -1

    constants = force_constants_from_modes(displacements, frequencies, masses, positions, "nonlinear")

    again = frequencies_for_masses(constants, masses, positions, "nonlinear")
    assert again == pytest.approx(np.sort(frequencies), rel=1e-9)


def test_displacements_that_are_weighted_already_are_refused() -> None:
    positions = molecule("H2O").positions * angstrom
    masses = atomic_masses(("O", "H", "H"))
    displacements, frequencies = modes_of(springs(positions), masses, 3)
    weighted = displacements * np.sqrt(masses / atomic_mass)[:, np.newaxis]

    with pytest.raises(ValueError, match="miss being orthonormal by up to"):
        force_constants_from_modes(weighted, frequencies, masses, positions, "nonlinear")


def test_a_mode_without_displacements_is_refused() -> None:
    with pytest.raises(ValueError, match="a normal mode has no displacements"):
        force_constants_from_modes(np.zeros((1, 2, 3)), np.array([1e14]), np.ones(2), np.eye(2, 3), "linear")


@pytest.mark.parametrize("file", ["QChem/QChem4.2__water_ir.out.gz", "QChem/QChem4.2__dvb_ir.out.gz"])
def test_printed_modes_and_printed_hessian_agree_on_other_isotopes(many_outputs: Path, file: str) -> None:
    cclib = pytest.importorskip("cclib")
    data = cclib.io.ccread(str(many_outputs / file), loglevel=logging.CRITICAL)
    symbols = {1: "H", 6: "C", 8: "O"}
    atoms = tuple(symbols[int(number)] for number in data.atomnos)
    positions = data.atomcoords[-1] * angstrom
    light = np.array(data.atommasses) * atomic_mass
    heavy = atomic_masses(atoms, tuple((i, "D") for i, symbol in enumerate(atoms, start=1) if symbol == "H"))
    shape = shape_of(positions)

    rebuilt = force_constants_from_modes(
        np.array(data.vibdisps), np.array(data.vibfreqs) * PER_CM, light, positions, shape
    )
    from_modes = frequencies_for_masses(rebuilt, heavy, positions, shape) / PER_CM
    from_hessian = frequencies_for_masses(data.hessian * HESSIAN, heavy, positions, shape) / PER_CM

    assert np.sort(data.vibfreqs) == pytest.approx(
        frequencies_for_masses(data.hessian * HESSIAN, light, positions, shape) / PER_CM, abs=0.1
    )
    # Displacements are printed with three digits, which leaves the modes mixed by an angle of about 1e-3.
    assert from_modes == pytest.approx(from_hessian, rel=2e-3, abs=0.5)
