"""Tunnelling corrections: one file a model behind the ``TunnellingModel`` protocol, one line each in the table here.

Each takes the barriers from both sides, zero-point energies included, and the imaginary frequency, and gives the
factor that multiplies a classical rate coefficient. The factor is the same both ways, so that detailed balance holds.
"""

from types import MappingProxyType

from rateloom.rates.tunnelling.eckart import eckart
from rateloom.rates.tunnelling.model import Barrier, Tunnelling, TunnellingModel
from rateloom.rates.tunnelling.none import none
from rateloom.rates.tunnelling.wigner import wigner

TUNNELLING_MODELS: MappingProxyType[str, TunnellingModel] = MappingProxyType(
    {"none": none, "wigner": wigner, "eckart": eckart}
)
"""By the word in a job file."""

__all__ = ["TUNNELLING_MODELS", "Barrier", "Tunnelling", "TunnellingModel"]
