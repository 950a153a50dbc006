"""The members of a reaction against each other: atoms, charge, spin, levels of theory, programs, energies."""

import re
from collections import Counter
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field

from scipy.constants import N_A, kilo

from rateloom.audit.limits import Limits
from rateloom.job.model import FrequencyScale
from rateloom.remarks import Remark
from rateloom.statmech import Species

_UNKNOWN = "unknown level"  # how a level that was not printed is written


@dataclass(frozen=True, slots=True)
class Origin:
    """What geometry and frequencies, or an energy, come from."""

    level: str
    """Level of theory; free text where the numbers were given in the job file."""
    program: str = ""
    """Empty where not known; ``given`` where the numbers were given in the job file."""
    version: str = ""

    @property
    def comparable(self) -> bool:
        """Whether the level is one that a program printed."""
        return self.program != "given" and self.level != _UNKNOWN


@dataclass(frozen=True, slots=True)
class Member:
    """One molecule of a reaction, or its saddle."""

    name: str
    species: Species
    geometry_level: str
    """Level of theory of geometry and frequencies; empty for an atom, which has neither."""
    energy_level: str
    """Level of theory of the energy."""
    geometry_program: str = ""
    """Program and version of the first, empty where not known; program ``given`` for numbers of the job file."""
    geometry_version: str = ""
    energy_program: str = ""
    energy_version: str = ""
    frequency_scale: FrequencyScale = field(default_factory=FrequencyScale)

    @property
    def geometry(self) -> Origin | None:
        """What geometry and frequencies come from; None for an atom."""
        if not self.geometry_level:
            return None
        return Origin(self.geometry_level, self.geometry_program, self.geometry_version)

    @property
    def energy(self) -> Origin:
        """What the energy comes from."""
        return Origin(self.energy_level, self.energy_program, self.energy_version)


@dataclass(frozen=True, slots=True)
class Members:
    """All of them."""

    reactants: tuple[Member, ...]
    products: tuple[Member, ...]
    saddle: Member

    @property
    def all(self) -> tuple[Member, ...]:
        """Reactants, products, saddle."""
        return (*self.reactants, *self.products, self.saddle)

    @property
    def sides(self) -> tuple[tuple[str, tuple[Member, ...]], ...]:
        """Reactants and products with what they are called."""
        return ("reactants", self.reactants), ("products", self.products)


def reaction_remarks(members: Members, limits: Limits | None = None) -> tuple[Remark, ...]:
    """Check one reaction.

    Parameters
    ----------
    members : Members
        Reactants and products once per molecule, in SI units.
    limits : Limits or None
        Thresholds, each in the unit of its name; the defaults where None.

    Returns
    -------
    tuple of Remark
        ``atoms-not-balanced``, ``charge-not-balanced``, ``spin-not-conserved``, ``levels-differ``,
        ``level-not-comparable``, ``programs-differ``, ``program-versions-differ``, ``frequency-scales-differ``,
        ``unusual-frequency-scale``, ``barrier-below-reactants``, ``barrier-below-products``.

    References
    ----------
    .. [1] E. Wigner, E. E. Witmer, Z. Phys. 51 (1928) 859, for the coupling of spins (from memory).
    """
    checks: tuple[Callable[[Members], list[Remark]], ...] = (_atoms, _charge, _spin, _levels, _programs)
    remarks = [remark for check in checks for remark in check(members)]
    remarks += _scales(members, limits or Limits())
    codes = {remark.code for remark in remarks}
    if not codes & {"atoms-not-balanced", "levels-differ"}:
        # Energies of other atoms or another level are no barrier.
        remarks += _barriers(members)
    return tuple(remarks)


def _formula(composition: Counter[str]) -> str:
    return " ".join(f"{element}{count}" for element, count in sorted(composition.items()))


def _atoms(members: Members) -> list[Remark]:
    saddle = Counter(dict(members.saddle.species.composition))
    remarks = []
    for side, molecules in members.sides:
        total: Counter[str] = Counter()
        for molecule in molecules:
            total.update(dict(molecule.species.composition))
        if total != saddle:
            message = (
                f"the {side} hold {_formula(total)}, the saddle {members.saddle.name} holds {_formula(saddle)}: "
                "correct the equation or the transition state"
            )
            remarks.append(Remark("atoms-not-balanced", message, _formula(total), _formula(saddle)))
    return remarks


def _charge(members: Members) -> list[Remark]:
    saddle = members.saddle.species.charge
    remarks = []
    for side, molecules in members.sides:
        total = sum(molecule.species.charge for molecule in molecules)
        if total != saddle:
            message = f"the {side} carry charge {total:+d}, the saddle {members.saddle.name} carries {saddle:+d}"
            remarks.append(Remark("charge-not-balanced", message, f"{total:+d}", f"{saddle:+d}"))
    return remarks


def _spin(members: Members) -> list[Remark]:
    """Check that the spins of each side can couple to that of the saddle (Wigner-Witmer rules)."""
    saddle = members.saddle.species.multiplicity
    remarks = []
    for side, molecules in members.sides:
        possible = {1}
        for molecule in molecules:
            own = molecule.species.multiplicity
            possible = {m for other in possible for m in range(abs(other - own) + 1, other + own, 2)}
        if saddle not in possible:
            listed = ", ".join(str(multiplicity) for multiplicity in sorted(possible))
            message = (
                f"the {side} can have multiplicity {listed}, the saddle {members.saddle.name} has {saddle}: "
                "it belongs to another potential-energy surface"
            )
            remarks.append(Remark("spin-not-conserved", message, str(saddle), listed))
    return remarks


