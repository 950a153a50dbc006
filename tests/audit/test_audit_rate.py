"""Rate coefficients that cannot be, or hang on what transition state theory knows least about."""

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from ase.build import molecule
from scipy.constants import angstrom, c, centi, h, k

from rateloom.audit.collision import enclosing_radius
from rateloom.audit.fit import fit_remarks
from rateloom.audit.limits import Limits
from rateloom.audit.rate import rate_remarks
from rateloom.calculation.record import Calculation, Level
from rateloom.fits import fit_rates
from rateloom.molecule import atomic_masses
from rateloom.rates import ReactionRates, hard_sphere_rate_coefficient
from rateloom.statmech import Assembly, Choices, assemble

LIMITS = Limits()
GRID = np.linspace(300.0, 2000.0, 35)
PER_CM = c / centi


def assembly(name: str, **changes: Any) -> Assembly:
    atoms = molecule(name)
    modes = 1 if len(atoms) == 2 else max(3 * len(atoms) - 6, 0)
    record = Calculation(
        program="test",
        program_version="1",
        level=Level("B3LYP", "6-31G*"),
        charge=0,
        multiplicity=1 + sum(atoms.numbers) % 2,
        atoms=tuple(atoms.symbols),
        geometry_angstrom=atoms.positions,
        energies_hartree={"DFT": -40.0},
        energy_kind="DFT",
        frequencies_per_cm=np.linspace(800.0, 3000.0, modes),
        finished=True,
    )
    return assemble(replace(record, **changes), None, Choices(), is_saddle=False)


METHANE, ATOM = assembly("CH4"), assembly("H")
SADDLE = replace(METHANE.species, imaginary_frequency=1400 * PER_CM)  # type: ignore[type-var]


def rates(
    forward: Any = 1e-20, reverse: Any = 1e-20, factors: Any = 1.0, tunnelling: str = "eckart"
) -> ReactionRates:
    forward, reverse, factors = (np.broadcast_to(x, GRID.shape).astype(float) for x in (forward, reverse, factors))
    zero = np.zeros(len(GRID))
    return ReactionRates(
        temperatures=GRID,
        forward=forward,
        reverse=reverse,
        forward_without_tunnelling=forward / factors,
        reverse_without_tunnelling=reverse / factors,
        log_forward=np.log(forward),
        log_reverse=np.log(reverse),
        tunnelling_factors=factors,
        K_c=forward / reverse,
        K_p=forward / reverse,
        delta_H=zero,
        delta_S=zero,
        delta_G=zero,
        pressure=1e5,
        classical_barrier_forward=5e4,
        classical_barrier_reverse=5e4,
        barrier_forward=5e4,
        barrier_reverse=5e4,
        reaction_energy=0.0,
        imaginary_frequency=1400 * PER_CM,
        tunnelling=tunnelling,
        path_degeneracy=1.0,
        computed_path_degeneracy=1.0,
        degenerate=False,
    )


def codes(evaluated: ReactionRates, reactants: Any = (METHANE, ATOM), products: Any = (METHANE, ATOM)) -> list[str]:
    return [remark.code for remark in rate_remarks(evaluated, reactants, products, SADDLE, LIMITS)]


@pytest.mark.parametrize(
    ("name", "diameter"),
    # Lennard-Jones diameters [angstrom] of R. C. Reid, J. M. Prausnitz, B. E. Poling, The Properties of Gases and
    # Liquids, 4th ed., McGraw-Hill, 1987, app. B (from memory); a sphere that holds the molecule is larger.
    [("CH4", 3.758), ("CO2", 3.941), ("C2H6", 4.443), ("N2", 3.798), ("H2O", 2.641), ("C6H6", 5.349)],
)
def test_the_sphere_holds_the_molecule_and_little_more(name: str, diameter: float) -> None:
    atoms = molecule(name)
    symbols = tuple(atoms.symbols)

    radius = enclosing_radius(symbols, atomic_masses(symbols), atoms.positions * angstrom) / angstrom

    assert diameter < 2 * radius < 1.75 * diameter  # water attracts beyond its size, and benzene is flat


def test_a_rate_above_the_collision_limit_says_where() -> None:
    (remark,) = rate_remarks(rates(forward=2e-15 * (GRID / 300)), (METHANE, ATOM), (METHANE, ATOM), SADDLE, LIMITS)

    assert remark.code == "above-collision-limit"
    assert "between" in remark.message
    assert "2000 K" in remark.message
    assert "forward" in remark.message
    assert remark.value.endswith("cm3 molecule-1 s-1")
    assert codes(rates(reverse=1e-10)) == ["above-collision-limit"]


def test_a_usual_abstraction_is_below_the_collision_limit() -> None:
    assert codes(rates(forward=3e-10 * centi**3)) == []  # the usual order of that limit, at 300 K


