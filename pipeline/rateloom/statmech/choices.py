"""What a job file says of one species or saddle, without its name, place and files: equal settings are equal."""

from dataclasses import dataclass, field

from rateloom.job.model import Entity, FrequencyScale


@dataclass(frozen=True, slots=True, kw_only=True)
class Choices:
    """Settings that override what is read or detected; None where the job file is silent."""

    charge: int | None = None
    multiplicity: int | None = None
    symmetry_number: int | None = None
    optical_isomers: int | None = None
    isotopes: tuple[tuple[int, str], ...] = ()
    """(atom number counted from 1, isotope), ascending."""
    electronic_levels: tuple[tuple[int, float], ...] | None = None
    """(degeneracy, energy above the lowest level [J]), ascending."""
    spin_orbit_lowering: float | None = None
    """[J]"""
    frequency_scale: FrequencyScale = field(default_factory=FrequencyScale)


def choices_of(entity: Entity) -> Choices:
    """Take the settings of a species or a transition state out of its job-file entry.

    Parameters
    ----------
    entity : Entity
        The entry, energies in joules [J].

    Returns
    -------
    Choices
        The same settings, energies in joules [J].

    References
    ----------
    .. [1] No physics: the names are those of the job file.
    """
    return Choices(
        charge=entity.charge,
        multiplicity=entity.multiplicity,
        symmetry_number=entity.symmetry_number,
        optical_isomers=entity.optical_isomers,
        isotopes=entity.isotopes,
        electronic_levels=entity.electronic_levels,
        spin_orbit_lowering=entity.spin_orbit_lowering,
        frequency_scale=entity.frequency_scale,
    )
