"""Calculations that do not fit together, or were not brought to their end, are found; sound ones are left alone."""

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from ase.build import molecule
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import angstrom, atomic_mass, c, centi
from scipy.spatial.transform import Rotation

from rateloom.audit.calculation import calculation_remarks
from rateloom.audit.limits import Limits
from rateloom.calculation.record import Calculation, Level
from rateloom.molecule import atomic_masses, moments_of, rotational_constants, shape_of

LIMITS = Limits()


def calculation(name: str, **changes: Any) -> Calculation:
    atoms = molecule(name)
    record = Calculation(
        program="test",
        program_version="1",
        level=Level("B3LYP", "6-31G*"),
        charge=0,
        multiplicity=1,
        atoms=tuple(atoms.symbols),
        geometry_angstrom=atoms.positions,
        energies_hartree={"DFT": -76.4},
        energy_kind="DFT",
        frequencies_per_cm=np.array([500.0, 1000.0, 3000.0]),
        finished=True,
    )
    return replace(record, **changes)


def codes(
    frequencies: Calculation | None,
    energy: Calculation | None = None,
    limits: Limits = LIMITS,
    *,
    is_saddle: bool = False,
) -> list[str]:
    return [remark.code for remark in calculation_remarks(frequencies, energy, limits, is_saddle=is_saddle)]


def constants(record: Calculation, masses: Any = None) -> Any:
    positions = record.geometry_angstrom * angstrom
    masses = atomic_masses(record.atoms) if masses is None else masses * atomic_mass
    return rotational_constants(moments_of(masses, positions, shape_of(positions))) / (c / centi)


METHANOL = calculation("CH3OH")


def test_a_sound_pair_has_no_remarks() -> None:
    record = replace(
        METHANOL,
        optimised_geometry_angstrom=METHANOL.geometry_angstrom + 1e-4,
        largest_gradient=4.4e-4,
        rotational_constants_per_cm=constants(METHANOL),
        spin_squared=0.0,
    )

    assert codes(record, METHANOL) == []
    assert codes(None, METHANOL) == []
    assert codes(record) == []


@settings(max_examples=30, deadline=None)
@given(st.integers(0, 2**32 - 1))
def test_the_energy_may_be_of_any_orientation_and_order(seed: int) -> None:
    random = np.random.default_rng(seed)
    order = random.permutation(len(METHANOL.atoms))
    turned = Rotation.random(rng=random).apply(METHANOL.geometry_angstrom)[order] + random.normal(size=3)
    energy = replace(METHANOL, atoms=tuple(METHANOL.atoms[i] for i in order), geometry_angstrom=turned)

    assert codes(METHANOL, energy) == []


def test_an_energy_at_another_geometry_is_an_error() -> None:
    energy = replace(METHANOL, geometry_angstrom=1.02 * METHANOL.geometry_angstrom)

    (remark,) = calculation_remarks(METHANOL, energy, LIMITS, is_saddle=False)

    assert remark.code == "geometries-differ"
    # The longest distance of the molecule grows by 2 %.
    longest = np.linalg.norm(METHANOL.geometry_angstrom[:, None] - METHANOL.geometry_angstrom, axis=2).max()
    assert float(remark.value.split()[0]) == pytest.approx(0.02 * longest, abs=5e-4)  # three digits are printed
    assert remark.limit == "0.01 angstrom"


def test_the_limit_of_the_job_file_counts() -> None:
    energy = replace(METHANOL, geometry_angstrom=1.02 * METHANOL.geometry_angstrom)

    assert codes(METHANOL, energy, Limits(geometry_difference_angstrom=0.1)) == []


def test_an_isomer_in_the_energy_file_is_another_molecule() -> None:
    assert codes(calculation("CH3CH2OH"), calculation("CH3OCH3")) == ["connectivity-differs"]
    assert codes(calculation("CH3CH2OH"), calculation("CH3OCH3"), is_saddle=True) == ["geometries-differ"]


def test_other_atoms_are_left_to_the_assembly() -> None:
    assert codes(METHANOL, calculation("H2O")) == []


