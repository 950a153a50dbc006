"""The expression fitted to a rate coefficient: does it carry what the rate coefficient does?

The deviation itself is remarked on where the expression is fitted.
"""

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.audit.limits import Limits
from rateloom.fits import Fit, log_rate
from rateloom.remarks import Remark

_NEEDED = 5  # points: three constants go through any three


def fit_remarks(
    direction: str, fit: Fit, temperatures: FloatArray, log_rates: FloatArray, limits: Limits
) -> tuple[Remark, ...]:
    """Check that an expression bends as the rate coefficient does, which a small deviation alone does not tell.

    Parameters
    ----------
    direction : str
        ``forward`` or ``reverse``.
    fit : Fit
        The expression.
    temperatures : ndarray, shape (n,)
        That it was fitted at, ascending [K].
    log_rates : ndarray, shape (n,)
        ln k [ln SI]; what is not finite is left out.
    limits : Limits
        Thresholds, each in the unit of its name.

    Returns
    -------
    tuple of Remark
        ``curvature-not-carried``.

    References
    ----------
    .. [1] The local activation energy, R T d ln k / d ln T: K. J. Laidler, Pure Appl. Chem. 68 (1996) 149 (from
       memory).
    """
    usable = np.isfinite(log_rates)
    if not fit.terms or usable.sum() < _NEEDED:
        return ()
    temperatures = temperatures[usable]
    residual = log_rate(fit.terms, temperatures, fit.reference_temperature) - log_rates[usable]
    slopes = np.gradient(residual, np.log(temperatures))
    worst = int(np.abs(slopes).argmax())
    limit = limits.curvature_slope_ratio
    if not abs(slopes[worst]) > limit:
        return ()
    message = (
        f"at {temperatures[worst]:g} K the {direction} expression falls or rises with temperature otherwise than the "
        f"rate coefficient (d ln k / d ln T is off by {slopes[worst]:+.2f}): one expression does not carry the "
        "curvature; use a shorter range or the table itself, and do not extrapolate"
    )
    return (Remark("curvature-not-carried", message, f"{slopes[worst]:+.2f}", f"{limit:g}"),)
