"""Fits a form of rate expression to rate coefficients and judges it."""

from types import MappingProxyType

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.fits.form import Fit, Form, Term, activation_energy, log_rate
from rateloom.fits.modified_arrhenius import modified_arrhenius
from rateloom.remarks import Remark

FORMS: MappingProxyType[str, Form] = MappingProxyType({"modified-arrhenius": modified_arrhenius})
"""Form by the name it has in a job file."""

_FEWEST = 3  # temperatures, one a parameter


def fit_rates(
    temperatures: FloatArray,
    log_rates: FloatArray,
    *,
    form: str = "modified-arrhenius",
    reference_temperature: float = 1.0,
    tolerance: float = 0.05,
) -> Fit:
    """Fit a rate expression to rate coefficients by least squares in ln k.

    Parameters
    ----------
    temperatures : ndarray, shape (n_temperatures,)
        Temperatures [K], above zero.
    log_rates : ndarray, shape (n_temperatures,)
        ln k [ln SI]; what is not finite is left out.
    form : str
        A name of the table of forms.
    reference_temperature : float
        T_ref [K], above zero.
    tolerance : float
        Largest relative deviation that passes without a remark [1].

    Returns
    -------
    Fit
        The expression [SI, J mol-1] and its deviations [1]. Without terms, and with a remark, where there are fewer
        than three temperatures or the reference temperature puts A beyond the range of numbers.

    Raises
    ------
    KeyError
        No form has that name.
    ValueError
        The arrays differ in shape, or a temperature is not above zero.

    References
    ----------
    .. [1] K. J. Laidler, Pure Appl. Chem. 56, 149 (1984), for the activation energy (from memory).
    """
    if temperatures.shape != log_rates.shape or not (np.all(temperatures > 0) and reference_temperature > 0):
        msg = "a fit needs one rate coefficient for each temperature, and temperatures above 0 K"
        raise ValueError(msg)
    usable = np.isfinite(log_rates)
    remarks = _left_out(temperatures[~usable])
    temperatures, log_rates = temperatures[usable], log_rates[usable]
    if len(np.unique(temperatures)) < _FEWEST:
        return _nothing(form, reference_temperature, (*remarks, _too_few(len(np.unique(temperatures)))))
    terms = FORMS[form](temperatures, log_rates, reference_temperature)
    if not all(0 < term.A < np.inf for term in terms):
        return _nothing(form, reference_temperature, (*remarks, _beyond_numbers(reference_temperature)))
    deviations = np.expm1(log_rate(terms, temperatures, reference_temperature) - log_rates)
    worst = int(np.abs(deviations).argmax())
    if abs(deviations[worst]) > tolerance:
        remarks = (*remarks, _poor(float(deviations[worst]), float(temperatures[worst]), tolerance))
    return _judged(form, reference_temperature, terms, temperatures, deviations, remarks)


def _judged(
    form: str,
    reference_temperature: float,
    terms: tuple[Term, ...],
    temperatures: FloatArray,
    deviations: FloatArray,
    remarks: tuple[Remark, ...],
) -> Fit:
    lowest, highest = float(temperatures.min()), float(temperatures.max())
    middle = 2 / (1 / lowest + 1 / highest)
    return Fit(
        form=form,
        reference_temperature=reference_temperature,
        terms=terms,
        lowest_temperature=lowest,
        highest_temperature=highest,
        max_deviation=float(np.abs(deviations).max()),
        rms_deviation=float(np.sqrt(np.mean(deviations**2))),
        activation_energy=activation_energy(terms, middle, reference_temperature),
        activation_temperature=middle,
        remarks=remarks,
    )


def _nothing(form: str, reference_temperature: float, remarks: tuple[Remark, ...]) -> Fit:
    return Fit(
        form=form,
        reference_temperature=reference_temperature,
        terms=(),
        lowest_temperature=np.nan,
        highest_temperature=np.nan,
        max_deviation=np.nan,
        rms_deviation=np.nan,
        activation_energy=np.nan,
        activation_temperature=np.nan,
        remarks=remarks,
    )


def _left_out(temperatures: FloatArray) -> tuple[Remark, ...]:
    if not len(temperatures):
        return ()
    message = (
        f"The rate coefficient has no finite logarithm at {len(temperatures)} temperatures from "
        f"{temperatures.min():g} to {temperatures.max():g} K, which the fit leaves out: begin the grid above them."
    )
    return (Remark("temperatures-not-fitted", message, value=str(len(temperatures)), limit="0"),)


def _too_few(found: int) -> Remark:
    message = f"A rate expression of three parameters needs three or more temperatures; there are {found}."
    return Remark("too-few-temperatures", message, value=str(found), limit=str(_FEWEST))


def _beyond_numbers(reference_temperature: float) -> Remark:
    message = (
        f"With the reference temperature {reference_temperature:g} K the prefactor A is beyond the range of numbers: "
        "set a reference temperature inside the range of the fit."
    )
    return Remark("prefactor-out-of-range", message, value=f"{reference_temperature:g} K")


def _poor(deviation: float, temperature: float, tolerance: float) -> Remark:
    message = (
        f"The fitted expression is off by {100 * deviation:+.3g} % at {temperature:g} K: fit a shorter range of "
        "temperatures, or use the table of rate coefficients itself."
    )
    return Remark("poor-fit", message, value=f"{100 * abs(deviation):.3g} %", limit=f"{100 * tolerance:.3g} %")
