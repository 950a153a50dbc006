"""Stage: partition functions of reactants, products and saddle to rate coefficients both ways."""

from dataclasses import dataclass, replace
from typing import Any

from rateloom.batch.stages.partition import Tabulated
from rateloom.engine import Outcome
from rateloom.rates import Participant, ReactionRates, evaluate_reaction
from rateloom.statmech import Assembly

VALUE = ReactionRates


@dataclass(frozen=True, slots=True)
class RateRequest:
    """What the job says of a reaction; inputs are the assemblies and then the tables of all its members."""

    reactants: int
    """How many of the members are reactants; products follow, the saddle is last."""
    products: int
    tunnelling: str
    path_degeneracy: float | None
    degenerate: bool
    """Whether the products are the reactants again."""


def evaluate(request: RateRequest, *inputs: Any) -> Outcome:
    """Evaluate a reaction; without one of its members there is no rate."""
    count = request.reactants + request.products + 1
    members = [_participant(*pair) for pair in zip(inputs[:count], inputs[count:], strict=True)]
    known = [member for member in members if member is not None]
    if len(known) < count:
        return Outcome(None)
    rates = evaluate_reaction(
        known[: request.reactants],
        known[request.reactants : -1],
        known[-1],
        tunnelling=request.tunnelling,
        degenerate=request.degenerate,
        explicit_path_degeneracy=request.path_degeneracy,
    )
    return Outcome(replace(rates, remarks=()), rates.remarks)


def _participant(assembly: Assembly | None, table: Tabulated | None) -> Participant | None:
    if assembly is None or assembly.species is None or table is None:
        return None
    return Participant(assembly.species, table.partition, table.thermochemistry)
