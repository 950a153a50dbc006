"""Verdicts on the demo's real saddles: each confirmed for its own reaction, none for another one."""

from dataclasses import dataclass, replace
from functools import cache
from itertools import chain, permutations
from pathlib import Path

import numpy as np
import pytest
from ase.collections import g2
from scipy.constants import angstrom, c, physical_constants

from rateloom.audit.saddle import judge_saddle
from rateloom.calculation import Calculation, Level, read_calculation
from rateloom.molecule import atomic_masses, force_constants_from_modes, shape_of

FOLDER = Path(__file__).resolve().parents[2] / "sample_outputs" / "calculations"
NAMES_OF_G2 = ("CH3OH", "H2COH", "H2")  # in the set of molecules that ASE ships
REACTIONS = {
    "ts_h2_h": "h + h2 -> h2 + h",
    "ts_h2_o": "h2 + o -> oh + h",
    "ts_h2_oh": "h2 + oh -> h2o + h",
    "ts_h2o_o": "h2o + o -> oh + oh",
    "ts_nh3_h": "nh3 + h -> nh2 + h2",
    "ts_nh3_o": "nh3 + o -> nh2 + oh",
    "ts_nh3_oh": "nh3 + oh -> nh2 + h2o",
    "ts_ch4_h": "ch4 + h -> ch3 + h2",
    "ts_ch3oh_h_c": "ch3oh + h -> ch2oh + h2",
    "ts_ch3oh_h_o": "ch3oh + h -> ch3o + h2",
    "ts_ch2o_h": "ch2o + h -> hco + h2",
    "ts_ch3nh2_h_c": "ch3nh2 + h -> ch2nh2 + h2",
    "ts_h2o2_h": "h2o2 + h -> ho2 + h2",
    "ts_n2h2_h": "n2h2_trans + h -> nnh + h2",
    "ts_n2h2_isom": "n2h2_trans -> n2h2_cis",
    "ts_nnh_diss": "nnh -> n2 + h",
    "ts_hco_diss": "hco -> h + co",
    "ts_ch3o_diss": "ch3o -> ch2o + h",
    "ts_n2o_h": "n2o + h -> n2 + oh",
    "ts_hcn_isom": "hcn -> hnc",
    "ts_nh_h": "nh + h -> n + h2",
    "ts_nh2_h": "nh2 + h -> nh + h2",
    "ts_ch3_h": "ch3 + h -> ch2 + h2",
    "ts_ch2o_diss": "ch2o -> h2 + co",
}


@dataclass(frozen=True)
class Members:
    """The calculations of one reaction."""

    saddle: Calculation
    reactants: tuple[Calculation, ...]
    products: tuple[Calculation, ...]


ATOMS = ("h", "n", "o")  # need no file: an atom has no geometry to speak of


def _is_there(stem: str) -> bool:
    return stem in ATOMS or (FOLDER / f"{stem}.out.gz").is_file()


@cache
def _read(stem: str) -> Calculation:
    return _atom(stem) if stem in ATOMS else read_calculation(str(FOLDER / f"{stem}.out.gz"))


def _atom(stem: str) -> Calculation:
    return _bare((stem.upper(),), np.zeros((1, 3)))


def _bare(atoms: tuple[str, ...], geometry: np.ndarray) -> Calculation:
    return Calculation(
        program="",
        program_version="",
        level=Level(),
        charge=0,
        multiplicity=1,
        atoms=atoms,
        geometry_angstrom=geometry,
        energies_hartree={},
        energy_kind="",
        finished=True,
    )


def _sides(equation: str) -> tuple[list[str], list[str]]:
    left, right = equation.split(" -> ")
    return left.split(" + "), right.split(" + ")


@cache
def _members(saddle: str) -> Members:
    left, right = _sides(REACTIONS[saddle])
    return Members(_read(saddle), tuple(map(_read, left)), tuple(map(_read, right)))


COMPLETE = [
    saddle
    for saddle, equation in REACTIONS.items()
    if all(_is_there(stem) for stem in (saddle, *chain(*_sides(equation))))
]


@pytest.mark.parametrize("saddle", COMPLETE)
def test_every_saddle_of_the_demo_is_confirmed(saddle: str) -> None:
    members = _members(saddle)

    verdict = judge_saddle(members.saddle, members.reactants, members.products)

    assert verdict.verdict == "confirmed", verdict.remarks
    assert [remark.code for remark in verdict.remarks] == ["imaginary-mode-confirmed"]
    assert judge_saddle(members.saddle, members.products, members.reactants).verdict == "confirmed"


def test_no_saddle_of_the_demo_serves_another_reaction() -> None:
    assert len(COMPLETE) == len(REACTIONS) == 24
    for ours, other in permutations(COMPLETE, 2):
        members, wrong = _members(other), _members(ours).saddle
        verdict = judge_saddle(wrong, members.reactants, members.products)
        assert verdict.verdict != "confirmed", (ours, other)
        assert verdict.remarks, (ours, other)
        if sorted(wrong.atoms) == sorted(members.saddle.atoms):
            assert verdict.verdict == "off-reaction", (ours, other, verdict)


@pytest.mark.parametrize("saddle", COMPLETE)
def test_the_hessian_of_the_printed_modes_gives_the_same_verdict(saddle: str) -> None:
    # Force constants put together from all printed modes, then only they are given.
    members = _members(saddle)
    record = members.saddle
    assert record.frequencies_per_cm is not None
    assert record.displacements is not None
    masses = atomic_masses(record.atoms)
    positions = record.geometry_angstrom * angstrom
    constants = force_constants_from_modes(
        record.displacements,
        record.frequencies_per_cm * 100 * c,
        masses,
        positions,
        shape_of(positions),
    )
    unit = physical_constants["Hartree energy"][0] / physical_constants["Bohr radius"][0] ** 2
    without = replace(record, displacements=None, hessian=constants / unit)

    printed = judge_saddle(record, members.reactants, members.products)
    found = judge_saddle(without, members.reactants, members.products)

    assert found.verdict == printed.verdict
    assert found.share == pytest.approx(printed.share, abs=0.02)  # five printed digits, masses of program and library
    assert np.sign(found.share) == 1


def test_a_methyl_rotation_is_no_abstraction() -> None:
    path = FOLDER / "broken" / "ts_ch3oh_methyl_rotation.out.gz"
    if not path.is_file():
        pytest.skip("the demo holds no saddle of the methyl rotation of methanol")
    methanol, radical, hydrogen = (_bare(tuple(g2[n].get_chemical_symbols()), g2[n].positions) for n in NAMES_OF_G2)

    verdict = judge_saddle(read_calculation(str(path)), [methanol, _atom("h")], [radical, hydrogen])

    assert verdict.verdict == "off-reaction"
    assert "torsion" in verdict.moved
