"""Calculations and the job's choices made into species: numbers, remarks and facts."""

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from ase.build import molecule
from scipy.constants import angstrom, atomic_mass, c, centi, h, physical_constants

from rateloom.calculation.record import Calculation, Level
from rateloom.job.model import Entity, FrequencyScale, Place
from rateloom.statmech import Assembly, Choices, assemble, choices_of

PER_CM = c / centi
HARTREE = physical_constants["Hartree energy"][0]


def calculation(name: str, frequencies: list[float] | None = None, **changes: Any) -> Calculation:
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
        frequencies_per_cm=None if frequencies is None else np.array(frequencies),
        finished=True,
    )
    return replace(record, **changes)


WATER = calculation("H2O", [1650.0, 3750.0, 3860.0])
COUPLED = calculation(
    "H2O",
    level=Level("CCSD(T)", "cc-pVTZ"),
    energies_hartree={"SCF": -76.05, "CCSD(T)": -76.33},
    energy_kind="CCSD(T)",
)
OXYGEN = calculation("O", multiplicity=3, energies_hartree={"CCSD(T)": -75.0}, energy_kind="CCSD(T)")


def hydrogen_exchange(bend: float = 0.0, first_bend: float = 900.0) -> Calculation:
    """A linear saddle of three hydrogen atoms, one imaginary mode and three real ones."""
    positions = np.array([[-0.93, 0, 0], [0, bend, 0], [0.93, 0, 0]])
    record = calculation("H2", multiplicity=2, energies_hartree={"DFT": -1.65})
    frequencies = np.array([-1000.0, first_bend, 900.0, 2050.0])
    return replace(record, atoms=("H", "H", "H"), geometry_angstrom=positions, frequencies_per_cm=frequencies)


def codes(assembly: Assembly) -> list[str]:
    return [remark.code for remark in assembly.remarks]


def minimum(record: Calculation | None, energy: Calculation | None = None, **choices: Any) -> Assembly:
    return assemble(record, energy, Choices(**choices), is_saddle=False)


def saddle(record: Calculation, **choices: Any) -> Assembly:
    return assemble(record, None, Choices(**choices), is_saddle=True)


def test_a_molecule_comes_out_in_si_units() -> None:
    species = minimum(WATER).species

    assert species is not None
    assert species.composition == (("H", 2), ("O", 1))
    assert species.shape == "nonlinear"
    assert (species.symmetry_number, species.optical_isomers) == (2, 1)
    assert species.mass / atomic_mass == pytest.approx(18.0105647, abs=1e-6)  # 2 x 1.00782503 + 15.99491462
    assert species.frequencies == pytest.approx(np.array([1650, 3750, 3860]) * PER_CM)
    assert species.zero_point_energy == pytest.approx(h * (1650 + 3750 + 3860) / 2 * PER_CM)
    assert species.electronic_energy == pytest.approx(-76.4 * HARTREE)
    assert species.imaginary_frequency is None
    assert (species.degeneracies.tolist(), species.level_energies.tolist()) == ([1.0], [0.0])
    assert species.moments[0] + species.moments[1] == pytest.approx(species.moments[2])  # planar


def test_the_two_scale_factors_stay_apart() -> None:
    species = minimum(WATER, frequency_scale=FrequencyScale(zero_point=0.98, modes=0.96)).species

    assert species is not None
    assert species.frequencies[0] == pytest.approx(0.96 * 1650 * PER_CM)
    assert species.zero_point_energy == pytest.approx(0.98 * h * 4630 * PER_CM)


def test_the_energy_file_gives_the_energy_alone() -> None:
    assembly = minimum(WATER, COUPLED)

    assert assembly.species is not None
    assert assembly.species.electronic_energy == pytest.approx(-76.33 * HARTREE)
    assert assembly.species.frequencies[0] == pytest.approx(1650 * PER_CM)
    assert assembly.facts is not None
    assert (assembly.facts.energy_kind, assembly.facts.energy_source) == ("CCSD(T)", "energy file")
    assert assembly.facts.geometry_level == "B3LYP/6-31G*"
    assert assembly.facts.energy_level == "CCSD(T)/cc-pVTZ"


