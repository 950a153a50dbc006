"""From what the stages remarked to findings, and from findings to what is delivered."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from rateloom.audit import Finding, Subject, judge, unmatched_accepts, withholding
from rateloom.job import Entity, Job, Reaction
from rateloom.remarks import Remark


@dataclass(frozen=True, slots=True)
class Verdict:
    """What the audit says of a job."""

    findings: tuple[Finding, ...]
    """Gravest first."""
    withheld: dict[str, tuple[str, ...]]
    """Reasons by reaction, in the order of the job file."""
    withheld_species: frozenset[str]


def verdict_of(
    job: Job,
    remarks: Mapping[tuple[str, str], Iterable[Remark]],
    missing: Mapping[str, bool],
) -> Verdict:
    """Judge all remarks of a job.

    Parameters
    ----------
    job
        Its settings and what it accepts.
    remarks
        By kind and name of the subject.
    missing
        Whether a reaction's numbers could not be computed.

    Returns
    -------
    Verdict
        A finding that a reaction accepts may be one about its transition states, too.
    """
    severities = dict(job.audit_severities)
    of_reaction = {state: dict(r.accept) for r in job.reactions for state in r.transition_states}
    findings: dict[Subject, list[Finding]] = {}
    entries: tuple[Entity | Reaction, ...] = (*job.species, *job.transition_states, *job.reactions)
    for entry in entries:
        subject = subject_of(entry)
        accept = dict(entry.accept)
        if subject.kind == "transition_state":
            accept = of_reaction.get(entry.name, {}) | accept
        findings[subject] = judge(subject, remarks.get((subject.kind, subject.name), ()), accept, severities)
    for entry in entries:
        subject = subject_of(entry)
        found = list(findings[subject])
        for state in entry.transition_states if isinstance(entry, Reaction) else ():
            found += findings[Subject("transition_state", state)]
        unmatched = unmatched_accepts(subject, dict(entry.accept), found)
        findings[subject] += judge(subject, unmatched, {}, severities)
    everything = [finding for group in findings.values() for finding in group]
    gone = withholding(everything)
    return Verdict(
        tuple(sorted(everything, key=lambda finding: finding.rank)),
        {r.name: reasons for r in job.reactions if (reasons := _reasons(r, gone, missing.get(r.name, False)))},
        frozenset(subject.name for subject in gone if subject.kind == "species"),
    )


def subject_of(entry: Entity | Reaction) -> Subject:
    """Name an entry of the job file as the audit does."""
    return Subject(entry.kind if isinstance(entry, Entity) else "reaction", entry.name)


def _reasons(reaction: Reaction, gone: Mapping[Subject, list[Finding]], missing: bool) -> tuple[str, ...]:
    """Say what keeps a reaction from being delivered."""
    subjects = [Subject("reaction", reaction.name)]
    subjects += [Subject("transition_state", name) for name in reaction.transition_states]
    subjects += [Subject("species", name) for name in dict.fromkeys((*reaction.reactants, *reaction.products))]
    reasons = [f"{s.name}: {finding.code}" for s in subjects for finding in gone.get(s, ())]
    if missing and not reasons:
        reasons = ["its numbers cannot be computed from what was read"]
    return tuple(dict.fromkeys(reasons))
