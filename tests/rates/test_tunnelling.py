"""Tunnelling factors against published values, high-precision integrals and the laws they must keep."""

from itertools import pairwise
from pathlib import Path

import mpmath
import numpy as np
import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import N_A, c, centi, h, k, kilo, pi
from scipy.integrate import quad

from rateloom.rates import TUNNELLING_MODELS, Barrier
from rateloom.rates.tunnelling.eckart import log_probability

PER_CM = c / centi  # Hz
ENTRIES = yaml.safe_load((Path(__file__).parents[1] / "reference" / "tunnelling.yaml").read_text())["entries"]
FREQUENCY = 3.0e13  # Hz: the unit of energy where an entry gives ratios alone
UNIT = h * FREQUENCY / (2 * pi)
GRID = 1 / np.linspace(1 / 2500, 1 / 100, 45)


def entries(prefix: str) -> list:
    return [pytest.param(entry, id=entry["id"]) for entry in ENTRIES if entry["id"].startswith(prefix)]


def factors(model: str, barrier: Barrier, temperatures: np.ndarray) -> np.ndarray:
    return np.exp(TUNNELLING_MODELS[model](barrier, temperatures).log_factors)


def molar(forward: float, reverse: float, wavenumber: float) -> Barrier:
    return Barrier(forward * kilo / N_A, reverse * kilo / N_A, wavenumber * PER_CM)


def exact_eckart(barrier: Barrier, temperature: float) -> float:
    """The average of the textbook form of P, in arithmetic with so many digits that cancellation does not matter."""
    with mpmath.workdps(60 + int(barrier.forward / (h * barrier.imaginary_frequency) * 6)):
        unit = mpmath.mpf(h) * barrier.imaginary_frequency / (2 * mpmath.pi)
        low, high = (mpmath.mpf(v) / unit for v in sorted((barrier.forward, barrier.reverse)))
        beta = unit / (mpmath.mpf(k) * temperature)
        scale = 2 / (1 / mpmath.sqrt(low) + 1 / mpmath.sqrt(high))
        cosh_d = mpmath.cosh(2 * mpmath.sqrt(low * high - mpmath.pi**2 / 4)).real

        def integrand(root: mpmath.mpf) -> mpmath.mpf:
            energy = root**2  # the variable is the root: P has one at the threshold
            a, b = scale * root, scale * mpmath.sqrt(energy + high - low)
            probability = 1 - (mpmath.cosh(a - b) + cosh_d) / (mpmath.cosh(a + b) + cosh_d)
            return probability * mpmath.exp(-beta * (energy - low)) * beta * 2 * root

        top, end = mpmath.sqrt(low), mpmath.sqrt(low + 60 / beta + 60)
        panels = [top * i / 24 for i in range(25)] + [
            top + (end - top) * (mpmath.mpf(i) / 24) ** 2 for i in range(1, 25)
        ]
        return float(mpmath.log(mpmath.quad(integrand, panels, maxdegree=4)))


@pytest.mark.parametrize("entry", [p for p in entries("B-eckart") if "u" in p.values[0]["inputs"]])
def test_eckart_factors_in_reduced_units(entry: dict) -> None:
    reduced = entry["inputs"]
    barrier = Barrier(reduced["alpha1"] * UNIT, reduced["alpha2"] * UNIT, FREQUENCY)

    value = factors("eckart", barrier, np.array([h * FREQUENCY / (k * reduced["u"])]))[0]

    assert value == pytest.approx(entry["value"], rel=1e-8)  # the digits of the entry: it asks for 1e-5


@pytest.mark.parametrize("entry", [p for p in entries("B-eckart") if "u" not in p.values[0]["inputs"]])
def test_eckart_factors_of_real_barriers(entry: dict) -> None:
    given_ = entry["inputs"]
    barrier = molar(
        given_["barrier_forward_kJ_per_mol"],
        given_["barrier_reverse_kJ_per_mol"],
        given_["imaginary_frequency_per_cm"],
    )

    value = factors("eckart", barrier, np.array([given_["temperature_K"]]))[0]

    assert value == pytest.approx(entry["value"], rel=1e-8)