def test_an_atom_needs_an_energy_alone() -> None:
    species = minimum(None, OXYGEN).species

    assert species is not None
    assert species.shape == "atom"
    assert len(species.moments) == len(species.frequencies) == 0
    assert species.degeneracies.tolist() == [5, 3, 1]
    assert species.ground_energy == pytest.approx(-75 * HARTREE - 77.974667 * h * PER_CM)  # mean of the 3P levels


def test_a_linear_saddle_keeps_its_bends() -> None:
    species = saddle(hydrogen_exchange()).species

    assert species is not None
    assert species.shape == "linear"
    assert species.symmetry_number == 2
    assert species.imaginary_frequency == pytest.approx(1000 * PER_CM)
    assert species.frequencies / PER_CM == pytest.approx([900, 900, 2050])
    assert species.zero_point_energy == pytest.approx(h * 3850 / 2 * PER_CM)


def test_the_imaginary_frequency_is_scaled_like_the_modes() -> None:
    species = saddle(hydrogen_exchange(), frequency_scale=FrequencyScale(zero_point=0.98, modes=0.9)).species

    assert species is not None
    assert species.imaginary_frequency == pytest.approx(900 * PER_CM)


def test_a_second_imaginary_mode_counts_as_real() -> None:
    assembly = saddle(hydrogen_exchange(first_bend=-150.0))

    assert codes(assembly) == []  # the audit has the threshold that tells noise from an error
    assert assembly.species is not None
    assert assembly.species.imaginary_frequency == pytest.approx(1000 * PER_CM)
    assert assembly.species.frequencies / PER_CM == pytest.approx([150, 900, 2050])


def test_an_imaginary_mode_of_a_minimum_counts_as_real() -> None:
    assembly = minimum(replace(WATER, frequencies_per_cm=np.array([-30.0, 3750, 3860])))

    assert codes(assembly) == []
    assert assembly.species is not None
    assert assembly.species.frequencies / PER_CM == pytest.approx([30, 3750, 3860])
    assert assembly.species.imaginary_frequency is None


def test_no_saddle_without_an_imaginary_mode() -> None:
    assembly = saddle(WATER)

    assert codes(assembly) == ["no-imaginary-mode"]
    assert "the lowest mode has 1650.0 cm-1" in assembly.remarks[0].message
    assert assembly.species is None


@pytest.mark.parametrize(
    ("record", "code"),
    [
        pytest.param(replace(WATER, frequencies_per_cm=None), "no-frequencies", id="none"),
        pytest.param(replace(WATER, frequencies_per_cm=np.array([1650.0, 3750])), "wrong-number-of-modes", id="few"),
        pytest.param(replace(WATER, frequencies_per_cm=np.array([0, 1.0, 2])), "wrong-number-of-modes", id="zero"),
        pytest.param(replace(WATER, frequencies_per_cm=np.array([np.nan, 1, 2])), "wrong-number-of-modes", id="nan"),
        pytest.param(hydrogen_exchange(bend=0.3), "wrong-number-of-modes", id="bent"),
        pytest.param(replace(WATER, energies_hartree={}, energy_kind=""), "no-energy", id="energy"),
        pytest.param(replace(WATER, energies_hartree={"DFT": np.nan}), "no-energy", id="energy-nan"),
        pytest.param(replace(WATER, geometry_angstrom=np.zeros((3, 3))), "calculation-not-readable", id="coincident"),
        pytest.param(
            replace(WATER, geometry_angstrom=np.full((3, 3), np.nan)), "calculation-not-readable", id="geometry-nan"
        ),
        pytest.param(replace(WATER, atoms=("O", "H", "X")), "calculation-not-readable", id="dummy-atom"),
    ],
)
def test_what_makes_no_species_says_why(record: Calculation, code: str) -> None:
    assembly = minimum(record)

    assert assembly.species is None
    assert code in codes(assembly)


