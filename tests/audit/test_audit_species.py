"""Species that fall apart, vibrate too fast or too softly, or have energies out of order are found."""

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from ase.build import molecule
from scipy.constants import c, centi, h, k

from rateloom.audit.limits import Limits
from rateloom.audit.species import species_remarks
from rateloom.calculation.record import Calculation, Level
from rateloom.statmech import Choices, Species, assemble

LIMITS = Limits()


def calculation(name: str, **changes: Any) -> Calculation:
    atoms = molecule(name)
    modes = max(3 * len(atoms) - 6, 0)
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
        frequencies_per_cm=np.linspace(300.0, 3000.0, modes),
        finished=True,
    )
    return replace(record, **changes)


def species(record: Calculation) -> Species:
    made = assemble(record, None, Choices(), is_saddle=False).species
    assert made is not None
    return made


def codes(record: Calculation, *, is_saddle: bool = False) -> list[str]:
    return [remark.code for remark in species_remarks(record, None, None, LIMITS, is_saddle=is_saddle)]


@pytest.mark.parametrize(
    "name", ["CH4", "H2", "H2O2", "N2H4", "C6H6", "SO2", "LiF", "Na2", "CCl4", "bicyclobutane", "ClO"]
)
def test_common_molecules_hold_together(name: str) -> None:
    assert codes(calculation(name)) == []


def test_fragments_are_named() -> None:
    water = calculation("H2O")
    pair = replace(
        water,
        atoms=water.atoms * 2,
        geometry_angstrom=np.concatenate(
            [water.geometry_angstrom, water.geometry_angstrom + np.array([0.0, 3.0, 0.0])]
        ),
    )

    (remark,) = species_remarks(pair, None, None, LIMITS, is_saddle=False)

    assert remark.code == "molecule-in-pieces"
    assert "O1H2H3 + O4H5H6" in remark.message
    assert codes(pair, is_saddle=True) == []


def test_no_vibration_is_faster_than_that_of_hydrogen() -> None:
    assert codes(calculation("H2", frequencies_per_cm=np.array([4650.0]))) == []  # Hartree-Fock
    assert codes(calculation("H2", frequencies_per_cm=np.array([28769.0]))) == ["frequency-implausible"]


@pytest.mark.parametrize(
    ("energies", "expected"),
    [
        ({"SCF": -76.0, "MP2": -76.2, "CCSD": -76.21, "CCSD(T)": -76.22}, []),
        ({"SCF": -76.0, "MP2": -76.22, "CCSD": -76.21}, []),  # MP2 may exaggerate
        ({"SCF": -0.499810, "CCSD": -0.499810, "CCSD(T)": -0.499810}, []),  # a hydrogen atom
        ({"SCF": -76.3, "CCSD(T)": -76.22}, ["energies-out-of-order"]),
        ({"CCSD": -76.23, "CCSD(T)": -76.22}, ["energies-out-of-order"]),
        ({"DFT": -76.4}, []),
    ],
)
def test_correlation_lowers_the_energy(energies: dict[str, float], expected: list[str]) -> None:
    assert codes(calculation("H2O", energies_hartree=energies)) == expected


def test_soft_modes_are_listed_with_their_weight() -> None:
    record = calculation("H2O2")
    soft = replace(record, frequencies_per_cm=np.array([40.0, 80.0, 900.0, 1400.0, 3600.0, 3600.0]))

    (remark,) = species_remarks(soft, None, species(soft), LIMITS, is_saddle=False)

    hot = [k * 1000.0 / (h * c * wavenumber / centi) + 0.5 for wavenumber in (40, 80)]
    assert (remark.code, remark.value, remark.limit) == ("soft-mode", "40, 80 cm-1", "100 cm-1")
    # The next term of the series, h nu / 12 k T, is below 1 % of it.
    assert f"a factor of {np.prod(hot):.3g}" in remark.message
    assert f"ln of it {np.log(hot).sum():.2f}" in remark.message
