"""Rate coefficients of whole reactions: closed formulas, statistical factors, detailed balance."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import N_A, R, bar, c, centi, k, kilo, m_u

from rateloom.rates import ReactionRates, evaluate_reaction, log_rate_coefficient, participant, path_degeneracy
from rateloom.statmech import Species

PER_CM = c / centi  # Hz
GRID = 1 / np.linspace(1 / 250, 1 / 2500, 12)
FACTS = yaml.safe_load((Path(__file__).parents[1] / "reference" / "thermal_arithmetic.yaml").read_text())["entries"]


def species(mass: float, shape: str = "atom", **changes: object) -> Species:
    """A species of some mass [u] with plausible numbers inside."""
    size = {"atom": 0, "linear": 1, "nonlinear": 3}[shape]
    plain = Species(
        composition=(("H", 1),),
        charge=0,
        multiplicity=2,
        mass=mass * m_u,
        shape=shape,
        moments=np.array([1.1, 2.3, 3.0])[:size] * 1e-46,
        symmetry_number=1,
        optical_isomers=1,
        frequencies=np.array([900.0, 1400.0, 3000.0])[:size] * PER_CM,
        imaginary_frequency=None,
        zero_point_energy=0.0,
        electronic_energy=0.0,
        spin_orbit_lowering=0.0,
        degeneracies=np.array([2.0]),
        level_energies=np.zeros(1),
    )
    return replace(plain, **changes)


ATOM = species(1.008)
DIATOMIC = species(2.016, "linear", symmetry_number=2, zero_point_energy=4.0e-20)
RADICAL = species(16.0, "nonlinear", zero_point_energy=5.0e-20, electronic_energy=-2.0e-20)
SADDLE = species(
    3.024, "linear", imaginary_frequency=1500 * PER_CM, zero_point_energy=3.0e-20, electronic_energy=8.0e-20
)


def evaluate(
    reactants: list[Species], products: list[Species], saddle: Species, tunnelling: str = "none", **more: object
) -> ReactionRates:
    return evaluate_reaction(
        [participant(one, GRID, bar) for one in reactants],
        [participant(one, GRID, bar) for one in products],
        participant(saddle, GRID, bar),
        tunnelling=tunnelling,
        **more,
    )


@pytest.mark.parametrize("entry", [e for e in FACTS if e["id"].startswith("J-eyring-k")], ids=lambda e: e["id"])
def test_eyring_equation(entry: dict) -> None:
    inputs, T = entry["inputs"], np.array([entry["inputs"]["temperature_K"]])
    log_saddle = np.array([inputs["activation_entropy_J_per_mol_K"] / R])

    log_k = log_rate_coefficient(log_saddle, np.zeros(1), inputs["activation_enthalpy_kJ_per_mol"] * kilo / N_A, T)

    assert np.exp(log_k)[0] == pytest.approx(entry["value"], rel=1e-8)


@pytest.mark.parametrize("entry", [e for e in FACTS if e["id"].startswith("J-kT-over-h")], ids=lambda e: e["id"])
def test_universal_frequency(entry: dict) -> None:
    T = np.array([entry["inputs"]["temperature_K"]])

    assert np.exp(log_rate_coefficient(np.zeros(1), np.zeros(1), 0.0, T))[0] == pytest.approx(
        entry["value"], rel=1e-9
    )


def test_atom_and_atom_meet_as_hard_spheres() -> None:
    # two atoms and a saddle that is a rigid rotor of the same reduced mass give pi d^2 <v> (McQuarrie)
    other = species(4.0)
    mass, distance = ATOM.mass * other.mass / (ATOM.mass + other.mass), 3.0e-10
    pair = replace(
        SADDLE,
        mass=ATOM.mass + other.mass,
        moments=np.array([mass * distance**2]),
        frequencies=np.zeros(0),
        degeneracies=np.array([4.0]),
        zero_point_energy=0.0,
        electronic_energy=0.0,
    )

    rates = evaluate([ATOM, other], [pair], pair)

    np.testing.assert_allclose(
        rates.forward, np.pi * distance**2 * np.sqrt(8 * k * GRID / (np.pi * mass)), rtol=1e-12
    )


def test_exchange_counts_both_ends_of_the_molecule() -> None:
    symmetric = replace(SADDLE, symmetry_number=2)

    assert path_degeneracy([ATOM, DIATOMIC], symmetric, degenerate=True) == 2.0  # H + H2
    assert path_degeneracy([ATOM, DIATOMIC], SADDLE) == 2.0  # D + H2, whose saddle D-H-H has no symmetry
    exchange = evaluate([ATOM, DIATOMIC], [DIATOMIC, ATOM], symmetric, degenerate=True)
    labelled = evaluate([ATOM, DIATOMIC], [replace(DIATOMIC, symmetry_number=1), ATOM], SADDLE)
    # a label that weighs nothing cannot change the rate
    np.testing.assert_allclose(exchange.forward, labelled.forward, rtol=1e-13)


def test_inversion_has_one_way() -> None:
    pyramid, plane = species(17.0, "nonlinear", symmetry_number=3), species(17.0, "nonlinear", symmetry_number=6)

    assert path_degeneracy([pyramid], plane, degenerate=True) == 1.0


def test_mirror_images_interconvert_over_one_plane_saddle() -> None:
    twisted = species(34.0, "nonlinear", symmetry_number=2, optical_isomers=2)
    plane = species(34.0, "nonlinear", symmetry_number=2)

    assert path_degeneracy([twisted], plane, degenerate=True) == 1.0


def test_chiral_saddle_has_two_ways() -> None:
    assert path_degeneracy([ATOM, RADICAL], replace(SADDLE, optical_isomers=2)) == 2.0


def test_degenerate_reaction_is_at_equilibrium_with_itself() -> None:
    rates = evaluate([ATOM, DIATOMIC], [DIATOMIC, ATOM], SADDLE, "eckart", degenerate=True)

    np.testing.assert_allclose(rates.K_c, 1.0, rtol=1e-12)
    np.testing.assert_allclose(rates.forward, rates.reverse, rtol=1e-12)


def test_extent_of_a_reaction_with_itself_has_no_factor_of_a_half() -> None:
    # A + A and A + A' with a label that weighs nothing: half as many unlike pairs of each kind, two saddles for them
    saddle = replace(SADDLE, symmetry_number=2)
    alike = evaluate([ATOM, ATOM], [DIATOMIC], saddle)
    unlike = evaluate([ATOM, ATOM], [replace(DIATOMIC, symmetry_number=1)], replace(saddle, symmetry_number=1))

    # with [A] = [A'] = x: total extent k(alike) (2x)^2 = 2 k(alike) x^2 + k(unlike) x^2
    np.testing.assert_allclose(4 * alike.forward, 2 * alike.forward + unlike.forward, rtol=1e-13)


def test_explicit_path_degeneracy_scales_both_ways() -> None:
    plain = evaluate([ATOM, DIATOMIC], [RADICAL], SADDLE)
    scaled = evaluate([ATOM, DIATOMIC], [RADICAL], SADDLE, explicit_path_degeneracy=6.0)

    assert plain.path_degeneracy == plain.computed_path_degeneracy == scaled.computed_path_degeneracy == 2.0
    np.testing.assert_allclose(scaled.forward / plain.forward, 3.0, rtol=1e-12)
    np.testing.assert_allclose(scaled.reverse / plain.reverse, 3.0, rtol=1e-12)


@settings(max_examples=25, deadline=None)
@given(
    energy=st.floats(min_value=-1.0e-19, max_value=1.0e-19),
    barrier=st.floats(min_value=-2.0e-20, max_value=2.0e-19),
    tunnelling=st.sampled_from(["none", "wigner", "eckart"]),
    products=st.integers(min_value=1, max_value=3),
)
def test_detailed_balance(energy: float, barrier: float, tunnelling: str, products: int) -> None:
    last = replace(RADICAL, electronic_energy=energy)
    rates = evaluate(
        [ATOM, DIATOMIC], [last, ATOM, ATOM][:products], replace(SADDLE, electronic_energy=barrier), tunnelling
    )

    np.testing.assert_allclose(rates.forward / rates.reverse, rates.K_c, rtol=1e-11)  # rounding of exp(40)
    bare = rates.forward_without_tunnelling / rates.reverse_without_tunnelling
    np.testing.assert_allclose(bare, rates.K_c, rtol=1e-11)
    np.testing.assert_allclose(rates.forward, rates.forward_without_tunnelling * rates.tunnelling_factors, rtol=1e-12)
    np.testing.assert_allclose(np.log(rates.K_p), -rates.delta_G / (R * GRID), rtol=1e-10, atol=1e-10)
    np.testing.assert_allclose(rates.K_p, rates.K_c * (k * GRID / bar) ** (products - 2), rtol=1e-10)


def test_barriers_are_with_and_without_zero_point_energy() -> None:
    lowered = replace(ATOM, spin_orbit_lowering=1.0e-21)
    rates = evaluate([lowered, DIATOMIC], [RADICAL], SADDLE)

    assert rates.classical_barrier_forward == pytest.approx(N_A * 8.1e-20)
    assert rates.barrier_forward == pytest.approx(N_A * (8.1e-20 + 3.0e-20 - 4.0e-20))
    assert rates.barrier_reverse == pytest.approx(N_A * (8.0e-20 + 3.0e-20 - 3.0e-20))
    assert rates.reaction_energy == pytest.approx(rates.barrier_forward - rates.barrier_reverse)


def test_rate_too_small_for_a_double_keeps_its_logarithm() -> None:
    high = replace(SADDLE, electronic_energy=3.0e-18)

    rates = evaluate([ATOM, DIATOMIC], [RADICAL], high)

    assert rates.forward[0] == 0.0
    assert np.all(np.isfinite(rates.log_forward))


def test_saddle_without_reaction_coordinate_is_refused() -> None:
    with pytest.raises(ValueError, match="imaginary"):
        evaluate([ATOM, DIATOMIC], [RADICAL], replace(SADDLE, imaginary_frequency=None))


def test_participants_share_one_grid() -> None:
    odd = participant(ATOM, GRID + 1.0, bar)
    with pytest.raises(ValueError, match="grid"):
        evaluate_reaction([odd], [odd], participant(SADDLE, GRID, bar), tunnelling="none")