def test_several_defects_are_told_at_once() -> None:
    record = replace(WATER, frequencies_per_cm=None, energies_hartree={}, finished=False, converged=False)

    assert codes(minimum(record)) == ["no-energy", "no-frequencies"]


def test_an_energy_of_other_atoms_makes_no_species() -> None:
    assembly = minimum(WATER, calculation("NH3"))

    assert "geometries-differ" in codes(assembly)
    assert assembly.remarks[0].message == "The energy file is of H3N, the frequency file of H2O."
    assert assembly.species is None


def test_the_job_file_wins_over_the_detected_symmetry() -> None:
    assembly = minimum(WATER, symmetry_number=1, optical_isomers=2)

    assert codes(assembly) == ["symmetry-number-differs", "optical-isomers-differ"]
    assert [(remark.value, remark.limit) for remark in assembly.remarks] == [("1", "2"), ("2", "1")]
    assert all("that consume one such molecule by 0.5" in remark.message for remark in assembly.remarks)
    assert assembly.species is not None
    assert (assembly.species.symmetry_number, assembly.species.optical_isomers) == (1, 2)


def test_the_factor_of_a_saddle_goes_the_other_way() -> None:
    assembly = saddle(hydrogen_exchange(), symmetry_number=1, optical_isomers=2)

    assert all("over this saddle by 2." in remark.message for remark in assembly.remarks)


def test_agreeing_with_the_detected_symmetry_is_no_remark() -> None:
    assert codes(minimum(WATER, symmetry_number=2, optical_isomers=1)) == []


def test_a_point_group_broken_by_noise_is_told() -> None:
    noisy = WATER.geometry_angstrom + np.array([[0, 0, 0], [0, 0.02, 0], [0, 0, 0]])

    assembly = minimum(replace(WATER, geometry_angstrom=noisy))

    assert codes(assembly) == ["point-group-broken-by-noise"]
    assert assembly.species is not None
    assert assembly.species.symmetry_number == 2
    assert codes(minimum(replace(WATER, geometry_angstrom=noisy), symmetry_number=2)) == []


@pytest.mark.parametrize(
    ("record", "choices", "value", "limit"),
    [
        (WATER, {"multiplicity": 2}, "multiplicity 2", "10 electrons"),
        (replace(WATER, charge=1), {}, "multiplicity 1", "9 electrons"),
        (WATER, {"charge": 1, "multiplicity": 2}, "0", "1"),
        (calculation("H2", [4400.0], charge=1, multiplicity=4), {}, "multiplicity 4", "1 electrons"),
    ],
)
def test_charge_and_spin_must_fit_the_electrons(
    record: Calculation, choices: dict[str, int], value: str, limit: str
) -> None:
    remarks = [remark for remark in minimum(record, **choices).remarks if remark.code == "electron-count-differs"]

    assert (value, limit) in [(remark.value, remark.limit) for remark in remarks]


def test_the_charge_of_the_job_file_is_used() -> None:
    species = minimum(WATER, charge=1, multiplicity=2).species

    assert species is not None
    assert (species.charge, species.multiplicity) == (1, 2)


def test_an_energy_of_another_spin_is_told() -> None:
    assembly = minimum(WATER, replace(COUPLED, multiplicity=3))

    assert codes(assembly) == ["electron-count-differs"]
    assert (assembly.remarks[0].value, assembly.remarks[0].limit) == ("3", "1")


def test_equal_settings_of_two_entries_are_equal() -> None:
    def entity(name: str, line: int) -> Entity:
        return Entity(name=name, kind="species", place=Place("job.yaml", line), frequencies=f"/{name}", charge=1)

    assert choices_of(entity("A", 1)) == choices_of(entity("B", 2)) == Choices(charge=1)


