"""Partition functions and thermochemistry against published tables, ASE and each other."""

from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import yaml
from ase import Atoms, units
from ase.thermochemistry import IdealGasThermo
from scipy.constants import N_A, R, angstrom, bar, c, centi, eV, h, k, kilo, m_u, pi

from rateloom.calculation import read_calculation
from rateloom.statmech import Choices, Species, assemble, partition_functions, thermochemistry

PER_CM = c / centi  # Hz
ENTRIES = yaml.safe_load((Path(__file__).parents[1] / "reference" / "ideal_gas.yaml").read_text())["entries"]
SPECIES_ENTRIES = [entry for entry in ENTRIES if "reaction" not in entry["inputs"]]
REACTION_ENTRIES = [entry for entry in ENTRIES if "reaction" in entry["inputs"]]


def species_of(inputs: dict) -> Species:
    constants = np.array(inputs["rotational_constants_per_cm"])
    degeneracies, energies = np.array(inputs["electronic_levels_g_per_cm"]).T
    return Species(
        composition=((inputs["species"], 1),),
        charge=0,
        multiplicity=1,
        mass=inputs["molar_mass_g_per_mol"] / kilo / N_A,
        shape={0: "atom", 1: "linear", 3: "nonlinear"}[len(constants)],
        moments=np.sort(h / (8 * pi**2 * constants * PER_CM)),
        symmetry_number=inputs["symmetry_number"],
        optical_isomers=inputs["optical_isomers"],
        frequencies=np.array(inputs["frequencies_per_cm"]) * PER_CM,
        imaginary_frequency=None,
        zero_point_energy=0.0,
        electronic_energy=0.0,
        spin_orbit_lowering=0.0,
        degeneracies=degeneracies,
        level_energies=energies * h * PER_CM,
    )


SPECIES = {entry["inputs"]["species"]: species_of(entry["inputs"]) for entry in SPECIES_ENTRIES}


def computed(entry: dict) -> float:
    """The quantity of an entry, in its unit."""
    species, temperatures = species_of(entry["inputs"]), np.array([entry["temperature_K"]])
    functions = thermochemistry(species, temperatures, entry["inputs"]["pressure_bar"] * bar)
    kind = entry["id"].split("-")[-2]
    if kind == "Q":
        partition = partition_functions(species, temperatures)
        return float(np.exp(partition.log_total - partition.log_translation)[0])
    return float({"S": functions.entropy, "Cp": functions.heat_capacity, "H": functions.enthalpy / kilo}[kind][0])


def margin(tolerance: dict) -> dict[str, float]:
    return {"absolute": {"abs": tolerance["size"], "rel": 0.0}, "relative": {"rel": tolerance["size"]}}[
        tolerance["kind"]
    ]


@pytest.mark.parametrize("entry", [pytest.param(entry, id=entry["id"]) for entry in SPECIES_ENTRIES])
def test_published_tables_are_met(entry: dict) -> None:
    value = computed(entry)

    # the first tolerance is the model's (rigid rotor, harmonic oscillators), the second that of the arithmetic
    assert value == pytest.approx(entry["value"], **margin(entry["tolerance"]))
    assert value == pytest.approx(entry["model_value"], **margin(entry["model_tolerance"]))


@pytest.mark.parametrize("entry", [pytest.param(entry, id=entry["id"]) for entry in REACTION_ENTRIES])
def test_published_equilibrium_constants_are_met(entry: dict) -> None:
    temperature, inputs = np.array([entry["temperature_K"]]), entry["inputs"]
    left, right = inputs["reaction"].split(" = ")
    changes = [(-count, name) for count, name in molecules(left)] + list(molecules(right))
    change = sum(count * thermochemistry(SPECIES[name], temperature, bar).gibbs_energy[0] for count, name in changes)
    log10_K = -(inputs["reaction_enthalpy_0K_kJ_per_mol"] * kilo + change) / (R * temperature[0] * np.log(10))

    assert log10_K == pytest.approx(entry["value"], **margin(entry["tolerance"]))
    assert log10_K == pytest.approx(entry["model_value"], **margin(entry["model_tolerance"]))


def molecules(side: str) -> Iterator[tuple[int, str]]:
    """Number and name of each molecule on one side of an equation."""
    for term in side.split(" + "):
        *count, name = term.split()
        yield int(count[0]) if count else 1, name


TEMPERATURES = np.array([150.0, 298.15, 800.0, 2500.0])


