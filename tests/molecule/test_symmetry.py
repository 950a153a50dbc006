"""Symmetry numbers, chirality and point groups against handbooks and an outside library."""

from pathlib import Path

import numpy as np
import pytest
import yaml
from ase import Atoms
from ase.build import molecule
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import angstrom
from scipy.spatial.transform import Rotation

from rateloom.molecule import Symmetry, symmetry_of

HANDBOOK = yaml.safe_load((Path(__file__).parents[1] / "reference" / "symmetry_numbers.yaml").read_text())["entries"]
NOISE = 5e-3  # angstrom per coordinate, the noise of a loosely converged geometry


def ring(count: int, radius: float, height: float = 0.0, turn: float = 0.0) -> np.ndarray:
    angles = 2 * np.pi * np.arange(count) / count + turn
    return np.column_stack([radius * np.cos(angles), radius * np.sin(angles), np.full(count, height)])


def corners(signs: list[tuple[int, int, int]], size: float) -> np.ndarray:
    return size * np.array(signs, dtype=float)


TETRAHEDRON = [(1, 1, 1), (1, -1, -1), (-1, 1, -1), (-1, -1, 1)]
OCTAHEDRON = [(1, 0, 0), (-1, 0, 0), (0, 1, 0), (0, -1, 0), (0, 0, 1), (0, 0, -1)]
CUBE = [(x, y, z) for x in (1, -1) for y in (1, -1) for z in (1, -1)]


def icosahedron(size: float) -> np.ndarray:
    golden = (1 + 5**0.5) / 2
    one = np.array([(0, y, golden * z) for y in (1, -1) for z in (1, -1)])
    return size * np.concatenate([one, np.roll(one, 1, axis=1), np.roll(one, 2, axis=1)])


def orbit(symbols: str, rotations: np.ndarray, *points: tuple[float, float, float]) -> Atoms:
    """Images of general points under a group of rotations: a molecule of just this symmetry."""
    positions = np.concatenate([rotations @ np.array(point) for point in points])
    return Atoms([symbols[index] for index in range(len(points)) for _ in rotations], positions)


def built(symbols: list[str], *parts: np.ndarray) -> Atoms:
    names = [symbol for symbol, part in zip(symbols, parts, strict=True) for _ in part]
    return Atoms(names, np.concatenate(parts))


