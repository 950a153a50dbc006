"""The validated job: what the user asked for, in base units, with the place of every entry.

Everything here is plain data made whole by the loader: defaults are resolved, names are checked, paths are absolute.
"""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Place:
    """Where an entry stands in a job file."""

    file: str
    line: int


@dataclass(frozen=True, slots=True)
class FrequencyScale:
    """Scale factors of harmonic frequencies [1]."""

    zero_point: float = 1.0
    modes: float = 1.0


@dataclass(frozen=True, slots=True)
class FitSettings:
    """How rate coefficients are fitted."""

    form: str = "modified-arrhenius"
    reference_temperature: float = 1.0
    """[K]"""
    tolerance: float = 0.05
    """Largest relative deviation that passes [1]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Given:
    """Numbers from a paper in the place of an output file, in the units of a calculation record."""

    energy_hartree: float
    frequencies_per_cm: tuple[float, ...] = ()
    """Imaginary ones negative."""
    atoms: tuple[str, ...]
    geometry_angstrom: tuple[tuple[float, float, float], ...]
    charge: int = 0
    multiplicity: int
    level: str = ""
    """Level of theory or source, free text."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Entity:
    """A species or a transition state: where its calculations are and what the user says of it."""

    name: str
    kind: str
    """``species`` or ``transition_state``."""
    place: Place
    frequencies: str | None = None
    """Absolute path of the output with geometry and frequencies."""
    energy: str | None = None
    """Absolute path of the output with the energy, where it is another one."""
    given: Given | None = None
    charge: int | None = None
    multiplicity: int | None = None
    symmetry_number: int | None = None
    optical_isomers: int | None = None
    isotopes: tuple[tuple[int, str], ...] = ()
    """(atom number counted from 1, isotope such as ``D``, ``T`` or ``13C``), ascending."""
    electronic_levels: tuple[tuple[int, float], ...] | None = None
    """(degeneracy, energy above the lowest level [J]), ascending."""
    spin_orbit_lowering: float | None = None
    """[J]"""
    frequency_scale: FrequencyScale = FrequencyScale()
    accept: tuple[tuple[str, str], ...] = ()
    """(finding code, reason), ascending."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Reaction:
    """One elementary reaction."""

    name: str
    place: Place
    equation: str
    """As written, white space folded."""
    reactants: tuple[str, ...]
    """Species names, one per molecule (``2 A`` gives the name twice), in the order written."""
    products: tuple[str, ...]
    transition_states: tuple[str, ...]
    tunnelling: str = "eckart"
    """``none``, ``wigner`` or ``eckart``."""
    temperatures: tuple[float, ...]
    """[K], ascending: the reaction's own or the job's."""
    fit: FitSettings = FitSettings()
    path_degeneracy: float | None = None
    accept: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Job:
    """A whole job file with its includes."""

    title: str
    path: str
    """Absolute path of the job file."""
    files: tuple[str, ...]
    """Absolute paths of every YAML file read, the job file first."""
    output: str
    """Absolute path of the output folder."""
    temperatures: tuple[float, ...]
    """[K], ascending."""
    standard_pressure: float
    """[Pa]"""
    rate_unit: str
    """One of the four units of the contract, its concentration part; first-order rates are in s-1."""
    species: tuple[Entity, ...]
    transition_states: tuple[Entity, ...]
    reactions: tuple[Reaction, ...]
    audit_limits: tuple[tuple[str, float], ...] = ()
    """(threshold name, value in its unit) that differ from the defaults, ascending."""
    audit_severities: tuple[tuple[str, str], ...] = ()
    """(finding code, severity) that differ from the defaults, ascending."""
