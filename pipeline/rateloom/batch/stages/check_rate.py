"""Stages: rate coefficients and the expressions fitted to them to remarks."""

from dataclasses import dataclass
from typing import Any

from rateloom.audit import Limits, fit_remarks, rate_remarks
from rateloom.batch.stages.fit import FitPair
from rateloom.engine import Outcome
from rateloom.rates import ReactionRates


@dataclass(frozen=True, slots=True)
class RateCheck:
    """Inputs are the rates, the fits, and then the assemblies of reactants, products and saddle."""

    limits: Limits
    reactants: int


VALUE = bool


def check(request: RateCheck, rates: ReactionRates | None, fits: FitPair | None, *assemblies: Any) -> Outcome:
    """Check one reaction; without rates there is nothing to check."""
    if rates is None or fits is None:
        return Outcome(None)
    *molecules, saddle = assemblies
    count = request.reactants
    remarks = rate_remarks(rates, molecules[:count], molecules[count:], saddle.species, request.limits)
    for direction, fit, log_rates in (
        ("forward", fits.forward, rates.log_forward),
        ("reverse", fits.reverse, rates.log_reverse),
    ):
        remarks += fit_remarks(direction, fit, rates.temperatures, log_rates, request.limits)
    return Outcome(not remarks, remarks)
