"""What every form of rate expression is made of: a sum of modified-Arrhenius terms.

k(T) = sum of A (T/T_ref)^n exp(-E/RT), with A in the SI unit of the rate coefficient and E in J/mol.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from scipy.constants import R

from rateloom.arrays import FloatArray
from rateloom.remarks import Remark


@dataclass(frozen=True, slots=True)
class Term:
    """A (T/T_ref)^n exp(-E/RT)."""

    A: float
    """[(m3)^(order-1) s-1]"""
    n: float
    E: float
    """[J mol-1]"""


@dataclass(frozen=True, slots=True, kw_only=True)
class Fit:
    """An expression and how well it holds; without terms where none could be fitted."""

    form: str
    reference_temperature: float
    """[K]"""
    terms: tuple[Term, ...]
    lowest_temperature: float
    """Of those that were fitted [K]"""
    highest_temperature: float
    """[K]"""
    max_deviation: float
    """Largest of k(fitted)/k - 1 without its sign [1]"""
    rms_deviation: float
    """Root mean square of k(fitted)/k - 1 [1]"""
    activation_energy: float
    """R T^2 dlnk/dT at ``activation_temperature`` [J mol-1]"""
    activation_temperature: float
    """Middle of the range in 1/T: the harmonic mean of its ends [K]"""
    remarks: tuple[Remark, ...] = ()


class Form(Protocol):
    """Fits terms to ln k, finite at three or more different temperatures [K], with a reference temperature [K]."""

    def __call__(
        self, temperatures: FloatArray, log_rates: FloatArray, reference_temperature: float, /
    ) -> tuple[Term, ...]:
        """Fit the terms."""
        ...


def log_rate(terms: Sequence[Term], temperatures: FloatArray, reference_temperature: float) -> FloatArray:
    """Natural logarithm of the rate coefficient that an expression gives.

    Parameters
    ----------
    terms : sequence of Term
        At least one, with A above zero [SI].
    temperatures : ndarray, shape (n_temperatures,)
        Temperatures [K], above zero.
    reference_temperature : float
        T_ref [K], above zero.

    Returns
    -------
    ndarray, shape (n_temperatures,)
        ln k [ln SI].

    Raises
    ------
    ValueError
        There is no term.

    References
    ----------
    .. [1] K. J. Laidler, Pure Appl. Chem. 56, 149 (1984) (from memory).
    """
    return np.logaddexp.reduce(_log_terms(terms, temperatures, reference_temperature), axis=0)


def activation_energy(terms: Sequence[Term], temperature: float, reference_temperature: float) -> float:
    """Activation energy of an expression at one temperature, R T^2 dlnk/dT.

    Parameters
    ----------
    terms : sequence of Term
        At least one, with A above zero [SI].
    temperature : float
        Temperature [K], above zero.
    reference_temperature : float
        T_ref [K], above zero.

    Returns
    -------
    float
        E + n R T, averaged over the terms by their share of k [J mol-1].

    Raises
    ------
    ValueError
        There is no term.

    References
    ----------
    .. [1] K. J. Laidler, Pure Appl. Chem. 56, 149 (1984) (from memory).
    """
    logs = _log_terms(terms, np.array([temperature]), reference_temperature)[:, 0]
    shares = np.exp(logs - np.logaddexp.reduce(logs))
    return float(sum(share * (term.E + term.n * R * temperature) for share, term in zip(shares, terms, strict=True)))


def _log_terms(terms: Sequence[Term], temperatures: FloatArray, reference_temperature: float) -> FloatArray:
    """Shape (n_terms, n_temperatures)."""
    if not terms:
        msg = "an expression has at least one term"
        raise ValueError(msg)
    logs = np.log(temperatures / reference_temperature)
    return np.array([np.log(term.A) + term.n * logs - term.E / (R * temperatures) for term in terms])
