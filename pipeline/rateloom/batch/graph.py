"""The job as nodes: which stage is applied to what.

Names of nodes are what a user reads in a plan: ``species CH4``, ``rate ch4-h``. Parameters hold nothing but what the
result depends on: names only where they are written, so that a renamed species recomputes nothing but its rows.
"""

from dataclasses import dataclass, field
from os.path import relpath
from pathlib import Path

from rateloom.audit import Limits, Subject
from rateloom.batch.stages import (
    CalculationsCheck,
    EntryRequest,
    FitRequest,
    Grid,
    JobCheck,
    MemberRequest,
    RateCheck,
    RateRequest,
    ReactionCheck,
    ReactionRowsRequest,
    Reading,
    SaddleCheck,
    SpeciesRequest,
    SpeciesRowsRequest,
)
from rateloom.engine import Node, encode
from rateloom.job import Entity, Job, Place, Reaction
from rateloom.statmech import choices_of

WHOLE_JOB = "check the whole job"
"""Node that holds everything against everything; its value names its subjects."""


@dataclass(frozen=True, slots=True)
class Source:
    """A node whose remarks are about an entity, and the words that say where they come from."""

    node: str
    words: str = ""


@dataclass(frozen=True, slots=True)
class Calculations:
    """The nodes that read the calculations of one entity."""

    structure: str | None
    """Of geometry and frequencies; None for an atom that has an energy alone."""
    energy: str | None
    """Of the energy, where it is another one."""

    @property
    def nodes(self) -> tuple[str, ...]:
        """Those there are."""
        return tuple(node for node in (self.structure, self.energy) if node is not None)

    @property
    def of_structure(self) -> str:
        """The one that tells the geometry."""
        return self.nodes[0]

    @property
    def of_energy(self) -> str:
        """The one that tells the energy."""
        return self.nodes[-1]


@dataclass(slots=True)
class JobGraph:
    """Nodes of a job, and which of them speak of what."""

    nodes: dict[str, Node] = field(default_factory=dict)
    sources: dict[tuple[str, str], list[Source]] = field(default_factory=dict)
    """By kind and name of the subject."""
    species_rows: dict[str, str] = field(default_factory=dict)
    """Node that gives the rows of each species."""
    reaction_rows: dict[str, str] = field(default_factory=dict)


def graph_of(job: Job, *, rates: bool = True, sieve: bool = True) -> JobGraph:
    """Lay out the stages of a job, or those alone that read and check; with or without the sieve before cclib."""
    return _Builder(job, rates=rates, sieve=sieve).build()