def with_modes(record: Calculation) -> Calculation:
    """Give a water record the normal modes of a valence force field."""
    positions = record.geometry_angstrom * angstrom
    constants = np.zeros((9, 9))
    for hydrogen in (1, 2):
        bond = (positions[hydrogen] - positions[0]) / np.linalg.norm(positions[hydrogen] - positions[0])
        stretch = np.zeros((3, 3))
        stretch[hydrogen], stretch[0] = bond, -bond
        constants += 800 * np.outer(stretch.ravel(), stretch.ravel())
    between = (positions[2] - positions[1]) / np.linalg.norm(positions[2] - positions[1])
    bend = np.zeros((3, 3))
    bend[2], bend[1] = between, -between
    constants += 80 * np.outer(bend.ravel(), bend.ravel())
    masses = np.array([15.9949146, 1.00782503, 1.00782503])
    roots = np.repeat(np.sqrt(masses * atomic_mass), 3)
    values, vectors = np.linalg.eigh(constants / np.outer(roots, roots))
    displacements = (vectors / roots[:, np.newaxis]).T[-3:]
    displacements /= np.linalg.norm(displacements, axis=1, keepdims=True)
    bohr = physical_constants["Bohr radius"][0]
    return replace(
        record,
        masses_u=masses,
        frequencies_per_cm=np.sqrt(values[-3:]) / (2 * np.pi) / PER_CM,
        displacements=displacements.reshape(3, 3, 3).round(5),
        hessian=constants * bohr**2 / HARTREE,
    )


MODES = with_modes(WATER)
HEAVY_WATER = ((2, "D"), (3, "D"))


def test_isotopes_change_masses_moments_frequencies_and_symmetry() -> None:
    light, heavy = minimum(MODES).species, minimum(MODES, isotopes=((2, "D"),)).species

    assert light is not None
    assert heavy is not None
    assert heavy.composition == light.composition
    assert (light.symmetry_number, heavy.symmetry_number) == (2, 1)
    # The product rule of Teller and Redlich for one atom exchanged; masses of the library and five printed digits.
    masses = (2.01410178 / 1.00782503) ** 1.5 * (light.mass / heavy.mass) ** 1.5
    product = masses * np.sqrt(np.prod(light.moments) / np.prod(heavy.moments))
    assert np.prod(light.frequencies / heavy.frequencies) == pytest.approx(product, rel=1e-6)
    assert heavy.zero_point_energy == pytest.approx(h * heavy.frequencies.sum() / 2)


def test_modes_do_as_well_as_the_hessian() -> None:
    by_hessian = minimum(MODES, isotopes=HEAVY_WATER)
    by_modes = minimum(replace(MODES, hessian=None), isotopes=HEAVY_WATER)

    assert by_hessian.facts is not None
    assert by_modes.facts is not None
    assert by_hessian.facts.frequencies_source == "recalculated for the isotopes from the Hessian"
    assert by_modes.facts.frequencies_source == "recalculated for the isotopes from the normal modes"
    assert by_hessian.species is not None
    assert by_modes.species is not None
    assert by_modes.species.frequencies == pytest.approx(by_hessian.species.frequencies, rel=1e-4)  # digits printed


def test_a_hessian_that_misses_the_printed_frequencies_is_not_trusted() -> None:
    assert MODES.hessian is not None

    assembly = minimum(replace(MODES, hessian=MODES.hessian * 1.2), isotopes=HEAVY_WATER)

    assert assembly.facts is not None
    assert assembly.facts.frequencies_source == "recalculated for the isotopes from the normal modes"


@pytest.mark.parametrize(
    ("spoil", "reason"),
    [
        (lambda record: replace(record, hessian=None, displacements=None), "the output prints neither"),
        (lambda record: replace(record, hessian=record.hessian * 2, displacements=None), "the Hessian miss"),
        (lambda record: replace(record, hessian=None, displacements=np.ones((3, 3, 3))), "miss being orthonormal"),
    ],
)
def test_isotopes_need_modes_or_a_hessian(spoil: Callable[[Calculation], Calculation], reason: str) -> None:
    assembly = minimum(spoil(MODES), isotopes=HEAVY_WATER)

    assert codes(assembly) == ["isotopes-need-normal-modes"]
    assert reason in assembly.remarks[0].message
    assert assembly.species is None


