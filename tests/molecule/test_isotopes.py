"""Isotopic masses against the atomic mass evaluation, and the isotopes a program's masses stand for."""

from pathlib import Path

import numpy as np
import periodictable
import pytest
import yaml
from scipy.constants import atomic_mass

from rateloom.molecule import atomic_masses, atomic_number, isotope_labels, isotope_mass, printed_isotopes

ENTRIES = yaml.safe_load((Path(__file__).parents[1] / "reference" / "masses.yaml").read_text())["entries"]


def entries(prefix: str) -> list[pytest.ParameterSet]:
    return [pytest.param(entry, id=entry["id"]) for entry in ENTRIES if entry["id"].startswith(prefix)]


@pytest.mark.parametrize("entry", entries("L-mass-"))
def test_isotopic_masses_are_those_of_the_mass_evaluation(entry: dict) -> None:
    symbol, number = entry["inputs"]["element"], entry["inputs"]["mass_number"]

    mass = isotope_mass(symbol, f"{number}{symbol}")

    assert mass == pytest.approx(entry["value"], abs=entry["tolerance"]["size"])


@pytest.mark.parametrize("entry", entries("L-most-abundant-"))
def test_the_default_isotope_is_the_most_abundant_one(entry: dict) -> None:
    symbol = entry["inputs"]["element"]

    assert round(isotope_mass(symbol)) == entry["value"]


def test_an_element_without_abundant_isotopes_has_its_longest_lived_one() -> None:
    assert round(isotope_mass("Tc")) == 98  # the mass number in brackets of periodic tables


@pytest.mark.parametrize("entry", entries("L-molecule-"))
def test_masses_of_molecules_add_up(entry: dict) -> None:
    atoms: list[str] = []
    isotopes: list[tuple[int, str]] = []
    for name, count in entry["inputs"]["composition"]:
        symbol = name.rstrip("0123456789")
        for _ in range(count):
            atoms.append(symbol)
            isotopes.append((len(atoms), f"{name[len(symbol) :]}{symbol}"))

    total = atomic_masses(tuple(atoms), tuple(isotopes)).sum() / atomic_mass

    assert total == pytest.approx(entry["value"], abs=entry["tolerance"]["size"])


def test_isotopes_written_in_two_ways_have_one_name() -> None:
    names = isotope_labels(("H", "H", "H", "C", "C"), ((1, "D"), (2, "2H"), (3, "1H"), (4, "13C"), (5, "12C")))

    assert names == ("D", "D", "H", "13C", "C")


@pytest.mark.parametrize(
    ("isotopes", "text"),
    [
        (((1, "D"),), "D is no isotope of O"),
        (((2, "13C"),), "13C is no isotope of H"),
        (((2, "heavy"),), "'heavy' is no isotope: write D, T or mass number and symbol such as 13C"),
        (((2, "99H"),), "no isotope 99H is known; choose a mass number such as 1H"),
        (((4, "D"),), "isotope D is set on atom 4, but the atoms are numbered 1 to 3"),
    ],
)
def test_a_label_that_does_not_fit_is_refused(isotopes: tuple[tuple[int, str], ...], text: str) -> None:
    with pytest.raises(ValueError, match=text):
        atomic_masses(("O", "H", "H"), isotopes)


@pytest.mark.parametrize("symbol", ["Xx", "D", "n", ""])
def test_what_is_no_element_is_refused(symbol: str) -> None:
    with pytest.raises(ValueError, match="there is no element"):
        atomic_number(symbol)


def test_masses_of_a_deuterated_run_are_recognised() -> None:
    isotopes, remarks = printed_isotopes(("C", "H", "Cl"), np.array([13.0034, 2.0141, 34.9689]))

    assert isotopes == ((1, "13C"), (2, "D"))
    assert [remark.code for remark in remarks] == ["isotopes-from-output"]
    assert remarks[0].value == "1: 13C, 2: D"


@pytest.mark.parametrize("symbol", ["H", "C", "N", "O", "F", "Si", "P", "S", "Cl", "Br", "I", "B", "Se", "Cu", "Zn"])
def test_an_average_atomic_weight_is_no_other_isotope(symbol: str) -> None:
    weight = periodictable.elements.symbol(symbol).mass  # what some programs print for every atom

    isotopes, remarks = printed_isotopes((symbol,), np.array([weight]))

    assert isotopes == ()
    assert {remark.code for remark in remarks} <= {"masses-not-isotopic"}


def test_masses_that_are_not_printed_say_nothing() -> None:
    assert printed_isotopes(("H",), None) == ((), ())
