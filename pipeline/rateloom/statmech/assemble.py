"""One or two calculations and what the job file says of them, made into the physical species in SI units.

The geometry and the frequencies come from the frequency file (for an atom, from the only file), the electronic
energy from the energy file where there is one. What the job file says wins over what is read or detected. A remark
states a fact; whether it withholds a reaction is for the audit to say.
"""

from dataclasses import dataclass
from typing import TypedDict

import numpy as np
from scipy.constants import angstrom, h, physical_constants

from rateloom.arrays import FloatArray
from rateloom.calculation.record import Calculation
from rateloom.job.model import FrequencyScale
from rateloom.molecule import SYMMETRY_TOLERANCE, Symmetry, moments_of, symmetry_of
from rateloom.remarks import Remark
from rateloom.statmech.choices import Choices
from rateloom.statmech.electronic import electronic_levels
from rateloom.statmech.identity import Framework, charge_and_multiplicity, composition_of, file_remarks, framework_of
from rateloom.statmech.species import Species
from rateloom.statmech.vibrations import Vibrations, vibrations_of

_HARTREE = physical_constants["Hartree energy"][0]  # J


@dataclass(frozen=True, slots=True, kw_only=True)
class Facts:
    """What was read, detected and chosen on the way to a species."""

    labels: tuple[str, ...]
    """Element symbols, or isotopes such as ``D``, in the order of the geometry."""
    masses: FloatArray
    """Shape (n_atoms,) [kg]"""
    positions: FloatArray
    """Shape (n_atoms, 3) [m]"""
    symmetry: Symmetry
    """As detected, whatever the job file says."""
    symmetry_source: str
    """``geometry`` or ``job file``."""
    optical_isomers_source: str
    geometry_level: str
    """Level of theory of geometry and frequencies."""
    energy_level: str
    energy_kind: str
    """Which energy of the output is taken, e.g. ``CCSD(T)``; empty where there is none."""
    energy_reason: str
    energy_source: str
    """``energy file`` or ``frequency file``."""
    frequencies_source: str
    levels_source: str
    lowering_source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Assembly:
    """A species, or None where its calculations do not make one, and what there is to say of it."""

    species: Species | None
    remarks: tuple[Remark, ...] = ()
    facts: Facts | None = None


def assemble(
    frequencies: Calculation | None, energy: Calculation | None, choices: Choices, *, is_saddle: bool
) -> Assembly:
    """Make the physical species from its calculations.

    Parameters
    ----------
    frequencies : Calculation or None
        Geometry [angstrom] and frequencies [cm-1]; None for an atom that has an energy.
    energy : Calculation or None
        The energy [hartree], where it is another calculation.
    choices : Choices
        What the job file says; energies [J].
    is_saddle : bool
        Whether it is a transition state.

    Returns
    -------
    Assembly
        The species in SI units, remarks and facts.

    Raises
    ------
    ValueError
        There is no calculation at all.

    References
    ----------
    .. [1] D. A. McQuarrie, Statistical Mechanics, Harper & Row, 1976, ch. 8, for the rigid rotor and harmonic
       oscillators (from memory).
    """
    structure = frequencies if frequencies is not None else energy
    if structure is None:
        msg = "a species needs at least one calculation"
        raise ValueError(msg)
    opening = file_remarks(frequencies, energy)
    framework, body = framework_of(structure, choices)
    if framework is None:
        return Assembly(species=None, remarks=opening + body)
    charge, multiplicity, count = charge_and_multiplicity(structure, energy, choices)
    vibrations, modes = vibrations_of(structure, framework, is_saddle=is_saddle)
    symmetry = symmetry_of(framework.positions, framework.labels)
    composition = composition_of(structure.atoms)
    electronic, levels = electronic_levels(composition, charge, multiplicity, choices)
    source = structure if energy is None else energy
    hartree, missing = _energy_of(source, "frequency" if energy is None else "energy")
    symmetric = _symmetry_remarks(symmetry, choices, is_saddle=is_saddle)
    remarks = opening + body + count + missing + modes + symmetric + levels
    facts = Facts(
        labels=framework.labels,
        masses=framework.masses,
        positions=framework.positions,
        symmetry=symmetry,
        symmetry_source="geometry" if choices.symmetry_number is None else "job file",
        optical_isomers_source="geometry" if choices.optical_isomers is None else "job file",
        geometry_level=str(structure.level),
        energy_level=str(source.level),
        energy_kind=source.energy_kind,
        energy_reason=source.energy_reason,
        energy_source="frequency file" if energy is None else "energy file",
        frequencies_source="none" if vibrations is None else vibrations.source,
        levels_source=electronic.levels_source,
        lowering_source=electronic.lowering_source,
    )
    if vibrations is None or hartree is None or composition_of(source.atoms) != composition:
        return Assembly(species=None, remarks=remarks, facts=facts)
    species = Species(
        composition=composition,
        charge=charge,
        multiplicity=multiplicity,
        **_nuclear(framework, vibrations, choices.frequency_scale),
        symmetry_number=symmetry.symmetry_number if choices.symmetry_number is None else choices.symmetry_number,
        optical_isomers=symmetry.optical_isomers if choices.optical_isomers is None else choices.optical_isomers,
        electronic_energy=hartree * _HARTREE,
        spin_orbit_lowering=electronic.lowering,
        degeneracies=np.array([degeneracy for degeneracy, _ in electronic.levels], dtype=float),
        level_energies=np.array([level for _, level in electronic.levels], dtype=float),
    )
    return Assembly(species=species, remarks=remarks, facts=facts)