CENTRE = np.zeros((1, 3))
# Point group, symmetry number and optical isomers follow from how each is built.
BUILT = {
    "SF6": (built(["S", "F"], CENTRE, corners(OCTAHEDRON, 1.56)), "Oh", 24, 1),
    "cubane": (built(["C", "H"], corners(CUBE, 0.78), corners(CUBE, 1.41)), "Oh", 24, 1),
    "P4": (built(["P"], corners(TETRAHEDRON, 0.78)), "Td", 12, 1),
    "B12H12": (built(["B", "H"], icosahedron(0.89), icosahedron(1.52)), "Ih", 60, 1),
    "ferrocene-staggered": (
        built(["Fe", "C", "C"], CENTRE, ring(5, 1.22, 1.65), ring(5, 1.22, -1.65, np.pi / 5)), "D5d", 10, 1,
    ),
    "ferrocene-eclipsed": (built(["Fe", "C", "C"], CENTRE, ring(5, 1.22, 1.65), ring(5, 1.22, -1.65)), "D5h", 10, 1),
    "S8": (built(["S", "S"], ring(4, 2.3, 0.5), ring(4, 2.3, -0.5, np.pi / 4)), "D4d", 8, 1),
    "PCl5": (
        built(["P", "Cl", "Cl"], CENTRE, ring(3, 2.02), np.array([[0, 0, 2.14], [0, 0, -2.14]])), "D3h", 6, 1,
    ),
    "XeF4": (built(["Xe", "F"], CENTRE, ring(4, 1.95)), "D4h", 8, 1),
    "BrF5": (built(["Br", "F", "F"], CENTRE, ring(4, 1.77, -0.1), np.array([[0, 0, 1.69]])), "C4v", 4, 1),
    "IF7": (built(["I", "F", "F"], CENTRE, ring(5, 1.86), np.array([[0, 0, 1.79], [0, 0, -1.79]])), "D5h", 10, 1),
    "boric-acid": (built(["B", "O", "H"], CENTRE, ring(3, 1.36), ring(3, 1.85, 0, 0.5)), "C3h", 3, 1),
    "propeller-C3": (built(["N", "C", "H"], CENTRE, ring(3, 1.4, 0.4), ring(3, 2.0, 0.9, 0.5)), "C3", 3, 2),
    "ethane-twisted": (
        built(["C", "C", "H", "H"], *(ring(*r) for r in ((1, 0, 0.8), (1, 0, -0.8), (3, 1, 1.2), (3, 1, -1.2, 0.6)))),
        "D3", 6, 2,
    ),
    "S4": (
        built(
            ["C", "F", "H"], CENTRE,
            np.array([[1.0, 0.9, 0.7], [-1.0, -0.9, 0.7], [0.9, -1.0, -0.7], [-0.9, 1.0, -0.7]]),
            np.array([[1.8, 0.3, 1.1], [-1.8, -0.3, 1.1], [0.3, -1.8, -1.1], [-0.3, 1.8, -1.1]]),
        ),
        "S4", 2, 1,
    ),
    "Ci": (
        built(["C", "F", "Cl", "H"], *(np.array([point, [-x for x in point]]) for point in
              ([0.7, 0.2, 0.1], [1.2, 1.1, -0.6], [1.4, -1.2, 0.9], [0.5, 0.9, 1.4]))),
        "Ci", 1, 1,
    ),
    "T": (orbit("CH", Rotation.create_group("T").as_matrix(), (0.8, 1.9, 2.6), (1.5, 2.4, 3.1)), "T", 12, 2),
    "O": (orbit("C", Rotation.create_group("O").as_matrix(), (1.0, 2.1, 3.3)), "O", 24, 2),
    "D2": (orbit("CH", Rotation.create_group("D2").as_matrix(), (0.6, 0.9, 1.3), (1.7, 0.8, 2.1)), "D2", 4, 2),
    "D7": (orbit("C", Rotation.create_group("D7").as_matrix(), (3.0, 0.4, 1.3)), "D7", 14, 2),
    "C5": (orbit("CH", Rotation.create_group("C5").as_matrix(), (2.0, 0.4, 0.3), (2.8, 0.9, 1.3)), "C5", 5, 2),
    "CHFClBr": (
        Atoms(["C", "H", "F", "Cl", "Br"],
              np.concatenate([CENTRE, corners(TETRAHEDRON, 1.0) * np.array([[0.63], [0.8], [1.02], [1.12]])])),
        "C1", 1, 2,
    ),
}  # fmt: skip
# Molecules of the G2 set that ASE carries, with the numbers of G. Herzberg, Infrared and Raman Spectra, 1945, p. 508,
# or of their point group.
KNOWN = {
    "H": ("Kh", 1, 1),
    "N2": ("D*h", 2, 1),
    "HCN": ("C*v", 1, 1),
    "CO2": ("D*h", 2, 1),
    "C2H2": ("D*h", 2, 1),
    "H2O": ("C2v", 2, 1),
    "NH3": ("C3v", 3, 1),
    "CH4": ("Td", 12, 1),
    "C2H6": ("D3d", 6, 1),
    "C2H4": ("D2h", 4, 1),
    "C6H6": ("D6h", 12, 1),
    "BF3": ("D3h", 6, 1),
    "CH3Cl": ("C3v", 3, 1),
    "H2CO": ("C2v", 2, 1),
    "H2O2": ("C2", 2, 2),
    "HOCl": ("Cs", 1, 1),
    "CH3OH": ("Cs", 1, 1),
    "C3H4_D2d": ("D2d", 4, 1),
    "trans-butane": ("C2h", 2, 1),
    "cyclobutane": ("D2d", 4, 1),
    "C3H6_D3h": ("D3h", 6, 1),
    "CF4": ("Td", 12, 1),
    "N2H4": ("C2", 2, 2),
}


def case(name: str) -> tuple[Atoms, str, int, int]:
    return BUILT[name] if name in BUILT else (molecule(name), *KNOWN[name])


def found(atoms: Atoms, noise: float = 0.0, seed: int = 0) -> Symmetry:
    positions = atoms.positions + np.random.default_rng(seed).normal(scale=noise or 1e-12, size=atoms.positions.shape)
    return symmetry_of(positions * angstrom, tuple(atoms.symbols))


@pytest.mark.parametrize("name", [*BUILT, *KNOWN])
@pytest.mark.parametrize("noise", [0.0, NOISE], ids=["exact", "noisy"])
def test_group_number_and_chirality_are_known(name: str, noise: float) -> None:
    atoms, group, number, isomers = case(name)

    symmetry = found(atoms, noise)

    assert (symmetry.point_group, symmetry.symmetry_number, symmetry.optical_isomers) == (group, number, isomers)
    assert symmetry.closed


@pytest.mark.parametrize("name", [name for name in [*BUILT, *KNOWN] if name not in ("H", "N2", "HCN", "CO2", "C2H2")])
def test_an_outside_library_finds_the_same_group(name: str) -> None:
    library = pytest.importorskip("pymsym")
    atoms = case(name)[0]

    symmetry = found(atoms)

    # Of the library the group alone is compared: its table of symmetry numbers has 12 for O and 4 for S4.
    group = library.get_point_group([int(z) for z in atoms.numbers], atoms.positions.tolist())
    assert symmetry.point_group == group


