"""One modified-Arrhenius term by linear least squares in ln k."""

import numpy as np
from scipy.constants import R

from rateloom.arrays import FloatArray
from rateloom.fits.form import Term


def modified_arrhenius(
    temperatures: FloatArray, log_rates: FloatArray, reference_temperature: float, /
) -> tuple[Term, ...]:
    """Fit A (T/T_ref)^n exp(-E/RT) to ln k, every temperature with the same weight.

    The temperatures are measured from the middle of the range inside, so that the least-squares problem does not
    depend on T_ref and loses no digits to it.

    Parameters
    ----------
    temperatures : ndarray, shape (n_temperatures,)
        Three or more different temperatures [K], above zero.
    log_rates : ndarray, shape (n_temperatures,)
        ln k, finite [ln SI].
    reference_temperature : float
        T_ref [K], above zero.

    Returns
    -------
    tuple of Term
        One term [SI, J mol-1]; A is zero or infinity where T_ref puts it beyond a double.

    Raises
    ------
    ValueError
        The temperatures are fewer than three different ones, or a number is not finite.

    References
    ----------
    .. [1] D. M. Kooij, Z. Phys. Chem. 12, 155 (1893), for the expression (from memory).
    """
    if len(np.unique(temperatures)) < 3 or not np.all(np.isfinite(log_rates)):
        msg = "three parameters need finite rate coefficients at three or more different temperatures"
        raise ValueError(msg)
    middle = 1 / np.mean(1 / temperatures)
    # ln x and 1/x - 1 are nearly opposite where x is near 1: the columns are ln x and what their sum leaves
    x = temperatures / middle
    logs = np.log(x)
    design = np.column_stack([np.ones_like(x), logs, np.expm1(-logs) + logs])
    scales = np.abs(design).max(axis=0)
    at_middle, slope, curvature = np.linalg.lstsq(design / scales, log_rates, rcond=None)[0] / scales
    n, E = slope + curvature, -curvature * R * middle
    log_A = at_middle - n * np.log(middle / reference_temperature) - curvature
    with np.errstate(over="ignore"):  # the caller sees infinity
        return (Term(float(np.exp(log_A)), float(n), float(E)),)
