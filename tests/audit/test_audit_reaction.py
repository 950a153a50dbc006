"""The members of a reaction: balances, levels of theory, programs, scale factors, barriers."""

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import N_A, kilo

from rateloom.audit.limits import Limits
from rateloom.audit.members import Member, Members
from rateloom.audit.reaction import reaction_remarks
from rateloom.job.model import FrequencyScale
from rateloom.statmech import Species

KJ = kilo / N_A


def member(name: str, formula: dict[str, int], multiplicity: int = 1, energy: float = 0.0, **changes: Any) -> Member:
    species = Species(
        composition=tuple(sorted(formula.items())),
        charge=0,
        multiplicity=multiplicity,
        mass=1e-26,
        shape="nonlinear",
        moments=np.ones(3) * 1e-46,
        symmetry_number=1,
        optical_isomers=1,
        frequencies=np.array([3e13]),
        imaginary_frequency=None,
        zero_point_energy=0.0,
        electronic_energy=energy * KJ,
        spin_orbit_lowering=0.0,
        degeneracies=np.array([float(multiplicity)]),
        level_energies=np.zeros(1),
    )
    made = Member(name, species, "B3LYP/6-31G*", "CCSD(T)/cc-pVTZ", "NWChem", "7.0", "Psi4", "1.3")
    return replace(made, **changes)


METHANE, METHYL = member("CH4", {"C": 1, "H": 4}), member("CH3", {"C": 1, "H": 3}, 2)
HYDROGEN = member("H2", {"H": 2}, energy=5.0)
ATOM = member("H", {"H": 1}, 2, geometry_level="", geometry_program="", geometry_version="")
SADDLE = member("ts", {"C": 1, "H": 5}, 2, energy=60.0)
SOUND = Members((METHANE, ATOM), (METHYL, HYDROGEN), SADDLE)


def codes(members: Members) -> list[str]:
    return [remark.code for remark in reaction_remarks(members, Limits())]


def with_saddle(**changes: Any) -> Members:
    return replace(SOUND, saddle=replace(SADDLE, **changes))


def saddle_species(**changes: Any) -> Members:
    return with_saddle(species=replace(SADDLE.species, **changes))


def test_a_sound_reaction_has_no_remarks() -> None:
    assert codes(SOUND) == []


@settings(max_examples=30, deadline=None)
@given(st.permutations([METHANE, ATOM]), st.permutations([METHYL, HYDROGEN]), st.booleans())
def test_order_and_direction_change_no_verdict(first: list[Member], second: list[Member], forward: bool) -> None:
    sides = (tuple(first), tuple(second)) if forward else (tuple(second), tuple(first))

    assert codes(Members(*sides, SADDLE)) == []
    assert codes(Members(*sides, saddle_species(charge=1).saddle)) == ["charge-not-balanced", "charge-not-balanced"]


def test_each_side_is_held_against_the_saddle() -> None:
    (remark,) = reaction_remarks(replace(SOUND, products=(METHYL,)))

    assert remark.code == "atoms-not-balanced"
    assert "the products hold C1 H3, the saddle ts holds C1 H5" in remark.message


def test_spins_must_couple() -> None:
    (first, second) = reaction_remarks(saddle_species(multiplicity=4))

    assert first.code == second.code == "spin-not-conserved"
    assert (first.value, first.limit) == ("4", "2")


def test_levels_differ_whatever_case_and_spaces_say() -> None:
    assert codes(with_saddle(energy_level="ccsd(t) / CC-pVTZ")) == []
    assert codes(with_saddle(energy_level="CCSD(T)/cc-pVDZ")) == ["levels-differ"]
    assert codes(with_saddle(geometry_level="B3LYP/6-31G**")) == ["levels-differ"]


def test_an_atom_has_no_level_of_geometry() -> None:
    assert codes(SOUND) == []
    assert ATOM.geometry is None


def test_a_level_in_words_is_no_error() -> None:
    given_level = with_saddle(energy_level="Table 2 of the paper", energy_program="given", energy_version="")
    same_words = with_saddle(energy_level="CCSD(T)/cc-pVTZ", energy_program="given", energy_version="")
    not_printed = with_saddle(energy_level="unknown level")

    assert codes(given_level) == ["level-not-comparable"]
    assert codes(same_words) == []
    assert codes(not_printed) == ["level-not-comparable"]


def test_programs_and_versions() -> None:
    assert codes(with_saddle(energy_version="1.9")) == ["program-versions-differ"]
    assert codes(with_saddle(energy_program="ORCA", energy_version="6.0")) == ["programs-differ"]


@pytest.mark.parametrize(
    ("scale", "expected"),
    [
        (FrequencyScale(0.977, 0.961), ["frequency-scales-differ"]),
        (FrequencyScale(0.8, 0.961), ["frequency-scales-differ", "unusual-frequency-scale"]),
        (FrequencyScale(98, 96), ["frequency-scales-differ", "unusual-frequency-scale", "unusual-frequency-scale"]),
    ],
)
def test_scale_factors(scale: FrequencyScale, expected: list[str]) -> None:
    assert codes(with_saddle(frequency_scale=scale)) == expected


def test_one_pair_of_scale_factors_is_fine() -> None:
    scale = FrequencyScale(0.977, 0.961)
    members = [replace(m, frequency_scale=scale) for m in SOUND.all if m is not ATOM]

    assert codes(Members((members[0], ATOM), (members[1], members[2]), members[3])) == []


def test_barriers_include_zero_point_energy() -> None:
    low = saddle_species(electronic_energy=10.0 * KJ, zero_point_energy=-8.0 * KJ)

    (remark,) = reaction_remarks(low)

    assert remark.code == "barrier-below-products"
    assert remark.value == "-3.00 kJ/mol"


def test_energies_of_two_levels_are_no_barrier() -> None:
    low = saddle_species(electronic_energy=-500.0 * KJ)

    assert codes(replace(low, saddle=replace(low.saddle, energy_level="MP2/cc-pVTZ"))) == ["levels-differ"]
