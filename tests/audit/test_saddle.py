"""Verdicts on saddles whose mode is known: right, wrong, soft, missing, turned, renumbered."""

import time
from dataclasses import replace

import numpy as np
import pytest
from ase.collections import g2
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from rateloom.audit.limits import Limits
from rateloom.audit.saddle import SaddleVerdict, judge_saddle
from rateloom.calculation.record import Calculation, Level
from rateloom.molecule.isotopes import atomic_masses

MASSES = {name: atomic_masses((name,))[0] for name in ("H", "C", "N", "O")}
METHYL = [[0.05, 1.06, 0.2], [0.05, -0.53, 1.02], [0.05, -0.53, -0.82]]


def calculation(
    atoms: str | list[str], geometry: object, mode: object = None, frequency: float = -1200.0
) -> Calculation:
    """Record of a calculation, with one imaginary mode where it is given."""
    displacements = None if mode is None else np.array([mode], float)
    return Calculation(
        program="NWChem",
        program_version="7.2",
        level=Level("B3LYP", "6-31G*"),
        charge=0,
        multiplicity=1,
        atoms=tuple(atoms),
        geometry_angstrom=np.array(geometry, float),
        energies_hartree={},
        energy_kind="",
        finished=True,
        frequencies_per_cm=None if mode is None else np.array([frequency]),
        displacements=displacements,
    )


def molecule(name: str) -> Calculation:
    """A molecule of the G2 set of ASE, or an atom."""
    if len(name) == 1:
        return calculation([name], np.zeros((1, 3)))
    return calculation(g2[name].get_chemical_symbols(), g2[name].positions)


def sliding(atoms: str, moving: int, direction: tuple[float, float, float]) -> np.ndarray:
    """Mode in which one atom moves against all the others."""
    masses = np.array([MASSES[atom] for atom in atoms])
    mode = np.tile(-np.array(direction) * masses[moving] / (masses.sum() - masses[moving]), (len(atoms), 1))
    mode[moving] = direction
    return mode


Case = tuple[Calculation, list[Calculation], list[Calculation]]
OH_CH4 = ("CHHHHOH", [[0, 0, 0], *METHYL, [-1.2, 0, 0], [-2.5, 0.1, 0], [-2.7, 1.0, 0]])
H_N2O = ("NNOH", [[0, 0, 0], [0, 0, 1.13], [0.2, 0, 2.35], [-0.9, 0, 3.2]])
FLAT_NH3 = ("NHHH", [[0, 0, 0], [0, 0.99, 0], [0.857, -0.495, 0], [-0.857, -0.495, 0]])
CASES: dict[str, Case] = {
    "exchange": (
        calculation("HHH", [[0, 0, -0.93], [0, 0, 0], [0, 0, 0.93]], [[0, 0, 1], [0, 0, -2], [0, 0, 1]]),
        [molecule("H"), molecule("H2")],
        [molecule("H2"), molecule("H")],
    ),
    "early abstraction": (
        calculation(*OH_CH4, sliding(OH_CH4[0], 4, (-1, 0, 0))),
        [molecule("CH4"), molecule("OH")],
        [molecule("CH3"), molecule("H2O")],
    ),
    # The N-O bond hardly moves along the mode: it breaks once the hydrogen has arrived.
    "one bond after the other": (
        calculation(*H_N2O, sliding(H_N2O[0], 3, (0.8, 0, -0.6))),
        [calculation("NNO", [[0, 0, 0], [0, 0, 1.13], [0, 0, 2.32]]), molecule("H")],
        [molecule("N2"), molecule("OH")],
    ),
    "shift": (
        calculation("CNH", [[0, 0, 0], [0, 0, 1.19], [1.15, 0, 0.3]], sliding("CNH", 2, (-0.2, 0, 1.0))),
        [molecule("HCN")],
        [calculation("HNC", [[0, 0, 0], [0, 0, 1.0], [0, 0, 2.17]])],
    ),
    "dissociation": (
        calculation("COH", [[0, 0, 0], [0, 0, 1.13], [1.55, 0, -0.8]], sliding("COH", 2, (0.9, 0, -0.45))),
        [molecule("HCO")],
        [molecule("CO"), molecule("H")],
    ),
    "inversion": (calculation(*FLAT_NH3, sliding("NHHH", 0, (0, 0, 1))), [molecule("NH3")], [molecule("NH3")]),
}


