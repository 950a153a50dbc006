"""Tunnelling through an asymmetric Eckart barrier: thermal average of its exact transmission probability.

Energies are in units of h nu/2 pi here, nu being the magnitude of the imaginary frequency. The transmission
probability of a barrier of heights V1 and V2 is that of two momenta a(E) and b(E) on its two sides and a constant d,

    P = 1 - (cosh(b - a) + cosh d) / (cosh(a + b) + cosh d).

Energies below the ground level of reactants or products do not tunnel: the average begins at the higher of them. It
is then the same from both sides, and is worked out from the side where the barrier is lower, which has a = 0 there.

The textbook form loses all digits where P is small, and its integral is hard for a fixed quadrature: a root at the
threshold, a step at the top and a thermal maximum that wanders between them. Three changes make it easy:

- by parts, the average is the integral of P'(E) exp(-(E - V)/kT), and P' is a sum of positive terms;
- in the variable s = a + b, all poles of P' lie pi away from the path or, in shallow barriers, near its beginning;
- with s - s0 = w ln(1 + exp t) the beginning goes to minus infinity, and the trapezoidal rule converges
  exponentially, whatever the barrier.
"""

from dataclasses import dataclass
from math import cosh, exp, expm1, log, log1p, pi, sin, sqrt

import numpy as np
from scipy.constants import N_A, h, k, kilo

from rateloom.arrays import FloatArray
from rateloom.rates.tunnelling.model import Barrier, Tunnelling
from rateloom.remarks import Remark

_NEGLIGIBLE = 28.0  # exp(-28) = 7e-13 of the largest part of the integrand is left out
_STEP = 0.6  # of t; poles at a distance w from the path give an error of exp(-2 pi w/step)
_SHALLOW_STEP = 0.4  # poles at pi/2 instead of pi


def eckart(barrier: Barrier, temperatures: FloatArray, /) -> Tunnelling:
    """Give the tunnelling factors of a reaction through an Eckart barrier.

    Parameters
    ----------
    barrier : Barrier
        Zero-point-corrected heights both ways and imaginary frequency [J, Hz].
    temperatures : ndarray, shape (n_temperatures,)
        Temperatures [K], above zero.

    Returns
    -------
    Tunnelling
        ln of the factors [1]; zero, with the remark ``no-eckart-barrier``, where a height is not above zero.

    Raises
    ------
    ValueError
        A temperature or the frequency is not above zero.

    References
    ----------
    .. [1] C. Eckart, Phys. Rev. 35, 1303 (1930) (from memory).
    """
    if min(barrier.forward, barrier.reverse) > 0:
        factors = log_eckart_factor(barrier.forward, barrier.reverse, barrier.imaginary_frequency, temperatures)
        return Tunnelling(factors)
    lowest = min(barrier.forward, barrier.reverse) * N_A / kilo
    side = "reactants" if barrier.forward <= barrier.reverse else "products"
    message = (
        f"Seen from the {side} there is no barrier with zero-point energy, and so no Eckart barrier: the tunnelling "
        "factor is 1. Check the level of theory, or look for a complex before the saddle."
    )
    remark = Remark("no-eckart-barrier", message, value=f"{lowest:.2f} kJ/mol", limit="above 0 kJ/mol")
    return Tunnelling(np.zeros(len(temperatures)), (remark,))