def test_a_bend_lost_by_the_program_comes_back_from_the_hessian() -> None:
    """A linear saddle printed as a bent one: three vibrations and a zero instead of four."""
    bohr = physical_constants["Bohr radius"][0]
    stretches = np.array([[1.0, -1, 0], [0, 1, -1]])
    along = stretches.T @ np.array([[50.0, 90], [90, 50]]) @ stretches  # a strong coupling makes a saddle
    bend = 40 * np.outer([1.0, -2, 1], [1.0, -2, 1])
    constants = np.zeros((3, 3, 3, 3))
    for axis, block in enumerate((along, bend, bend)):
        constants[:, axis, :, axis] = block
    whole = hydrogen_exchange()
    mass = 1.00782503 * atomic_mass
    values = np.linalg.eigvalsh(constants.reshape(9, 9) / mass)
    values = values[np.abs(values) > 1e-6 * values.max()]
    expected = np.sign(values) * np.sqrt(np.abs(values)) / (2 * np.pi) / PER_CM
    record = replace(whole, hessian=constants.reshape(9, 9) * bohr**2 / HARTREE)

    assembly = saddle(replace(record, frequencies_per_cm=np.array([expected[0], 0.0, *expected[2:]])))
    without = saddle(replace(record, frequencies_per_cm=np.array([-5000.0, 0.0, *expected[2:]])))

    assert codes(assembly) == ["modes-recalculated"]
    assert assembly.remarks[0].value == f"{expected[1]:.1f} cm-1"
    assert assembly.species is not None
    assert assembly.species.frequencies / PER_CM == pytest.approx(expected[1:], rel=1e-6)  # digits of the mass
    assert assembly.species.imaginary_frequency == pytest.approx(-expected[0] * PER_CM, rel=1e-6)
    assert codes(without) == ["wrong-number-of-modes"]  # the Hessian does not give the printed ones back


def test_isotopes_the_program_ran_with_need_no_new_frequencies() -> None:
    record = replace(WATER, masses_u=np.array([15.9949, 2.0141, 2.0141]))

    assembly = minimum(record)
    again = minimum(record, isotopes=HEAVY_WATER)

    assert codes(assembly) == codes(again) == ["isotopes-from-output"]
    assert assembly.species is not None
    assert assembly.species.frequencies[0] == pytest.approx(1650 * PER_CM)
    assert assembly.species.mass / atomic_mass == pytest.approx(20.0231182, abs=1e-6)  # D2O, mass evaluation
    assert assembly.facts is not None
    assert assembly.facts.labels == ("O", "D", "D")


def test_a_deuterated_output_can_be_made_light_again() -> None:
    heavy = minimum(MODES, isotopes=HEAVY_WATER).species
    assert heavy is not None
    record = replace(
        MODES,
        masses_u=np.array([15.9949146, 2.01410178, 2.01410178]),
        frequencies_per_cm=heavy.frequencies / PER_CM,
        displacements=None,
    )

    light = minimum(record, isotopes=((2, "1H"), (3, "1H"))).species

    assert light is not None
    assert MODES.frequencies_per_cm is not None
    assert light.frequencies / PER_CM == pytest.approx(MODES.frequencies_per_cm, rel=1e-6)  # digits of the masses


def test_an_isotope_of_another_element_is_told() -> None:
    assembly = minimum(WATER, isotopes=((1, "D"),))

    assert codes(assembly) == ["isotope-not-known"]
    assert "D is no isotope of O" in assembly.remarks[0].message


def test_a_deuterium_atom_is_an_atom() -> None:
    species = minimum(None, calculation("H", multiplicity=2), isotopes=((1, "D"),)).species

    assert species is not None
    assert species.mass / atomic_mass == pytest.approx(2.0141018, abs=1e-6)
    assert species.degeneracies.tolist() == [2]


def test_nothing_at_all_is_a_fault_of_the_caller() -> None:
    with pytest.raises(ValueError, match="at least one calculation"):
        assemble(None, None, Choices(), is_saddle=False)
