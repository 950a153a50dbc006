"""Rates and barriers of the demo's real calculations against evaluated rate coefficients and best barrier heights."""

from functools import cache
from pathlib import Path

import numpy as np
import pytest
import yaml
from scipy.constants import N_A, R, bar, c, calorie, centi, h, kilo

from rateloom.calculation import read_calculation
from rateloom.job import FrequencyScale
from rateloom.rates import Participant, ReactionRates, evaluate_reaction, participant
from rateloom.statmech import Choices, assemble

TESTS = Path(__file__).resolve().parents[1]
CALCULATIONS = TESTS.parent / "sample_outputs" / "calculations"
KCAL = kilo * calorie  # J
LEVEL = h * c / centi  # J per cm-1
TEMPERATURES = np.array([298.0, 400.0, 500.0, 700.0, 1000.0, 1500.0, 2000.0])
SCALE = FrequencyScale(zero_point=0.95, modes=0.93)  # of the demo
CHOICES = {
    # 2Pi: two levels; a calculation gives their mean (as in the demo)
    "oh": Choices(
        frequency_scale=SCALE,
        electronic_levels=((2, 0.0), (2, 139.2 * LEVEL)),
        spin_orbit_lowering=69.6 * LEVEL,
    ),
    # O(3P) meets H2 on two surfaces, 3A' and 3A", which touch at the collinear saddle: 3Pi
    "ts_h2_o": Choices(frequency_scale=SCALE, electronic_levels=((6, 0.0),), spin_orbit_lowering=0.0),
}


def entries(file: str) -> dict[str, dict]:
    return {e["id"]: e for e in yaml.safe_load((TESTS / "reference" / file).read_text(encoding="utf-8"))["entries"]}


@cache
def member(name: str, isotopes: tuple[tuple[int, str], ...] = (), *, relativistic: bool = True) -> Participant:
    """A species of the demo: geometry and frequencies BH&HLYP/6-31G**, energy CCSD(T)/aug-cc-pVDZ."""
    choices = CHOICES.get(name, Choices(frequency_scale=SCALE, isotopes=isotopes))
    if not relativistic:
        choices = Choices(frequency_scale=SCALE, spin_orbit_lowering=0.0)
    path, energy = CALCULATIONS / f"{name}.out.gz", read_calculation(CALCULATIONS / f"{name}_ccsdt.out.gz")
    frequencies = read_calculation(path) if path.exists() else None
    species = assemble(frequencies, energy, choices, is_saddle=name.startswith("ts_")).species
    assert species is not None
    return participant(species, TEMPERATURES, bar)


def rates(reactants: str, products: str, saddle: str, *, relativistic: bool = True) -> ReactionRates:
    left = [member(name, relativistic=relativistic) for name in reactants.split()]
    right = [member(name, relativistic=relativistic) for name in products.split()]
    return evaluate_reaction(left, right, member(saddle, relativistic=relativistic), tunnelling="eckart")


def published(entry: dict) -> np.ndarray:
    """The expression of an entry [m3 s-1]."""
    total = np.zeros_like(TEMPERATURES)
    for term in entry["inputs"]["terms"]:
        power = (TEMPERATURES / term["T_ref_K"]) ** term["n"]
        total += term["A"] * power * np.exp(-term["E_over_R_K"] / TEMPERATURES)
    return total * centi**3


def check(entry: dict, computed: np.ndarray) -> None:
    """Compare over the range of an evaluation, within what the level of theory allows.

    Barriers by CCSD(T)/aug-cc-pVDZ at geometries of a hybrid functional are good to 1.5 kcal/mol (the basis set alone
    makes 0.5 to 1, see the barriers below): a factor of exp(1.5 kcal/mol / RT), 12.6 at 298 K and 2.1 at 1000 K.
    Harmonic bends, the Eckart barrier and no recrossing add a factor of 2.
    """
    inside = (entry["inputs"]["valid_from_K"] <= TEMPERATURES) & (entry["inputs"]["valid_to_K"] >= TEMPERATURES)
    allowed = 2 * np.exp(1.5 * KCAL / (R * TEMPERATURES)) * entry["tolerance"]["size"]
    ratio = computed / published(entry)

    assert inside.sum() >= 3
    assert np.all((ratio < allowed)[inside]), ratio
    assert np.all((ratio > 1 / allowed)[inside]), ratio


@pytest.mark.parametrize(
    ("entry", "reactants", "products", "saddle"),
    [
        ("E-o-h2-gri", "h2 o", "oh h", "ts_h2_o"),
        ("E-oh-h2-michael", "h2 oh", "h2o h", "ts_h2_oh"),
    ],
)
def test_evaluated_rate_coefficients_are_met(entry: str, reactants: str, products: str, saddle: str) -> None:
    reaction = rates(reactants, products, saddle)

    assert not reaction.remarks
    check(entries("rate_expressions.yaml")[entry], reaction.forward)


def test_isotope_exchange_is_met_with_the_force_constants_of_the_light_molecules() -> None:
    atom, saddle = member("h", ((1, "D"),)), member("ts_h2_h", ((1, "D"),))
    assert saddle.species.symmetry_number == 1
    mixed = member("h2", ((1, "D"),))

    reaction = evaluate_reaction([atom, member("h2")], [mixed, member("h")], saddle, tunnelling="eckart")

    assert reaction.path_degeneracy == 2
    check(entries("rate_expressions.yaml")["E-d-h2-michael"], reaction.forward)
    # dissociation energies of H2 and HD: 36118.07 and 36405.83 cm-1, Y. P. Zhang, C. H. Cheng, J. T. Kim,
    # J. Stanojevic, E. E. Eyler, Phys. Rev. Lett. 92, 203003 (2004), from memory; harmonic, scaled: good to 3 %
    assert reaction.reaction_energy == pytest.approx(N_A * (36118.07 - 36405.83) * LEVEL, rel=0.03)


@pytest.mark.parametrize(
    ("entry", "reactants", "products", "saddle", "way"),
    [
        ("G-h-h2-h2-h-f-w2f12", "h h2", "h2 h", "ts_h2_h", "forward"),
        ("G-oh-h2-h2o-h-f-w2f12", "h2 oh", "h2o h", "ts_h2_oh", "forward"),
        ("G-oh-h2-h2o-h-r-w2f12", "h2 oh", "h2o h", "ts_h2_oh", "reverse"),
        ("G-h-n2-hn2-f-w2f12", "nnh", "n2 h", "ts_nnh_diss", "reverse"),
        ("G-h-n2-hn2-r-w2f12", "nnh", "n2 h", "ts_nnh_diss", "forward"),
    ],
)
def test_classical_barriers_are_near_the_best_ones(
    entry: str, reactants: str, products: str, saddle: str, way: str
) -> None:
    best = entries("barrier_heights.yaml")[entry]
    reaction = rates(reactants, products, saddle, relativistic=False)

    barrier = {"forward": reaction.classical_barrier_forward, "reverse": reaction.classical_barrier_reverse}[way]

    # aug-cc-pVDZ lacks half to one kcal/mol of the correlation energy that a new bond gains, twice that of the strong
    # O-H bond of water (its reaction energy is off by 1.0); the geometry of another method adds a few tenths
    assert barrier / KCAL == pytest.approx(best["value"], abs=1.7)
    assert best["unit"] == "kcal/mol"