def test_identical_partners_collide_half_as_often() -> None:
    pair = (METHANE, METHANE)
    mass = METHANE.species.mass  # type: ignore[union-attr]
    facts = METHANE.facts
    assert facts is not None
    diameter = 2 * enclosing_radius(facts.labels, facts.masses, facts.positions)
    limit = hard_sphere_rate_coefficient(mass / 2, diameter, GRID)

    assert codes(rates(forward=0.49 * limit), pair) == []
    assert codes(rates(forward=0.51 * limit), pair) == ["above-collision-limit"]


def test_ions_and_single_molecules_have_no_such_limit() -> None:
    assert codes(rates(forward=1e-10), (METHANE,)) == []
    assert codes(rates(forward=1e-10), (METHANE, assembly("H", charge=1, multiplicity=1))) == []


@pytest.mark.parametrize(
    ("forward", "molecules", "expected"),
    [
        (1e-47, (METHANE, ATOM), ["too-slow-to-matter"]),  # 1e-41 cm3
        (1e-45, (METHANE, ATOM), []),
        (1e-31, (METHANE,), ["too-slow-to-matter"]),
        (1e-29, (METHANE,), []),
    ],
)
def test_rates_nobody_could_notice(forward: float, molecules: Any, expected: list[str]) -> None:
    assert codes(rates(forward=forward), molecules) == expected


def test_one_noticeable_temperature_is_enough() -> None:
    assert codes(rates(forward=np.where(GRID > 1900, 1e-30, 1e-60))) == []


def test_wigner_fails_when_cold() -> None:
    reduced = h * 1400 * PER_CM / (k * GRID)
    (remark,) = rate_remarks(
        rates(factors=1 + reduced**2 / 24, tunnelling="wigner"), (METHANE, ATOM), (METHANE, ATOM), SADDLE, LIMITS
    )

    assert remark.code == "wigner-beyond-validity"
    assert remark.value == f"h nu / k T {reduced[0]:.2f}"
    # h nu / k T = 4 at 1400 cm-1 x 1.4388 cm K / 4 (the second radiation constant)
    assert "fails below 504 K" in remark.message
    assert codes(rates(factors=2.9, tunnelling="eckart")) == []


def test_a_large_tunnelling_factor_is_noted() -> None:
    (remark,) = rate_remarks(rates(factors=np.exp(1000 / GRID)), (METHANE, ATOM), (METHANE, ATOM), SADDLE, LIMITS)

    assert remark.code == "large-tunnelling-factor"
    assert remark.value == "28"  # exp(1000 / 300) = 28.03
    assert "at 300 K" in remark.message


def test_soft_modes_of_the_saddle_alone_decide() -> None:
    frequencies = np.array([50 * PER_CM, 900 * PER_CM])
    saddle = replace(SADDLE, frequencies=frequencies)
    soft_reactant = replace(METHANE, species=replace(SADDLE, frequencies=frequencies))

    (forward, reverse) = rate_remarks(rates(), (METHANE, ATOM), (METHANE, ATOM), saddle, LIMITS)
    balanced = rate_remarks(rates(), (soft_reactant, ATOM), (soft_reactant, ATOM), saddle, LIMITS)

    assert forward.code == reverse.code == "soft-modes-decide-rate"
    # From the zero-point level q = k T / h nu + 1/2, and two digits are printed.
    assert float(forward.value) == pytest.approx(np.log(k * 1000 / (h * 50 * PER_CM) + 0.5), abs=0.006)
    assert "saddle 50 cm-1" in forward.message
    assert balanced == ()


def test_an_expression_that_bends_like_the_rate_passes() -> None:
    log_rates = np.log(1e-20 * GRID**2 * np.exp(-5000 / GRID))
    fit = fit_rates(GRID, log_rates)

    assert fit_remarks("forward", fit, GRID, log_rates, LIMITS) == ()
    assert fit_remarks("forward", replace(fit, terms=()), GRID, log_rates, LIMITS) == ()
    assert fit_remarks("forward", fit, GRID[:4], log_rates[:4], LIMITS) == ()


def test_an_expression_without_the_curvature_is_found() -> None:
    # Two ways of a reaction, the easier one far narrower: no single expression carries the change.
    log_rates = np.log(np.exp(-12000 / GRID) + 1e-8 * np.exp(-500 / GRID))

    (remark,) = fit_remarks("reverse", fit_rates(GRID, log_rates), GRID, log_rates, LIMITS)

    assert remark.code == "curvature-not-carried"
    assert "the reverse expression" in remark.message


def test_rates_too_small_for_a_number_are_left_out() -> None:
    log_rates = np.log(1e-20) - 5000 / GRID
    fit = fit_rates(GRID, log_rates)
    log_rates[:3] = -np.inf

    assert fit_remarks("forward", fit, GRID, log_rates, LIMITS) == ()
