"""Over a whole job: one file, molecule or reaction under two names, and energies that do not close a cycle."""

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from ase.build import molecule
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import N_A, kilo
from scipy.spatial.transform import Rotation

from rateloom.audit.findings import Subject
from rateloom.audit.limits import Limits
from rateloom.audit.network import Entry, network_remarks
from rateloom.job.model import Place, Reaction

KJ = kilo / N_A
LIMITS = Limits()


def entry(name: str, like: str, energy: float = 0.0, kind: str = "species", **changes: Any) -> Entry:
    atoms = molecule(like)
    made = Entry(
        subject=Subject(kind, name),
        files=(f"{name}.out", f"{name}_ccsdt.out"),
        labels=tuple(atoms.symbols),
        geometry_angstrom=atoms.positions,
        charge=0,
        multiplicity=1 + sum(atoms.numbers) % 2,
        ground_energy=energy * KJ,
    )
    return replace(made, **changes)


def reaction(name: str, reactants: str, products: str, saddle: str = "") -> Reaction:
    return Reaction(
        name=name,
        place=Place("job.yaml", 1),
        equation=f"{reactants} <=> {products}",
        reactants=tuple(reactants.split(" + ")),
        products=tuple(products.split(" + ")),
        transition_states=(saddle or f"ts-{name}",),
        temperatures=(300.0, 1000.0),
    )


def found(entries: list[Entry], reactions: list[Reaction] | None = None, limits: Limits = LIMITS) -> list[Any]:
    return [(subject.name, remark.code) for subject, remark in network_remarks(entries, reactions or [], limits)]


CH4, H, CH3, H2 = entry("CH4", "CH4"), entry("H", "H"), entry("CH3", "CH3"), entry("H2", "H2", 5.0)
OH, H2O = entry("OH", "OH"), entry("H2O", "H2O", -60.0)
SIX = [CH4, H, CH3, H2, OH, H2O]
CYCLE = [
    reaction("ch4-h", "CH4 + H", "CH3 + H2"),
    reaction("ch4-oh", "CH4 + OH", "CH3 + H2O"),
    reaction("h2-oh", "H2 + OH", "H2O + H"),
]


def test_a_sound_network_has_no_remarks() -> None:
    assert found(SIX, CYCLE) == []


def test_a_file_used_twice_is_reported_once() -> None:
    copy = replace(CH4, subject=Subject("species", "methane"), files=("methane.out", "CH4_ccsdt.out"))

    ((subject, remark),) = network_remarks([*SIX, copy], [], LIMITS)

    assert (subject.name, remark.code, remark.value) == ("methane", "file-used-twice", "CH4_ccsdt.out")


def test_isotopologues_may_share_their_files() -> None:
    heavy = replace(CH4, subject=Subject("species", "CD4"), labels=("C", "D", "D", "D", "D"))

    assert found([CH4, heavy]) == []


def test_an_entry_may_use_one_file_for_both() -> None:
    assert found([replace(CH4, files=("CH4.out", "CH4.out"))]) == []


@settings(max_examples=20, deadline=None)
@given(st.sampled_from(["H2O2", "CH3OH", "C2H6", "isobutane"]), st.integers(0, 2**32 - 1), st.booleans())
def test_the_same_geometry_is_found_in_any_order_and_orientation(name: str, seed: int, mirrored: bool) -> None:
    random = np.random.default_rng(seed)
    first, second = entry("A", name), entry("B", name)
    order = random.permutation(len(first.labels))
    turned = Rotation.random(rng=random).apply(first.geometry_angstrom * (-1 if mirrored else 1))
    second = replace(second, labels=tuple(first.labels[i] for i in order), geometry_angstrom=turned[order])

    assert found([first, second, entry("C", "CH4")]) == [("B", "same-geometry-twice")]


@pytest.mark.parametrize("change", [{"charge": 1}, {"multiplicity": 3}])
def test_another_state_is_another_species(change: dict[str, int]) -> None:
    assert found([H2O, replace(H2O, subject=Subject("species", "other"), files=("x.out",), **change)]) == []


def test_conformers_and_isomers_are_other_species() -> None:
    pairs = [("CH3CH2OH", "CH3OCH3"), ("2-butyne", "butadiene"), ("trans-butane", "isobutane")]

    for first, second in pairs:
        assert found([entry("A", first), entry("B", second)]) == []


def test_a_saddle_that_is_a_minimum_of_another_name_is_found() -> None:
    assert found([CH4, entry("ts", "CH4", kind="transition_state")]) == [("ts", "same-geometry-twice")]


def test_a_molecule_under_two_names_opens_a_cycle() -> None:
    methane = entry("methane", "CH4", 7.0)
    reactions = [CYCLE[0], reaction("methane-oh", "methane + OH", "CH3 + H2O"), CYCLE[2]]

    remarks = [r for _, r in network_remarks([*SIX, methane], reactions, LIMITS) if r.code == "cycle-does-not-close"]

    (remark,) = remarks
    # ch4-h forwards, methane-oh backwards and h2-oh forwards consume CH4 and give methane, 7 kJ/mol higher, or all
    # the other way round.
    assert remark.value in ("7.00 kJ/mol", "-7.00 kJ/mol")
    for name in ("ch4-h", "methane-oh", "h2-oh"):
        assert name in remark.message
    assert "(backwards)" in remark.message


def test_two_names_with_one_energy_close_every_cycle() -> None:
    reactions = [CYCLE[0], reaction("methane-oh", "methane + OH", "CH3 + H2O"), CYCLE[2]]

    assert found([*SIX, entry("methane", "CH4", 0.5)], reactions) == [("methane", "same-geometry-twice")]


def test_two_names_without_a_cycle_contradict_nothing() -> None:
    reactions = [CYCLE[0], reaction("methane-oh", "methane + OH", "CH3 + H2O")]

    assert found([*SIX, entry("methane", "CH4", 7.0)], reactions) == [("methane", "same-geometry-twice")]


def test_the_same_molecule_of_another_level_is_recognised() -> None:
    stretched = entry("methane", "CH4", 40.0, geometry_angstrom=1.01 * CH4.geometry_angstrom)
    reactions = [CYCLE[0], reaction("methane-oh", "methane + OH", "CH3 + H2O"), CYCLE[2]]

    assert ("methane", "cycle-does-not-close") in found([*SIX, stretched], reactions)


@settings(max_examples=25, deadline=None)
@given(st.lists(st.floats(-500, 500), min_size=6, max_size=6))
def test_energies_of_single_names_close_whatever_they_are(energies: list[float]) -> None:
    entries = [replace(e, ground_energy=energy * KJ) for e, energy in zip(SIX, energies, strict=True)]

    assert found(entries, CYCLE) == []


def test_two_saddles_between_the_same_molecules() -> None:
    again = reaction("again", "H2 + CH3", "H + CH4")  # the other way round

    assert found(SIX, [CYCLE[0], again]) == [("ch4-h", "several-saddles"), ("again", "several-saddles")]


def test_the_same_reaction_twice() -> None:
    again = reaction("again", "H2 + CH3", "H + CH4", saddle="ts-ch4-h")

    assert found(SIX, [CYCLE[0], again]) == [("again", "reaction-twice")]


def test_an_unknown_energy_takes_part_in_no_cycle() -> None:
    reactions = [CYCLE[0], reaction("methane-oh", "methane + OH", "CH3 + H2O"), CYCLE[2]]
    methane = entry("methane", "CH4", 7.0, ground_energy=None)

    assert found([*SIX, methane], reactions) == [("methane", "same-geometry-twice")]