def test_frequencies_must_be_of_the_optimised_geometry() -> None:
    record = replace(METHANOL, optimised_geometry_angstrom=1.02 * METHANOL.geometry_angstrom)

    assert codes(record) == ["frequencies-at-another-geometry"]


@pytest.mark.parametrize(("gradient", "expected"), [(4.5e-4, []), (2e-3, ["residual-gradient"])])
def test_a_gradient_beyond_what_optimisers_leave_is_found(gradient: float, expected: list[str]) -> None:
    assert codes(replace(METHANOL, largest_gradient=gradient)) == expected


@pytest.mark.parametrize("name", ["CH3OH", "CO2", "N2", "C6H6", "CH3Cl"])
def test_rotational_constants_of_any_usual_masses_agree(name: str) -> None:
    record = calculation(name)
    natural = molecule(name).get_masses()

    for masses in (None, natural):
        assert codes(replace(record, rotational_constants_per_cm=constants(record, masses))) == []


def test_rotational_constants_of_printed_isotopes_agree() -> None:
    record = calculation("CH4")
    masses = np.array([12.0, 2.0141, 2.0141, 2.0141, 2.0141])

    printed = replace(record, rotational_constants_per_cm=constants(record, masses))

    assert codes(printed) == ["rotational-constants-differ"]
    assert codes(replace(printed, masses_u=masses)) == []


def test_a_linear_molecule_may_print_its_axis() -> None:
    record = calculation("CO2")
    (only,) = constants(record)

    for printed in ([only], [only, only], [1e9, only, only]):
        assert codes(replace(record, rotational_constants_per_cm=np.array(printed))) == []


def test_rotational_constants_of_another_step_are_found() -> None:
    assert codes(replace(METHANOL, rotational_constants_per_cm=1.01 * constants(METHANOL))) == [
        "rotational-constants-differ"
    ]


@pytest.mark.parametrize(
    ("multiplicity", "spin_squared", "expected"),
    [
        (2, 0.76, []),
        (2, 0.85, ["spin-contamination"]),  # NNH from unrestricted Hartree-Fock
        (3, 2.15, []),
        (3, 2.3, ["spin-contamination"]),
        (1, 0.0, []),
        (1, 0.9, ["spin-contamination"]),  # a broken-symmetry singlet
        (4, 0.75, ["spin-contamination"]),  # a doublet by its wave function
    ],
)
def test_spin_contamination(multiplicity: int, spin_squared: float, expected: list[str]) -> None:
    record = replace(METHANOL, multiplicity=multiplicity, spin_squared=spin_squared)

    assert codes(record) == expected
    assert codes(None, record) == expected


@pytest.mark.parametrize(
    ("frequencies", "is_saddle", "expected"),
    [
        ([-40.0, 500.0], False, ["small-imaginary-mode"]),
        ([-140.0, 500.0], False, ["imaginary-mode-in-minimum"]),
        ([-140.0, -40.0], False, ["imaginary-mode-in-minimum"]),
        ([-1500.0, 500.0], True, []),
        ([-1500.0, -40.0], True, ["small-imaginary-mode"]),
        ([-1500.0, -140.0], True, ["second-imaginary-mode"]),
        ([-40.0, 500.0], True, []),  # the reaction coordinate itself is judged with its motion
        ([300.0, 500.0], True, []),  # its absence is remarked on where the saddle is assembled
    ],
)
def test_surplus_imaginary_modes(frequencies: list[float], is_saddle: bool, expected: list[str]) -> None:
    assert codes(replace(METHANOL, frequencies_per_cm=np.array(frequencies)), is_saddle=is_saddle) == expected


def test_a_small_imaginary_mode_says_how_it_is_treated() -> None:
    record = replace(METHANOL, frequencies_per_cm=np.array([-40.0, 500.0]))

    (remark,) = calculation_remarks(record, None, LIMITS, is_saddle=False)

    assert "counts as a real vibration of the same magnitude" in remark.message
    assert (remark.value, remark.limit) == ("40.0i cm-1", "100 cm-1")


def test_a_record_without_a_geometry_raises_nothing() -> None:
    empty = replace(METHANOL, geometry_angstrom=np.zeros((0, 3)), rotational_constants_per_cm=np.array([1.0]))

    assert codes(empty, empty) == []
