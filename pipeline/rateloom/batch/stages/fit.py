"""Stage: rate coefficients to the expressions fitted to them, one each way."""

from dataclasses import dataclass, replace

from rateloom.engine import Outcome
from rateloom.fits import Fit, fit_rates
from rateloom.job import FitSettings
from rateloom.rates import ReactionRates
from rateloom.remarks import Remark


@dataclass(frozen=True, slots=True)
class FitRequest:
    """How they are fitted."""

    settings: FitSettings


@dataclass(frozen=True, slots=True)
class FitPair:
    """Both ways."""

    forward: Fit
    reverse: Fit


VALUE = FitPair


def fit(request: FitRequest, rates: ReactionRates | None) -> Outcome:
    """Fit both directions."""
    if rates is None:
        return Outcome(None)
    settings = request.settings
    fits: list[Fit] = []
    remarks: list[Remark] = []
    for direction, log_rates in (("forward", rates.log_forward), ("reverse", rates.log_reverse)):
        fitted = fit_rates(
            rates.temperatures,
            log_rates,
            form=settings.form,
            reference_temperature=settings.reference_temperature,
            tolerance=settings.tolerance,
        )
        remarks += [replace(remark, message=f"{direction}: {remark.message}") for remark in fitted.remarks]
        fits.append(replace(fitted, remarks=()))
    return Outcome(FitPair(*fits), tuple(remarks))
