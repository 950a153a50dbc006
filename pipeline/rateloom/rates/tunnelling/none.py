"""No tunnelling."""

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.rates.tunnelling.model import Barrier, Tunnelling


def none(_barrier: Barrier, temperatures: FloatArray) -> Tunnelling:
    """Give the factor 1.

    Parameters
    ----------
    temperatures : ndarray, shape (n_temperatures,)
        [K]

    Returns
    -------
    Tunnelling
        Logarithms of factors [1], shape (n_temperatures,).

    References
    ----------
    .. [1] No physics: a classical rate coefficient stays as it is.
    """
    return Tunnelling(np.zeros_like(temperatures))
