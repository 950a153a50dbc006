"""Stage: the imaginary mode of a saddle against the reaction it is to belong to."""

from dataclasses import dataclass, replace

from rateloom.audit import Limits, SaddleVerdict, judge_saddle
from rateloom.calculation import Calculation
from rateloom.engine import Outcome


@dataclass(frozen=True, slots=True)
class SaddleCheck:
    """Inputs are the calculations with the geometries of reactants, products and saddle, in order."""

    limits: Limits
    reactants: int


VALUE = SaddleVerdict


def check(request: SaddleCheck, *calculations: Calculation | None) -> Outcome:
    """Judge a saddle; without one of the geometries there is nothing to judge."""
    known = [calculation for calculation in calculations if calculation is not None]
    if len(known) < len(calculations):
        return Outcome(None)
    count = request.reactants
    verdict = judge_saddle(known[-1], known[:count], known[count:-1], request.limits)
    return Outcome(replace(verdict, remarks=()), verdict.remarks)
