"""Wigner's correction, the first term of an expansion in (h nu / k T)."""

import numpy as np
from scipy.constants import h, k

from rateloom.arrays import FloatArray
from rateloom.rates.tunnelling.model import Barrier, Tunnelling


def wigner(barrier: Barrier, temperatures: FloatArray) -> Tunnelling:
    """Evaluate 1 + (h nu / k T)^2 / 24.

    Parameters
    ----------
    barrier
        Only its imaginary frequency counts [Hz].
    temperatures : ndarray, shape (n_temperatures,)
        [K], above zero.

    Returns
    -------
    Tunnelling
        Logarithms of factors [1], shape (n_temperatures,).

    References
    ----------
    .. [1] E. Wigner, Z. Phys. Chem. B 19, 203 (1932).
    """
    return Tunnelling(np.log1p((h * barrier.imaginary_frequency / (k * temperatures)) ** 2 / 24.0))