@pytest.mark.parametrize("name", CASES)
def test_a_mode_along_the_reaction_is_confirmed(name: str) -> None:
    verdict = judge_saddle(*CASES[name])

    assert verdict.verdict == "confirmed"
    assert verdict.share > 0.8
    assert [remark.code for remark in verdict.remarks] == ["imaginary-mode-confirmed"]


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(
    name=st.sampled_from(sorted(CASES)),
    seed=st.integers(0, 2**32 - 1),
    sign=st.sampled_from([1.0, -1.0, 0.01]),
    backwards=st.booleans(),
)
def test_order_place_sign_and_direction_change_no_verdict(name: str, seed: int, sign: float, backwards: bool) -> None:
    random = np.random.default_rng(seed)
    saddle, reactants, products = CASES[name]
    sides = (products, reactants) if backwards else (reactants, products)

    plain = judge_saddle(saddle, reactants, products)
    changed = judge_saddle(
        _moved(saddle, random, sign),
        *([_moved(member, random) for member in random.permutation(side)] for side in sides),
    )

    assert changed.verdict == plain.verdict
    assert changed.share == pytest.approx(plain.share, abs=1e-6)
    assert [remark.code for remark in changed.remarks] == [remark.code for remark in plain.remarks]


def _moved(given: Calculation, random: np.random.Generator, sign: float = 1.0) -> Calculation:
    order = random.permutation(len(given.atoms))
    turn = Rotation.random(random_state=int(random.integers(2**31))).as_matrix()
    displacements = given.displacements
    return replace(
        given,
        atoms=tuple(given.atoms[i] for i in order),
        geometry_angstrom=given.geometry_angstrom[order] @ turn.T + random.normal(size=3),
        displacements=None if displacements is None else sign * displacements[:, order] @ turn.T,
    )


@pytest.mark.parametrize(
    ("name", "mode", "moved"),
    [
        ("early abstraction", [[0, 0, 0]] + [np.cross([1, 0, 0], h) for h in METHYL] + [[0, 0, 0]] * 3, "torsion"),
        ("early abstraction", sliding(OH_CH4[0], 6, (0, 0, 1)), "torsion"),
        ("one bond after the other", sliding(H_N2O[0], 3, (0.61, 0, 0.79)), "angle"),
        ("exchange", [[1, 0, 0], [-2, 0, 0], [1, 0, 0]], "angle"),
        ("inversion", sliding("NHHH", 1, (1, 0, 0)), "angle"),
    ],
)
def test_another_motion_is_off_the_reaction_and_named(name: str, mode: object, moved: str) -> None:
    saddle, reactants, products = CASES[name]

    verdict = judge_saddle(replace(saddle, displacements=np.array([mode], float)), reactants, products)

    assert verdict.verdict == "off-reaction"
    assert [remark.code for remark in verdict.remarks] == ["imaginary-mode-off-reaction"]
    assert f"({moved}, " in verdict.moved
    assert verdict.moved in verdict.remarks[0].message
    assert verdict.expected in verdict.remarks[0].message


def test_the_message_says_what_moves_and_what_should() -> None:
    saddle, reactants, products = CASES["early abstraction"]
    spin = [[0, 0, 0]] + [np.cross([1, 0, 0], h) for h in METHYL] + [[0, 0, 0]] * 3

    remark = judge_saddle(replace(saddle, displacements=np.array([spin])), reactants, products).remarks[0]

    assert remark.message.startswith("the imaginary mode (1200i cm-1) moves H")
    assert "(torsion, " in remark.message
    assert "expected C1-H5 to stretch and H5-O6 to shorten" in remark.message


