"""Quantities with units: factors from CODATA through scipy, unusual units through pint."""

import math
from contextlib import suppress

import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.constants import Avogadro, bar, c, h, k, physical_constants

from rateloom.job.problems import Fault
from rateloom.job.units import ENERGY, FREQUENCY, LENGTH, LEVEL, PRESSURE, RATIO, TEMPERATURE, Kind, quantity

HARTREE = physical_constants["Hartree energy"][0]
KINDS = [ENERGY, FREQUENCY, LENGTH, LEVEL, PRESSURE, RATIO, TEMPERATURE]


@pytest.mark.parametrize(
    ("text", "kind", "value"),
    [
        ("300", TEMPERATURE, 300.0),
        ("300K", TEMPERATURE, 300.0),
        ("3e2 K", TEMPERATURE, 300.0),
        ("25 degC", TEMPERATURE, 298.15),
        ("1", PRESSURE, bar),
        ("100 kPa", PRESSURE, bar),
        ("750.0617 torr", PRESSURE, bar),
        ("-437.476", ENERGY, -437.476),
        ("-437.476 Eh", ENERGY, -437.476),
        ("−437.476 hartree", ENERGY, -437.476),  # the minus sign of a typeset table
        ("-1148580 kJ/mol", ENERGY, -1148580e3 / Avogadro / HARTREE),
        ("1 MJ / mol", ENERGY, 1e6 / Avogadro / HARTREE),
        ("139.2", LEVEL, 139.2e2 * h * c),
        ("139.2 cm^-1", LEVEL, 139.2e2 * h * c),
        ("139.2 cm⁻¹", LEVEL, 139.2e2 * h * c),
        ("139.2 1/cm", LEVEL, 139.2e2 * h * c),
        ("1 meV", LEVEL, physical_constants["electron volt"][0] / 1000),
        ("1.665 kJ·mol-1", LEVEL, 1665 / Avogadro),
        ("4.1731 THz", LEVEL, 4.1731e12 * h),
        ("1580.0", FREQUENCY, 1580.0),
        ("1580D0 cm**-1", FREQUENCY, 1580.0),
        ("30 THz", FREQUENCY, 30e12 / c / 100),
        ("1.09 Å", LENGTH, 1.09),
        ("109 pm", LENGTH, 1.09),
        ("1 bohr", LENGTH, physical_constants["Bohr radius"][0] * 1e10),
        ("5 %", RATIO, 0.05),
        ("5%", RATIO, 0.05),
        ("0.05", RATIO, 0.05),
    ],
)
def test_quantities_are_converted(text: str, kind: Kind, value: float) -> None:
    # 1e-9: pint carries its own CODATA issue; the torr is rounded to 7 digits
    assert quantity(text, kind) == pytest.approx(value, rel=1e-7 if "torr" in text else 1e-9)


def test_a_number_in_the_unit_of_the_records_keeps_its_digits() -> None:
    assert quantity("-40.51838392847561 hartree", ENERGY) == -40.51838392847561


@pytest.mark.parametrize(
    ("text", "kind", "message"),
    [
        ("300 kg", TEMPERATURE, "'300 kg' is not a temperature"),
        ("1 K", PRESSURE, "'1 K' is not a pressure"),
        ("3 bananas", LEVEL, "the unit 'bananas' of '3 bananas' is not known"),
        ("0,977", RATIO, "'0,977' is no number"),
        ("1e999", TEMPERATURE, "'1e999' is no finite number"),
        ("nan", TEMPERATURE, "'nan' is no number"),
        (".inf", TEMPERATURE, "'.inf' is no number"),
        ("12:30", TEMPERATURE, "'12:30' is no number"),
        ("0x10", TEMPERATURE, "the unit 'x10' of '0x10' is not known"),
        ("", TEMPERATURE, "'' is no number"),
        ("1 K^9^9^9^9", TEMPERATURE, "the unit 'K9999' of '1 K^9^9^9^9' is not known"),
        ("1 __import__('os')", TEMPERATURE, "the unit \"__import__('os')\" of \"1 __import__('os')\" is not known"),
    ],
)
def test_what_is_no_such_quantity_is_refused(text: str, kind: Kind, message: str) -> None:
    with pytest.raises(Fault) as caught:
        quantity(text, kind)
    assert caught.value.message == message
    assert caught.value.advice.startswith(f"Write {kind.name} such as '{kind.example}'")


@given(st.text(max_size=90), st.sampled_from(KINDS))
def test_any_text_gives_a_number_or_a_fault(text: str, kind: Kind) -> None:
    for candidate in (text, f"1 {text}"):
        with suppress(Fault):
            assert math.isfinite(quantity(candidate, kind))


@given(st.floats(1.0, 1e4))
def test_energies_agree_whatever_the_unit(value: float) -> None:
    in_kelvin = k / HARTREE * value  # h c R: one energy, three spellings
    assert quantity(f"{in_kelvin!r} hartree", LEVEL) == pytest.approx(k * value, rel=1e-12)
    assert quantity(f"{k * value / (h * c * 100)!r} cm-1", LEVEL) == pytest.approx(k * value, rel=1e-12)
    assert quantity(f"{k * value * Avogadro / 1000!r} kJ/mol", LEVEL) == pytest.approx(k * value, rel=1e-12)
