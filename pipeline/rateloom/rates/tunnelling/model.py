"""What every tunnelling model takes and gives."""

from dataclasses import dataclass
from typing import Protocol

from rateloom.arrays import FloatArray
from rateloom.remarks import Remark


@dataclass(frozen=True, slots=True)
class Barrier:
    """A one-dimensional barrier; energies are per molecule."""

    forward: float
    """From the ground level of the reactants to that of the saddle [J]."""
    reverse: float
    """From the ground level of the products to that of the saddle [J]."""
    imaginary_frequency: float
    """Magnitude [Hz], above zero."""


@dataclass(frozen=True, slots=True)
class Tunnelling:
    """A correction over a temperature grid."""

    log_factors: FloatArray
    """Natural logarithms of the factors, shape (n_temperatures,) [1]"""
    remarks: tuple[Remark, ...] = ()


class TunnellingModel(Protocol):
    """A function that evaluates one model."""

    def __call__(self, barrier: Barrier, temperatures: FloatArray, /) -> Tunnelling:
        """Evaluate the factors at temperatures [K], shape (n_temperatures,)."""