@pytest.mark.parametrize("entry", entries("B-probability"))
def test_transmission_probabilities(entry: dict) -> None:
    reduced = entry["inputs"]
    barrier = Barrier(reduced["alpha1"] * UNIT, reduced["alpha2"] * UNIT, FREQUENCY)
    energy = np.array([reduced["energy_over_V1"]]) * barrier.forward

    assert np.exp(log_probability(barrier, energy))[0] == pytest.approx(
        entry["value"], rel=entry["tolerance"]["size"]
    )


@pytest.mark.parametrize("entry", entries("B-wigner"))
def test_wigner_factors(entry: dict) -> None:
    barrier = molar(50.0, 50.0, entry["inputs"]["imaginary_frequency_per_cm"])

    value = factors("wigner", barrier, np.array([entry["inputs"]["temperature_K"]]))[0]

    assert value == pytest.approx(entry["value"], rel=entry["tolerance"]["size"])


CORNERS = [
    (1.0, 1.0, 3000.0, 100.0),
    (1.0, 1.000001, 3000.0, 100.0),
    (1.0, 400.0, 3000.0, 100.0),
    (1.36, 335.0, 1019.0, 100.0),
    (400.0, 399.0, 3000.0, 300.0),
    (147.0, 1.36, 1945.0, 100.0),
    (20.0, 20.001, 900.0, 206.0),
]


@pytest.mark.parametrize("corner", CORNERS, ids=str)
def test_eckart_integral_in_the_corners_of_its_range(corner: tuple[float, float, float, float]) -> None:
    forward, reverse, wavenumber, temperature = corner
    barrier = molar(forward, reverse, wavenumber)

    value = TUNNELLING_MODELS["eckart"](barrier, GRID).log_factors
    alone = TUNNELLING_MODELS["eckart"](barrier, np.array([temperature])).log_factors[0]

    assert alone == pytest.approx(exact_eckart(barrier, temperature), abs=1e-8)  # wanted: 1e-6
    if temperature == 100.0:
        assert value[-1] == pytest.approx(alone, abs=1e-8)  # whatever the rest of the grid


def test_eckart_meets_an_adaptive_integral_all_over_its_range() -> None:
    random = np.random.default_rng(20240607)
    for _ in range(25):
        low, ratio, wavenumber, temperature = np.exp(
            random.uniform(np.log([1.0, 1.0, 50.0, 100.0]), np.log([150.0, 8.0, 3000.0, 2500.0]))
        )
        barrier = molar(low, min(low * ratio, 400.0), wavenumber)
        thermal = k * temperature
        width = h * barrier.imaginary_frequency / (2 * pi)
        log_scale = TUNNELLING_MODELS["eckart"](barrier, np.array([temperature])).log_factors[0]

        def integrand(
            root: float, barrier: Barrier = barrier, thermal: float = thermal, log_scale: float = log_scale
        ) -> float:
            energy = np.array([root**2])
            log_boltzmann = (barrier.forward - energy) / thermal - log_scale
            return float(np.exp(log_probability(barrier, energy) + log_boltzmann)[0]) * 2 * root / thermal

        top = barrier.forward
        edges = np.sqrt(
            np.unique(
                np.concatenate(
                    [np.linspace(0, 1, 21) ** 2 * top, np.clip(top + width * np.arange(-8.0, 9.0), 0, None)]
                )
            )
        )
        far = np.sqrt(top + 45 * thermal + 10 * width)
        edges = np.concatenate([edges, np.linspace(edges[-1], max(far, edges[-1] * 1.01), 12)[1:]])
        total = sum(quad(integrand, a, b, epsrel=1e-10, epsabs=1e-13)[0] for a, b in pairwise(edges))
        assert total == pytest.approx(1.0, abs=1e-8), (barrier, temperature)


barriers = st.floats(min_value=1.0, max_value=400.0)
wavenumbers = st.floats(min_value=20.0, max_value=3000.0)