def log_eckart_factor(
    forward: float, reverse: float, imaginary_frequency: float, temperatures: FloatArray
) -> FloatArray:
    """Natural logarithm of the ratio of quantum to classical thermal flux through an Eckart barrier.

    The relative error of the factor is below 1e-9 for barriers of 1 to 400 kJ/mol, imaginary frequencies up to
    3000 cm-1 and temperatures from 100 K.

    Parameters
    ----------
    forward, reverse : float
        Heights of the barrier from both sides, per molecule [J].
    imaginary_frequency : float
        Magnitude of the imaginary frequency [Hz].
    temperatures : ndarray, shape (n_temperatures,)
        Temperatures [K].

    Returns
    -------
    ndarray, shape (n_temperatures,)
        ln of the factor [1].

    Raises
    ------
    ValueError
        A height, the frequency or a temperature is not above zero.

    References
    ----------
    .. [1] C. Eckart, Phys. Rev. 35, 1303 (1930) (from memory).
    .. [2] H. S. Johnston, J. Heicklen, J. Phys. Chem. 66, 532 (1962), for the notation (from memory).
    .. [3] L. N. Trefethen, J. A. C. Weideman, SIAM Rev. 56, 385 (2014), for the quadrature (from memory).
    """
    if not np.all(temperatures > 0):
        msg = f"temperatures must be above 0 K, the lowest is {np.min(temperatures):.4g} K"
        raise ValueError(msg)
    shape, unit = _shape(forward, reverse, imaginary_frequency)
    betas = unit / (k * temperatures)
    offsets, log_weights = _grid(shape, betas)
    above_top = shape.energy(offsets) - shape.height
    logs = (shape.log_slope(offsets) + log_weights)[np.newaxis, :] - betas[:, np.newaxis] * above_top
    largest = logs.max(axis=1, keepdims=True)
    return largest[:, 0] + np.log(np.exp(logs - largest).sum(axis=1))


def log_probability(barrier: Barrier, energies: FloatArray) -> FloatArray:
    """Natural logarithm of the transmission probability of an Eckart barrier.

    Parameters
    ----------
    barrier : Barrier
        Heights both ways and imaginary frequency, above zero [J, Hz].
    energies : ndarray, shape (n_energies,)
        Energies above the ground level of the reactants [J].

    Returns
    -------
    ndarray, shape (n_energies,)
        ln P [1]; minus infinity where the energy is below the ground level of reactants or products.

    Raises
    ------
    ValueError
        A height or the frequency is not above zero.

    References
    ----------
    .. [1] C. Eckart, Phys. Rev. 35, 1303 (1930) (from memory).
    """
    shape, unit = _shape(barrier.forward, barrier.reverse, barrier.imaginary_frequency)
    above = np.maximum((energies - max(barrier.forward - barrier.reverse, 0.0)) / unit, 0.0)
    a = shape.scale * np.sqrt(above)
    b = np.hypot(a, shape.start)
    with np.errstate(divide="ignore"):  # ln 0 at and below the threshold is meant
        return a + b + np.log(-np.expm1(-2 * a)) + np.log(-np.expm1(-2 * b)) - shape.log_sum(a + b)


@dataclass(frozen=True, slots=True)
class _Shape:
    """An Eckart barrier in units of h nu/2 pi, seen from the side where it is lower."""

    height: float
    scale: float
    """a = scale sqrt(E), E counted from the threshold."""
    start: float
    """s = a + b = b at the threshold."""
    log_top: float
    """ln(2 + 2 cosh d)."""

    @classmethod
    def of(cls, low: float, high: float) -> "_Shape":
        scale = 2 / (1 / sqrt(low) + 1 / sqrt(high))
        return cls(low, scale, scale * sqrt(high - low), _log_top(low * high))

    def energy(self, offsets: FloatArray) -> FloatArray:
        """Energy above the threshold where s = start + offset."""
        s = self.start + offsets
        return (offsets * (s + self.start) / (2 * s * self.scale)) ** 2

    def log_sum(self, s: FloatArray) -> FloatArray:
        """ln(2 cosh s + 2 cosh d), written as 4 sinh(s/2)^2 + (2 + 2 cosh d)."""
        with np.errstate(divide="ignore"):  # s = 0 gives ln 0, which adds nothing
            return np.logaddexp(s + 2 * np.log(-np.expm1(-s)), self.log_top)

    def log_slope(self, offsets: FloatArray) -> FloatArray:
        """ln dP/ds where s = start + offset."""
        s = self.start + offsets
        m = self.start**2 / s  # b - a
        log_sum = self.log_sum(s)
        with np.errstate(divide="ignore"):  # m = 0 in a symmetric barrier
            log_change = np.log(m / s) + m + np.log(-np.expm1(-2 * m))
        log_rest = self.log_sum(m) - log_sum + s + np.log(-np.expm1(-2 * s))
        return np.logaddexp(log_change, log_rest) - log_sum


