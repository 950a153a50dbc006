"""The job as a whole: the same file, molecule or reaction under two names, and cycles that do not close.

A species has one energy, so that reaction energies round a cycle add up to zero of themselves, unless one molecule
stands in the cycle under two names. Molecules are therefore told apart by their atoms, charge, multiplicity and
distances, not by their names.
"""

from collections import Counter, defaultdict
from collections.abc import Sequence
from dataclasses import dataclass

import networkx as nx
import numpy as np

from rateloom.arrays import FloatArray
from rateloom.audit.cycles import Balance, open_cycles
from rateloom.audit.findings import Subject
from rateloom.audit.geometries import shape_difference, sorted_distances
from rateloom.audit.limits import Limits
from rateloom.job.model import Reaction
from rateloom.molecule.bonds import distances
from rateloom.remarks import Remark


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """A species or transition state as the network sees it."""

    subject: Subject
    files: tuple[str, ...]
    """Names of its output files; two entries that show one name use one file."""
    labels: tuple[str, ...]
    """Element symbols or isotopes."""
    geometry_angstrom: FloatArray
    """Shape (n_atoms, 3)"""
    charge: int
    multiplicity: int
    ground_energy: float | None
    """Zero-point energy included [J]; None where it is not known."""


def network_remarks(
    entries: Sequence[Entry], reactions: Sequence[Reaction], limits: Limits
) -> tuple[tuple[Subject, Remark], ...]:
    """Check a whole job.

    Parameters
    ----------
    entries : sequence of Entry
        Species and transition states whose geometry is known [angstrom], in the order of the job file.
    reactions : sequence of Reaction
        All reactions.
    limits : Limits
        Thresholds, each in the unit of its name.

    Returns
    -------
    tuple of (Subject, Remark)
        ``file-used-twice``, ``same-geometry-twice``, ``several-saddles``, ``reaction-twice``,
        ``cycle-does-not-close``, each with whom it is about.

    References
    ----------
    .. [1] Hess's law: G. H. Hess, Ann. Phys. 126 (1840) 385 (from memory).
    """
    twice = _used_twice(entries)
    alike = _alike(entries, limits.same_molecule_angstrom)
    found = [
        (entries[later].subject, _file_remark(entries[earlier], files)) for (earlier, later), files in twice.items()
    ]
    molecules = nx.Graph()
    molecules.add_nodes_from(range(len(entries)))
    molecules.add_edges_from(alike)
    molecule_of: dict[tuple[str, str], int] = {}
    for members in nx.connected_components(molecules):
        first, *others = sorted(members)
        for member in (first, *others):
            molecule_of[entries[member].subject.kind, entries[member].subject.name] = first
        found += [
            (entries[other].subject, _geometry_remark(entries[first], alike.get((first, other)), limits))
            for other in others
            if (first, other) not in twice
        ]
    found += _same_reactions(reactions, molecule_of)
    found += _cycles(entries, reactions, molecule_of, limits)
    return tuple(found)


def _used_twice(entries: Sequence[Entry]) -> dict[tuple[int, int], list[str]]:
    """Pairs of entries that share a file, isotopologues and other charges aside."""
    users: dict[tuple[object, ...], list[int]] = defaultdict(list)
    for number, entry in enumerate(entries):
        for file in dict.fromkeys(entry.files):
            users[file, tuple(sorted(entry.labels)), entry.charge, entry.multiplicity].append(number)
    pairs: dict[tuple[int, int], list[str]] = defaultdict(list)
    for key, (first, *others) in users.items():
        for other in others:
            pairs[first, other].append(str(key[0]))
    return dict(pairs)


def _file_remark(other: Entry, files: Sequence[str]) -> Remark:
    shown = ", ".join(files)
    message = f"its file {shown} is also that of {other.subject.name}: correct one of the two, or use one name"
    return Remark("file-used-twice", message, shown, "one use")


