"""The asymmetric Eckart barrier, exact in one dimension.

The transmission probability is written as 2 sinh(a) sinh(b) / (cosh(a + b) + cosh(d)) and as a logarithm: the usual
difference of hyperbolic cosines cancels for thick barriers, and its terms overflow. The thermal average is integrated
on energies that do not depend on temperature, so that one evaluation of the probability serves the whole grid.
"""

import numpy as np
from scipy.constants import N_A, h, k, kilo, pi

from rateloom.arrays import FloatArray
from rateloom.rates.tunnelling.model import Barrier, Tunnelling
from rateloom.remarks import Remark

NODES, WEIGHTS = np.polynomial.legendre.leggauss(16)
ABOVE = 45.0
"""Energies this many k T above the barrier add less than the rounding of a double."""
EVEN_PANELS = 16
FINEST = 13
"""Panels at the threshold shrink to 2^-FINEST of the way, in the square root of the energy."""


def eckart(barrier: Barrier, temperatures: FloatArray) -> Tunnelling:
    """Evaluate the ratio of the quantum to the classical thermal flux through an Eckart barrier.

    Parameters
    ----------
    barrier
        Zero-point-corrected barriers both ways [J] and the imaginary frequency [Hz].
    temperatures : ndarray, shape (n_temperatures,)
        [K], above zero.

    Returns
    -------
    Tunnelling
        Logarithms of factors [1], shape (n_temperatures,). Where a barrier is not above zero there is no Eckart
        barrier: factor 1 and the remark ``no-eckart-barrier``.

    Notes
    -----
    Energies below the ground level of reactants or products do not tunnel. The result is good to 1e-9 relative for
    barriers of 1 to 400 kJ/mol, imaginary frequencies up to 3000 cm-1 and temperatures from 100 K.

    References
    ----------
    .. [1] C. Eckart, Phys. Rev. 35, 1303 (1930).
    .. [2] H. S. Johnston, J. Heicklen, J. Phys. Chem. 66, 532 (1962).
    """
    lower = min(barrier.forward, barrier.reverse)
    if lower <= 0.0:
        message = (
            "with zero-point energies the saddle is not above both reactants and products: there is no Eckart "
            "barrier, and the tunnelling factor is 1"
        )
        remark = Remark("no-eckart-barrier", message, f"{lower * N_A / kilo:.2f} kJ/mol", "above 0 kJ/mol")
        return Tunnelling(np.zeros_like(temperatures), (remark,))
    energies, weights = _quadrature(barrier, float(temperatures.max()))
    thermal = k * temperatures[:, np.newaxis]
    log_terms = log_probability(barrier, energies) + (barrier.forward - energies) / thermal
    largest = log_terms.max(axis=1, keepdims=True)
    return Tunnelling(largest[:, 0] + np.log((np.exp(log_terms - largest) * weights / thermal).sum(axis=1)))


def log_probability(barrier: Barrier, energies: FloatArray) -> FloatArray:
    """Natural logarithm of the transmission probability of an Eckart barrier.

    Parameters
    ----------
    barrier
        Both barriers above zero.
    energies : ndarray, any shape
        Above the ground level of the reactants, and above that of the products [J].

    Returns
    -------
    ndarray, same shape
        ln P [1].

    References
    ----------
    .. [1] H. S. Johnston, J. Heicklen, J. Phys. Chem. 66, 532 (1962), whose 2 pi a, 2 pi b and 2 pi d
       are a, b and d here.
    """
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