@pytest.mark.parametrize("name", ["h2", "oh", "n2o", "h2o", "nh3", "ch4", "n2h2_trans", "ch3o"])
def test_ase_gives_the_same_thermochemistry(name: str, calculations: Path) -> None:
    assembly = assemble(read_calculation(calculations / f"{name}.out.gz"), None, Choices(), is_saddle=False)
    species, facts = assembly.species, assembly.facts
    assert species is not None
    assert facts is not None
    atoms = Atoms("H" * len(facts.masses), positions=facts.positions / angstrom, masses=facts.masses / m_u)
    gas = IdealGasThermo(
        vib_energies=species.frequencies * h / eV,
        geometry=species.shape,
        atoms=atoms,
        symmetrynumber=species.symmetry_number,
        spin=(species.multiplicity - 1) / 2,
        vib_selection="exact",
    )
    functions = thermochemistry(species, TEMPERATURES, bar)

    for i, temperature in enumerate(TEMPERATURES):
        # in units of ASE's own k, as its constants are of CODATA 2014; what is left of that is 1e-6 in logarithms
        entropy = gas.get_entropy(temperature, bar, verbose=False) / units.kB * R
        enthalpy = (gas.get_enthalpy(temperature, verbose=False) - gas.get_ZPE_correction()) / units.kB * R
        isomers = R * np.log(species.optical_isomers)  # ASE knows of none
        assert functions.entropy[i] - isomers == pytest.approx(entropy, abs=1e-4, rel=0)
        assert functions.enthalpy[i] == pytest.approx(enthalpy, rel=2e-6)


def test_heat_capacity_and_entropy_are_the_derivatives_of_enthalpy_and_gibbs_energy() -> None:
    temperature, step = 700.0, 0.5
    grid = temperature + step * np.array([-2.0, -1.0, 0.0, 1.0, 2.0])
    for species in SPECIES.values():
        functions = thermochemistry(species, grid, bar)

        # five-point formula: its own error is below 1e-9 of the value, rounding adds as much
        slopes = [
            np.dot([1.0, -8.0, 0.0, 8.0, -1.0], values) / (12 * step)
            for values in (functions.enthalpy, functions.gibbs_energy)
        ]
        assert slopes[0] == pytest.approx(functions.heat_capacity[2], rel=1e-7)
        assert -slopes[1] == pytest.approx(functions.entropy[2], rel=1e-7)


def test_mirror_images_add_their_entropy_of_mixing(thermal: Callable[[str], float]) -> None:
    one, two = (
        thermochemistry(replace(SPECIES["H2O"], optical_isomers=m), TEMPERATURES, bar).entropy for m in (1, 2)
    )

    np.testing.assert_allclose(two - one, thermal("J-R-ln2"), rtol=1e-9)


def test_entropy_falls_with_pressure_as_in_an_ideal_gas(thermal: Callable[[str], float]) -> None:
    at_bar, at_atm = (thermochemistry(SPECIES["CH4"], TEMPERATURES, p).entropy for p in (bar, 101325.0))

    np.testing.assert_allclose(at_bar - at_atm, thermal("J-entropy-atm-bar"), rtol=1e-7)


def test_hot_molecule_reaches_equipartition() -> None:
    # 2.5 R and half an R a rotation, one R a vibration; the next term is -(h nu/k T)^2/12, below 1e-3 here
    water = thermochemistry(replace(SPECIES["H2O"]), np.array([1.0e5]), bar)

    assert water.heat_capacity[0] == pytest.approx((2.5 + 1.5 + 3.0) * R, rel=1e-3)


def test_cold_atom_is_in_its_lowest_level() -> None:
    oxygen = thermochemistry(SPECIES["O"], np.array([5.0]), bar)

    assert oxygen.heat_capacity[0] == pytest.approx(2.5 * R, rel=1e-12)
    assert oxygen.enthalpy[0] == pytest.approx(2.5 * R * 5.0, rel=1e-12)


def test_gibbs_energy_is_that_of_the_partition_function() -> None:
    for species in SPECIES.values():
        functions = thermochemistry(species, TEMPERATURES, bar)
        per_molecule = partition_functions(species, TEMPERATURES).log_total + np.log(k * TEMPERATURES / bar)

        np.testing.assert_allclose(functions.gibbs_energy, -R * TEMPERATURES * per_molecule, rtol=1e-13)
