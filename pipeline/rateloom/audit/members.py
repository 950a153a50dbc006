"""The members of a reaction as its checks see them."""

from dataclasses import dataclass, field

from rateloom.job.model import FrequencyScale
from rateloom.statmech import Species

UNKNOWN_LEVEL = "unknown level"
"""How a level that was not printed is written."""


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
        return self.program != "given" and self.level != UNKNOWN_LEVEL


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