@settings(max_examples=25, deadline=None)
@given(forward=barriers, reverse=barriers, wavenumber=wavenumbers)
def test_factor_is_the_same_both_ways(forward: float, reverse: float, wavenumber: float) -> None:
    there = TUNNELLING_MODELS["eckart"](molar(forward, reverse, wavenumber), GRID).log_factors
    back = TUNNELLING_MODELS["eckart"](molar(reverse, forward, wavenumber), GRID).log_factors

    np.testing.assert_allclose(there, back, rtol=1e-10, atol=1e-10)  # rounding of E - V1 + V2


@settings(max_examples=25, deadline=None)
@given(forward=barriers, reverse=barriers, wavenumber=wavenumbers)
def test_factor_falls_with_temperature(forward: float, reverse: float, wavenumber: float) -> None:
    # GRID falls, so the factors rise; below 1, where reflection rules (shallow barriers), they may turn
    values = TUNNELLING_MODELS["eckart"](molar(forward, reverse, wavenumber), GRID).log_factors

    assert np.all(np.isfinite(values))
    strong = values > 0.2
    assert np.all(np.diff(values[strong]) > 0)


@settings(max_examples=25, deadline=None)
@given(alpha=st.floats(min_value=200.0, max_value=2000.0), ratio=st.floats(min_value=1.0, max_value=3.0))
def test_hot_eckart_barrier_has_wigners_curvature(alpha: float, ratio: float) -> None:
    u = 0.5
    barrier, hot = Barrier(alpha * UNIT, alpha * ratio * UNIT, FREQUENCY), np.array([h * FREQUENCY / (k * u)])

    eckart, wigner = (TUNNELLING_MODELS[name](barrier, hot).log_factors[0] for name in ("eckart", "wigner"))

    # what differs is of order u^4/1000 and, from the third and fourth derivatives of the barrier, u/alpha
    assert eckart == pytest.approx(wigner, abs=0.5 * u / alpha + 1e-3 * u**4)


def test_broad_high_barrier_approaches_the_parabola() -> None:
    u = 3.0
    barrier = Barrier(4000 * UNIT, 4000 * UNIT, FREQUENCY)

    value = factors("eckart", barrier, np.array([h * FREQUENCY / (k * u)]))[0]

    # (u/2)/sin(u/2) of an infinite parabola; the barrier is 4000 units high and its flattening counts as 1/4000
    assert value == pytest.approx((u / 2) / np.sin(u / 2), rel=1e-2)


@pytest.mark.parametrize(("forward", "reverse"), [(-3.0, 40.0), (40.0, -3.0), (0.0, 40.0)])
def test_without_a_barrier_on_one_side_the_factor_is_one(forward: float, reverse: float) -> None:
    given_ = TUNNELLING_MODELS["eckart"](molar(forward, reverse, 1200.0), GRID)

    np.testing.assert_array_equal(given_.log_factors, np.zeros(len(GRID)))
    (remark,) = given_.remarks
    assert remark.code == "no-eckart-barrier"
    assert f"{min(forward, reverse):.2f} kJ/mol" == remark.value


def test_no_tunnelling_is_a_factor_of_one() -> None:
    np.testing.assert_array_equal(factors("none", molar(50.0, 40.0, 1500.0), GRID), np.ones(len(GRID)))


def test_probability_of_a_thick_barrier_keeps_its_digits() -> None:
    barrier = molar(400.0, 380.0, 300.0)
    energy = 30.0 * kilo / N_A
    with mpmath.workdps(800):
        unit = mpmath.mpf(h) * barrier.imaginary_frequency / (2 * mpmath.pi)
        v1, v2, e = (mpmath.mpf(x) / unit for x in (barrier.forward, barrier.reverse, energy))
        scale = 2 / (1 / mpmath.sqrt(v1) + 1 / mpmath.sqrt(v2))
        a, b = scale * mpmath.sqrt(e), scale * mpmath.sqrt(e - v1 + v2)
        d = 2 * mpmath.sqrt(v1 * v2 - mpmath.pi**2 / 4)
        textbook = 1 - (mpmath.cosh(a - b) + mpmath.cosh(d)) / (mpmath.cosh(a + b) + mpmath.cosh(d))
        exact = float(mpmath.log(textbook))

    value = log_probability(barrier, np.array([energy]))[0]

    assert exact < -700  # beyond the smallest double
    assert value == pytest.approx(exact, rel=1e-12)