def _shape(forward: float, reverse: float, imaginary_frequency: float) -> tuple[_Shape, float]:
    """Shape of a barrier and the unit of its energies [J]."""
    if not min(forward, reverse, imaginary_frequency) > 0:
        given = f"{forward:.4g} J, {reverse:.4g} J and {imaginary_frequency:.4g} Hz"
        msg = f"heights and frequency of an Eckart barrier must be above 0, not {given}"
        raise ValueError(msg)
    unit = h * imaginary_frequency / (2 * pi)
    return _Shape.of(min(forward, reverse) / unit, max(forward, reverse) / unit), unit


def _log_top(product: float) -> float:
    """ln(2 + 2 cosh d) for d^2 = 4 (V1 V2 - pi^2/4), which may be negative."""
    if product >= pi**2 / 4:
        d = 2 * sqrt(product - pi**2 / 4)
        return d + 2 * log1p(exp(-d))
    # 2 + 2 cos|d| = 4 cos(|d|/2)^2, and the angle is near pi/2 in a shallow barrier
    return 2 * log(2 * sin(product / (pi / 2 + sqrt(pi**2 / 4 - product))))


def _grid(shape: _Shape, betas: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Offsets of s from its start and ln of their weights, for all temperatures together."""
    coldest, hottest = float(betas.max()), float(betas.min())
    width = min(1.0, shape.scale * sqrt(pi / coldest) / 2)  # half that of the coldest Boltzmann factor
    step = _SHALLOW_STEP if shape.log_top < log(2 + 2 * cosh(pi)) else _STEP
    first = _inverse_softplus(_lowest_offset(shape, betas) / width)
    last = _inverse_softplus(_highest_offset(shape, hottest) / width)
    t = np.arange(first, last + step, step)
    return width * np.logaddexp(0.0, t), log(width * step) - np.logaddexp(0.0, -t)


def _inverse_softplus(value: float) -> float:
    return value + log(-expm1(-value)) if value > exp(-_NEGLIGIBLE) else -_NEGLIGIBLE


def _lowest_offset(shape: _Shape, betas: FloatArray) -> float:
    """Offset below which the integrand is negligible at every temperature.

    Below the top the integrand is less than exp(beta (V - E) - (top - s)) and E is more than
    (s^2 - 2 start^2)/(4 scale^2): a parabola in s, held against the value that the integrand has at its vertex.
    """
    vertex = 2 * shape.scale**2 / betas
    reached = np.clip(vertex, shape.start, max(shape.log_top, shape.start + 1.0))
    value = betas * (shape.height - shape.energy(reached - shape.start)) - np.maximum(shape.log_top - reached, 0.0)
    bound = betas * (shape.height + (shape.start / shape.scale) ** 2 / 2) - shape.log_top + vertex / 2
    depth = np.maximum(bound - value, 0.0) + _NEGLIGIBLE
    return max(float((vertex - 2 * shape.scale * np.sqrt(depth / betas)).min()) - shape.start, 0.0)


def _highest_offset(shape: _Shape, hottest: float) -> float:
    """Offset above which the slope, or the Boltzmann factor of the highest temperature, is negligible."""
    beyond_top = max(shape.log_top, 0.0) + _NEGLIGIBLE
    beyond_start = (_NEGLIGIBLE + sqrt(_NEGLIGIBLE**2 + 4 * shape.start**2)) / 2  # where s - m is that large
    momentum = shape.scale * sqrt(shape.height + 2 * _NEGLIGIBLE / hottest)
    beyond_energy = momentum + sqrt(momentum**2 + shape.start**2)
    return min(max(beyond_top, beyond_start), beyond_energy) - shape.start
