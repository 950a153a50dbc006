"""Charge and multiplicity against the electrons; spellings; energies chosen; rigid motions."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rateloom.calculation import given_calculation
from rateloom.calculation.checks import check_electrons
from rateloom.calculation.energies import choose
from rateloom.calculation.motion import count_rigid, rigid_motions, rigid_share, same_shape
from rateloom.calculation.names import usual_basis, usual_dispersion, usual_method

WATER = np.array([[0, 0, 0.117], [0, 0.757, -0.469], [0, -0.757, -0.469]])
OH = given_calculation(energy_hartree=-75.7, atoms="OH", geometry_angstrom=((0, 0, 0), (0, 0, 0.97)), multiplicity=2)


@pytest.mark.parametrize(
    ("charge", "multiplicity", "taken", "codes"),
    [
        (0, 2, 2, []),
        (0, 4, 4, []),
        (0, 3, 2, ["multiplicity-corrected"]),  # as cclib reports a restricted open-shell doublet
        (0, 1, 1, ["electron-count-differs"]),
        (0, 20, 20, ["electron-count-differs"]),
        (-1, 1, 1, []),
        (1, 3, 3, []),
    ],
)
def test_electrons_decide_on_the_multiplicity(charge: int, multiplicity: int, taken: int, codes: list[str]) -> None:
    record, remarks = check_electrons(replace(OH, charge=charge, multiplicity=multiplicity))

    assert record.multiplicity == taken
    assert [remark.code for remark in remarks] == codes


@pytest.mark.parametrize(
    ("printed", "usual"),
    [
        ("UB3LYP", "B3LYP"), ("rob3lyp", "B3LYP"), ("PBE1PBE", "PBE0"), ("wB97XD", "wB97X-D"), ("UM062X", "M06-2X"),
        ("B3LYP/G", "B3LYP/G"), ("DLPNO-CCSD(T)", "DLPNO-CCSD(T)"), ("rhf", "HF"), ("UHF", "HF"),
        ("revPBE", "revPBE"), ("RIMP2", "MP2"), ("cam-b3lyp", "CAM-B3LYP"), ("unheard", "unheard"),
    ],
)  # fmt: skip
def test_methods_are_spelled_as_usual(printed: str, usual: str) -> None:
    assert usual_method(printed) == usual


@pytest.mark.parametrize(
    ("printed", "usual"),
    [
        ("6-31g(d,p)", "6-31G**"), ("6-31G**", "6-31G**"), ("6-311++G(3df,3pd)", "6-311++G(3df,3pd)"),
        ("cc-pvtz", "cc-pVTZ"), ("Aug-CC-pVDZ", "aug-cc-pVDZ"), ("AUG-CC-PVTZ", "aug-cc-pVTZ"),
        ("cc-pwcvqz", "cc-pwCVQZ"), ("def2tzvp", "def2-TZVP"), ("Def2-SVP", "def2-SVP"), ("def2-tzvpd", "def2-TZVPD"),
        ("sto-3g", "STO-3G"), ("cc-pVTZ-F12", "cc-pVTZ-F12"), ("mine", "mine"),
    ],
)  # fmt: skip
def test_basis_sets_are_spelled_as_usual(printed: str, usual: str) -> None:
    assert usual_basis(printed) == usual


def test_dispersion_is_spelled_as_usual() -> None:
    assert [usual_dispersion(word) for word in ("GD3BJ", "D3(BJ)", "d3bj", "D3ZERO")] == [
        "D3BJ",
        "D3BJ",
        "D3BJ",
        "D3",
    ]


def test_highest_level_is_taken_whatever_the_order() -> None:
    assert choose(["CCSD(T)", "SCF", "MP2", "CCSD"])[0] == "CCSD(T)"
    assert choose(["DFT", "double-hybrid DFT"])[0] == "double-hybrid DFT"
    assert choose(["SCF"]) == ("SCF", "SCF: the only energy printed at this geometry")
    assert choose([])[0] == ""


@pytest.mark.parametrize(
    ("geometry", "count"),
    [
        (np.zeros((1, 3)), 3),
        (np.array([[0.0, 0, 0], [0, 0, 1]]), 5),
        (np.array([[0.0, 0, 0], [0.004, 0, 1], [0, 0, 2]]), 5),
        (WATER, 6),
    ],
    ids=["atom", "diatomic", "linear but for noise", "bent"],
)
def test_rigid_motions_follow_the_shape(geometry: np.ndarray, count: int) -> None:
    motions = rigid_motions(geometry, np.ones(len(geometry)))

    assert count_rigid(geometry) == count == len(motions)
    assert motions @ motions.T == pytest.approx(np.eye(count), abs=1e-12)


@settings(max_examples=25, deadline=None)
@given(st.lists(st.floats(-1, 1), min_size=6, max_size=6))
def test_any_rigid_motion_is_recognised(parts: list[float]) -> None:
    shift, turn = np.array(parts[:3]), np.array(parts[3:])
    moved = shift + np.cross(turn, WATER)
    if np.linalg.norm(moved) > 1e-6:
        share = rigid_share(moved[np.newaxis], WATER, np.array([15.995, 1.008, 1.008]))

        assert share == pytest.approx([1.0], abs=1e-9)


def test_shape_is_the_same_in_any_frame() -> None:
    turned = WATER @ np.array([[0.0, 1, 0], [0, 0, 1], [1, 0, 0]]) + 3.0

    assert same_shape(WATER, turned, 1e-9)
    assert not same_shape(WATER, 1.01 * WATER, 1e-3)
    assert not same_shape(WATER, WATER[:2], 1.0)
