"""Eckart factors by another way: panels of Gauss-Legendre quadrature on the probability itself.

The package integrates by parts with a trapezoidal rule in another variable; nothing but the formula of the
transmission probability (C. Eckart, Phys. Rev. 35, 1303 (1930), in the form of H. S. Johnston, J. Heicklen, J. Phys.
Chem. 66, 532 (1962)) is common to both.
"""

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.constants import N_A, c, centi, h, k, kilo, pi

from rateloom.rates import TUNNELLING_MODELS, Barrier

FloatArray = NDArray[np.float64]
NODES, WEIGHTS = np.polynomial.legendre.leggauss(16)
ABOVE = 45.0
"""Energies this many k T above the barrier add less than the rounding of a double."""
EVEN_PANELS = 16
FINEST = 13
"""Panels at the threshold shrink to 2^-FINEST of the way, in the square root of the energy."""


def log_factors(barrier: Barrier, temperatures: FloatArray) -> FloatArray:
    energies, weights = _quadrature(barrier, float(temperatures.max()))
    thermal = k * temperatures[:, np.newaxis]
    log_terms = log_probability(barrier, energies) + (barrier.forward - energies) / thermal
    largest = log_terms.max(axis=1, keepdims=True)
    return largest[:, 0] + np.log((np.exp(log_terms - largest) * weights / thermal).sum(axis=1))


def log_probability(barrier: Barrier, energies: FloatArray) -> FloatArray:
    quantum = h * barrier.imaginary_frequency
    forward, reverse = 2.0 * pi * barrier.forward / quantum, 2.0 * pi * barrier.reverse / quantum
    thickness = 2.0 / (forward**-0.5 + reverse**-0.5)
    a = thickness * np.sqrt(2.0 * pi * energies / quantum)
    b = thickness * np.sqrt(np.maximum(2.0 * pi * (energies - barrier.forward) / quantum + reverse, 0.0))
    discriminant = forward * reverse - pi**2 / 4.0
    # 2 sinh(a) sinh(b) = e^(a+b) (1 - e^-2a) (1 - e^-2b) / 2; zero at the threshold, where b = 0.
    with np.errstate(divide="ignore"):
        log_flux = a + b + np.log(-np.expm1(-2.0 * a)) + np.log(-np.expm1(-2.0 * b)) - np.log(2.0)
    if discriminant >= 0.0:
        return log_flux - np.logaddexp(_log_cosh(a + b), _log_cosh(2.0 * np.sqrt(discriminant)))
    # cosh(s) + cos(d) = 2 (sinh(s/2)^2 + cos(d/2)^2): a sum of squares, even where both terms nearly cancel.
    half = 0.5 * (a + b)
    squares = (0.5 * np.expm1(-2.0 * half)) ** 2 + np.cos(np.sqrt(-discriminant)) ** 2 * np.exp(-2.0 * half)
    return log_flux - np.log(2.0) - 2.0 * half - np.log(squares)


def _log_cosh(x: FloatArray | float) -> FloatArray | float:
    return np.logaddexp(x, np.negative(x)) - np.log(2.0)


def _quadrature(barrier: Barrier, hottest: float) -> tuple[FloatArray, FloatArray]:
    """Place Gauss-Legendre panels: energies [J] and weights [J], both of shape (n_nodes,).

    Below the barrier the variable is the square root of the energy from the threshold, which takes away the branch
    points there; panels shrink towards the threshold. Towards the top they shrink to h nu / 2 pi, the width over
    which the probability goes from 0 to 1. Above the top they grow from that width to eight times k T.
    """
    threshold = max(0.0, barrier.forward - barrier.reverse)
    depth = barrier.forward - threshold
    distances = h * barrier.imaginary_frequency / (2.0 * pi) * 2.0 ** np.arange(40)
    near_top = np.sqrt(1.0 - distances[distances < depth] / depth)
    even = np.linspace(0.0, 1.0, EVEN_PANELS + 1)
    edges = np.unique(np.concatenate([even, 2.0 ** -np.arange(5.0, FINEST + 1.0), near_top]))
    root, below = _panels(edges)
    height = ABOVE * k * hottest
    steps = np.linspace(0.0, height, 7)
    above, above_weights = _panels(np.unique(np.concatenate([steps, distances[distances < height]])))
    return (
        np.concatenate([threshold + depth * root**2, barrier.forward + above]),
        np.concatenate([2.0 * depth * root * below, above_weights]),
    )


def _panels(edges: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Nodes and weights of Gauss-Legendre quadrature on panels between edges, flat."""
    middle, half = 0.5 * (edges[1:] + edges[:-1]), 0.5 * (edges[1:] - edges[:-1])
    nodes = middle[:, np.newaxis] + half[:, np.newaxis] * NODES
    return nodes.ravel(), (half[:, np.newaxis] * WEIGHTS).ravel()


def barriers() -> list[Barrier]:
    """Corners of the box of barriers that are claimed, and a hundred at random in it."""
    generator = np.random.default_rng(20)
    low, high, slowest, fastest = np.log(1.0), np.log(400.0), np.log(20.0), np.log(3000.0)
    heights = np.exp(generator.uniform(low, high, (100, 2)))
    waves = np.exp(generator.uniform(slowest, fastest, 100))
    corners = [(v1, v2, nu) for v1 in (1.0, 400.0) for v2 in (1.0, 1.001, 400.0) for nu in (20.0, 3000.0)]
    box = [*corners, *((*pair, nu) for pair, nu in zip(heights, waves, strict=True))]
    molar, wave = kilo / N_A, c / centi
    return [Barrier(v1 * molar, v2 * molar, nu * wave) for v1, v2, nu in box]


def test_two_quadratures_agree_over_the_whole_box() -> None:
    temperatures = np.geomspace(100.0, 2500.0, 15)

    for barrier in barriers():
        ours = TUNNELLING_MODELS["eckart"](barrier, temperatures).log_factors
        # Both are good to about 1e-9; 1e-6 is what is claimed.
        assert ours == pytest.approx(log_factors(barrier, temperatures), abs=1e-8, rel=1e-9), barrier
