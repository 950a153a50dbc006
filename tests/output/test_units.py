"""Units of the tables, against the definition of the mole and the litre."""

import pytest
from pint import UnitRegistry

from rateloom.output.units import concentration_unit, rate_unit

UNITS = ("cm3 molecule-1 s-1", "cm3 mol-1 s-1", "m3 mol-1 s-1", "L mol-1 s-1")
REGISTRY = UnitRegistry()
NAMES = {"molecule": "particle", "L": "liter", "cm": "centimeter", "m": "meter", "s": "second"}


def in_pint(unit: str) -> str:
    """Write a unit of ours the way pint reads it."""
    words = []
    for word in unit.split():
        letters = word.rstrip("-0123456789")
        power = word[len(letters) :] or "1"
        words.append(f"{NAMES.get(letters, letters)}**({power})")
    return " * ".join(words)


@pytest.mark.parametrize("unit", UNITS)
@pytest.mark.parametrize("order", [1, 2, 3])
def test_rate_units_have_the_size_that_pint_gives(unit: str, order: int) -> None:
    name, size = rate_unit(unit, order)
    quantity = REGISTRY.Quantity(1.0, in_pint(name))

    # A few roundings of double precision.
    assert quantity.to(f"meter**{3 * (order - 1)} / particle**{order - 1} / second").magnitude == pytest.approx(
        size, rel=1e-14
    )


@pytest.mark.parametrize("unit", UNITS)
@pytest.mark.parametrize("change", [-2, -1, 1, 2])
def test_concentration_units_have_the_size_that_pint_gives(unit: str, change: int) -> None:
    name, size = concentration_unit(unit, change)
    quantity = REGISTRY.Quantity(1.0, in_pint(name))

    assert quantity.to(f"(particle / meter**3)**({change})").magnitude == pytest.approx(size, rel=1e-14)


def test_a_first_order_rate_coefficient_and_a_pure_number_need_no_concentration() -> None:
    assert rate_unit("L mol-1 s-1", 1) == ("s-1", 1.0)
    assert concentration_unit("L mol-1 s-1", 0) == ("", 1.0)
