"""Factors of the partition function: closed formulas by other means, laws that hold for any input, refusals."""

from dataclasses import replace

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import c, centi, h, k, m_u, physical_constants, pi

from rateloom.statmech import Species, log_vibration_by_mode, partition_functions
from rateloom.statmech.partition import log_electronic, log_rotation, log_vibration

PER_CM = c / centi  # Hz
WATER = Species(
    composition=(("H", 2), ("O", 1)),
    charge=0,
    multiplicity=1,
    mass=18.0105646 * m_u,
    shape="nonlinear",
    moments=np.sort(h / (8 * pi**2 * np.array([27.8806, 14.5218, 9.2777]) * PER_CM)),
    symmetry_number=2,
    optical_isomers=1,
    frequencies=np.array([1595.0, 3657.0, 3756.0]) * PER_CM,
    imaginary_frequency=None,
    zero_point_energy=0.0,
    electronic_energy=0.0,
    spin_orbit_lowering=0.0,
    degeneracies=np.ones(1),
    level_energies=np.zeros(1),
)
temperatures_of_flames = st.floats(min_value=50.0, max_value=5000.0)


def test_total_is_the_product_of_the_factors() -> None:
    q = partition_functions(replace(WATER, optical_isomers=2), np.array([300.0, 2000.0]))

    parts = (q.log_translation, q.log_rotation, q.log_vibration, q.log_electronic, q.log_optical)
    np.testing.assert_array_equal(q.log_total, sum(parts[1:], parts[0]))
    assert q.log_optical == pytest.approx(np.log(2))


def test_translation_is_one_molecule_in_a_cube_of_its_thermal_wavelength() -> None:
    # Sackur-Tetrode constant of CODATA: S/R of 1 u at 1 K and 100 kPa is 5/2 + ln(q k T/p)
    published = physical_constants["Sackur-Tetrode constant (1 K, 100 kPa)"]
    one = replace(WATER, mass=m_u)

    q = partition_functions(one, np.array([1.0])).log_translation[0]

    assert 2.5 + q + np.log(k * 1.0 / 1e5) == pytest.approx(published[0], abs=1e-8)  # digits printed


@pytest.mark.parametrize("wavenumber", [1e-3, 1.0, 50.0, 1000.0, 4000.0])
def test_oscillator_keeps_its_digits(wavenumber: float) -> None:
    temperature = 300.0
    with mpmath.workdps(40):
        reduced = mpmath.mpf(h) * wavenumber * PER_CM / (mpmath.mpf(k) * temperature)
        exact = -mpmath.log(1 - mpmath.exp(-reduced))

        q = log_vibration(np.array([wavenumber * PER_CM]), np.array([temperature]))[0]

        # digits of a soft mode are those of its frequency; a hard one matters by its size beside other logarithms
        assert abs(q - exact) < 1e-13 * exact + 1e-16


def test_oscillator_is_the_sum_over_its_levels() -> None:
    reduced = h * 800.0 * PER_CM / (k * 1000.0)
    levels = np.exp(-reduced * np.arange(200))

    q = log_vibration(np.array([800.0]) * PER_CM, np.array([1000.0]))[0]

    assert q == pytest.approx(np.log(levels.sum()), rel=1e-13)


@pytest.mark.parametrize(("constant", "symmetry_number"), [(0.05, 1), (0.05, 2)])
def test_linear_rotor_is_nearly_the_sum_over_its_levels(constant: float, symmetry_number: int) -> None:
    temperature = 1000.0
    reduced = h * c * constant / centi / (k * temperature)
    j = np.arange(2000)
    moment = h / (8 * pi**2 * constant * PER_CM)

    q = log_rotation(np.array([moment]), symmetry_number, np.array([temperature]))[0]

    # the sum is 1/x + 1/3 + ...: the classical rotor is x/3 = 2.4e-5 low, the next term x^2/15 is below 1e-9
    levels = ((2 * j + 1) * np.exp(-reduced * j * (j + 1))).sum() / symmetry_number
    assert q == pytest.approx(np.log(levels) - np.log1p(reduced / 3), abs=1e-9)


def test_spherical_top_is_nearly_the_sum_over_its_levels() -> None:
    constant, temperature = 0.05, 1000.0
    reduced = h * c * constant / centi / (k * temperature)
    j = np.arange(2000)
    moments = np.full(3, h / (8 * pi**2 * constant * PER_CM))

    q = log_rotation(moments, 1, np.array([temperature]))[0]

    # sum of (2J+1)^2: classical times exp(x/4), by Poisson summation
    levels = ((2 * j + 1) ** 2 * np.exp(-reduced * j * (j + 1))).sum()
    assert q == pytest.approx(np.log(levels) - reduced / 4, abs=1e-12)


@settings(deadline=None)
@given(temperature=temperatures_of_flames, factor=st.floats(min_value=0.1, max_value=10.0))
def test_rotation_depends_on_moment_times_temperature(temperature: float, factor: float) -> None:
    one = log_rotation(WATER.moments * factor, 2, np.array([temperature]))
    other = log_rotation(WATER.moments, 2, np.array([temperature * factor]))

    np.testing.assert_allclose(one, other, rtol=1e-12)


@settings(deadline=None)
@given(
    temperature=temperatures_of_flames,
    wavenumbers=st.lists(st.floats(min_value=5.0, max_value=5000.0), min_size=1, max_size=6),
)
def test_modes_add_up_and_grow_with_temperature(temperature: float, wavenumbers: list[float]) -> None:
    frequencies, grid = np.array(wavenumbers) * PER_CM, temperature * np.array([1.0, 1.1])

    by_mode = log_vibration_by_mode(frequencies, grid)

    assert by_mode.shape == (2, len(wavenumbers))
    np.testing.assert_allclose(by_mode.sum(axis=1), log_vibration(frequencies, grid), rtol=1e-13, atol=1e-16)
    assert np.all(by_mode[1] > by_mode[0])
    assert np.all(by_mode >= 0)


def test_electronic_levels_are_counted_from_the_lowest() -> None:
    degeneracies, energies = np.array([4.0, 2.0]), np.array([0.0, 404.141 * h * PER_CM])

    cold, hot = np.exp(log_electronic(degeneracies, energies, np.array([5.0, 1e7])))

    assert cold == pytest.approx(4.0, rel=1e-12)
    assert hot == pytest.approx(6.0, rel=1e-4)  # h nu/k T is 6e-5


def test_atom_and_molecule_without_modes_have_nothing_inside() -> None:
    grid = np.array([300.0, 400.0])

    np.testing.assert_array_equal(log_rotation(np.zeros(0), 1, grid), np.zeros(2))
    np.testing.assert_array_equal(log_vibration(np.zeros(0), grid), np.zeros(2))


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"frequencies": np.array([0.0, 1e13, 1e13])}, "frequenc"),
        ({"moments": np.array([0.0, 1e-46, 1e-46])}, "moment"),
    ],
)
def test_senseless_species_are_refused(change: dict, words: str) -> None:
    with pytest.raises(ValueError, match=words):
        partition_functions(replace(WATER, **change), np.array([300.0]))


def test_temperatures_are_above_zero() -> None:
    with pytest.raises(ValueError, match="temperature"):
        partition_functions(WATER, np.array([0.0, 300.0]))