def _origins(members: Members) -> tuple[tuple[str, list[tuple[str, Origin]]], ...]:
    """Where the geometries and the energies come from, with the names of the members."""
    return (
        ("geometries and frequencies", [(m.name, m.geometry) for m in members.all if m.geometry is not None]),
        ("energies", [(m.name, m.energy) for m in members.all]),
    )


def _levels(members: Members) -> list[Remark]:
    """Check that geometries have one level of theory and energies one."""
    remarks = []
    for what, origins in _origins(members):
        by_level = _grouped((origin.level, name) for name, origin in origins if origin.comparable)
        if len(by_level) > 1:
            message = f"the level of theory of the {what} differs ({_listed(by_level)}): recalculate the odd one out"
            remarks.append(Remark("levels-differ", message, "; ".join(by_level), "one level"))
        in_words = [(name, origin) for name, origin in origins if not origin.comparable]
        others = _grouped((origin.level, name) for name, origin in in_words)
        alike = {_plain(level) for level in (*by_level, *others)}
        if others and (len(alike) > 1 or _plain(_UNKNOWN) in alike):
            message = (
                f"whether the {what} of all members are of one level of theory cannot be told "
                f"({_listed(by_level | others)}): compare them by eye"
            )
            remarks.append(Remark("level-not-comparable", message, "; ".join(others), "one level"))
    return remarks


def _grouped(pairs: Iterable[tuple[str, str]]) -> dict[str, list[str]]:
    """Names by what they have in common, whose spelling does not matter; ascending, each name once."""
    spelling: dict[str, str] = {}
    groups: dict[str, dict[str, None]] = {}
    for common, name in pairs:
        groups.setdefault(spelling.setdefault(_plain(common), common), {})[name] = None
    return {common: list(groups[common]) for common in sorted(groups)}


def _plain(name: str) -> str:
    return re.sub(r"\s+", "", name).casefold()


def _listed(groups: Mapping[str, Sequence[str]]) -> str:
    return "; ".join(f"{common}: {', '.join(names)}" for common, names in groups.items())


def _programs(members: Members) -> list[Remark]:
    """Programs differ in integration grids and in what they mean by a functional; their versions seldom."""
    remarks = []
    for what, origins in _origins(members):
        printed = [(name, origin) for name, origin in origins if origin.program not in ("", "given")]
        programs = _grouped((origin.program, name) for name, origin in printed)
        if len(programs) > 1:
            message = (
                f"the {what} of the members are from different programs ({_listed(programs)}), which may define one "
                "functional or one reference differently: take one program, or show that they agree for a member"
            )
            remarks.append(Remark("programs-differ", message, "; ".join(programs), "one program"))
        for program in programs:
            versions = _grouped(
                (origin.version or "unknown", name)
                for name, origin in printed
                if _plain(origin.program) == _plain(program)
            )
            if len(versions) > 1:
                message = f"the {what} of the members are from different versions of {program} ({_listed(versions)})"
                remarks.append(Remark("program-versions-differ", message, "; ".join(versions), "one version"))
    return remarks


def _scales(members: Members, limits: Limits) -> list[Remark]:
    """Check the scale factors of frequencies: usual ones, and the same for all."""
    low, high = limits.lowest_frequency_scale_ratio, limits.highest_frequency_scale_ratio
    scaled = [member for member in members.all if member.geometry is not None]
    used = _grouped((f"{m.frequency_scale.zero_point:g} and {m.frequency_scale.modes:g}", m.name) for m in scaled)
    remarks = []
    if len(used) > 1:
        message = (
            "the scale factors (of zero-point energy and of modes) differ within the reaction "
            f"({_listed(used)}): one level of theory has one pair of them"
        )
        remarks.append(Remark("frequency-scales-differ", message, "; ".join(used), "one pair"))
    for what, factors in (
        ("zero-point energy", {member.frequency_scale.zero_point for member in scaled}),
        ("modes", {member.frequency_scale.modes for member in scaled}),
    ):
        for factor in sorted(factors):
            if not low <= factor <= high:
                message = f"the scale factor {factor:g} of the {what} lies outside those in use: check it"
                remarks.append(Remark("unusual-frequency-scale", message, f"{factor:g}", f"{low:g} to {high:g}"))
    return remarks


def _barriers(members: Members) -> list[Remark]:
    """Check that the saddle lies above both sides, zero-point energies included."""
    top = members.saddle.species.ground_energy
    remarks = []
    for side, molecules in members.sides:
        barrier = (top - _ground(molecules)) * N_A / kilo
        if barrier < 0.0:
            message = (
                f"with zero-point energies the saddle lies {-barrier:.2f} kJ/mol below the {side}: a complex may lie "
                "before it, and the rate coefficient is then not that of this saddle alone"
            )
            remarks.append(Remark(f"barrier-below-{side}", message, f"{barrier:.2f} kJ/mol", "0 kJ/mol"))
    return remarks


def _ground(molecules: Sequence[Member]) -> float:
    return sum(molecule.species.ground_energy for molecule in molecules)
