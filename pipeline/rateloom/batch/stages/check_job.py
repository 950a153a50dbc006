"""Stage: all species, saddles and reactions of a job against each other."""

from dataclasses import dataclass

from scipy.constants import angstrom

from rateloom.audit import Entry, Limits, Subject, network_remarks
from rateloom.engine import Outcome
from rateloom.job import Reaction
from rateloom.remarks import Remark
from rateloom.statmech import Assembly


@dataclass(frozen=True, slots=True)
class EntryRequest:
    """One species or saddle."""

    subject: Subject
    files: tuple[str, ...]
    """As the job file shows them."""


@dataclass(frozen=True, slots=True)
class JobCheck:
    """Inputs are the assemblies of the entries, in order."""

    limits: Limits
    entries: tuple[EntryRequest, ...]
    reactions: tuple[Reaction, ...]
    """Their places and settings left out."""


VALUE = tuple[tuple[Subject, Remark], ...]


def check(request: JobCheck, *assemblies: Assembly | None) -> Outcome:
    """Check a whole job; what it has to say is the value, for it is about many subjects."""
    entries = [
        _entry(entry, assembly) for entry, assembly in zip(request.entries, assemblies, strict=True) if assembly
    ]
    known = [entry for entry in entries if entry is not None]
    return Outcome(network_remarks(known, request.reactions, request.limits))


def _entry(request: EntryRequest, assembly: Assembly) -> Entry | None:
    if assembly.facts is None or assembly.species is None:
        return None
    species = assembly.species
    return Entry(
        subject=request.subject,
        files=request.files,
        labels=assembly.facts.labels,
        geometry_angstrom=assembly.facts.positions / angstrom,
        charge=species.charge,
        multiplicity=species.multiplicity,
        ground_energy=species.ground_energy,
    )
