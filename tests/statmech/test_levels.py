"""Built-in electronic levels against published ones, and what a species gets of them."""

from pathlib import Path

import pytest
import yaml
from scipy.constants import c, centi, h, k

from rateloom.statmech import GROUND_TERMS, Choices, ground_term, spin_orbit_lowering
from rateloom.statmech.electronic import electronic_levels
from rateloom.statmech.levels import partition_above_mean

PER_CM = h * c / centi
ENTRIES = yaml.safe_load((Path(__file__).parents[1] / "reference" / "electronic_levels.yaml").read_text())["entries"]
COMPOSITIONS = {"OH": (("H", 1), ("O", 1)), "NO": (("N", 1), ("O", 1)), "ClO": (("Cl", 1), ("O", 1))}
OH = COMPOSITIONS["OH"]


def entries(prefix: str) -> list[pytest.ParameterSet]:
    return [pytest.param(entry, id=entry["id"]) for entry in ENTRIES if entry["id"].startswith(prefix)]


def composition(species: str) -> tuple[tuple[str, int], ...]:
    return COMPOSITIONS.get(species, ((species, 1),))


@pytest.mark.parametrize("entry", entries("K-levels-"))
def test_levels_are_the_published_ones(entry: dict) -> None:
    term = ground_term(composition(entry["inputs"]["species"]), 0)

    assert term is not None
    assert [degeneracy for degeneracy, _ in term.levels_per_cm] == [degeneracy for degeneracy, _ in entry["value"]]
    energies = [energy for _, energy in entry["value"]]
    assert [energy for _, energy in term.levels_per_cm] == pytest.approx(energies, abs=entry["tolerance"]["size"])
    assert term.term == entry["inputs"]["term"]


@pytest.mark.parametrize("entry", entries("K-lowering-"))
def test_lowerings_are_the_published_ones(entry: dict) -> None:
    term = ground_term(composition(entry["inputs"]["species"]), 0)

    assert term is not None
    assert term.lowering / PER_CM == pytest.approx(entry["value"], rel=entry["tolerance"]["size"])


@pytest.mark.parametrize("entry", entries("K-qel-"))
def test_partition_functions_from_the_lowest_level(entry: dict) -> None:
    term = ground_term(composition(entry["inputs"]["species"]), 0)

    assert term is not None
    total = partition_above_mean(term.levels, 0.0, entry["inputs"]["temperature_K"])
    assert total == pytest.approx(entry["value"], rel=entry["tolerance"]["size"])


@pytest.mark.parametrize("key", [pytest.param(key, id=str(key)) for key in GROUND_TERMS])
def test_every_term_holds_the_states_that_its_symbol_counts(key: tuple[tuple[str, int], ...]) -> None:
    term = GROUND_TERMS[key]
    orbital = {"S": 1, "P": 3, "Pi": 2}[term.term[1:]]

    assert int(term.term[0]) == term.multiplicity
    assert sum(degeneracy for degeneracy, _ in term.levels) == term.multiplicity * orbital
    assert list(key) == sorted(key)
    assert term.levels[0][1] == 0.0
    assert term.source


def test_hot_levels_fill_the_whole_term() -> None:
    term = GROUND_TERMS[("O", 1),]

    q = partition_above_mean(term.levels, term.lowering, 1e7)

    assert q == pytest.approx(9, rel=1e-6)  # the next term, from the mean square of the levels, is below 1e-8


def test_no_temperature_no_partition_function() -> None:
    with pytest.raises(ValueError, match="above 0 K"):
        partition_above_mean(((2, 0.0),), 0.0, 0.0)


def test_an_atom_takes_its_fine_structure_unasked() -> None:
    electronic, remarks = electronic_levels((("Cl", 1),), 0, 2, Choices())

    assert [degeneracy for degeneracy, _ in electronic.levels] == [4, 2]
    assert electronic.lowering == pytest.approx(882.3515 / 3 * PER_CM)  # 2P: a third of the splitting
    assert "NIST" in electronic.levels_source
    assert remarks == ()


def test_a_radical_is_offered_its_fine_structure() -> None:
    electronic, (remark,) = electronic_levels(OH, 0, 2, Choices())

    assert electronic.levels == ((2, 0.0),)
    assert electronic.lowering == 0.0
    assert remark.code == "fine-structure-available"
    assert "`electronic_levels: [[2, 0 cm-1], [2, 139.2 cm-1]]`" in remark.message
    assert "`spin_orbit_lowering: 69.6 cm-1`" in remark.message


def test_the_offer_says_what_it_does_to_a_rate() -> None:
    """With energies from the mean, OH has 2 exp(+69.6 x) + 2 exp(-69.6 x) instead of 2 states."""
    _, (remark,) = electronic_levels(OH, 0, 2, Choices())

    x = PER_CM / (k * 298.15)
    expected = 2 / (2 * 2.718281828459045 ** (69.6 * x) + 2 * 2.718281828459045 ** (-69.6 * x))
    assert remark.value == f"factor {expected:.3g} at 298.15 K"


def test_levels_without_the_lowering_are_still_told_of_it() -> None:
    levels = ((2, 0.0), (2, 139.2 * PER_CM))

    electronic, (remark,) = electronic_levels(OH, 0, 2, Choices(electronic_levels=levels))

    assert electronic.levels == levels
    assert electronic.levels_source == "job file"
    assert "electronic_levels" not in remark.message
    assert "`spin_orbit_lowering: 69.6 cm-1`" in remark.message


def test_what_the_job_file_says_in_full_is_taken_without_a_word() -> None:
    levels = ((2, 0.0), (2, 140 * PER_CM))
    choices = Choices(electronic_levels=levels, spin_orbit_lowering=70 * PER_CM)

    electronic, remarks = electronic_levels(OH, 0, 2, choices)

    assert (electronic.levels, electronic.lowering) == (levels, 70 * PER_CM)
    assert remarks == ()


def test_an_atom_of_another_multiplicity_gets_no_built_in_levels() -> None:
    electronic, (remark,) = electronic_levels((("O", 1),), 0, 1, Choices())

    assert electronic.levels == ((1, 0.0),)
    assert electronic.lowering == 0.0
    assert (remark.code, remark.value, remark.limit) == ("not-the-ground-term", "1", "3")


@pytest.mark.parametrize(("symbol", "charge", "name"), [("Ti", 0, "Ti"), ("C", 1, "C of charge +1")])
def test_an_atom_without_data_is_told(symbol: str, charge: int, name: str) -> None:
    _, (remark,) = electronic_levels(((symbol, 1),), charge, 2, Choices())

    assert remark.code == "no-fine-structure-data"
    assert f"the atom {name}." in remark.message


@pytest.mark.parametrize("multiplicity", [1, 2, 3])
def test_any_other_species_has_its_spin_states(multiplicity: int) -> None:
    electronic, remarks = electronic_levels((("C", 1), ("H", 2)), 0, multiplicity, Choices())

    assert electronic.levels == ((multiplicity, 0.0),)
    assert remarks == ()


def test_levels_are_counted_from_the_lowest() -> None:
    electronic, _ = electronic_levels((("C", 1), ("H", 2)), 0, 3, Choices(electronic_levels=((3, 1e-21), (1, 5e-21))))

    assert electronic.levels == ((3, 0.0), (1, 4e-21))


def test_a_single_level_is_not_lowered() -> None:
    assert spin_orbit_lowering(((4, 0.0),)) == 0.0
