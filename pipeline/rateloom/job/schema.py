"""The job file as pydantic sees it: which keys there are and what each holds. Records are made of it elsewhere."""

import re
from typing import Annotated, Any, TypeAlias

from pydantic import (
    AfterValidator,
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Discriminator,
    Field,
    Tag,
    WithJsonSchema,
    model_validator,
)

from rateloom.job.fields import (
    AtomNumber,
    Charge,
    Degeneracy,
    Energy,
    FitForm,
    Frequency,
    GridCount,
    Length,
    LevelEnergy,
    Multiplicity,
    Names,
    OpticalIsomers,
    PathDegeneracy,
    Pressure,
    RateUnit,
    ReferenceTemperature,
    ScaleFactor,
    Severity,
    Spacing,
    SymmetryNumber,
    Temperature,
    Text,
    Threshold,
    Tolerance,
    Tunnelling,
    literal,
)
from rateloom.job.names import PATTERN
from rateloom.job.problems import refuse

FEWEST_TEMPERATURES = 3
"""A modified Arrhenius expression has three parameters."""
_ISOTOPE = re.compile(r"[DT]|[1-9]\d{0,2}[A-Z][a-z]?")


class Entry(BaseModel):
    """A block that refuses keys it does not know."""

    model_config = ConfigDict(extra="forbid", frozen=True, populate_by_name=False)


class GridEntry(Entry):
    """Evenly spaced temperatures."""

    start: Temperature = Field(alias="from")
    to: Temperature
    count: GridCount
    spacing: Spacing = "linear"

    @model_validator(mode="after")
    def _ascends(self) -> "GridEntry":
        if self.start >= self.to:
            refuse(f"'from' ({self.start:g} K) is not below 'to' ({self.to:g} K)", "Swap them.", ("from",))
        return self


class ScaleEntry(Entry):
    """Scale factors of zero-point energy and of the modes in the partition function."""

    zero_point: ScaleFactor
    modes: ScaleFactor


class FitEntry(Entry):
    """How rate coefficients are fitted."""

    form: FitForm | None = None
    reference_temperature: ReferenceTemperature | None = None
    tolerance: Tolerance | None = None


def _collection(value: Any) -> str:
    """Tell apart what may be written as a block, a list or a plain value; brackets hide the tag from messages."""
    return "<block>" if isinstance(value, dict) else "<list>"


def _isotope(value: Any) -> str:
    text = literal(value, "an isotope")
    if not _ISOTOPE.fullmatch(text):
        refuse(f"{text[:40]!r} is no isotope", "Write D, T or a mass number with its element such as 13C.")
    return text


def _distinct(temperatures: list[float]) -> list[float]:
    if len(temperatures) < FEWEST_TEMPERATURES:
        refuse(f"{len(temperatures)} temperatures are too few", f"A fit needs at least {FEWEST_TEMPERATURES}.")
    for index, value in enumerate(temperatures):
        if value in temperatures[:index]:
            refuse(f"{value:g} K stands twice in the list", "Remove one of them.", (index,))
    return temperatures


def _ascending(levels: list[tuple[int, float]]) -> list[tuple[int, float]]:
    if levels[0][1] != 0.0:
        refuse("the first level is not at 0", "Count energies from the lowest level and begin with it.", (0, 1))
    for index in range(1, len(levels)):
        if levels[index][1] <= levels[index - 1][1]:
            advice = "Sort the levels by energy and add up the degeneracies of equal ones."
            refuse("this level is not above the one before", advice, (index, 1))
    return levels


def _row(length: int, wanted: str) -> BeforeValidator:
    def validate(value: Any) -> Any:
        if not isinstance(value, list) or len(value) != length:
            refuse(f"{wanted} is wanted here", f"Write {wanted}.")
        return value

    return BeforeValidator(validate)