class _Nuclear(TypedDict):
    mass: float
    shape: str
    moments: FloatArray
    frequencies: FloatArray
    imaginary_frequency: float | None
    zero_point_energy: float


def _nuclear(framework: Framework, vibrations: Vibrations, scale: FrequencyScale) -> _Nuclear:
    """Work out what depends on masses, geometry and vibrations alone."""
    return {
        "mass": float(framework.masses.sum()),
        "shape": framework.shape,
        "moments": moments_of(framework.masses, framework.positions, framework.shape),
        "frequencies": vibrations.real * scale.modes,
        "imaginary_frequency": None if vibrations.imaginary is None else vibrations.imaginary * scale.modes,
        "zero_point_energy": float(h * vibrations.real.sum() / 2 * scale.zero_point),
    }


def _energy_of(source: Calculation, file: str) -> tuple[float | None, tuple[Remark, ...]]:
    hartree = source.energy_hartree
    if hartree is not None and np.isfinite(hartree):
        return hartree, ()
    return None, (Remark("no-energy", f"The {file} file holds no energy: give a file with one under `energy`."),)


def _symmetry_remarks(symmetry: Symmetry, choices: Choices, *, is_saddle: bool) -> tuple[Remark, ...]:
    """Compare the job file with what is detected, or say how sure the detected number is."""
    remarks = []
    # A partition function is divided by the symmetry number and multiplied by the optical isomers; the saddle's
    # stands in the numerator of a rate coefficient, a reactant's in the denominator.
    sign = 1 if is_saddle else -1
    reactions = "over this saddle" if is_saddle else "of reactions that consume one such molecule"
    number, isomers = choices.symmetry_number, choices.optical_isomers
    for code, words, wanted, found, power in (
        ("symmetry-number-differs", "symmetry number", number, symmetry.symmetry_number, -sign),
        ("optical-isomers-differ", "number of optical isomers", isomers, symmetry.optical_isomers, sign),
    ):
        if wanted is not None and wanted != found:
            message = (
                f"The job file gives the {words} {wanted}, which is used; the geometry has {found} "
                f"({symmetry.point_group}). This multiplies the rate coefficients {reactions} by "
                f"{(wanted / found) ** power:.4g}."
            )
            remarks.append(Remark(code, message, value=str(wanted), limit=str(found)))
    if choices.symmetry_number is None:
        remarks.extend(_noise_remarks(symmetry))
    return tuple(remarks)


def _noise_remarks(symmetry: Symmetry) -> list[Remark]:
    deviation = f"{symmetry.worst_deviation / angstrom:.3f} angstrom"
    limit = f"{SYMMETRY_TOLERANCE / angstrom:.3f} angstrom"
    number, group = symmetry.symmetry_number, symmetry.point_group
    if not symmetry.closed:
        message = (
            f"The geometry is near the limit of symmetry: {group} (symmetry number {number}) is taken, with atoms up "
            f"to {deviation} off. Set symmetry_number."
        )
        return [Remark("symmetry-number-uncertain", message, value=deviation, limit=limit)]
    if symmetry.strict_symmetry_number != number:
        message = (
            f"Noise of the geometry breaks the point group {group} to {symmetry.strict_point_group}: atoms are up to "
            f"{deviation} off. The symmetry number {number} of {group} is used."
        )
        return [Remark("point-group-broken-by-noise", message, value=deviation, limit=limit)]
    return []
