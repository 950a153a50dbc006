"""Psi4 outputs: Debian's build, linear molecules, atoms, numerical differentiation, coupled cluster."""

import re
from collections.abc import Callable

import pytest

from rateloom.calculation import Calculation

Reader = Callable[[str], Calculation]
Text = Callable[[str], str]
FOLDER = "Psi4-1.3.2/"


def test_coupled_cluster_keeps_every_digit(read: Reader, text_of: Text) -> None:
    record, text = read(FOLDER + "oh_uhf_ccsdt.out.gz"), text_of(FOLDER + "oh_uhf_ccsdt.out.gz")

    assert record.program_version == "1.3.2"  # printed beside `Git: Rev {} zzzzzzz`
    assert str(record.level) == "CCSD(T)/cc-pVDZ"
    for kind in ("MP2", "CCSD", "CCSD(T)"):
        (printed,) = re.findall(rf"\* {re.escape(kind)} total energy += +(\S+)", text)
        assert record.energies_hartree[kind] == float(printed)
    assert record.spin_squared == 0.7546034244  # `@S^2 Observed`
    assert record.rotational_constants_per_cm == pytest.approx([18.89752, 18.89752])  # the third overflows


def test_atom_without_beta_electrons(read: Reader) -> None:
    record = read(FOLDER + "h_ccsdt.out.gz")

    assert (record.atoms, record.multiplicity, record.frequencies_per_cm) == (("H",), 2, None)
    assert record.rotational_constants_per_cm is None
    assert record.finished


def test_linear_molecule_keeps_its_vibration(read: Reader) -> None:
    record = read(FOLDER + "n2_opt_freq.out.gz")

    assert record.frequencies_per_cm == pytest.approx([2669.9428], abs=0)
    assert record.displacements is not None
    assert record.displacements.shape == (1, 2, 3)
    assert record.converged
    assert record.energies_hartree == {"SCF": -107.50065426204355}  # at the last geometry


def test_reference_of_a_numerical_differentiation_is_taken(read: Reader, text_of: Text) -> None:
    record, text = read(FOLDER + "h2o_numerical_freq.out.gz"), text_of(FOLDER + "h2o_numerical_freq.out.gz")
    energies = [float(word) for word in re.findall(r"@RHF Final Energy: +(\S+)", text)]

    assert record.energy_hartree == energies[0]
    assert len(set(energies)) > 1  # those of the displaced geometries
    assert record.frequencies_per_cm is not None
    assert len(record.frequencies_per_cm) == 6  # off a stationary point Psi4 leaves rotations in
