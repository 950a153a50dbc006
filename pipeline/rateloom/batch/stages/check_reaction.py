"""Stage: the members of a reaction against each other."""

from dataclasses import dataclass
from typing import Any

from rateloom.audit import Limits, Member, Members, reaction_remarks
from rateloom.calculation import Calculation
from rateloom.engine import Outcome
from rateloom.job import FrequencyScale
from rateloom.statmech import Assembly


@dataclass(frozen=True, slots=True)
class MemberRequest:
    """One of them: what the messages call it, and what the job says of it."""

    name: str
    frequency_scale: FrequencyScale


@dataclass(frozen=True, slots=True)
class ReactionCheck:
    """Inputs are, for each member in order, the calculation of its geometry, that of its energy and its assembly."""

    limits: Limits
    reactants: tuple[MemberRequest, ...]
    products: tuple[MemberRequest, ...]
    saddle: MemberRequest


VALUE = bool


def check(request: ReactionCheck, *inputs: Any) -> Outcome:
    """Check a reaction; without one of its members there is nothing to check."""
    requests = (*request.reactants, *request.products, request.saddle)
    triples = zip(inputs[0::3], inputs[1::3], inputs[2::3], strict=True)
    members = [_member(*pair) for pair in zip(requests, triples, strict=True)]
    known = [member for member in members if member is not None]
    if len(known) < len(members):
        return Outcome(None)
    count = len(request.reactants)
    remarks = reaction_remarks(Members(tuple(known[:count]), tuple(known[count:-1]), known[-1]), request.limits)
    return Outcome(not remarks, remarks)


def _member(
    request: MemberRequest, inputs: tuple[Calculation | None, Calculation | None, Assembly | None]
) -> Member | None:
    """Take out of an assembly and its calculations what the check needs."""
    structure, source, assembly = inputs
    if structure is None or source is None or assembly is None or assembly.species is None or assembly.facts is None:
        return None
    has_shape = assembly.species.shape != "atom"
    return Member(
        request.name,
        assembly.species,
        assembly.facts.geometry_level if has_shape else "",
        assembly.facts.energy_level,
        structure.program if has_shape else "",
        structure.program_version if has_shape else "",
        source.program,
        source.program_version,
        request.frequency_scale,
    )