def test_a_saddle_that_lost_another_hydrogen_is_caught() -> None:
    # The saddle of CH4 + OH, said to be that of an isomer of the products: H2 and methoxy-like CH3O.
    saddle, reactants, _ = CASES["early abstraction"]

    verdict = judge_saddle(saddle, reactants, [molecule("CH3O"), molecule("H2")])

    assert verdict.verdict == "off-reaction"
    assert verdict.kind == ""
    assert "one H-H bond to form" in verdict.expected


def test_other_atoms_leave_a_bond_motion_open_and_catch_a_rotation() -> None:
    saddle, _, _ = CASES["early abstraction"]
    spin = [[0, 0, 0]] + [np.cross([1, 0, 0], h) for h in METHYL] + [[0, 0, 0]] * 3
    reaction = ([molecule("CH4"), molecule("H")], [molecule("CH3"), molecule("H2")])

    assert judge_saddle(saddle, *reaction).verdict == "inconclusive"
    assert judge_saddle(replace(saddle, displacements=np.array([spin])), *reaction).verdict == "off-reaction"


def test_without_displacements_a_hessian_serves() -> None:
    saddle, reactants, products = CASES["exchange"]
    mode = np.array([[0, 0, 1], [0, 0, -2], [0, 0, 1.0]]).ravel()
    hessian = 0.3 * np.diag([1.0, 1, 0] * 3) - 0.1 * np.outer(mode, mode)  # hartree/bohr2

    verdict = judge_saddle(replace(saddle, displacements=None, hessian=hessian), reactants, products)

    assert verdict.verdict == "confirmed"
    assert verdict.share == pytest.approx(1.0)


def test_without_displacements_and_hessian_it_says_so() -> None:
    saddle, reactants, products = CASES["early abstraction"]

    verdict = judge_saddle(replace(saddle, displacements=None), reactants, products)

    assert verdict.verdict == "inconclusive"
    assert [remark.code for remark in verdict.remarks] == ["mode-not-printed"]
    assert verdict.expected == "C1-H5 to stretch and H5-O6 to shorten"


@pytest.mark.parametrize("spoilt", [np.nan, 0.0])
def test_displacements_that_are_no_motion_count_as_not_printed(spoilt: float) -> None:
    saddle, reactants, products = CASES["exchange"]

    verdict = judge_saddle(replace(saddle, displacements=np.full((1, 3, 3), spoilt)), reactants, products)

    assert _codes(verdict) == ("inconclusive", ["mode-not-printed"])


@pytest.mark.parametrize("frequencies", [None, np.array([300.0]), np.zeros(0)])
def test_a_saddle_without_an_imaginary_mode_is_left_to_the_other_checks(frequencies: np.ndarray | None) -> None:
    saddle, reactants, products = CASES["exchange"]

    verdict = judge_saddle(replace(saddle, frequencies_per_cm=frequencies), reactants, products)

    assert verdict.verdict == "inconclusive"
    assert verdict.imaginary_per_cm is None
    assert verdict.remarks == ()


def test_a_soft_mode_is_never_an_error() -> None:
    saddle, reactants, products = CASES["early abstraction"]
    soft = replace(saddle, frequencies_per_cm=np.array([-60.0]))
    spin = replace(
        soft, displacements=np.array([[[0, 0, 0]] + [np.cross([1, 0, 0], h) for h in METHYL] + [[0] * 3] * 3])
    )

    assert _codes(judge_saddle(soft, reactants, products)) == (
        "confirmed",
        ["small-imaginary-mode", "imaginary-mode-confirmed"],
    )
    assert _codes(judge_saddle(spin, reactants, products)) == (
        "inconclusive",
        ["small-imaginary-mode", "imaginary-mode-inconclusive"],
    )
    assert _codes(judge_saddle(spin, reactants, products, Limits(small_imaginary_per_cm=50.0))) == (
        "off-reaction",
        ["imaginary-mode-off-reaction"],
    )


