"""How much faster is the Eckart factor over a grid than an adaptive integral for each temperature?"""

from time import perf_counter

import numpy as np
import pytest
from scipy.constants import N_A, c, centi, h, k, kilo, pi
from scipy.integrate import quad

from rateloom.rates import TUNNELLING_MODELS, Barrier

BARRIER = Barrier(62.8 * kilo / N_A, 49.8 * kilo / N_A, 1450 * c / centi)
GRID = 1 / np.linspace(1 / 300, 1 / 2500, 45)


def by_quad(barrier: Barrier, temperature: float) -> float:
    """The textbook form, integrated from the threshold to far above the barrier."""
    unit = h * barrier.imaginary_frequency / (2 * pi)
    v1, v2, thermal = barrier.forward / unit, barrier.reverse / unit, k * temperature / unit
    scale = 2 / (v1**-0.5 + v2**-0.5)
    cosh_d = np.cosh(2 * np.sqrt(v1 * v2 - pi**2 / 4))

    def integrand(energy: float) -> float:
        a, b = scale * np.sqrt(energy), scale * np.sqrt(energy - v1 + v2)
        probability = 1 - (np.cosh(a - b) + cosh_d) / (np.cosh(a + b) + cosh_d)
        return probability * np.exp((v1 - energy) / thermal) / thermal

    top = quad(integrand, max(0.0, v1 - v2), v1, epsrel=1e-8, limit=200)[0]
    return top + quad(integrand, v1, v1 + 40 * thermal, epsrel=1e-8, limit=200)[0]


@pytest.mark.benchmark
def test_grid_of_factors_against_a_loop_of_integrals(capsys: pytest.CaptureFixture[str]) -> None:
    TUNNELLING_MODELS["eckart"](BARRIER, GRID)
    start = perf_counter()
    for _ in range(20):
        grid = TUNNELLING_MODELS["eckart"](BARRIER, GRID).log_factors
    ours = (perf_counter() - start) / 20
    start = perf_counter()
    loop = [by_quad(BARRIER, temperature) for temperature in GRID]
    theirs = perf_counter() - start

    np.testing.assert_allclose(np.exp(grid), loop, rtol=1e-6)  # what the textbook form keeps of its digits
    with capsys.disabled():
        times = f"{1e3 * ours:.3g} ms; scipy quad {1e3 * theirs:.3g} ms; {theirs / ours:.0f} times"
        print(f"\nEckart, 45 temperatures: {times}")
    assert ours < theirs
