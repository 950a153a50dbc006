"""How much faster is the vectorised Eckart factor than one adaptive integral a temperature?"""

import timeit

import numpy as np
import pytest
from scipy.constants import N_A, c, centi, h, k, kilo, pi
from scipy.integrate import quad

from rateloom.rates import TUNNELLING_MODELS, Barrier

GRID = 1 / np.linspace(1 / 2500, 1 / 300, 45)  # as in the demo
BARRIERS = [  # forward and reverse [kJ mol-1], imaginary frequency [cm-1]
    (62.8, 49.8, 1450.0),
    (26.4, 81.6, 1350.0),
    (120.0, 60.0, 1800.0),
    (40.0, 40.0, 1150.0),
    (250.0, 20.0, 900.0),
]


def loop(barrier: Barrier, temperatures: np.ndarray) -> np.ndarray:
    """Integrate the textbook form over the energy once a temperature: what one writes on an afternoon."""
    unit = h * barrier.imaginary_frequency / (2 * pi)
    v1, v2 = barrier.forward / unit, barrier.reverse / unit
    length = 2 / (v1**-0.5 + v2**-0.5)
    constant = np.cosh(2 * np.sqrt(v1 * v2 - pi**2 / 4))

    def integrand(energy: float, beta: float) -> float:
        a, b = length * np.sqrt(energy), length * np.sqrt(energy - v1 + v2)
        probability = (np.cosh(a + b) - np.cosh(a - b)) / (np.cosh(a + b) + constant)
        return beta * probability * np.exp(beta * (v1 - energy))

    factors = []
    for temperature in temperatures:
        beta = unit / (k * temperature)
        threshold, end = max(0.0, v1 - v2), v1 + 45 / beta
        below = quad(integrand, threshold, v1, args=(beta,), epsrel=1e-9, limit=200)[0]
        factors.append(below + quad(integrand, v1, end, args=(beta,), epsrel=1e-9, limit=200)[0])
    return np.array(factors)


@pytest.mark.benchmark
def test_vectorised_eckart_beats_a_loop_over_quad(capsys: pytest.CaptureFixture[str]) -> None:
    barriers = [Barrier(f * kilo / N_A, r * kilo / N_A, nu * c / centi) for f, r, nu in BARRIERS]
    eckart = TUNNELLING_MODELS["eckart"]
    for barrier in barriers:
        # the same numbers, to the 1e-9 that the loop asks for and the square root at its threshold
        np.testing.assert_allclose(np.exp(eckart(barrier, GRID).log_factors), loop(barrier, GRID), rtol=1e-7)

    # side by side and the best of several, so that another load on the machine weighs on both
    vectorised, looped = [], []
    for _ in range(3):
        vectorised.append(timeit.timeit(lambda: [eckart(barrier, GRID) for barrier in barriers], number=10) / 10)
        looped.append(timeit.timeit(lambda: [loop(barrier, GRID) for barrier in barriers], number=1))
    ratio = min(looped) / min(vectorised)

    with capsys.disabled():
        print(
            f"\nEckart factors, {len(barriers)} barriers at {len(GRID)} temperatures: vectorised "
            f"{1e3 * min(vectorised):.2f} ms, quad loop {1e3 * min(looped):.0f} ms, ratio {ratio:.0f}"
        )
    assert ratio > 10