@pytest.mark.parametrize("frequency", [-150.0, -3500.0])
def test_an_unusual_magnitude_is_noted(frequency: float) -> None:
    saddle, reactants, products = CASES["early abstraction"]

    verdict = judge_saddle(replace(saddle, frequencies_per_cm=np.array([frequency])), reactants, products)

    assert _codes(verdict) == ("confirmed", ["imaginary-mode-confirmed", "imaginary-mode-unusual"])
    assert verdict.remarks[1].value == f"{-frequency:.0f}i cm-1"


def _codes(verdict: SaddleVerdict) -> tuple[str, list[str]]:
    return verdict.verdict, [remark.code for remark in verdict.remarks]


def test_forty_atoms_take_less_than_a_second() -> None:
    # OH takes a hydrogen from the middle of tridecane: 43 atoms.
    alkane, hydroxyl = _alkane(13), molecule("OH")
    carbon, hydrogen = 6, _hydrogen_of(alkane, 6)
    axis = alkane.geometry_angstrom[hydrogen] - alkane.geometry_angstrom[carbon]
    axis /= np.linalg.norm(axis)
    geometry = alkane.geometry_angstrom.copy()
    start = geometry[carbon].copy()
    geometry[hydrogen] = start + 1.22 * axis
    across = np.cross(axis, [1.0, 0, 0])
    geometry = np.vstack([geometry, start + 2.5 * axis, start + 2.5 * axis + 0.97 * across / np.linalg.norm(across)])
    atoms = [*alkane.atoms, "O", "H"]
    saddle = calculation(atoms, geometry, sliding("".join(atoms), hydrogen, tuple(axis)))
    keep = [i for i in range(len(alkane.atoms)) if i != hydrogen]
    radical = calculation([alkane.atoms[i] for i in keep], alkane.geometry_angstrom[keep])
    end = calculation([alkane.atoms[i] for i in keep], alkane.geometry_angstrom[keep])
    wrong = _hydrogen_of(alkane, 0)
    other = [i for i in range(len(alkane.atoms)) if i != wrong]
    terminal = calculation([alkane.atoms[i] for i in other], alkane.geometry_angstrom[other])

    began = time.process_time()
    right = judge_saddle(saddle, [alkane, hydroxyl], [end, molecule("H2O")])
    caught = judge_saddle(saddle, [alkane, hydroxyl], [terminal, molecule("H2O")])
    taken = time.process_time() - began

    assert len(radical.atoms) + 3 > 40
    assert right.verdict == "confirmed"
    assert caught.verdict == "off-reaction"
    assert taken < 2.0  # two verdicts, a second each


def _alkane(carbons: int) -> Calculation:
    """A zigzag chain with C-C 1.53, C-H 1.09 angstrom and tetrahedral angles, to a few degrees."""
    spine = np.array([[1.25 * k, 0.44 * (-1) ** k, 0.0] for k in range(carbons)])
    hydrogens = []
    for k, place in enumerate(spine):
        up = -np.array([0, np.sign(-place[1]), 0.0])
        hydrogens += [place + 1.09 * (0.58 * up + 0.81 * np.array([0, 0, side])) for side in (1, -1)]
        if k in (0, carbons - 1):
            hydrogens.append(place + 1.09 * np.array([-0.82 if k == 0 else 0.82, -0.57 * up[1], 0]))
    return calculation(["C"] * carbons + ["H"] * len(hydrogens), np.vstack([spine, hydrogens]))


def _hydrogen_of(alkane: Calculation, carbon: int) -> int:
    lengths = np.linalg.norm(alkane.geometry_angstrom - alkane.geometry_angstrom[carbon], axis=1)
    return next(i for i, atom in enumerate(alkane.atoms) if atom == "H" and lengths[i] < 1.2)


def test_a_verdict_is_made_of_plain_data() -> None:
    verdict = judge_saddle(*CASES["exchange"])

    assert isinstance(verdict.share, float)
    assert isinstance(verdict.imaginary_per_cm, float)
    assert {type(value) for value in (verdict.verdict, verdict.kind, verdict.expected, verdict.moved)} == {str}