STAND_INS = {  # a molecule with the same framework in the G2 set, and the names its atoms get
    "HO2": ("HOCl", ("O", "H", "O")),
    "CH2O": ("H2CO", ("O", "C", "H", "H")),
    "CHF3": ("CF4", ("C", "H", "F", "F", "F")),
    "D2O": ("H2O", ("O", "D", "D")),
    "D2": ("H2", ("D", "D")),
    "HD": ("H2", ("H", "D")),
    "HBr": ("HCl", ("Br", "H")),
    "HI": ("HCl", ("I", "H")),
    "35ClO": ("ClO", ("Cl", "O")),
    "I": ("F", ("I",)),
}


@pytest.mark.parametrize("entry", [pytest.param(entry, id=entry["id"]) for entry in HANDBOOK])
def test_numbers_that_reproduce_published_entropies(entry: dict) -> None:
    species = entry["inputs"]["species"]
    name, labels = STAND_INS.get(species, (species, ()))
    atoms = molecule(name)

    symmetry = symmetry_of(atoms.positions * angstrom, labels or tuple(atoms.symbols))

    assert symmetry.symmetry_number == entry["value"]


@pytest.mark.parametrize(
    ("labels", "number", "isomers", "group"),
    [
        (("C", "H", "H", "H", "D"), 3, 1, "C3v"),
        (("C", "H", "H", "D", "D"), 2, 1, "C2v"),
        (("C", "H", "D", "D", "D"), 3, 1, "C3v"),
        (("C", "D", "D", "D", "D"), 12, 1, "Td"),
        (("C", "H", "D", "T", "F"), 1, 2, "C1"),
    ],
)
def test_isotopes_are_different_atoms(labels: tuple[str, ...], number: int, isomers: int, group: str) -> None:
    symmetry = symmetry_of(molecule("CH4").positions * angstrom, labels)

    assert (symmetry.symmetry_number, symmetry.optical_isomers, symmetry.point_group) == (number, isomers, group)


@pytest.mark.parametrize("seed", range(3))
def test_sixty_atoms_with_noise_keep_all_sixty_rotations(seed: int) -> None:
    symmetry = found(molecule("C60"), NOISE, seed)

    assert (symmetry.symmetry_number, symmetry.point_group) == (60, "Ih")


@settings(deadline=None, max_examples=60)
@given(st.sampled_from([*BUILT, *KNOWN]), st.integers(0, 2**32 - 1))
def test_pose_order_and_noise_change_nothing(name: str, seed: int) -> None:
    atoms, group, number, isomers = case(name)
    generator = np.random.default_rng(seed)
    order = generator.permutation(len(atoms))
    rotation = Rotation.from_quat(generator.normal(size=4))
    noisy = atoms.positions + generator.normal(scale=NOISE, size=atoms.positions.shape)
    positions = (rotation.apply(noisy) + generator.normal(scale=10.0, size=3))[order]

    symmetry = symmetry_of(positions * angstrom, tuple(np.array(atoms.symbols)[order]))

    assert (symmetry.point_group, symmetry.symmetry_number, symmetry.optical_isomers) == (group, number, isomers)


@settings(deadline=None, max_examples=60)
@given(st.sampled_from(["CH4", "C2H6", "C6H6", "SF6", "S8", "NH3", "C2H4", "D2"]), st.integers(0, 2**32 - 1))
def test_any_noise_leaves_a_group(name: str, seed: int) -> None:
    """Lagrange: what is left of a point group divides its order, however the noise falls about the tolerance."""
    atoms, _, number, _ = case(name)
    generator = np.random.default_rng(seed)
    noise = generator.uniform(0.01, 0.05)

    symmetry = found(atoms, noise, seed)

    assert number % symmetry.symmetry_number == 0


def test_noise_is_told_from_symmetry() -> None:
    exact, noisy = found(molecule("CH4")), found(molecule("CH4"), NOISE)

    assert exact.strict_symmetry_number == 12
    assert exact.worst_deviation < 1e-4 * angstrom
    assert noisy.strict_symmetry_number < noisy.symmetry_number == 12
    assert 0.005 * angstrom < noisy.worst_deviation < 0.05 * angstrom


def test_a_real_distortion_is_no_noise() -> None:
    atoms = molecule("CH4")
    atoms.positions[1] *= 1.10  # one bond 0.11 angstrom longer

    assert found(atoms).point_group == "C3v"


def test_labels_must_be_as_many_as_atoms() -> None:
    with pytest.raises(ValueError, match="3 atoms have 2 labels"):
        symmetry_of(molecule("H2O").positions * angstrom, ("O", "H"))