def _alike(entries: Sequence[Entry], tolerance: float) -> dict[tuple[int, int], float]:
    """Pairs of entries that are one molecule, with the largest difference of their distances [angstrom]."""
    groups: dict[tuple[object, ...], list[int]] = defaultdict(list)
    for number, entry in enumerate(entries):
        groups[tuple(sorted(entry.labels)), entry.charge, entry.multiplicity].append(number)
    found = {}
    for members in groups.values():
        if len(members) < 2:
            continue
        sorted_ones = np.array(
            [sorted_distances(entries[m].labels, distances(entries[m].geometry_angstrom)) for m in members]
        )
        for place, first in enumerate(members):
            apart = np.abs(sorted_ones[place + 1 :] - sorted_ones[place]).max(axis=1, initial=0.0)
            for offset in np.flatnonzero(apart <= tolerance):
                second = members[place + 1 + int(offset)]
                one, other = entries[first], entries[second]
                difference = shape_difference(
                    one.labels, one.geometry_angstrom, other.labels, other.geometry_angstrom, tolerance
                )
                if difference <= tolerance:
                    found[first, second] = difference
    return found


def _geometry_remark(other: Entry, difference: float | None, limits: Limits) -> Remark:
    value = "" if difference is None else f"{difference:.4f} angstrom"
    message = (
        f"it has the atoms, charge, multiplicity and geometry of {other.subject.name} (mirror images count as the "
        "same): use one name, or take the geometry that is meant"
    )
    return Remark("same-geometry-twice", message, value, f"{limits.same_molecule_angstrom:g} angstrom")


def _same_reactions(
    reactions: Sequence[Reaction], molecule_of: dict[tuple[str, str], int]
) -> list[tuple[Subject, Remark]]:
    """Find reactions between the same molecules, whichever way round they are written."""

    def numbers(kind: str, names: Sequence[str]) -> tuple[object, ...]:
        return tuple(
            sorted((molecule_of.get((kind, name), -1), name * ((kind, name) not in molecule_of)) for name in names)
        )

    groups: dict[tuple[object, ...], list[Reaction]] = defaultdict(list)
    for reaction in reactions:
        sides = sorted(repr(numbers("species", names)) for names in (reaction.reactants, reaction.products))
        groups[tuple(sides)].append(reaction)
    found = []
    for group in groups.values():
        saddles = [numbers("transition_state", reaction.transition_states) for reaction in group]
        for place, reaction in enumerate(group):
            for other in range(len(group)):
                if other == place:
                    continue
                same = saddles[other] == saddles[place]
                if same and other > place:
                    continue
                found.append((Subject("reaction", reaction.name), _repeat_remark(group[other], same=same)))
    return found


def _repeat_remark(other: Reaction, *, same: bool) -> Remark:
    if same:
        message = (
            f"it is the reaction {other.name} again, over the same saddle (either is given both ways): a model with "
            "both would count it twice; remove one"
        )
        return Remark("reaction-twice", message, other.name, "one reaction")
    message = (
        f"reaction {other.name} leads from the same molecules to the same molecules over another saddle: their rate "
        "coefficients add, if they are two ways and not two calculations of one"
    )
    return Remark("several-saddles", message, other.name, "one saddle")


def _cycles(
    entries: Sequence[Entry],
    reactions: Sequence[Reaction],
    molecule_of: dict[tuple[str, str], int],
    limits: Limits,
) -> list[tuple[Subject, Remark]]:
    """Find molecules with two names and energies that a cycle of reactions brings together."""
    energies = {e.subject.name: e.ground_energy for e in entries if e.subject.kind == "species"}
    known = {name: energy for name, energy in energies.items() if energy is not None}
    balances = []
    for reaction in reactions:
        change = Counter(reaction.products)
        change.subtract(reaction.reactants)
        if all(name in known for name in change):
            balances.append(Balance(reaction.name, {name: number for name, number in change.items() if number}))
    molecules = {name: molecule_of["species", name] for name in known}
    found = []
    for cycle in open_cycles(balances, known, molecules, limits.cycle_kJ_per_mol):
        message = (
            f"the energies of the cycle {cycle.words} add up to {cycle.sum_kJ_per_mol:.2f} kJ/mol instead of 0, for "
            f"{cycle.first} and {cycle.second} are one molecule with two energies: equilibrium constants of the "
            "reactions contradict one another; use one name"
        )
        limit = f"{limits.cycle_kJ_per_mol:g} kJ/mol"
        remark = Remark("cycle-does-not-close", message, f"{cycle.sum_kJ_per_mol:.2f} kJ/mol", limit)
        found.append((Subject("species", cycle.second), remark))
    return found