Temperatures: TypeAlias = Annotated[
    Annotated[GridEntry, Tag("<block>")] | Annotated[list[Temperature], AfterValidator(_distinct), Tag("<list>")],
    Discriminator(_collection),
]
Scale: TypeAlias = Annotated[
    Annotated[ScaleEntry, Tag("<block>")] | Annotated[ScaleFactor, Tag("<list>")],
    Discriminator(_collection),
]
Atom: TypeAlias = Annotated[tuple[Text, Length, Length, Length], _row(4, "an atom as [element, x, y, z]")]
ElectronicLevel: TypeAlias = Annotated[tuple[Degeneracy, LevelEnergy], _row(2, "a level as [degeneracy, energy]")]
Isotope: TypeAlias = Annotated[str, BeforeValidator(_isotope), WithJsonSchema({"type": "string"})]
Accept: TypeAlias = dict[str, Text]


class GivenEntry(Entry):
    """Numbers from a paper in the place of output files."""

    energy: Energy
    frequencies: list[Frequency] = Field(default_factory=list)
    geometry: Annotated[list[Atom], Field(min_length=1)]
    charge: Charge = 0
    multiplicity: Multiplicity
    level: Text = ""


class EntityEntry(Entry):
    """A species or a transition state."""

    frequencies: Text | None = None
    energy: Text | None = None
    given: GivenEntry | None = None
    charge: Charge | None = None
    multiplicity: Multiplicity | None = None
    symmetry_number: SymmetryNumber | None = None
    optical_isomers: OpticalIsomers | None = None
    isotopes: dict[AtomNumber, Isotope] = Field(default_factory=dict)
    electronic_levels: Annotated[list[ElectronicLevel], Field(min_length=1), AfterValidator(_ascending)] | None = None
    spin_orbit_lowering: LevelEnergy | None = None
    frequency_scale: Scale | None = None
    accept: Accept = Field(default_factory=dict)


class ReactionEntry(Entry):
    """One elementary reaction."""

    equation: Text
    transition_state: Annotated[Names, Field(min_length=1)]
    tunnelling: Tunnelling | None = None
    temperatures: Temperatures | None = None
    fit: FitEntry | None = None
    path_degeneracy: PathDegeneracy | None = None
    accept: Accept = Field(default_factory=dict)


class DefaultsEntry(Entry):
    """What holds for every entry that says nothing else."""

    frequency_scale: Scale | None = None
    tunnelling: Tunnelling | None = None
    fit: FitEntry | None = None


class AuditEntry(Entry):
    """Thresholds and severities of the audit that differ from the usual ones."""

    limits: dict[str, Threshold] = Field(default_factory=dict)
    severities: dict[str, Severity] = Field(default_factory=dict)


class IncludedFile(Entry):
    """What a file holds that a job file includes."""

    calculations: Text = "."
    include: Names = Field(default_factory=list)
    species: dict[str, EntityEntry] = Field(default_factory=dict)
    transition_states: dict[str, EntityEntry] = Field(default_factory=dict)
    reactions: dict[str, ReactionEntry] = Field(default_factory=dict)


class JobFile(IncludedFile):
    """A whole job file; its JSON Schema is that of the format."""

    title: Text | None = None
    output: Text | None = None
    temperatures: Temperatures
    standard_pressure: Pressure = 1e5
    rate_unit: RateUnit = "cm3 molecule-1 s-1"
    defaults: DefaultsEntry = DefaultsEntry()
    audit: AuditEntry = AuditEntry()


SECTIONS = ("species", "transition_states", "reactions")
"""Keys whose entries are validated one by one, so that a fault in one does not hide those of the others."""
BLOCKS: dict[str, type[Entry]] = {
    "given": GivenEntry,
    "fit": FitEntry,
    "frequency_scale": ScaleEntry,
    "temperatures": GridEntry,
    "defaults": DefaultsEntry,
    "audit": AuditEntry,
}
"""Model of each block inside another, by its key: which keys are known there."""


def job_schema() -> dict[str, Any]:
    """Give the JSON Schema of the job file, for editors that check while one types."""
    schema = JobFile.model_json_schema()
    for section in SECTIONS:
        schema["properties"][section]["propertyNames"] = {"pattern": f"^{PATTERN}$"}
    return {"$schema": "https://json-schema.org/draft/2020-12/schema", **schema}