class _Builder:
    """Adds nodes in the order of the job file."""

    def __init__(self, job: Job, *, rates: bool, sieve: bool) -> None:
        self.job = job
        self.reading = Reading(sieve=sieve)
        self.rates = rates
        self.graph = JobGraph()
        self.folder = Path(job.path).parent
        self.limits = Limits.of(dict(job.audit_limits))
        self.calculations: dict[str, Calculations] = {}
        self.scales = {
            _entity_node(e.kind, e.name): e.frequency_scale for e in (*job.species, *job.transition_states)
        }

    def build(self) -> JobGraph:
        for entity in (*self.job.species, *self.job.transition_states):
            self._entity(entity)
        for reaction in self.job.reactions:
            self._checks(reaction)
        self._whole_job()
        if self.rates:
            for entity in self.job.species:
                self._species_rows(entity)
            for reaction in self.job.reactions:
                self._reaction(reaction)
        return self.graph

    def _add(self, name: str, stage: str, parameters: object, *inputs: str, file: str | None = None) -> str:
        if name not in self.graph.nodes:
            self.graph.nodes[name] = Node(name, stage, encode(parameters), inputs, file)
        return name

    def _speaks_of(self, kind: str, name: str, node: str, words: str = "") -> None:
        self.graph.sources.setdefault((kind, name), []).append(Source(node, words))

    def _read(self, entity: Entity, path: str) -> str:
        shown = relpath(path, self.folder)
        node = self._add(f"read {shown}", "read", self.reading, file=path)
        self._speaks_of(entity.kind, entity.name, node, f"{shown}: ")
        return node

    def _calculations(self, entity: Entity) -> Calculations:
        """Add what reads the calculations of an entity."""
        structure = energy = None
        if entity.given is not None:
            structure = self._add(f"given {_entity_node(entity.kind, entity.name)}", "given", entity.given)
            self._speaks_of(entity.kind, entity.name, structure)
        if entity.frequencies is not None:
            structure = self._read(entity, entity.frequencies)
        if entity.energy is not None and entity.energy != entity.frequencies:
            energy = self._read(entity, entity.energy)
        return Calculations(structure, energy)

    def _entity(self, entity: Entity) -> None:
        """Add what reads an entity's calculations, assembles it from them and checks both."""
        name, is_saddle = _entity_node(entity.kind, entity.name), entity.kind == "transition_state"
        sources = self.calculations[name] = self._calculations(entity)
        has = {"has_frequencies": sources.structure is not None, "has_energy": sources.energy is not None}
        request = SpeciesRequest(choices_of(entity), is_saddle=is_saddle, **has)
        self._add(name, "species", request, *sources.nodes)
        check = CalculationsCheck(self.limits, is_saddle=is_saddle, **has)
        self._add(f"check {name}", "check-calculations", check, *sources.nodes, name)
        self._speaks_of(entity.kind, entity.name, name)
        self._speaks_of(entity.kind, entity.name, f"check {name}")

    def _partition(self, kind: str, name: str, temperatures: tuple[float, ...], reaction: str = "") -> str:
        """Add the partition functions of an entity on the grid of the job or of one reaction."""
        own = "" if temperatures == self.job.temperatures else f" on the grid of {reaction}"
        grid = Grid(temperatures, self.job.standard_pressure)
        entity = _entity_node(kind, name)
        return self._add(f"partition functions {entity}{own}", "partition", grid, entity)

    def _species_rows(self, entity: Entity) -> None:
        partition = self._partition(entity.kind, entity.name, self.job.temperatures)
        request = SpeciesRowsRequest(entity.name)
        self.graph.species_rows[entity.name] = self._add(
            f"rows of species {entity.name}", "species-rows", request, partition
        )

    def _checks(self, reaction: Reaction) -> None:
        """Add what holds the members of a reaction against each other and its saddle against its bonds."""
        members = [_entity_node(kind, name) for kind, name in _members(reaction)]
        requests = [
            MemberRequest(name, self.scales[node])
            for node, (_, name) in zip(members, _members(reaction), strict=True)
        ]
        count = len(reaction.reactants)
        request = ReactionCheck(self.limits, tuple(requests[:count]), tuple(requests[count:-1]), requests[-1])
        sources = [self.calculations[name] for name in members]
        triples = [
            node
            for own, name in zip(sources, members, strict=True)
            for node in (own.of_structure, own.of_energy, name)
        ]
        check = self._add(f"check reaction {reaction.name}", "check-reaction", request, *triples)
        self._speaks_of("reaction", reaction.name, check)
        mode = self._add(
            f"check mode of {members[-1]} for {reaction.name}",
            "check-saddle",
            SaddleCheck(self.limits, count),
            *(own.of_structure for own in sources),
        )
        self._speaks_of("transition_state", reaction.transition_states[0], mode)

    def _whole_job(self) -> None:
        """Add what holds everything against everything."""
        entities = (*self.job.species, *self.job.transition_states)
        entries = tuple(
            EntryRequest(
                Subject(entity.kind, entity.name),
                tuple(relpath(path, self.folder) for path in (entity.frequencies, entity.energy) if path is not None),
            )
            for entity in entities
        )
        # Nothing but names and equations matters here: a moved line or another grid wakes nothing.
        bare = tuple(
            Reaction(
                name=reaction.name,
                place=Place("", 0),
                equation="",
                reactants=reaction.reactants,
                products=reaction.products,
                transition_states=reaction.transition_states,
                temperatures=(),
            )
            for reaction in self.job.reactions
        )
        nodes = [_entity_node(entity.kind, entity.name) for entity in entities]
        self._add(WHOLE_JOB, "check-job", JobCheck(self.limits, entries, bare), *nodes)

    def _reaction(self, reaction: Reaction) -> None:
        """Add rate, fit and rows of a reaction."""
        members = _members(reaction)
        species = [_entity_node(kind, name) for kind, name in members]
        partitions = [self._partition(kind, name, reaction.temperatures, reaction.name) for kind, name in members]
        request = RateRequest(
            reactants=len(reaction.reactants),
            products=len(reaction.products),
            tunnelling=reaction.tunnelling,
            path_degeneracy=reaction.path_degeneracy,
            degenerate=sorted(reaction.reactants) == sorted(reaction.products),
        )
        rate = self._add(f"rate {reaction.name}", "rate", request, *species, *partitions)
        fit = self._add(f"fit {reaction.name}", "fit", FitRequest(reaction.fit), rate)
        check = RateCheck(self.limits, len(reaction.reactants))
        checked = self._add(f"check rate {reaction.name}", "check-rate", check, rate, fit, *species)
        rows = ReactionRowsRequest(reaction.name, self.job.rate_unit, len(reaction.reactants), len(reaction.products))
        self.graph.reaction_rows[reaction.name] = self._add(
            f"rows of reaction {reaction.name}", "reaction-rows", rows, rate, fit
        )
        self._speaks_of("reaction", reaction.name, rate)
        self._speaks_of("reaction", reaction.name, fit)
        self._speaks_of("reaction", reaction.name, checked)


def _members(reaction: Reaction) -> list[tuple[str, str]]:
    """Kind and name of reactants, products and saddle, once per molecule."""
    molecules = [("species", name) for name in (*reaction.reactants, *reaction.products)]
    return [*molecules, *(("transition_state", name) for name in reaction.transition_states)]


def _entity_node(kind: str, name: str) -> str:
    return f"species {name}" if kind == "species" else f"saddle {name}"
